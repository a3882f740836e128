package sizing_test

import (
	"testing"

	"railproof/calc/sizing"
)

func BenchmarkSizeAt(b *testing.B) {
	req := plain(18, 32, 5, 6, 500e3)
	choices := sizing.NewChoices()
	b.ReportAllocs()
	for b.Loop() {
		a := sizing.SizeAt(req, choices, 500e3)
		if !a.Status.OK() {
			b.Fatal(a.Conflicts)
		}
	}
}

func BenchmarkVerify(b *testing.B) {
	req := plain(18, 32, 5, 6, 500e3)
	a := sizing.SizeAt(req, sizing.NewChoices(), 500e3)
	b.ReportAllocs()
	for b.Loop() {
		a.Verify()
	}
}
