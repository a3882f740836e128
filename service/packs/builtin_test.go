package packs

import (
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"

	"github.com/stretchr/testify/require"
)

func TestBuiltinPacksNameTheirOrigin(t *testing.T) {
	all := Builtin().All()
	require.Len(t, all, 5)
	for _, e := range all {
		require.NotEmpty(t, e.Pack.Edition)
		require.NotEmpty(t, e.Pack.Provenance)
		for _, r := range e.Pack.Rules {
			require.NotEmpty(t, r.Basis, r.ID)
			require.NotContains(t, strings.ToLower(r.Basis), "remember", r.ID)
		}
	}
}

func TestGeneralPracticePassesASoundRail(t *testing.T) {
	rectifiers(func(kind stage.Rectifier) {
		r := builtinReport(fullCase(kind), "general-practice")
		for _, f := range r.Findings {
			require.Equal(t, rules.Pass, f.Verdict, "%s: %s", f.Rule, f.Detail)
			require.NotEmpty(t, f.Detail, f.Rule)
			require.NotEmpty(t, f.Provenance, f.Rule)
		}
		require.Equal(t, rules.Passed, r.Verdict)
	})
}

// A class-2 ceramic part whose capacitance under direct voltage nobody told is not
// proven, nor one that sees more than its table tells.
func TestClass2CeramicNeedsItsBiasTable(t *testing.T) {
	for name, c := range map[string]struct {
		change          func(*parts.Capacitor)
		missing, beyond []string
	}{
		"absent": {func(c *parts.Capacitor) { c.CapacitanceAtBias = numeric.Table{} }, []string{"/stage/output_capacitors/0/capacitance_at_bias"}, nil},
		"short":  {func(c *parts.Capacitor) { c.CapacitanceAtBias.X[1] = 4 }, nil, []string{"/stage/output_capacitors/0/capacitance_at_bias"}},
	} {
		t.Run(name, func(t *testing.T) {
			k := fullCase(stage.Synchronous)
			k.Stage.OutputCapacitors[0].Kind = parts.CeramicClass2
			c.change(&k.Stage.OutputCapacitors[0])
			r := builtinReport(k, "general-practice")
			f := verdictOf(t, r, "general-practice/output-ceramic-bias")
			require.Equal(t, rules.NotEvaluated, f.Verdict, f.Detail)
			require.Equal(t, c.missing, f.Missing)
			require.Equal(t, c.beyond, f.Beyond)
			require.Equal(t, rules.Incomplete, r.Verdict)
		})
	}
}

// The currents of banks that are no ceramic rest on their series resistance, for which
// a ceramic value is assumed.
func TestRippleCurrentNeedsTheSeriesResistance(t *testing.T) {
	c := fullCase(stage.Synchronous)
	c.Assumed = []stage.Assumed{{Field: "input_capacitors/0/esr_ohm", Value: 3e-3}}
	r := builtinReport(c, "general-practice")
	f := verdictOf(t, r, "general-practice/input-capacitor-ripple-current")
	require.Equal(t, rules.NotEvaluated, f.Verdict)
	require.Equal(t, []string{"/stage/input_capacitors/0/esr_ohm"}, f.Missing)
	require.Equal(t, rules.Incomplete, r.Verdict)
}

// A pack that tells capacitors apart by kind says so where it has nothing for one.
func TestKindsThatAPackDoesNotCoverAreNamed(t *testing.T) {
	c := fullCase(stage.Synchronous)
	c.Stage.InputCapacitors[0].Kind, c.Requirement.Input.Max = parts.CeramicClass1, 28
	alone := builtinReport(c, "eee-inst-002-capacitors")
	f := verdictOf(t, alone, rules.RuleCoverage)
	require.Equal(t, "/stage/output_capacitors/0", f.Pointer, "a polymer capacitor")
	require.Equal(t, rules.NotEvaluated, f.Verdict)
	require.Equal(t, "eee-inst-002-capacitors", f.Pack)
	require.Equal(t, rules.Incomplete, alone.Verdict)
	e, _ := Builtin().Pack("eee-inst-002-capacitors")
	g, _ := Builtin().Pack("general-practice")
	both := rules.Check(c, []*rules.Pack{e.Pack, g.Pack}, nil, rules.Date{})
	require.Equal(t, rules.Warning, verdictOf(t, both, rules.RuleCoverage).Severity, "the other pack judges it")
	require.Equal(t, rules.Passed, both.Verdict)
}

// Every stress that general practice covers must be able to fail, at its place.
func TestGeneralPracticeCoverage(t *testing.T) {
	greatest := func(id quantity.ID, v float64) func(*rules.Case) {
		return func(c *rules.Case) { setGreatest(c, id, v) }
	}
	least := func(id quantity.ID, v float64) func(*rules.Case) {
		return func(c *rules.Case) {
			e := c.Extremes[id]
			e.Least.Value = v
			c.Extremes[id], c.FullLoad[id] = e, e
		}
	}
	kinds := func(k parts.CapacitorKind, more func(*rules.Case)) func(*rules.Case) {
		return func(c *rules.Case) {
			c.Stage.OutputCapacitors[0].Kind, c.Stage.InputCapacitors[0].Kind = k, k
			more(c)
		}
	}
	cases := []struct {
		rule, pointer string
		rectifier     stage.Rectifier
		change        func(*rules.Case)
	}{
		{"high-side-voltage", "/stage/high_side/rating/drain_source_v", stage.Synchronous, greatest(quantity.BridgeVoltage, 32.1)},
		{"low-side-voltage", "/stage/low_side/rating/drain_source_v", stage.Synchronous, func(c *rules.Case) { c.Requirement.Input.Max = 32.1 }},
		{"diode-voltage", "/stage/diode/rating/reverse_v", stage.DiodeRectified, greatest(quantity.BridgeVoltage, 48.1)},
		{"gate-voltage", "/stage/low_side/rating/gate_source_v", stage.Synchronous, func(c *rules.Case) { c.Stage.LowSide.Rating.GateSource = 4.9 }},
		{"high-side-current", "/stage/high_side/rating/drain_current_a", stage.Synchronous, greatest(quantity.HighSideRMS, 20.1)},
		{"low-side-current", "/stage/low_side/rating/drain_current_a", stage.Synchronous, greatest(quantity.RectifierRMS, 20.1)},
		{"diode-current", "/stage/diode/rating/forward_a", stage.DiodeRectified, greatest(quantity.RectifierMean, 10.1)},
		{"high-side-junction", "/stage/high_side/rating/junction_degc", stage.Synchronous, greatest(quantity.HighSideJunction, 131)},
		{"low-side-junction", "/stage/low_side/rating/junction_degc", stage.Synchronous, greatest(quantity.LowSideJunction, 131)},
		{"diode-junction", "/stage/diode/rating/junction_degc", stage.DiodeRectified, greatest(quantity.DiodeJunction, 131)},
		{"inductor-saturation", "/stage/inductor/rating/saturation_a", stage.Synchronous, func(c *rules.Case) { c.Stage.Modulator.CurrentLimit = 12.1 }},
		{"inductor-saturation", "/stage/inductor/rating/saturation_a", stage.Synchronous, func(c *rules.Case) {
			c.Stage.Modulator.CurrentLimit = unknown
			setGreatest(c, quantity.InductorPeak, 12/1.3+0.01)
		}},
		{"inductor-saturation-load-step", "/stage/inductor/rating/saturation_a", stage.Synchronous, greatest(quantity.LoadStepPeak, 12.1)},
		{"inductor-heating", "/stage/inductor/rating/heating_a", stage.Synchronous, greatest(quantity.InductorRMS, 9.1)},
		{"inductor-winding", "/stage/inductor/rating/winding_degc", stage.Synchronous, greatest(quantity.InductorWinding, 126)},
		{"inductor-ripple-high", "/stage/inductor", stage.Synchronous, func(c *rules.Case) { c.Nominal[quantity.InductorRipplePP] = 2.5 }},
		{"inductor-ripple-low", "/stage/inductor", stage.Synchronous, func(c *rules.Case) { c.Nominal[quantity.InductorRipplePP] = 1.1 }},
		{"output-capacitor-voltage", "/stage/output_capacitors/0/rating/voltage_v", stage.Synchronous, func(c *rules.Case) { c.Stage.OutputCapacitors[0].Rating.Voltage = 6.3 * 0.99 }},
		{"output-capacitor-voltage", "/stage/output_capacitors/0/rating/voltage_v", stage.Synchronous, kinds(parts.TantalumSolid, func(c *rules.Case) { c.Stage.OutputCapacitors[0].Rating.Voltage = 10 })},
		{"input-capacitor-voltage", "/stage/input_capacitors/0/rating/voltage_v", stage.Synchronous, func(c *rules.Case) { c.Stage.InputCapacitors[0].Rating.Voltage = 35 }},
		{"output-capacitor-ripple-current", "/stage/output_capacitors/0/rating/ripple_current_a", stage.Synchronous, greatest(quantity.OutputCapacitorRMS, 6.1)},
		{"output-ceramic-ripple-current", "/stage/output_capacitors/0/rating/ripple_current_a", stage.Synchronous, kinds(parts.CeramicClass2, greatest(quantity.OutputCapacitorRMS, 6.1))},
		{"input-capacitor-ripple-current", "/stage/input_capacitors/0/rating/ripple_current_a", stage.Synchronous, greatest(quantity.InputCapacitorBankRMS, 6.1)},
		{"input-ceramic-ripple-current", "/stage/input_capacitors/0/rating/ripple_current_a", stage.Synchronous, kinds(parts.CeramicClass1, greatest(quantity.InputCapacitorBankRMS, 6.1))},
		{"output-ceramic-bias", "/stage/output_capacitors/0/capacitance_at_bias", stage.Synchronous, kinds(parts.CeramicClass2, func(c *rules.Case) {
			c.Stage.OutputCapacitors[0].CapacitanceAtBias.X[1] = 4.95
			setGreatest(c, quantity.OutputMean, 4.9)
		})},
		{"input-ceramic-bias", "/stage/input_capacitors/0/capacitance_at_bias", stage.Synchronous, kinds(parts.CeramicClass2, func(c *rules.Case) {
			c.Stage.InputCapacitors[0].CapacitanceAtBias.X[1] = 29
		})},
		{"output-capacitor-temperature", "/stage/output_capacitors/0/rating/temperature_degc", stage.Synchronous, greatest(quantity.OutputCapacitorTemperature, 106)},
		{"input-capacitor-temperature", "/stage/input_capacitors/0/rating/temperature_degc", stage.Synchronous, greatest(quantity.InputCapacitorTemperature, 106)},
		{"output-capacitor-life", "/stage/output_capacitors/0/life/rated_s", stage.Synchronous, least(quantity.OutputCapacitorLife, 0.9e7)},
		{"input-capacitor-life", "/stage/input_capacitors/0/life/rated_s", stage.Synchronous, least(quantity.InputCapacitorLife, 0.9e7)},
		{"controller-input-voltage", "/stage/controller/rating/input_v", stage.Synchronous, func(c *rules.Case) { c.Stage.Controller.Rating.Input = 29 }},
		{"controller-junction", "/stage/controller/rating/junction_degc", stage.Synchronous, greatest(quantity.ControllerJunction, 126)},
		{"least-on-time", "/stage/controller/min_on_time_s", stage.Synchronous, least(quantity.OnTime, 100e-9)},
		{"least-off-time", "/stage/controller/min_off_time_s", stage.Synchronous, least(quantity.OffTime, 110e-9)},
		{"duty-limit", "/stage/controller/max_duty_ratio", stage.Synchronous, greatest(quantity.DutyRatio, 0.945)},
		{"output-ripple", "/stage/output_capacitors", stage.Synchronous, greatest(quantity.OutputRippleWithESLPP, 0.051)},
		{"input-ripple", "/stage/input_capacitors", stage.Synchronous, greatest(quantity.InputRipplePP, 0.51)},
		{"regulation-accuracy", "/stage", stage.Synchronous, greatest(quantity.LoadVoltage, 5.16)},
		{"regulation-accuracy", "/stage", stage.Synchronous, least(quantity.LoadVoltage, 4.84)},
		{"divider-set-point", "/stage/feedback", stage.Synchronous, func(c *rules.Case) { c.Stage.Feedback.Upper *= 1.03 }},
		{"load-step-deviation", "/stage", stage.Synchronous, greatest(quantity.LoadStepDeviation, 0.21)},
		{"load-step-recovery", "/stage", stage.Synchronous, greatest(quantity.LoadStepRecovery, 1.1e-4)},
		{"efficiency-floor", "/stage", stage.Synchronous, least(quantity.Efficiency, 0.84)},
		{"continuous-conduction", "/stage/inductor", stage.Synchronous, greatest(quantity.BoundaryLoad, 1.3)},
		{"phase-margin-nominal", "/stage/compensator", stage.Synchronous, func(c *rules.Case) { c.Nominal[quantity.PhaseMargin] = 44 }},
		{"phase-margin-worst", "/stage/compensator", stage.Synchronous, least(quantity.PhaseMargin, 29)},
		{"gain-margin", "/stage/compensator", stage.Synchronous, least(quantity.GainMargin, 5.9)},
		{"crossover-limit", "/stage/compensator", stage.Synchronous, greatest(quantity.Crossover, 81e3)},
	}
	covered := map[string]bool{}
	for _, c := range cases {
		t.Run(c.rule, func(t *testing.T) {
			k := fullCase(c.rectifier)
			c.change(k)
			r := builtinReport(k, "general-practice")
			found := false
			for _, f := range r.Findings {
				if f.Rule == "general-practice/"+c.rule && f.Pointer == c.pointer {
					found = true
					require.Equal(t, rules.Fail, f.Verdict, f.Detail)
					require.Negative(t, f.Margin)
				} else {
					require.True(t, f.Verdict == rules.Pass || f.Rule == "general-practice/"+c.rule || strings.Contains(f.Rule, "voltage") && strings.Contains(c.rule, "voltage"),
						"%s should not be moved: %s", f.Rule, f.Detail)
				}
			}
			require.True(t, found, "no finding at %s", c.pointer)
		})
		covered["general-practice/"+c.rule] = true
	}
	e, _ := Builtin().Pack("general-practice")
	for _, r := range e.Pack.Rules {
		require.True(t, covered[r.ID], "%s is never seen to fail", r.ID)
	}
}

// key tells findings of one rule at one place apart from all others.
func key(f *rules.Finding) string { return f.Rule + " " + f.Pointer }

func TestABetterRatingNeverTurnsPassIntoFail(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 1))
	failures, improved := 0, 0
	for range 150 {
		rectifiers(func(kind stage.Rectifier) {
			c := fullCase(kind)
			randomise(c, r)
			before := map[string]rules.Verdict{}
			for _, f := range rules.Check(c, allBuiltin(), nil, rules.Date{}).Findings {
				before[key(&f)] = f.Verdict
				if f.Verdict == rules.Fail {
					failures++
				}
			}
			list := ratings(c.Stage)
			*list[r.IntN(len(list))] *= 1 + r.Float64()
			for _, f := range rules.Check(c, allBuiltin(), nil, rules.Date{}).Findings {
				was := before[key(&f)]
				require.False(t, was == rules.Pass && f.Verdict == rules.Fail, "%s failed after a rating was raised: %s", key(&f), f.Detail)
				if was == rules.Fail && f.Verdict == rules.Pass {
					improved++
				}
			}
		})
	}
	require.Greater(t, failures, 1000, "the random rails must fail often enough to mean something")
	require.Greater(t, improved, 10)
}

func TestAMissingRatingNeverPasses(t *testing.T) {
	var touched []string
	rectifiers(func(kind stage.Rectifier) {
		full := map[string]rules.Finding{}
		for _, f := range rules.Check(fullCase(kind), allBuiltin(), nil, rules.Date{}).Findings {
			full[key(&f)] = f
		}
		for i := range ratings(fullCase(kind).Stage) {
			c := fullCase(kind)
			*ratings(c.Stage)[i] = unknown
			for _, f := range rules.Check(c, allBuiltin(), nil, rules.Date{}).Findings {
				if len(f.Missing) > 0 {
					require.Equal(t, rules.NotEvaluated, f.Verdict)
					touched = append(touched, f.Rule)
					continue
				}
				was := full[key(&f)]
				require.Equal(t, was.Limit, f.Limit, "%s uses another limit when rating %d is missing", f.Rule, i)
				require.Equal(t, was.Value, f.Value, "%s uses another value when rating %d is missing", f.Rule, i)
			}
		}
	})
	for _, want := range []string{"general-practice/high-side-voltage", "general-practice/inductor-heating", "mil-dtl-917-fet/gate-source-voltage", "navsea-sd-18-rectifiers/reverse-voltage"} {
		require.True(t, slices.Contains(touched, want), want)
	}
}

// No quantity, when missing, may leave a rule that uses it passing.
func TestAMissingQuantityNeverPasses(t *testing.T) {
	touched := 0
	rectifiers(func(kind stage.Rectifier) {
		full := map[string]rules.Finding{}
		for _, f := range rules.Check(fullCase(kind), allBuiltin(), nil, rules.Date{}).Findings {
			full[key(&f)] = f
		}
		for id := quantity.ID(0); id < quantity.Count; id++ {
			c := fullCase(kind)
			delete(c.Extremes, id)
			delete(c.FullLoad, id)
			c.Nominal[id] = unknown
			for _, f := range rules.Check(c, allBuiltin(), nil, rules.Date{}).Findings {
				if len(f.Missing) > 0 {
					require.Equal(t, rules.NotEvaluated, f.Verdict)
					touched++
					continue
				}
				require.Equal(t, full[key(&f)].Value, f.Value, "%s has another value without %s", f.Rule, id.Key())
			}
		}
	})
	require.Greater(t, touched, 50)
}

// What Needs leaves out must make no difference to any verdict.
func TestNeedsIsEnough(t *testing.T) {
	rectifiers(func(kind stage.Rectifier) {
		c := fullCase(kind)
		want := rules.Check(c, allBuiltin(), nil, rules.Date{})
		d := rules.Needs(c, allBuiltin())
		keep := func(all map[quantity.ID]rules.Extreme, least, greatest []quantity.ID) map[quantity.ID]rules.Extreme {
			out := map[quantity.ID]rules.Extreme{}
			for id, e := range all {
				if !slices.Contains(least, id) {
					e.Least.Value = unknown
				}
				if !slices.Contains(greatest, id) {
					e.Greatest.Value = unknown
				}
				out[id] = e
			}
			return out
		}
		c.Extremes, c.FullLoad = keep(c.Extremes, d.Least, d.Greatest), keep(c.FullLoad, d.FullLoadLeast, d.FullLoadGreatest)
		for id := range c.Nominal {
			if !slices.Contains(d.Nominal, quantity.ID(id)) {
				c.Nominal[id] = unknown
			}
		}
		require.Equal(t, want.Verdict, rules.Check(c, allBuiltin(), nil, rules.Date{}).Verdict)
		for i, f := range rules.Check(c, allBuiltin(), nil, rules.Date{}).Findings {
			require.Equal(t, want.Findings[i].Verdict, f.Verdict, "%s: %s", f.Rule, f.Detail)
		}
		require.Less(t, len(d.Least)+len(d.Greatest)+len(d.Nominal), 60)
	})
}
