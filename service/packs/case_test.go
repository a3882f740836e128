package packs

import (
	"math"
	"math/rand/v2"
	"testing"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"

	"github.com/stretchr/testify/require"
)

// fullCase is a rail of which everything is known: every field, every rating and
// every quantity.
func fullCase(r stage.Rectifier) *rules.Case {
	s := stage.NewStage(r, 1, 1, 0, true, true, true, false)
	for _, f := range s.Fields() {
		*f.Value = 1
	}
	s.SwitchingFrequency = 400e3
	s.Feedback.Reference, s.Feedback.Upper, s.Feedback.Lower = 0.8, 42e3, 8e3
	for _, m := range []*parts.MOSFET{&s.HighSide, &s.LowSide} {
		m.Rating = parts.MOSFETRating{DrainSource: 40, GateSource: 20, DrainCurrent: 20, JunctionDegC: 150}
		m.Thermal.JunctionToAmbient = 40
	}
	s.Diode.Rating = parts.DiodeRating{Reverse: 60, Forward: 10, JunctionDegC: 150}
	s.Diode.Thermal.JunctionToAmbient = 40
	s.Inductor.Rating = parts.InductorRating{Saturation: 12, Heating: 9, WindingDegC: 125}
	for _, c := range []*parts.Capacitor{&s.OutputCapacitors[0], &s.InputCapacitors[0]} {
		c.Kind, c.Count = parts.AluminiumPolymer, 2
		c.Rating = parts.CapacitorRating{Voltage: 50, RippleCurrent: 3, TemperatureDegC: 105}
		c.Life.Rated = 1e8
		c.CapacitanceAtBias = numeric.Table{X: []float64{0, 40}, Y: []float64{1, 0.5}}
	}
	s.Controller.Drive, s.Controller.MinOnTime, s.Controller.MinOffTime, s.Controller.MaxDutyRatio = 5, 80e-9, 120e-9, 0.95
	s.Controller.Rating = parts.ControllerRating{Input: 40, JunctionDegC: 125}
	s.Modulator.CurrentLimit = 10
	c := &rules.Case{
		StageAt: "/stage", RequirementAt: "/requirement", Stage: s,
		Requirement: &stage.Requirement{
			Input: stage.Range{Min: 18, Typ: 24, Max: 30}, Output: 5, OutputTolerance: 0.03,
			LoadCurrent: stage.Range{Min: 0.1, Typ: 3, Max: 6}, AmbientDegC: stage.Range{Min: -20, Typ: 25, Max: 60},
			Targets: stage.Targets{
				InductorRippleRatio: 0.3, OutputRipple: 0.05, InputRipple: 0.5, ContinuousDownTo: 1.2, Efficiency: 0.85, JunctionDegC: 130, Life: 1e7,
				LoadStep: stage.LoadStep{Step: 3, Slew: 1e6, Deviation: 0.2, Recovery: 1e-4},
			},
		},
		Nominal:  &quantity.Vector{},
		Extremes: map[quantity.ID]rules.Extreme{}, FullLoad: map[quantity.ID]rules.Extreme{},
	}
	typical := map[quantity.ID]float64{
		quantity.OutputMean: 5, quantity.LoadVoltage: 5, quantity.OutputRippleWithESLPP: 0.02, quantity.OutputRipplePP: 0.015, quantity.InputRipplePP: 0.2,
		quantity.InductorRipplePP: 1.8, quantity.InductorPeak: 7, quantity.InductorRMS: 6.1, quantity.HighSideRMS: 3, quantity.RectifierRMS: 5, quantity.RectifierMean: 4,
		quantity.OutputCapacitorRMS: 1, quantity.InputCapacitorBankRMS: 3, quantity.BridgeVoltage: 24, quantity.OnTime: 5e-7, quantity.OffTime: 2e-6, quantity.DutyRatio: 0.25,
		quantity.DeadTimeDutyRatio: 0.01, quantity.BoundaryLoad: 0.9, quantity.Efficiency: 0.92,
		quantity.HighSideJunction: 90, quantity.LowSideJunction: 85, quantity.DiodeJunction: 60, quantity.InductorWinding: 80, quantity.ControllerJunction: 70,
		quantity.OutputCapacitorTemperature: 60, quantity.InputCapacitorTemperature: 65, quantity.OutputCapacitorLife: 5e8, quantity.InputCapacitorLife: 5e8,
		quantity.Crossover: 40e3, quantity.PhaseMargin: 60, quantity.GainMargin: 12, quantity.LoadStepDeviation: 0.1, quantity.LoadStepRecovery: 5e-5, quantity.LoadStepPeak: 9,
	}
	for id := quantity.ID(0); id < quantity.Count; id++ {
		v, ok := typical[id]
		if !ok {
			v = 1
		}
		c.Nominal[id] = v
		e := rules.Extreme{Least: rules.Worst{Value: v, Corner: 0}, Greatest: rules.Worst{Value: v, Corner: 1}}
		c.Extremes[id], c.FullLoad[id] = e, e
	}
	return c
}

// setGreatest makes a value the greatest of its quantity.
func setGreatest(c *rules.Case, id quantity.ID, v float64) {
	e := c.Extremes[id]
	e.Greatest.Value = v
	c.Extremes[id] = e
}

func mustParse(t testing.TB, text string) *Parsed {
	t.Helper()
	p, err := Parse([]byte(text))
	require.NoError(t, err)
	return p
}

// check loads a document on top of the built-in packs and checks a case with it.
func check(t testing.TB, c *rules.Case, text string) rules.Report {
	t.Helper()
	p := mustParse(t, text)
	l, err := Builtin().With(p)
	require.NoError(t, err)
	e, ok := l.Pack(p.Document.ID)
	require.True(t, ok)
	return rules.Check(c, []*rules.Pack{e.Pack}, nil, rules.Date{Year: 2030, Month: 1, Day: 1})
}

func verdictOf(t testing.TB, r rules.Report, rule string) rules.Finding {
	t.Helper()
	for _, f := range r.Findings {
		if f.Rule == rule {
			return f
		}
	}
	require.Fail(t, "no finding of "+rule)
	return rules.Finding{}
}

func builtinReport(c *rules.Case, id string) rules.Report {
	e, _ := Builtin().Pack(id)
	return rules.Check(c, []*rules.Pack{e.Pack}, nil, rules.Date{Year: 2030, Month: 1, Day: 1})
}

// ratings returns every rating of a stage, and whether more of it is better.
func ratings(s *stage.Stage) []*float64 {
	var list []*float64
	add := func(x ...*float64) { list = append(list, x...) }
	add(&s.HighSide.Rating.DrainSource, &s.HighSide.Rating.GateSource, &s.HighSide.Rating.DrainCurrent, &s.HighSide.Rating.JunctionDegC)
	if s.Rectifier == stage.DiodeRectified {
		add(&s.Diode.Rating.Reverse, &s.Diode.Rating.Forward, &s.Diode.Rating.JunctionDegC)
	} else {
		add(&s.LowSide.Rating.DrainSource, &s.LowSide.Rating.GateSource, &s.LowSide.Rating.DrainCurrent, &s.LowSide.Rating.JunctionDegC)
	}
	add(&s.Inductor.Rating.Saturation, &s.Inductor.Rating.Heating, &s.Inductor.Rating.WindingDegC)
	for _, c := range []*parts.Capacitor{&s.OutputCapacitors[0], &s.InputCapacitors[0]} {
		add(&c.Rating.Voltage, &c.Rating.RippleCurrent, &c.Rating.TemperatureDegC, &c.Life.Rated)
	}
	add(&s.Controller.Rating.Input, &s.Controller.Rating.JunctionDegC)
	return list
}

// randomise moves every quantity and rating at random, so that findings fall on
// both sides of their limits.
func randomise(c *rules.Case, r *rand.Rand) {
	for id := quantity.ID(0); id < quantity.Count; id++ {
		e := c.Extremes[id]
		e.Least.Value *= 0.6 + 0.8*r.Float64()
		e.Greatest.Value = e.Least.Value * (1 + r.Float64())
		c.Extremes[id], c.FullLoad[id] = e, e
		c.Nominal[id] = (e.Least.Value + e.Greatest.Value) / 2
	}
	for _, x := range ratings(c.Stage) {
		*x *= 0.5 + r.Float64()
	}
	kinds := []parts.CapacitorKind{parts.CeramicClass1, parts.CeramicClass2, parts.AluminiumElectrolytic, parts.AluminiumPolymer, parts.TantalumSolid, parts.TantalumPolymer, parts.Film}
	c.Stage.OutputCapacitors[0].Kind = kinds[r.IntN(len(kinds))]
	c.Stage.InputCapacitors[0].Kind = kinds[r.IntN(len(kinds))]
}

func allBuiltin() []*rules.Pack {
	entries := Builtin().All()
	all := make([]*rules.Pack, 0, len(entries))
	for _, e := range entries {
		all = append(all, e.Pack)
	}
	return all
}

func rectifiers(f func(r stage.Rectifier)) {
	f(stage.Synchronous)
	f(stage.DiodeRectified)
}

var unknown = math.NaN()
