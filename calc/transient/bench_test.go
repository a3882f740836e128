package transient

import (
	"testing"

	"railproof/calc/parts"
)

func BenchmarkRun(b *testing.B) {
	p := designed(b, solved(b, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	setup := Setup{
		Plant: p, Bounds: bounds(&p), Duration: 5e-3, Band: 0.025, Saturation: 12,
		Events: []Event{{Kind: LoadStep, At: 1e-3, Change: 3, Slew: 1e6}, {Kind: LoadStep, At: 3e-3, Change: -3, Slew: 1e6}},
		Record: Record{Points: 1000},
	}
	b.Run("5ms-500kHz/one-bank", func(b *testing.B) {
		for b.Loop() {
			e, err := New(&setup)
			if err != nil {
				b.Fatal(err)
			}
			for e.Advance(50) {
			}
		}
	})
	two := buoy()
	two.Banks = 2
	two.Bank[1].C, two.Bank[1].ESR = 330e-6, 18e-3
	setup.Plant = designed(b, solved(b, two, voltageMode(), opAmp()), parts.OpAmpType3, 40e3, 55)
	b.Run("5ms-500kHz/two-banks", func(b *testing.B) {
		for b.Loop() {
			e, _ := New(&setup)
			for e.Advance(50) {
			}
		}
	})
	b.Run("start", func(b *testing.B) {
		for b.Loop() {
			if _, err := New(&setup); err != nil {
				b.Fatal(err)
			}
		}
	})
}

func BenchmarkPeriod(b *testing.B) {
	p := designed(b, solved(b, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	setup := Setup{Plant: p, Bounds: bounds(&p), Duration: 1e6 * p.Circuit.Period, Band: 0.025, Saturation: 12, Record: Record{Points: 20000}}
	e, err := New(&setup)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if !e.Advance(1) {
			b.Fatal("ended")
		}
	}
}
