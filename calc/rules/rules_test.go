package rules

import (
	"math"
	"slices"
	"strings"
	"testing"

	"railproof/calc/evaluate"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"

	"github.com/stretchr/testify/require"
)

var today = Date{2030, 6, 15}

func testCase() *Case {
	s := stage.NewStage(stage.Synchronous, 2, 1, 0, false, false, true, false)
	s.SwitchingFrequency = 500e3
	s.Inductor.Rating.Heating = 10
	for i := range s.OutputCapacitors {
		s.OutputCapacitors[i].Count = i + 1
	}
	s.OutputCapacitors[1].Rating.Voltage = 10
	nominal := quantity.Vector{}
	for i := range nominal {
		nominal[i] = math.NaN()
	}
	nominal[quantity.InductorRMS] = 6
	return &Case{
		StageAt: "/stage", RequirementAt: "/requirement", Stage: s, Nominal: &nominal,
		Requirement: &stage.Requirement{Output: 5},
		Extremes: map[quantity.ID]Extreme{
			quantity.InductorRMS: {Least: Worst{Value: 1, Corner: 3}, Greatest: Worst{Value: 8, Corner: 7}},
			quantity.OutputMean:  {Least: Worst{Value: 4.9, Corner: 1}, Greatest: Worst{Value: 5.1, Corner: 2}},
		},
	}
}

func rule(id string, scope Scope, value, limit Number) Rule {
	m, err := ParseMessage("{value} {unit} against {limit}")
	if err != nil {
		panic(err)
	}
	return Rule{ID: "test/" + id, Title: id, Unit: "A", Message: m, Basis: "test", Bodies: []Body{{Scope: scope, Value: value, Limit: limit}}}
}

func heating(limit float64) Rule {
	r := rule("heating", OverInductor, func(l *Look) float64 { return l.Number("greatest.inductor_rms_a") }, func(l *Look) float64 {
		return limit * l.Number("part.rating.heating_a")
	})
	r.At = "rating/heating_a"
	return r
}

func check(c *Case, waivers []Waiver, list ...Rule) Report {
	return Check(c, []*Pack{{ID: "test", Edition: "1", Rules: list}}, waivers, today)
}

func only(t *testing.T, r Report) Finding {
	t.Helper()
	require.Len(t, r.Findings, 1, "findings: %+v", r.Findings)
	return r.Findings[0]
}

func TestFindingCarriesItsFigures(t *testing.T) {
	r := check(testCase(), nil, heating(1))
	f := only(t, r)
	require.Equal(t, Pass, f.Verdict)
	require.Equal(t, Passed, r.Verdict)
	require.Equal(t, "/stage/inductor/rating/heating_a", f.Pointer)
	require.Equal(t, []int{7}, f.Corners, "the corner of the greatest current")
	require.Equal(t, 8.0, f.Value)
	require.Equal(t, 10.0, f.Limit)
	require.InDelta(t, 0.2, f.Margin, 1e-15)
	require.Equal(t, "8 A against 10", f.Detail)
	require.Equal(t, "1", f.Edition)
}

func TestVerdicts(t *testing.T) {
	cases := []struct {
		name   string
		change func(*Case)
		rule   Rule
		want   Verdict
		all    Overall
	}{
		{"pass/equal-to-the-limit-up-to-rounding", nil, heating(0.8 - 1e-17), Pass, Passed},
		{"fail/above", nil, heating(0.79), Fail, Failed},
		{"not-evaluated/rating-missing", func(c *Case) { c.Stage.Inductor.Rating.Heating = parts.Unknown }, heating(1), NotEvaluated, Incomplete},
		{"not-evaluated/quantity-missing", func(c *Case) { delete(c.Extremes, quantity.InductorRMS) }, heating(1), NotEvaluated, Incomplete},
		{"not-evaluated/quantity-nan", func(c *Case) {
			c.Extremes[quantity.InductorRMS] = Extreme{Worst{Value: math.NaN()}, Worst{Value: math.NaN()}}
		}, heating(1), NotEvaluated, Incomplete},
		{"not-evaluated/table-beyond-its-end", func(c *Case) {
			e := c.Extremes[quantity.InductorRMS]
			e.Greatest.Beyond = []string{"/stage/inductor/inductance_at_current"}
			c.Extremes[quantity.InductorRMS] = e
		}, heating(1), NotEvaluated, Incomplete},
		{"not-evaluated/assumed-number-counts-as-missing", func(c *Case) {
			c.Assumed = []stage.Assumed{{Field: "inductor/rating/heating_a", Value: 10}}
		}, heating(1), NotEvaluated, Incomplete},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			k := testCase()
			if c.change != nil {
				c.change(k)
			}
			r := check(k, nil, c.rule)
			f := only(t, r)
			require.Equal(t, c.want, f.Verdict, f.Detail)
			require.Equal(t, c.all, r.Verdict)
			if c.want == NotEvaluated {
				require.True(t, len(f.Missing)+len(f.Beyond) > 0, "it must say what is missing")
			}
		})
	}
}

func TestMissingIsNamedByPointer(t *testing.T) {
	c := testCase()
	c.Stage.Inductor.Rating.Heating = parts.Unknown
	delete(c.Extremes, quantity.InductorRMS)
	require.Equal(t, []string{"inductor_rms_a", "/stage/inductor/rating/heating_a"}, only(t, check(c, nil, heating(1))).Missing)
}

func TestSeverityDecidesTheWhole(t *testing.T) {
	missing := func(s Severity) Rule {
		r := heating(1)
		r.Severity = s
		r.Needs = []string{"part.thermal.junction_to_ambient_k_per_w"}
		return r
	}
	failing := func(s Severity) Rule {
		r := heating(0.1)
		r.Severity = s
		return r
	}
	require.Equal(t, Failed, check(testCase(), nil, failing(Error)).Verdict)
	require.Equal(t, Failed, check(testCase(), nil, failing(Warning)).Verdict)
	require.Equal(t, Passed, check(testCase(), nil, failing(Note), heating(1)).Verdict)
	require.Equal(t, Incomplete, check(testCase(), nil, missing(Error), heating(1)).Verdict)
	require.Equal(t, Passed, check(testCase(), nil, missing(Warning), heating(1)).Verdict)
	require.Equal(t, Failed, check(testCase(), nil, missing(Error), failing(Error)).Verdict)
	require.Equal(t, Incomplete, check(testCase(), nil).Verdict, "nothing checked is no pass")
	require.Equal(t, Incomplete, check(testCase(), nil, missing(Warning)).Verdict, "nothing evaluated is no pass")
}

func TestBanksAreSeenOneByOne(t *testing.T) {
	voltage := rule("voltage", OverOutputCapacitors, func(l *Look) float64 { return l.Number("greatest.output_mean_v") / l.Number("part.rating.voltage_v") },
		func(*Look) float64 { return 0.8 })
	r := check(testCase(), nil, voltage)
	require.Len(t, r.Findings, 2)
	require.Equal(t, NotEvaluated, r.Findings[0].Verdict)
	require.Equal(t, []string{"/stage/output_capacitors/0/rating/voltage_v"}, r.Findings[0].Missing)
	require.Equal(t, Pass, r.Findings[1].Verdict)
	require.Equal(t, "/stage/output_capacitors/1", r.Findings[1].Pointer)
}

func TestRuleOfAnAbsentPartIsNotApplicable(t *testing.T) {
	r := check(testCase(), nil, rule("diode", OverDiode, func(*Look) float64 { return 1 }, func(*Look) float64 { return 2 }))
	require.Empty(t, r.Findings)
	require.Equal(t, []string{"test/diode"}, r.NotApplicable)
	require.Equal(t, Incomplete, r.Verdict)
}

func TestConditionWithAMissingFactIsNotEvaluated(t *testing.T) {
	r := heating(1)
	r.Bodies[0].When = func(l *Look) bool { return l.Number("requirement.targets.junction_degc") < 100 }
	c := testCase()
	c.Requirement.Targets.JunctionDegC = parts.Unknown
	f := only(t, check(c, nil, r))
	require.Equal(t, NotEvaluated, f.Verdict, "a condition that cannot be decided must not switch the rule off")
	require.Equal(t, []string{"/requirement/targets/junction_degc"}, f.Missing)
	c.Requirement.Targets.JunctionDegC = 120
	require.Empty(t, check(c, nil, r).Findings)
}

func TestModelBandIsShown(t *testing.T) {
	for name, c := range map[string]struct {
		low, high float64
		within    bool
	}{"band-over-the-limit": {7, 10.5, true}, "band-inside": {7.5, 9.9, false}} {
		t.Run(name, func(t *testing.T) {
			k := testCase()
			k.Extremes[quantity.InductorRMS] = Extreme{Greatest: Worst{Value: 8, Banded: true, Low: c.low, High: c.high}}
			f := only(t, check(k, nil, heating(1)))
			require.Equal(t, Pass, f.Verdict)
			require.Equal(t, c.within, f.WithinBand)
			require.Equal(t, []float64{c.low, c.high}, []float64{f.ValueLow, f.ValueHigh})
			require.Equal(t, c.within, strings.Contains(f.Detail, "both sides"))
		})
	}
}

func TestSpreadEndsAreFacts(t *testing.T) {
	c := testCase()
	c.Spreads = []spread.Variable{{Field: "switching_frequency_hz", Min: 450e3, Typ: 500e3, Max: 560e3}}
	read := func(name string) float64 {
		r := rule("f", OverStage, func(l *Look) float64 { return l.Number(name) }, func(*Look) float64 { return 1e9 })
		return only(t, check(c, nil, r)).Value
	}
	require.Equal(t, 450e3, read("stage_least.switching_frequency_hz"))
	require.Equal(t, 500e3, read("stage.switching_frequency_hz"))
	require.Equal(t, 560e3, read("stage_greatest.switching_frequency_hz"))
}

func TestStatusesOfCorners(t *testing.T) {
	c := testCase()
	c.Statuses = []PointStatus{{evaluate.OK, 0}, {evaluate.DropOut, 4}, {evaluate.DropOut, 5}}
	r := check(c, nil, heating(1))
	require.Equal(t, RuleOperatingStatus, r.Findings[0].Rule)
	require.Equal(t, Fail, r.Findings[0].Verdict)
	require.Equal(t, []int{4}, r.Findings[0].Corners)
	require.Len(t, r.Findings, 2)
	require.Equal(t, Failed, r.Verdict)
	c.Statuses = []PointStatus{{evaluate.NotConverged, 4}}
	require.Equal(t, Incomplete, check(c, nil, heating(1)).Verdict)
}

func TestWaivers(t *testing.T) {
	w := Waiver{Rule: "test/heating", Pointer: "/stage/inductor/rating/heating_a", Reason: "measured", Approver: "A. Harbour", Expires: today}
	t.Run("holds-through-its-last-day", func(t *testing.T) {
		r := check(testCase(), []Waiver{w}, heating(0.5))
		f := only(t, r)
		require.Equal(t, Waived, f.Verdict)
		require.Equal(t, Fail, f.WaivedFrom)
		require.Equal(t, "measured", f.Waiver.Reason)
		require.Equal(t, Passed, r.Verdict)
	})
	t.Run("expired", func(t *testing.T) {
		old := w
		old.Expires = Date{2030, 6, 14}
		r := check(testCase(), []Waiver{old}, heating(0.5))
		require.Equal(t, Failed, r.Verdict)
		require.Equal(t, Fail, r.Findings[0].Verdict)
		require.Equal(t, RuleWaiverExpired, r.Findings[1].Rule)
	})
	t.Run("unused-because-it-passes", func(t *testing.T) {
		r := check(testCase(), []Waiver{w}, heating(1))
		require.Equal(t, Passed, r.Verdict)
		require.Equal(t, RuleWaiverUnused, r.Findings[1].Rule)
		require.Equal(t, Note, r.Findings[1].Severity)
	})
	t.Run("unused-because-of-another-pointer", func(t *testing.T) {
		other := w
		other.Pointer = "/stage/inductor"
		r := check(testCase(), []Waiver{other}, heating(0.5))
		require.Equal(t, Failed, r.Verdict)
		require.Equal(t, RuleWaiverUnused, r.Findings[1].Rule)
	})
	t.Run("missing-data-can-be-accepted", func(t *testing.T) {
		c := testCase()
		c.Stage.Inductor.Rating.Heating = parts.Unknown
		r := check(c, []Waiver{w}, heating(1))
		require.Equal(t, NotEvaluated, r.Findings[0].WaivedFrom)
		require.Equal(t, Passed, r.Verdict)
	})
}

func TestParseDate(t *testing.T) {
	for _, text := range []string{"2028-02-29", "2000-02-29", "2030-12-31", "0001-01-01"} {
		d, err := ParseDate(text)
		require.NoError(t, err)
		require.Equal(t, text, d.String())
	}
	for _, text := range []string{"", "2030-2-1", "2030-13-01", "2030-00-10", "2030-04-31", "2027-02-29", "1900-02-29", "2030-01-00", "+030-01-01", "2030/01/01", "2030-01-01T"} {
		_, err := ParseDate(text)
		require.Error(t, err, text)
	}
	require.True(t, Date{2029, 12, 31}.Before(Date{2030, 1, 1}))
	require.True(t, Date{2030, 1, 31}.Before(Date{2030, 2, 1}))
	require.False(t, today.Before(today))
}

func TestMarginOfTemperatures(t *testing.T) {
	require.InDelta(t, 0.5, margin(AtMost, 75, 125, "Cel"), 1e-15, "half of the rise above 25 degC is left")
	require.InDelta(t, 0.5, margin(AtLeast, 1.5, 1, "1"), 1e-15)
	require.True(t, math.IsNaN(margin(AtMost, 1, 0, "V")))
}

func TestMessages(t *testing.T) {
	for _, bad := range []string{"{", "{}", "{valeu}", "x {limit"} {
		_, err := ParseMessage(bad)
		require.Error(t, err, bad)
	}
	m, err := ParseMessage("{part}: {value} {unit}, {margin} left by {rule}")
	require.NoError(t, err)
	f := Finding{Rule: "a/b", Value: 61.23456, Unit: "Cel", Margin: 0.125}
	require.Equal(t, "high_side: 61.23 °C, 12.5 % left by a/b", m.fill(&f, "high_side"))
	for _, c := range []struct {
		message, unit, want string
		value, limit        float64
	}{
		{"The on-time is {value} s; {limit} s keeps pulses.", "s", "The on-time is 282.5 ns; 104 ns keeps pulses.", 2.825e-7, 1.04e-7},
		{"{value} {unit} of {limit} {unit}", "V", "10.09 mV of 1.5 V", 0.01009, 1.5},
		{"It is {value} {unit}; the limit is {limit} {unit}.", "1", "It is -0.02783; the limit is 0.03.", -0.02783, 0.03},
		{"{value} Amperes, {limit} A", "A", "0.002 Amperes, 3 mA", 0.002, 0.003},
		{"{value} of {limit}", "V", "0.01 of 0.03", 0.01, 0.03},
		{"{value} V", "V", "unknown V", math.NaN(), 0},
		{"They last {value} s; {limit} s are asked for.", "s", "They last 134886 h; 12 s are asked for.", 134886 * 3600, 12},
		{"at {value} {unit} {limit}", "Hz", "at 77.93 kHz 9.2e+04", 77930, 92000},
	} {
		m, err := ParseMessage(c.message)
		require.NoError(t, err)
		f := Finding{Unit: c.unit, Value: c.value, Limit: c.limit}
		require.Equal(t, c.want, m.fill(&f, ""))
	}
}

// Every number that the facts can hold must have a name that packs may use, and
// the other way round for a full stage.
func TestVocabularyCoversTheFacts(t *testing.T) {
	for scope := Scope(0); scope < ScopeCount; scope++ {
		c := testCase()
		if scope == OverDiode {
			c.Stage = stage.NewStage(stage.DiodeRectified, 1, 1, 0, true, true, true, true)
		} else {
			c.Stage = stage.NewStage(stage.Synchronous, 1, 1, 0, true, true, true, true)
		}
		for _, f := range c.Stage.Fields() {
			*f.Value = 1
		}
		c.Extremes = map[quantity.ID]Extreme{}
		for i := range c.Nominal {
			c.Nominal[i] = 1
			c.Extremes[quantity.ID(i)] = Extreme{}
		}
		c.FullLoad = c.Extremes
		known := map[string]bool{}
		for _, n := range Vocabulary(scope) {
			require.False(t, known[n.Key], "%s twice", n.Key)
			known[n.Key] = true
			if n.Kind == NumberFact {
				require.NotEmpty(t, n.Unit, n.Key)
			}
		}
		f := prepare(c).at(scope, 0, nil)
		for _, set := range []map[string]fact{f.shared, f.own} {
			for name := range set {
				if _, hasUnit := UnitOf(name); hasUnit && !known[name] && !strings.Contains(name, "_least.") && !strings.Contains(name, "_greatest.") {
					t.Errorf("%s: %s is a fact without a name", scope, name)
				}
			}
		}
		for _, want := range []string{"greatest.inductor_peak_a", "stage.switching_frequency_hz", "stage_greatest.controller.min_on_time_s", "requirement.output.voltage_v"} {
			require.True(t, known[want], want)
			_, found := f.find(want)
			require.True(t, found, want)
		}
		require.Equal(t, scope == OverOutputCapacitors, known["greatest.output_capacitor_rms_a"])
	}
	require.True(t, slices.ContainsFunc(Vocabulary(OverInputCapacitors), func(n Name) bool { return n.Key == "part.rating.voltage_v" && n.Unit == "V" }))
}

func TestScopesByName(t *testing.T) {
	for s := Scope(0); s < ScopeCount; s++ {
		got, ok := ParseScope(s.String())
		require.True(t, ok)
		require.Equal(t, s, got)
	}
	_, ok := ParseScope("resistor")
	require.False(t, ok)
}

func TestComparePairsByRuleAndPlace(t *testing.T) {
	f := func(rule, pointer string, v Verdict, margin float64) Finding {
		return Finding{Rule: rule, Pointer: pointer, Verdict: v, Margin: margin}
	}
	before := []Finding{f("a", "/0", Pass, 0.1), f("a", "/1", Pass, 0.1), f("b", "/0", Fail, -0.1), f("c", "", NotEvaluated, math.NaN())}
	after := []Finding{f("a", "/1", Pass, 0.1+1e-9), f("b", "/0", Pass, 0.1), f("c", "", NotEvaluated, math.NaN()), f("a", "/2", Pass, 0.1)}
	changes := Compare(before, after)
	kinds := make([]ChangeKind, 0, len(changes))
	for _, c := range changes {
		kinds = append(kinds, c.Kind)
	}
	require.Equal(t, []ChangeKind{Unchanged, Better, Unchanged, Appears, Disappears}, kinds)
}

func TestNeedsNamesWhatRulesRead(t *testing.T) {
	read := func(scope Scope, when Predicate, names ...string) *Pack {
		return &Pack{Rules: []Rule{{Bodies: []Body{{Scope: scope, When: when, Reads: names}}}}}
	}
	c := testCase()
	d := Needs(c, []*Pack{
		read(OverInductor, nil, "greatest.inductor_rms_a", "part.rating.heating_a", "nominal.inductor_rms_a"),
		read(OverOutputCapacitors, nil, "greatest.output_capacitor_rms_a", "greatest.inductor_rms_a"),
		read(OverDiode, nil, "greatest.diode_junction_degc"),
		read(OverStage, func(l *Look) bool { return l.Number("requirement.output.voltage_v") > 100 }, "least.load_v"),
		read(OverStage, func(l *Look) bool { return l.Number("greatest.load_v") > 100 }, "full_load_least.efficiency_ratio"),
	})
	require.Equal(t, Demand{
		Nominal:       []quantity.ID{quantity.InductorRMS},
		Greatest:      []quantity.ID{quantity.InductorRMS, quantity.OutputCapacitorRMS, quantity.OutputCapacitorRMS + 1},
		FullLoadLeast: []quantity.ID{quantity.Efficiency},
	}, d)
}

func TestChangesHaveADirection(t *testing.T) {
	f := func(v Verdict, margin float64) []Finding { return []Finding{{Verdict: v, Margin: margin}} }
	for name, c := range map[string]struct {
		before, after []Finding
		want          ChangeKind
	}{
		"margin-shrinks":     {f(Pass, 0.2), f(Pass, 0.1), Worse},
		"margin-grows":       {f(Fail, -0.2), f(Fail, -0.1), Better},
		"pass-to-fail":       {f(Pass, 0.2), f(Fail, -0.1), Worse},
		"pass-to-gap":        {f(Pass, 0.2), f(NotEvaluated, math.NaN()), Worse},
		"fail-to-gap":        {f(Fail, -0.2), f(NotEvaluated, math.NaN()), Better},
		"gap-to-pass":        {f(NotEvaluated, math.NaN()), f(Pass, 0.1), Better},
		"still-a-gap":        {f(NotEvaluated, math.NaN()), f(NotEvaluated, math.NaN()), Unchanged},
		"within-the-solvers": {f(Pass, 0.2), f(Pass, 0.2-1e-8), Unchanged},
	} {
		require.Equal(t, c.want, Compare(c.before, c.after)[0].Kind, name)
	}
}

func TestLimitsOfARequestAreRules(t *testing.T) {
	c := testCase()
	c.Extremes[quantity.OutputCapacitorRMS+1] = Extreme{Greatest: Worst{Value: 0.7, Corner: 9}}
	c.FullLoad = map[quantity.ID]Extreme{quantity.InductorRMS: {Least: Worst{Value: 6, Corner: 7}}}
	nan := math.NaN()
	limits := []Limit{
		{Quantity: quantity.InductorRMS, Min: nan, Max: 7.5},
		{Quantity: quantity.InductorRMS, Min: nan, Max: 7.5, Where: AtNominal},
		{Quantity: quantity.InductorRMS, Min: 2, Max: nan, Where: AtFullLoad},
		{Quantity: quantity.OutputMean, Min: 4.8, Max: 5.05},
		{Quantity: quantity.OutputCapacitorRMS + 1, Min: nan, Max: 1},
		{Quantity: quantity.PhaseMargin, Min: 40, Max: nan},
	}
	pack := LimitRules("/limits", limits)
	r := Check(c, []*Pack{pack}, nil, today)
	type row struct {
		rule, pointer string
		verdict       Verdict
	}
	got := make([]row, 0, len(r.Findings))
	for _, f := range r.Findings {
		got = append(got, row{f.Rule, f.Pointer, f.Verdict})
	}
	require.Equal(t, []row{
		{"limits/inductor_rms_a.max", "/limits/0", Fail},
		{"limits/inductor_rms_a.max", "/limits/1", Pass},
		{"limits/inductor_rms_a.min", "/limits/2", Pass},
		{"limits/output_mean_v.min", "/limits/3", Pass},
		{"limits/output_mean_v.max", "/limits/3", Fail},
		{"limits/output_capacitor_rms_a.1.max", "/limits/4", Pass},
		{"limits/phase_margin_deg.min", "/limits/5", NotEvaluated},
	}, got)
	require.Equal(t, "It is 8 A; the limit is 7.5 A.", r.Findings[0].Detail)
	require.Equal(t, []int{9}, r.Findings[5].Corners)
	require.Equal(t, []string{"phase_margin_deg"}, r.Findings[6].Missing)
	d := Needs(c, []*Pack{pack})
	require.Equal(t, []quantity.ID{quantity.InductorRMS}, d.Nominal)
	require.Equal(t, []quantity.ID{quantity.InductorRMS}, d.FullLoadLeast)
	require.Equal(t, []quantity.ID{quantity.OutputMean, quantity.PhaseMargin}, d.Least)
	require.Equal(t, []quantity.ID{quantity.OutputMean, quantity.InductorRMS, quantity.OutputCapacitorRMS + 1}, d.Greatest)
}

// What a division by zero yields lies on the good side of every limit, or of none.
func TestInfiniteFiguresAreNotEvaluated(t *testing.T) {
	constant := func(v float64) Number { return func(*Look) float64 { return v } }
	for name, c := range map[string]Rule{
		"value": rule("a", OverStage, constant(math.Inf(-1)), constant(1)),
		"limit": rule("b", OverStage, constant(1), constant(math.Inf(1))),
	} {
		t.Run(name, func(t *testing.T) {
			r := check(testCase(), nil, c)
			f := only(t, r)
			require.Equal(t, NotEvaluated, f.Verdict)
			require.False(t, math.IsInf(f.Value, 0) || math.IsInf(f.Limit, 0), "nothing infinite leaves")
			require.Equal(t, Incomplete, r.Verdict)
		})
	}
}

// A stage that passes where it was looked at does not pass where it was not.
func TestWhatWasNotLookedAtLeavesTheCheckIncomplete(t *testing.T) {
	c := testCase()
	c.Uncovered = []Gap{{"/conditions/load", "The requirement asks for 0 to 6 A; the conditions reach from 1 to 2 A."}}
	r := check(c, nil, heating(1))
	require.Len(t, r.Findings, 2)
	require.Equal(t, RuleConditions, r.Findings[0].Rule)
	require.Equal(t, NotEvaluated, r.Findings[0].Verdict)
	require.Equal(t, "/conditions/load", r.Findings[0].Pointer)
	require.Equal(t, Incomplete, r.Verdict)
}

// A finding tells how its worst value was looked for: the least thorough of what it
// read.
func TestFindingTellsHowTheWorstWasFound(t *testing.T) {
	c := testCase()
	x := c.Extremes[quantity.InductorRMS]
	x.Greatest.By = VerticesSeeded
	c.Extremes[quantity.InductorRMS] = x
	require.Equal(t, VerticesSeeded, only(t, check(c, nil, heating(1))).WorstBy)
}

// A pass must hold over the whole range of every number that nobody gave.
func TestAPassThatRestsOnAnAssumptionIsNone(t *testing.T) {
	const at = "/stage/inductor/dc_resistance_ohm"
	for name, k := range map[string]struct {
		value   float64
		under   Under
		want    Verdict
		missing []string
	}{
		"holds":       {8, Under{at: {7, 9.9}}, Pass, nil},
		"turns":       {8, Under{at: {7, 10.1}}, NotEvaluated, []string{at}},
		"turns-below": {8, Under{at: {10.1, 7}}, NotEvaluated, []string{at}},
		"no-value":    {8, Under{at: {math.NaN(), 7}}, NotEvaluated, []string{at}},
		"fails":       {11, Under{at: {7, 12}}, Fail, nil},
	} {
		t.Run(name, func(t *testing.T) {
			c := testCase()
			c.Extremes[quantity.InductorRMS] = Extreme{Greatest: Worst{Value: k.value, Under: k.under}}
			f := only(t, check(c, nil, heating(1)))
			require.Equal(t, k.want, f.Verdict, f.Detail)
			require.Equal(t, k.missing, f.Missing)
		})
	}
}

// The draft stage of a sizing has parts that nobody makes.
func TestAPlaceholderPartProvesNothing(t *testing.T) {
	c := testCase()
	c.Stage.Inductor.Assumed = true
	r := check(c, nil, heating(1))
	require.Len(t, r.Findings, 2)
	require.Equal(t, RulePlaceholder, r.Findings[0].Rule)
	require.Equal(t, "/stage/inductor", r.Findings[0].Pointer)
	require.Equal(t, Pass, r.Findings[1].Verdict, "what can be computed is")
	require.Equal(t, Incomplete, r.Verdict)
}
