package contract

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"net/http"
	"net/http/httptest"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api"
	"railproof/api/exchange"
	"railproof/service"
)

type object = map[string]any

// cornersOf returns a rail's example as a tree, with other members put in.
func cornersOf(t testing.TB, rail string, members object) object {
	t.Helper()
	var tree object
	require.NoError(t, json.Unmarshal(exampleRequest(t, rail+"/corners.json"), &tree))
	for name, v := range members {
		if v == nil {
			delete(tree, name)
			continue
		}
		tree[name] = v
	}
	return tree
}

// within returns what stands below a tree at the path.
func within(v any, path ...any) any {
	for _, step := range path {
		switch step := step.(type) {
		case string:
			v = v.(object)[step]
		case int:
			v = v.([]any)[step]
		}
	}
	return v
}

func proved(t testing.TB, at string, request object) object {
	t.Helper()
	r := send(t, "POST", at+"/v1/corners", encode(t, request))
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, "corners", r)
	return r.tree(t).(object)
}

// Every point that an analysis tells, posted on with its stage, gives the figure
// that was told: same bits.
func TestWorstPointsPostedOnGiveTheSameFigures(t *testing.T) {
	at := server(t)
	for _, rail := range []string{"buoy-5v0", "mast-12v0"} {
		a := proved(t, at, cornersOf(t, rail, object{
			"stages": true, "samples": 64, "methods": []string{"extreme-value", "monte-carlo"}, "model_bands": true,
			"biases": []object{{"pointer": "/stage/feedback/reference_v", "drift_ratio": -0.004}, {"pointer": "/stage/switching_frequency_hz", "drift_ratio": 0.01}},
		}))
		checked := 0
		check := func(key string, w any) {
			if w == nil {
				return
			}
			checked++
			r := send(t, "POST", at+"/v1/losses", encode(t, object{"stage": within(w, "stage"), "point": within(w, "point")}))
			require.Equal(t, 200, r.status, "%s", r.body)
			item := within(r.tree(t), "items", 0)
			require.Equal(t, within(w, "status"), within(item, "status"), key)
			if role, bank, life := strings.Cut(key, "_capacitor_life_s/"); life {
				part := of(within(item, "part_temperatures"), "part", role+"_capacitors/"+bank)
				require.Equal(t, within(w, "value"), part["life_s"], "%s %s", rail, key)
				return
			}
			require.Equal(t, within(w, "value"), figureOf(item, key), "%s %s", rail, key)
		}
		for _, q := range within(a, "quantities").([]any) {
			key := within(q, "quantity").(string)
			check(key, within(q, "least"))
			check(key, within(q, "greatest"))
		}
		for _, s := range within(a, "worst_samples").([]any) {
			check(within(s, "quantity").(string), within(s, "worst"))
		}
		require.Greater(t, checked, 16)
	}
}

// figureOf returns a quantity of a losses item, which may be one of several banks.
func figureOf(item any, key string) any {
	name, bank, indexed := strings.Cut(key, "/")
	v := within(item, "quantities", name)
	if indexed {
		return within(v, int(bank[0]-'0'))
	}
	return v
}

func TestAnalysisHasTheSameBytesForAnyNumberOfWorkers(t *testing.T) {
	for _, sampling := range []string{"independent", "sobol", "latin-hypercube"} {
		body := encode(t, cornersOf(t, "buoy-5v0", object{"samples": 1000, "attribution_samples": 64, "sampling": sampling}))
		var want string
		for _, workers := range []int{1, 2, 7} {
			h := api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version(), Workers: workers})})
			r := httptest.NewRequestWithContext(t.Context(), "POST", "/v1/corners", bytes.NewReader(body))
			r.Header.Set("Content-Type", "application/json")
			w := httptest.NewRecorder()
			h.ServeHTTP(w, r)
			require.Equal(t, 200, w.Code, "%s", w.Body)
			if want == "" {
				want = w.Body.String()
			}
			require.Equal(t, want, w.Body.String(), "%s, %d workers", sampling, workers)
		}
	}
}

// A worst sample asked for again alone is the same unit with the same figures.
func TestOneSampleAskedForAlone(t *testing.T) {
	at := server(t)
	request := cornersOf(t, "buoy-5v0", object{"samples": 500, "methods": []string{"monte-carlo"}, "worst_samples": 1})
	a := proved(t, at, request)
	require.EqualValues(t, 500, a["samples_run"])
	require.EqualValues(t, 1, a["seed"])
	for _, s := range within(a, "worst_samples").([]any) {
		k, key, side := within(s, "sample"), within(s, "quantity"), within(s, "side")
		request["first_sample"], request["samples"] = k, 1
		alone := proved(t, at, request)
		require.EqualValues(t, 1, alone["samples_run"])
		found := false
		for _, w := range within(alone, "worst_samples").([]any) {
			if within(w, "quantity") == key && within(w, "side") == side {
				found = true
				require.Equal(t, k, within(w, "sample"))
				require.Equal(t, within(s, "worst", "variables"), within(w, "worst", "variables"))
				require.Equal(t, within(s, "worst", "value"), within(w, "worst", "value"))
			}
		}
		require.True(t, found)
	}
}

// lineOf returns an answer's line for a quantity.
func lineOf(t testing.TB, a object, key string) object {
	t.Helper()
	for _, q := range a["quantities"].([]any) {
		if within(q, "quantity") == key {
			return q.(object)
		}
	}
	require.Fail(t, "no line for "+key)
	return nil
}

// With the input range around twice the output the input capacitor's current is
// worst inside it; efficiency is best inside the load range. No vertex shows either.
func TestInteriorExtremesAreFound(t *testing.T) {
	at := server(t)
	request := cornersOf(t, "buoy-5v0", object{
		"methods": []string{"extreme-value"}, "limits": []object{{"quantity": "input_capacitor_rms_a", "max": 4}}, "quantities": []string{"efficiency_ratio"},
	})
	request["conditions"].(object)["input_v"] = object{"min": 8, "typ": 12, "max": 20}
	a := proved(t, at, request)
	w := lineOf(t, a, "input_capacitor_rms_a")["greatest"].(object)
	require.Equal(t, true, w["beyond_vertices"])
	require.Greater(t, w["value"], w["best_vertex"])
	require.InDelta(t, 10.3, within(w, "point", "input_v"), 0.5, "near twice the output")
	best := lineOf(t, a, "efficiency_ratio")["greatest"].(object)
	require.Equal(t, true, best["beyond_vertices"])
	load := within(best, "point", "load", "current_a").(float64)
	require.True(t, load > 0.2 && load < 5.8, "%g A", load)
}

// The answer holds together: the worst point is no better than nominal, than any
// unit, and than the ends of the tornado; the shares are sorted.
func TestAnalysisHoldsTogether(t *testing.T) {
	a := proved(t, server(t), cornersOf(t, "buoy-5v0", object{"samples": 400, "attribution_samples": 64, "quantiles": []float64{0.05}}))
	require.Equal(t, "ok", a["status"])
	pointers := map[any]bool{}
	for _, v := range a["variables"].([]any) {
		pointers[within(v, "pointer")] = true
	}
	require.True(t, pointers["/stage/inductor/inductance_h"] && pointers["/conditions/input_v"] && pointers["/conditions/age_ratio"])
	for _, q := range a["quantities"].([]any) {
		key := within(q, "quantity")
		for side, sign := range map[string]float64{"least": -1, "greatest": 1} {
			w, sought := within(q, side).(object)
			if !sought {
				continue
			}
			worst := sign * w["value"].(float64)
			require.GreaterOrEqual(t, worst, sign*within(q, "nominal").(float64), key)
			for _, s := range within(q, "statistics").([]any) {
				require.GreaterOrEqual(t, worst, sign*within(s, side).(float64), key)
				require.EqualValues(t, 400, within(s, "samples"))
				last, probability := -1e300, []float64{0.00135, 0.01, 0.05, 0.5, 0.99, 0.99865}
				require.Len(t, within(s, "quantiles"), len(probability))
				for i, p := range probability {
					require.Equal(t, p, within(s, "quantiles", i, "probability_ratio"))
					v := within(s, "quantiles", i, "value").(float64)
					require.GreaterOrEqual(t, v, last)
					require.Positive(t, within(s, "quantiles", i, "error"))
					last = v
				}
			}
			for _, b := range within(q, "one_at_a_time").([]any) {
				require.GreaterOrEqual(t, worst, sign*within(b, "at_min").(float64), key)
				require.GreaterOrEqual(t, worst, sign*within(b, "at_max").(float64), key)
			}
			before := 1e300
			for _, c := range w["contributions"].([]any) {
				require.True(t, pointers[within(c, "pointer")], "%v", c)
				size := within(c, "change").(float64)
				require.LessOrEqual(t, size*size, before, key)
				before = size * size
			}
		}
		for _, v := range within(q, "variance").([]any) {
			before := 1e300
			for _, s := range within(v, "shares").([]any) {
				total := within(s, "total_ratio").(float64)
				require.LessOrEqual(t, total, before)
				require.LessOrEqual(t, within(s, "total_low_ratio"), total)
				before = total
			}
		}
	}
	y := a["yield"].(object)
	require.Equal(t, "clopper-pearson", y["interval"])
	require.EqualValues(t, 59, y["wilks_samples"], "95/95")
}

func TestLimitsThatFailSayByHowMuch(t *testing.T) {
	request := cornersOf(t, "buoy-5v0", object{"samples": 300, "limits": []object{{"quantity": "inductor_peak_a", "max": 6.5}, {"quantity": "output_ripple_pp_v", "max": 0.03}, {"quantity": "efficiency_ratio", "min": 0.95, "at": "nominal"}}})
	a := proved(t, server(t), request)
	require.Equal(t, "fail", a["verdict"])
	peak := lineOf(t, a, "inductor_peak_a")
	require.Equal(t, "fail", peak["verdict"])
	worst := within(peak, "greatest", "value").(float64)
	require.InDelta(t, 1-worst/6.5, peak["margin_ratio"], 1e-12)
	require.Positive(t, peak["failing_units"])
	y := a["yield"].(object)
	require.EqualValues(t, 300, y["passes"].(float64)+peak["failing_units"].(float64), "the peak alone breaks a limit")
	require.Equal(t, "pass", lineOf(t, a, "output_ripple_pp_v")["verdict"])
	require.Equal(t, "fail", lineOf(t, a, "efficiency_ratio")["verdict"])
}

// A limit at full load is held by the worst value with the load at its greatest: the
// one that sizing finds on its draft, and that the same limit as a rule finds.
func TestLimitsAtFullLoad(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "buoy-5v0/sizing.json", nil)
	sized := asked(t, at, "sizing", request)
	limit := of(sized["limits"], "quantity", "efficiency_ratio")
	require.Equal(t, true, limit["full_load"])
	worst := of(sized["checks"], "quantity", "efficiency_ratio")["worst"]

	posted := object{"stage": sized["stage"], "conditions": sized["conditions"], "samples": 50, "limits": []any{limit, object{"quantity": "efficiency_ratio", "min": 0.5}}}
	a := proved(t, at, posted)
	require.Equal(t, "pass", a["verdict"])
	require.Contains(t, string(encode(t, a["warnings"])), "full-load")
	anywhere, full := within(a, "quantities", 0), within(a, "quantities", 1)
	require.Equal(t, limit, within(full, "limit"))
	require.InEpsilon(t, worst, within(full, "least", "value"), 1e-9)
	require.Equal(t, within(sized, "conditions", "load", "current_a", "max"), within(full, "least", "point", "load", "current_a"))
	require.Less(t, within(anywhere, "least", "value"), within(full, "least", "value"), "light load is worse")

	limit["min"] = 0.95
	require.Equal(t, "fail", proved(t, at, posted)["verdict"])

	judged := asked(t, at, "ruleChecks", object{"stage": sized["stage"], "conditions": sized["conditions"], "requirement": request["requirement"], "limits": []any{limit}})
	finding := of(judged["findings"], "rule", "limits/efficiency_ratio.min")
	require.Equal(t, "fail", finding["verdict"])
	require.InEpsilon(t, worst, finding["value"], 1e-9)
}

// At the border of the conduction modes an analysis tells the mode that losses tell.
func TestWorstPointsAtTheBorder(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "mast-12v0/losses.json", nil)
	stage, point := typical(request["stage"]), within(request, "points", 1).(object)
	delete(point, "id")
	load := point["load"].(object)
	for range 6 { // losses shift the border a little
		load["current_a"] = within(asked(t, at, "losses", object{"stage": stage, "point": point}), "items", 0, "quantities", "boundary_load_a")
	}
	item := within(asked(t, at, "losses", object{"stage": stage, "point": point}), "items", 0).(object)
	require.Equal(t, "boundary", item["conduction_mode"])

	within(stage, "controller").(object)["quiescent_current_a"] = object{"typ": 3e-3, "tol": 0.1} // moves no current of the circuit
	held := func(v any) object { return object{"min": v, "max": v} }
	a := proved(t, at, object{
		"stage": stage, "samples": 2, "quantities": []string{"inductor_peak_a"},
		"conditions": object{
			"input_v": held(point["input_v"]), "load": object{"current_a": held(load["current_a"])}, "ambient_degc": held(point["ambient_degc"]),
			"source_ohm": point["source_ohm"], "control": point["control"],
		},
	})
	require.Equal(t, "boundary", within(a, "quantities", 0, "greatest", "conduction_mode"))
	require.Equal(t, "boundary", within(a, "worst_samples", 0, "worst", "conduction_mode"))
}

// typical replaces every spread in a tree by its typical value.
func typical(v any) any {
	switch v := v.(type) {
	case []any:
		for i := range v {
			v[i] = typical(v[i])
		}
	case object:
		if typ, spread := v["typ"]; spread {
			return typ
		}
		for name := range v {
			v[name] = typical(v[name])
		}
	}
	return v
}

// of returns the entry of a list that has the value under the name.
func of(list any, name string, value any) object {
	for _, entry := range list.([]any) {
		if entry.(object)[name] == value {
			return entry.(object)
		}
	}
	return nil
}

// A stage that runs away somewhere in its conditions fails, whatever its other
// figures, and the point is told.
func TestFailedEvaluationsAreNoPasses(t *testing.T) {
	request := cornersOf(t, "buoy-5v0", object{"samples": 200, "methods": []string{"extreme-value", "monte-carlo"}})
	request["stage"].(object)["high_side"].(object)["thermal"] = object{"junction_to_ambient_k_per_w": object{"typ": 55, "tol": 0.6}}
	a := proved(t, server(t), request)
	require.Equal(t, "fail", a["verdict"])
	y := a["yield"].(object)
	require.Less(t, y["passes"], y["samples"])
	kinds := map[any]bool{}
	for _, f := range a["failures"].([]any) {
		kinds[fmt.Sprint(within(f, "method"), " ", within(f, "status"))] = true
		require.NotNil(t, within(f, "point"))
		require.Positive(t, within(f, "count"))
	}
	require.True(t, kinds["extreme-value over-temperature"] || kinds["extreme-value runaway"], "%v", kinds)
	require.True(t, kinds["monte-carlo over-temperature"] || kinds["monte-carlo runaway"], "%v", kinds)
}

// Margins of the loop are evaluated in every unit when they are asked for; of a loop
// that is unstable somewhere no limit passes.
func TestLoopMarginsOverTheCorners(t *testing.T) {
	at := server(t)
	request := cornersOf(t, "buoy-5v0", object{
		"samples": 100, "methods": []string{"extreme-value", "monte-carlo"},
		"limits": []object{{"quantity": "phase_margin_deg", "min": 30}, {"quantity": "modulus_margin_ratio", "min": 0.3}},
	})
	a := proved(t, at, request)
	require.Equal(t, "pass", a["verdict"])
	margin := lineOf(t, a, "phase_margin_deg")
	require.Less(t, within(margin, "least", "value"), margin["nominal"])
	require.EqualValues(t, 100, within(margin, "statistics", 0, "samples"))

	request["stage"].(object)["modulator"].(object)["ramp_v"] = object{"typ": 0.12, "tol": 0.5}
	a = proved(t, at, request)
	require.Contains(t, []any{"fail", "incomplete"}, a["verdict"])
	require.Contains(t, []any{"fail", "incomplete"}, lineOf(t, a, "phase_margin_deg")["verdict"])
	require.Equal(t, "fail", lineOf(t, a, "modulus_margin_ratio")["verdict"], "its sign tells an unstable loop")
	require.Less(t, within(a, "yield", "passes"), within(a, "yield", "samples"))
}

func TestSamplingMethodsKeepTheirPromises(t *testing.T) {
	at := server(t)
	for sampling, run := range map[string]int{"sobol": 1024, "latin-hypercube": 1008} {
		a := proved(t, at, cornersOf(t, "buoy-5v0", object{"samples": 1000, "sampling": sampling, "methods": []string{"monte-carlo"}}))
		require.EqualValues(t, 1000, a["samples_asked"])
		require.EqualValues(t, run, a["samples_run"])
		y := a["yield"].(object)
		require.Equal(t, "replicates", y["interval"])
		require.NotContains(t, y, "wilks_samples", "needs independent samples")
		require.NotContains(t, within(a, "quantities", 0, "statistics", 0), "wilks_bound")
		require.Contains(t, within(a, "quantities", 0, "statistics", 0), "mean_error")
		require.Contains(t, string(encode(t, a["warnings"])), `"code":"samples"`)
	}
}

func TestWarningsOfAnAnalysis(t *testing.T) {
	at := server(t)
	request := cornersOf(t, "buoy-5v0", object{"methods": []string{"extreme-value", "root-sum-square"}})
	request["conditions"].(object)["control"] = object{"regulate_to_v": 5}
	request["conditions"].(object)["input_v"] = object{"min": 24, "typ": 24, "max": 24}
	a := proved(t, at, request)
	warnings := string(encode(t, a["warnings"]))
	require.Contains(t, warnings, `"code":"tolerance-hidden"`)
	require.Contains(t, warnings, `"code":"no-width"`)
	require.Contains(t, warnings, `"code":"not-linear"`)
	delete(request["conditions"].(object), "control")
	require.NotContains(t, string(encode(t, proved(t, at, request)["warnings"])), "tolerance-hidden", "feedback is the default")
}

// Drifts add linearly and stand apart from the tolerances.
func TestDriftsAreBiasTerms(t *testing.T) {
	at := server(t)
	request := cornersOf(t, "buoy-5v0", object{"methods": []string{"extreme-value", "root-sum-square"}, "limits": []object{{"quantity": "output_error_ratio", "min": -0.04, "max": 0.04}}})
	request["conditions"].(object)["age_ratio"] = object{"min": 0, "max": 0}
	linear := func(a object) object { return within(a, "quantities", 0, "root_sum_square", 0).(object) }
	before := linear(proved(t, at, request))
	request["biases"] = []object{{"pointer": "/stage/feedback/reference_v", "drift_ratio": -0.004}}
	after := linear(proved(t, at, request))
	require.Equal(t, "least", after["side"])
	require.Zero(t, before["bias_below"])
	require.InDelta(t, -0.004, after["bias_below"], 1e-4)
	require.InDelta(t, before["random_below"], after["random_below"], 1e-9)
	require.InDelta(t, before["least"].(float64)+after["bias_below"].(float64), after["least"], 1e-9)
}

// A wider spread never narrows an extreme: the narrow box's worst point lies in the
// wide one.
func TestWiderSpreadsNeverNarrowAnExtreme(t *testing.T) {
	at := server(t)
	request := cornersOf(t, "buoy-5v0", object{"methods": []string{"extreme-value"}, "quantities": []string{"output_ripple_pp_v", "efficiency_ratio", "inductor_peak_a"}, "limits": nil})
	values := func(tol float64) (list []float64) {
		within(request, "stage", "inductor").(object)["inductance_h"] = object{"typ": 6.8e-6, "tol": tol}
		for _, q := range proved(t, at, request)["quantities"].([]any) {
			list = append(list, -within(q, "least", "value").(float64), within(q, "greatest", "value").(float64))
		}
		return list
	}
	narrow := values(0.05)
	for _, tol := range []float64{0.1, 0.2, 0.3} {
		wide := values(tol)
		for i := range wide {
			require.GreaterOrEqual(t, wide[i], narrow[i]-1e-9*max(1, -narrow[i]), "side %d at %g", i, tol)
		}
		narrow = wide
	}
}

// everyQuantity are more than thirty quantities that buoy-5v0 has.
var everyQuantity = []string{
	"output_mean_v", "output_ripple_with_esl_pp_v", "inductor_mean_a", "inductor_ripple_pp_a", "inductor_valley_a", "inductor_rms_a", "high_side_mean_a", "high_side_rms_a",
	"rectifier_mean_a", "rectifier_rms_a", "output_capacitor_rms_a", "input_capacitor_rms_a", "input_capacitor_bank_rms_a", "circuit_input_mean_a", "duty_ratio", "dead_time_duty_ratio",
	"inductance_effective_h", "output_capacitance_effective_f", "input_capacitance_effective_f", "bridge_v", "on_time_s", "off_time_s", "boundary_load_a", "load_v",
	"input_mean_a", "input_power_w", "output_power_w", "loss_total_w", "high_side_loss_w", "low_side_loss_w", "inductor_loss_w", "core_loss_w",
}

func TestAnalysesThatAreRefused(t *testing.T) {
	at := server(t) + "/v1/corners"
	limits := func(l ...object) object { return object{"limits": l} }
	stage := func(path []string, v any) func(object) {
		return func(o object) {
			s := o["stage"].(object)
			for _, p := range path[:len(path)-1] {
				s = s[p].(object)
			}
			s[path[len(path)-1]] = v
		}
	}
	inductance := []string{"inductor", "inductance_h"}
	cases := []struct {
		name             string
		members          object
		change           func(object)
		pointer, keyword string
		says             string
	}{
		{"min-above-typ", nil, stage(inductance, object{"min": 7e-6, "typ": 6.8e-6, "max": 8e-6}), "/stage/inductor/inductance_h/min", "spread", "above the typical"},
		{"zero-width", nil, stage(inductance, object{"typ": 6.8e-6, "tol": 0}), "/stage/inductor/inductance_h", "spread", "no width"},
		{"unknown-quantity", limits(object{"quantity": "output_hum_v", "max": 1}), nil, "/limits/0/quantity", "quantity", "no such quantity"},
		{"unknown-further-quantity", object{"quantities": []string{"hum"}}, nil, "/quantities/0", "quantity", "no such quantity"},
		{"quantity-of-another-stage", limits(object{"quantity": "diode_junction_degc", "max": 100}), nil, "/limits/0/quantity", "quantity", "no rectifier diode"},
		{"quantity-of-another-operation", object{"quantities": []string{"load_step_deviation_v"}}, nil, "/quantities/0", "quantity", "transients"},
		{"bank-that-is-not-there", limits(object{"quantity": "output_capacitor_rms_a/3", "max": 1}), nil, "/limits/0/quantity", "quantity", "no such capacitor bank"},
		{"limit-upside-down", limits(object{"quantity": "output_ripple_pp_v", "min": 0.2, "max": 0.1}), nil, "/limits/0/min", "limit", "min is above max"},
		{"limit-beyond-physics", limits(object{"quantity": "efficiency_ratio", "min": 1.01}), nil, "/limits/0/min", "limit", "below 1"},
		{"limit-below-zero", limits(object{"quantity": "output_ripple_pp_v", "max": 0}), nil, "/limits/0/max", "limit", "above zero"},
		{"limit-below-ambient", limits(object{"quantity": "high_side_junction_degc", "max": 50}), nil, "/limits/0/max", "limit", "ambient"},
		{"full-load-and-nominal", limits(object{"quantity": "efficiency_ratio", "min": 0.8, "at": "nominal", "full_load": true}), nil, "/limits/0/full_load", "limit", "not nominal"},
		{"limits-that-contradict", limits(object{"quantity": "inductor_peak_a", "max": 5}, object{"quantity": "inductor_peak_a", "min": 6}), nil, "/limits/1", "limit", "/limits/0"},
		{"group-without-width", nil, stage([]string{"feedback", "upper_ohm"}, object{"typ": 56200, "tol": 0, "group": "reel"}), "/stage/feedback/upper_ohm/group", "group", "width"},
		{"group-of-two-distributions", nil, func(o object) {
			stage([]string{"feedback", "upper_ohm"}, object{"typ": 56200, "tol": 0.01, "group": "reel"})(o)
			stage([]string{"feedback", "lower_ohm"}, object{"typ": 10700, "tol": 0.01, "group": "reel", "distribution": "normal"})(o)
		}, "/stage/feedback/lower_ohm/distribution", "group", "/stage/feedback/upper_ohm"},
		{"conditions-upside-down", nil, func(o object) { o["conditions"].(object)["input_v"] = object{"min": 32, "max": 18} }, "/conditions/input_v", "physics", "upside down"},
		{"corner-outside", object{"condition_corners": []object{{"input_v": 40, "ambient_degc": 25}}}, nil, "/condition_corners/0/input_v", "range", "outside"},
		{"one-sample-of-a-set", object{"sampling": "sobol", "first_sample": 3}, nil, "/first_sample", "sampling", "independent"},
		{"drift-of-nothing", object{"biases": []object{{"pointer": "/stage/inductor/colour", "drift_ratio": 0.1}}}, nil, "/biases/0/pointer", "bias", "no number"},
		{"drift-twice", object{"biases": []object{{"pointer": "/stage/feedback/reference_v", "drift_ratio": 0.1}, {"pointer": "/stage/feedback/reference_v", "drift_ratio": -0.1}}}, nil, "/biases/1/pointer", "bias", "already"},
		{"odd-base", object{"attribution_samples": 1000}, nil, "/attribution_samples", "budget", "power of two"},
		{"too-many-worst-samples", object{"worst_samples": 100, "quantities": everyQuantity}, nil, "/worst_samples", "budget", "too many to tell"},
		{"too-many-evaluations", object{"samples": 10000000, "attribution_samples": 1048576}, nil, "/samples", "budget", "too many evaluations"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			request := cornersOf(t, "buoy-5v0", c.members)
			if c.change != nil {
				c.change(request)
			}
			f := refused(t, send(t, "POST", at, encode(t, request)), 422, exchange.PhysicsFault)
			require.Equal(t, c.pointer, f["pointer"])
			require.Equal(t, c.keyword, f["keyword"])
			require.Contains(t, f["detail"], c.says)
			if c.keyword == "budget" {
				require.NotEmpty(t, f["limit"])
			}
		})
	}
}

// A client that goes away stops the work within a tenth of a second.
func TestWorkStopsWhenTheClientLeaves(t *testing.T) {
	h := api.New(api.Options{Service: service.New(service.Options{ContractVersion: contract.Version()})})
	ended := make(chan time.Time, 1)
	s := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		h.ServeHTTP(w, r)
		ended <- time.Now()
	}))
	defer s.Close()
	body := encode(t, cornersOf(t, "buoy-5v0", object{"samples": 5000000, "methods": []string{"monte-carlo"}, "condition_corners": []object{{"input_v": 24, "load_current_a": 3, "ambient_degc": 25}}}))
	ctx, leave := context.WithCancel(t.Context())
	request, err := http.NewRequestWithContext(ctx, http.MethodPost, s.URL+"/v1/corners", bytes.NewReader(body))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	gone := make(chan error, 1)
	go func() {
		r, err := http.DefaultClient.Do(request)
		if err == nil {
			err = r.Body.Close()
		}
		gone <- err
	}()
	time.Sleep(300 * time.Millisecond)
	select {
	case <-ended:
		t.Fatal("the work ended before the client left")
	default:
	}
	left := time.Now()
	leave()
	require.ErrorIs(t, <-gone, context.Canceled)
	select {
	case at := <-ended:
		require.Less(t, at.Sub(left), 100*time.Millisecond)
	case <-time.After(5 * time.Second):
		t.Fatal("the work goes on")
	}
}

func TestAnalysisAsATable(t *testing.T) {
	r := send(t, "POST", server(t)+"/v1/corners", encode(t, cornersOf(t, "buoy-5v0", object{"samples": 100, "methods": []string{"extreme-value", "root-sum-square", "monte-carlo"}})), "Accept", "text/csv")
	require.Equal(t, 200, r.status, "%s", r.body)
	lines, err := csv.NewReader(bytes.NewReader(r.body)).ReadAll()
	require.NoError(t, err)
	require.Len(t, lines, 10, "a line per quantity and side")
	for _, column := range []string{"quantity", "limit", "verdict", "nominal", "worst", "input_v [V]", "root_sum_square", "quantile_0.99865", "contributor_1", "contributor_2"} {
		require.Contains(t, lines[0], column)
	}
	require.Equal(t, "output_ripple_pp_v", lines[1][0])
}

// The limits of a sizing go on to the corners as they are; those that a run in time
// holds are left open, and said to be.
func TestLimitsOfSizingArePostedOn(t *testing.T) {
	at := server(t)
	sized := asked(t, at, "sizing", exampleOf(t, "buoy-5v0/sizing.json"))
	limits := within(sized, "limits").([]any)
	request := object{"stage": within(sized, "stage"), "conditions": within(sized, "conditions"), "limits": limits, "methods": []string{"extreme-value"}}
	answer := asked(t, at, "corners", request)
	require.Equal(t, limits, within(answer, "limits"))
	var open []string
	for _, w := range within(answer, "warnings").([]any) {
		if within(w, "code") == "limit-not-looked-at" {
			open = append(open, within(w, "pointer").(string))
		}
	}
	var want []string
	for i, l := range limits {
		if strings.HasPrefix(within(l, "quantity").(string), "load_step_") {
			want = append(want, "/limits/"+strconv.Itoa(i))
		}
	}
	require.NotEmpty(t, want)
	require.Equal(t, want, open)
	require.NotEqual(t, "pass", within(answer, "verdict"))

	request["limits"] = slices.DeleteFunc(slices.Clone(limits), func(l any) bool { return strings.HasPrefix(within(l, "quantity").(string), "load_step_") })
	require.NotEqual(t, "incomplete", within(asked(t, at, "corners", request), "verdict"))
}
