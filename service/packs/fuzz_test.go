package packs

import (
	"errors"
	"testing"

	"railproof/calc/rules"
	"railproof/calc/stage"
)

// Any text either loads or is refused with faults; a loaded pack can be applied.
func FuzzLoad(f *testing.F) {
	entries, _ := builtinFiles.ReadDir("builtin")
	for _, e := range entries {
		raw, _ := builtinFiles.ReadFile("builtin/" + e.Name())
		f.Add(raw)
	}
	f.Add([]byte(derived))
	f.Add([]byte(document()))
	f.Add([]byte(`{"id":"a","rules":[{"at_most":1e999}]}`))
	full := fullCase(stage.Synchronous)
	f.Fuzz(func(t *testing.T, raw []byte) {
		p, err := Parse(raw)
		if err == nil {
			var l *Library
			if l, err = Builtin().With(p); err == nil {
				e, _ := l.Pack(p.Document.ID)
				rules.Check(full, []*rules.Pack{e.Pack}, nil, rules.Date{})
				return
			}
		}
		var invalid *InvalidError
		if !errors.As(err, &invalid) || len(invalid.Faults) == 0 {
			t.Fatalf("refused without saying why: %v", err)
		}
	})
}

// Any expression either is refused or computes; one that lacks a fact never passes.
func FuzzExpression(f *testing.F) {
	for _, text := range []string{
		"greatest.inductor_rms_a", "1.3 * greatest.inductor_peak_a", "has(part.rating.heating_a) ? 1 : 2", "linear(1, 2, 3, 4, 5)",
		"min(1, 2) + max(3, 4, 5) - abs(-6) / sqrt(7)", `stage.rectifier == "diode" ? 1 : 0`, "!(1 > 2) && true ? 3 : 4", "1/0", "9223372036854775807", "0x10", "1e400", "a.b.c", "-",
	} {
		f.Add(text)
	}
	bare := fullCase(stage.Synchronous)
	bare.Extremes, bare.FullLoad, bare.Nominal, bare.Requirement = nil, nil, nil, nil
	f.Fuzz(func(t *testing.T, text string) {
		e, err := compile(text, environmentOf(rules.OverInductor))
		if err != nil {
			return
		}
		body := rules.Body{Scope: rules.OverInductor, Value: e.number, Limit: func(*rules.Look) float64 { return 1 }}
		pack := &rules.Pack{Rules: []rules.Rule{{ID: "a/b", Bodies: []rules.Body{body}}}}
		for _, finding := range rules.Check(bare, []*rules.Pack{pack}, nil, rules.Date{}).Findings {
			if len(finding.Missing) > 0 && finding.Verdict != rules.NotEvaluated {
				t.Fatalf("%q is %s although %v is missing", text, finding.Verdict, finding.Missing)
			}
		}
	})
}

func BenchmarkGeneralPractice(b *testing.B) {
	c := fullCase(stage.Synchronous)
	e, _ := Builtin().Pack("general-practice")
	for b.Loop() {
		rules.Check(c, []*rules.Pack{e.Pack}, nil, rules.Date{})
	}
}

func BenchmarkLoadDerived(b *testing.B) {
	Builtin()
	for b.Loop() {
		p, _ := Parse([]byte(derived))
		if _, err := Builtin().With(p); err != nil {
			b.Fatal(err)
		}
	}
}
