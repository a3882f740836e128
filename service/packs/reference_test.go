package packs

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"

	"github.com/stretchr/testify/require"
)

type figure struct {
	Value  json.RawMessage `json:"value"`
	TolAbs float64         `json:"tol_abs"`
	TolRel float64         `json:"tol_rel"`
}

// list returns the figure's values, null as NaN and a single one as a list of one.
func (f figure) list(t *testing.T) []float64 {
	t.Helper()
	var many []*float64
	if json.Unmarshal(f.Value, &many) != nil {
		many = []*float64{new(float64)}
		require.NoError(t, json.Unmarshal(f.Value, many[0]))
	}
	out := make([]float64, len(many))
	for i, v := range many {
		out[i] = math.NaN()
		if v != nil {
			out[i] = *v
		}
	}
	return out
}

type referenceCase struct {
	ID       string            `json:"id"`
	Inputs   map[string]figure `json:"inputs"`
	Expected map[string]figure `json:"expected"`
}

func (r referenceCase) in(t *testing.T, name string) float64   { return r.Inputs[name].list(t)[0] }
func (r referenceCase) want(t *testing.T, name string) float64 { return r.Expected[name].list(t)[0] }

func (r referenceCase) near(t *testing.T, name string, got float64) {
	t.Helper()
	f := r.Expected[name]
	want := f.list(t)[0]
	require.LessOrEqual(t, math.Abs(got-want), f.TolAbs+f.TolRel*math.Abs(want)+1e-12*math.Abs(want), "%s: got %.9g, want %.9g", name, got, want)
}

func reference(t *testing.T, id string) referenceCase {
	t.Helper()
	raw, err := os.ReadFile("../../tests/reference/loop-corners-rules.json")
	require.NoError(t, err)
	var doc struct {
		Cases []referenceCase `json:"cases"`
	}
	require.NoError(t, json.Unmarshal(raw, &doc))
	for _, c := range doc.Cases {
		if c.ID == id {
			return c
		}
	}
	require.Fail(t, "no case "+id)
	return referenceCase{}
}

func TestReference(t *testing.T) {
	t.Run("rule-01", func(t *testing.T) {
		r := reference(t, "rule-01")
		c := fullCase(stage.Synchronous)
		k := &c.Stage.OutputCapacitors[0]
		k.Kind, k.Rating.Voltage = parts.CeramicClass2, r.in(t, "V_rated")
		setGreatest(c, quantity.OutputMean, r.in(t, "V_dc"))
		setGreatest(c, quantity.OutputRippleWithESLPP, 2*r.in(t, "V_ac_peak"))
		c.Requirement.AmbientDegC.Max = r.in(t, "T_ambient")
		report := builtinReport(c, "eee-inst-002-capacitors")
		f := verdictOf(t, report, "eee-inst-002-capacitors/ceramic-voltage-output")
		require.Equal(t, rules.Pass, f.Verdict)
		r.near(t, "stress_ratio", f.Value)
		r.near(t, "factor", f.Limit)
		r.near(t, "V_limit", f.Limit*k.Rating.Voltage)
		r.near(t, "margin", f.Margin*f.Limit*k.Rating.Voltage)
		r.near(t, "T_max", verdictOf(t, report, "eee-inst-002-capacitors/ceramic-ambient").Limit)
		require.Equal(t, "NASA/TP-2003-212242, derating tables of 2005", f.Edition)
	})
	t.Run("rule-02", func(t *testing.T) {
		r := reference(t, "rule-02")
		for i := range 2 {
			pack := fmt.Sprintf("id: house\ntitle: a\nedition: b\nprovenance: c\nextends: rac-part-derating\noverrides: [{parameter: environment, value: %d, reason: x}]\n", i+1)
			c := fullCase(stage.DiodeRectified)
			limit := func(rule string) float64 { return verdictOf(t, check(t, c, pack), "house/"+rule).Limit }
			want := func(name string) float64 { return r.Expected[name].list(t)[i] }
			c.Stage.OutputCapacitors[0].Kind = parts.AluminiumElectrolytic
			require.Equal(t, want("al_electrolytic_V"), limit("electrolytic-voltage-output"))
			require.Equal(t, want("al_electrolytic_T_below_max"), 105-limit("electrolytic-temperature-output"))
			c.Stage.InputCapacitors[0].Kind = parts.TantalumSolid
			require.Equal(t, want("solid_tantalum_V"), limit("electrolytic-voltage-input"))
			c.Stage.InputCapacitors[0].Kind = parts.CeramicClass1
			require.Equal(t, want("ceramic_V"), limit("ceramic-film-voltage-input"))
			require.Equal(t, want("ceramic_T_below_max"), 105-limit("ceramic-film-temperature-input"))
			require.Equal(t, want("power_rectifier_VR"), limit("rectifier-voltage"))
			require.Equal(t, want("power_rectifier_Tj"), limit("rectifier-junction"))
		}
	})
	t.Run("rule-03", func(t *testing.T) {
		r := reference(t, "rule-03")
		c := fullCase(stage.Synchronous)
		c.Stage.HighSide.Rating = parts.MOSFETRating{DrainSource: r.in(t, "V_rated"), DrainCurrent: r.in(t, "I_rated"), GateSource: r.in(t, "VGS_rated"), JunctionDegC: 150}
		report := builtinReport(c, "mil-dtl-917-fet")
		limit := func(rule string) float64 { return verdictOf(t, report, "mil-dtl-917-fet/"+rule).Limit }
		r.near(t, "I_nominal", limit("drain-current-nominal-high-side")*r.in(t, "I_rated"))
		r.near(t, "I_max", limit("drain-current-greatest-high-side")*r.in(t, "I_rated"))
		r.near(t, "VGS", limit("gate-source-voltage")*r.in(t, "VGS_rated"))
		// The voltage rows hold for drain to gate, which no stage rates: they are
		// checked as a caller's own pack and must not stand in the built-in one.
		for name, factor := range map[string]float64{"V_dc": 0.5, "V_nominal_working": 0.6, "V_repetitive_peak": 0.7, "V_non_repetitive": 0.8} {
			f := verdictOf(t, check(t, c, document("scope: [high_side]", "value: greatest.bridge_v", fmt.Sprintf("at_most: %g * part.rating.drain_source_v", factor), "unit: V")), "house/heat")
			r.near(t, name, f.Limit)
		}
		for _, f := range report.Findings {
			require.NotContains(t, f.Pointer, "drain_source_v")
		}
	})
	t.Run("rule-04", func(t *testing.T) {
		r := reference(t, "rule-04")
		temperatures, factors, limits := r.Inputs["T_case"].list(t), r.Expected["factor"].list(t), r.Expected["I_limit"].list(t)
		for i, degC := range temperatures {
			c := fullCase(stage.Synchronous)
			c.Requirement.AmbientDegC.Max = degC
			c.Stage.Inductor.Rating.Heating = r.in(t, "I_rated") // stands for the fuse, which no stage has
			text := document("at_most: linear(requirement.ambient.max_degc, 85, 0.65, 110, 0.50) * part.rating.heating_a", "value: 1") +
				"  - {id: limit, title: t, severity: error, scope: [stage], value: requirement.ambient.max_degc, at_most: 110, unit: Cel, message: m, basis: b}\n"
			report := check(t, c, text)
			allowed := verdictOf(t, report, "house/limit").Verdict == rules.Pass
			require.Equal(t, !math.IsNaN(factors[i]), allowed, "at %g degC", degC)
			if allowed {
				require.InDelta(t, limits[i], verdictOf(t, report, "house/heat").Limit, 1e-9)
				require.InDelta(t, factors[i], verdictOf(t, report, "house/heat").Limit/r.in(t, "I_rated"), 1e-9)
			}
		}
	})
	t.Run("rule-05", func(t *testing.T) {
		r := reference(t, "rule-05")
		for i, degC := range r.Inputs["Tj_max"].list(t) {
			c := fullCase(stage.Synchronous)
			c.Stage.HighSide.Rating = parts.MOSFETRating{DrainSource: r.in(t, "VDS_rated"), DrainCurrent: r.in(t, "ID_rated"), GateSource: r.in(t, "VGS_rated"), JunctionDegC: degC}
			limit := func(limit, unit string) float64 {
				value := map[string]string{"V": "greatest.bridge_v", "A": "greatest.high_side_rms_a", "Cel": "greatest.high_side_junction_degc"}[unit]
				return verdictOf(t, check(t, c, document("scope: [high_side]", "value: "+value, "at_most: "+limit, "unit: "+unit)), "house/heat").Limit
			}
			r.near(t, "VDS", limit("0.80 * part.rating.drain_source_v", "V"))
			r.near(t, "VGS", limit("0.75 * part.rating.gate_source_v", "V"))
			r.near(t, "ID", limit("0.75 * part.rating.drain_current_a", "A"))
			require.Equal(t, r.Expected["Tj"].list(t)[i], limit("min(110, part.rating.junction_degc - 40)", "Cel"))
		}
		for _, e := range Builtin().All() {
			require.NotContains(t, strings.ToLower(e.Pack.ID+e.Pack.Title), "ecss", "a remembered figure must not be shipped under the standard's name")
		}
	})
	t.Run("rule-06", func(t *testing.T) {
		r := reference(t, "rule-06")
		c := fullCase(stage.Synchronous)
		c.Requirement.Input.Max, c.Requirement.Output = r.in(t, "Vin"), r.in(t, "Vout")
		c.Stage.Controller.MinOnTime, c.Stage.Controller.MinOffTime = r.in(t, "t_on_min"), r.in(t, "t_off_min")
		limit := func(text string) float64 {
			return verdictOf(t, check(t, c, document("scope: [controller]", "value: stage.switching_frequency_hz", "at_most: "+text, "unit: Hz")), "house/heat").Limit
		}
		r.near(t, "f_max_on", limit("requirement.output.voltage_v / (requirement.input.max_v * part.min_on_time_s)"))
		r.near(t, "f_max_off", limit("(1 - requirement.output.voltage_v / requirement.input.max_v) / part.min_off_time_s"))
		// The built-in rules compare times: they must turn at the same frequency.
		at := func(f float64) rules.Verdict {
			e := c.Extremes[quantity.OnTime]
			e.Least.Value = c.Requirement.Output / c.Requirement.Input.Max / f
			c.Extremes[quantity.OnTime] = e
			return verdictOf(t, builtinReport(c, "general-practice"), "general-practice/least-on-time").Verdict
		}
		turns := r.want(t, "f_max_on") / 1.3
		require.Equal(t, rules.Pass, at(turns*0.9999))
		require.Equal(t, rules.Fail, at(turns*1.0001))
	})
}

// Every cell of the rectifier table of SD-18 as far as it was read.
func TestSD18Table(t *testing.T) {
	type cell struct{ vr, i, tj float64 }
	table := map[[2]int]cell{
		{1, 1}: {0.95, 1.0, 150}, {1, 2}: {0.80, 0.9, 100}, {1, 3}: {0.50, 0.6, 70},
		{2, 1}: {0.90, 1.0, 125}, {2, 2}: {0.75, 0.85, 85}, {2, 3}: {0.30, 0.50, 35},
		{3, 1}: {0.85, 0.9, 125}, {3, 2}: {0.30, 0.6, 70},
	}
	for environment := 1; environment <= 3; environment++ {
		for level := 1; level <= 3; level++ {
			pack := fmt.Sprintf("id: house\ntitle: a\nedition: b\nprovenance: c\nextends: navsea-sd-18-rectifiers\noverrides: [{parameter: environment, value: %d, reason: x}, {parameter: quality_level, value: %d, reason: x}]\n", environment, level)
			r := check(t, fullCase(stage.DiodeRectified), pack)
			want, allowed := table[[2]int{environment, level}]
			if !allowed {
				require.Equal(t, rules.Fail, verdictOf(t, r, "house/level-allowed").Verdict)
				require.Len(t, r.Findings, 1, "no figure exists for this level")
				continue
			}
			got := cell{verdictOf(t, r, "house/reverse-voltage").Limit, verdictOf(t, r, "house/forward-current").Limit, verdictOf(t, r, "house/junction-temperature").Limit}
			require.Equal(t, want, got, "environment %d, level %d", environment, level)
		}
	}
}
