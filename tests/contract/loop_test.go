package contract

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// loopOf returns a rail's example as a tree, with other members put in; nil takes one
// out.
func loopOf(t testing.TB, rail string, members object) object {
	t.Helper()
	return exampleWith(t, rail+"/loop-gain.json", members)
}

func exampleWith(t testing.TB, name string, members object) object {
	t.Helper()
	var tree object
	require.NoError(t, json.Unmarshal(exampleRequest(t, name), &tree))
	for name, v := range members {
		if v == nil {
			delete(tree, name)
			continue
		}
		tree[name] = v
	}
	return tree
}

func asked(t testing.TB, at, operation string, request object) object {
	t.Helper()
	paths := map[string]string{"sizing": "/v1/sizing", "losses": "/v1/losses", "steadyState": "/v1/steady-state", "corners": "/v1/corners", "loopGain": "/v1/loop-gain", "transients": "/v1/transients", "ruleChecks": "/v1/rule-checks"}
	r := send(t, "POST", at+paths[operation], encode(t, request))
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, operation, r)
	return r.tree(t).(object)
}

// refusedAt returns the fault of a refused request at a pointer.
func refusedAt(t testing.TB, at, path string, request object, pointer string) object {
	t.Helper()
	r := send(t, "POST", at+path, encode(t, request))
	require.Equal(t, 422, r.status, "%s", r.body)
	for _, f := range within(r.tree(t), "errors").([]any) {
		if within(f, "pointer") == pointer {
			return f.(object)
		}
	}
	require.Fail(t, "no fault at "+pointer, "%s", r.body)
	return nil
}

func floats(v any) []float64 {
	list := make([]float64, len(v.([]any)))
	for i, x := range v.([]any) {
		list[i] = x.(float64)
	}
	return list
}

// between interpolates a curve over the logarithm of the frequency.
func between(x, y []float64, at float64) float64 {
	for i := 1; i < len(x); i++ {
		if x[i] >= at {
			return y[i-1] + (y[i]-y[i-1])*math.Log(at/x[i-1])/math.Log(x[i]/x[i-1])
		}
	}
	return math.NaN()
}

var rails = []string{"buoy-5v0", "buoy-3v3", "mast-12v0"}

func TestLoopsOfTheRails(t *testing.T) {
	at := server(t)
	for _, rail := range rails {
		t.Run(rail, func(t *testing.T) {
			a := asked(t, at, "loopGain", loopOf(t, rail, nil))
			require.Equal(t, "ok", a["status"])
			require.Len(t, a["items"], 3)
			for _, item := range a["items"].([]any) {
				require.Equal(t, "stable", within(item, "stability"))
				require.Equal(t, "crosses", within(item, "crossing"))
				require.Less(t, within(item, "spectral_radius_ratio"), 1.0)
				require.Greater(t, within(item, "phase_margin_deg"), 45.0)
				require.Greater(t, within(item, "gain_margin_db"), 6.0)
				require.Greater(t, within(item, "modulus_margin_ratio"), 0.5)

				// the curves say the same as the margins
				c := within(item, "curves")
				f, fc := floats(within(c, "frequency_hz")), within(item, "crossover_hz").(float64)
				require.InDelta(t, 0, between(f, floats(within(c, "loop_gain_db")), fc), 0.1)
				require.InDelta(t, within(item, "phase_margin_deg"), 180+between(f, floats(within(c, "loop_phase_deg")), fc), 0.3)
				open, closed := floats(within(c, "output_impedance_ohm")), floats(within(c, "closed_loop_output_impedance_ohm"))
				require.Less(t, closed[0], open[0]/50, "the loop lowers the output impedance")
				peak := within(item, "output_impedance_peak_ohm").(float64)
				for _, z := range closed {
					require.LessOrEqual(t, z, peak*(1+1e-5))
				}
				require.Equal(t, "stable", within(item, "source", "stability"))

				// the averaged stage agrees with the exact one at low frequency
				first := within(item, "model_deviation", 0)
				require.Less(t, within(first, "stage_ratio"), 0.01, "at a thousandth of the switching frequency")
			}
		})
	}
}

// Two capacitors ten times too small make the loop unstable. The answer names them,
// and with the right ones the loop is good.
func TestABadCompensatorIsExplained(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "buoy-5v0/loop-gain-unstable.json", nil)
	a := asked(t, at, "loopGain", request)
	require.Equal(t, "unstable", a["status"])
	item := within(a, "items", 0)
	require.Equal(t, "unstable", within(item, "stability"))
	require.Greater(t, within(item, "spectral_radius_ratio"), 1.0)
	require.Contains(t, within(item, "detail"), "oscillates at")
	for _, margin := range []string{"phase_margin_deg", "gain_margin_db", "modulus_margin_ratio"} {
		require.Negative(t, within(item, margin), "no margin of an unstable loop can be taken for one")
	}
	require.NotContains(t, item, "bandwidth_hz")
	require.NotContains(t, item, "output_impedance_peak_ohm", "an unstable loop has no closed-loop impedance")
	require.NotContains(t, within(item, "curves"), "closed_loop_output_impedance_ohm")
	said := map[any]any{}
	for _, r := range within(item, "remarks").([]any) {
		said[within(r, "pointer")] = within(r, "topic")
	}
	compensator := within(request, "stage", "compensator").(object)
	for _, name := range []string{"feedback_f", "lead_f"} {
		require.Equal(t, "zeros-too-high", said["/stage/compensator/"+name])
		compensator[name] = 10 * compensator[name].(float64)
	}
	require.Equal(t, "ok", asked(t, at, "loopGain", request)["status"])
}

// A designed compensator meets its target but for the rounding, and the stage that
// is answered, posted on, has the very loop that was told.
func TestSynthesisPostedOn(t *testing.T) {
	at := server(t)
	for name, c := range map[string]struct {
		rail      string
		synthesis object
	}{
		"op-amp-3":                    {"buoy-5v0", object{"type": "op-amp-3", "crossover_hz": 45e3, "phase_margin_deg": 60}},
		"op-amp-3/diode":              {"mast-12v0", object{"type": "op-amp-3", "crossover_hz": 15e3, "phase_margin_deg": 55, "series": "E96"}},
		"transconductance-2":          {"buoy-3v3", object{"type": "transconductance-2", "crossover_hz": 30e3, "phase_margin_deg": 58}},
		"another-amplifier":           {"buoy-3v3", object{"type": "op-amp-2", "crossover_hz": 30e3, "phase_margin_deg": 58, "gain_bandwidth_hz": 2e7}},
		"transconductance-3":          {"buoy-3v3", object{"type": "transconductance-3", "crossover_hz": 40e3, "phase_margin_deg": 65, "transconductance_s": 6e-4}},
		"without-compensator/op-amp3": {"buoy-5v0", object{"type": "op-amp-3", "crossover_hz": 45e3, "phase_margin_deg": 60, "gain_bandwidth_hz": 1e8}},
	} {
		t.Run(name, func(t *testing.T) {
			request := loopOf(t, c.rail, object{"synthesis": c.synthesis})
			if strings.HasPrefix(name, "without") {
				delete(request["stage"].(object), "compensator")
			}
			a := asked(t, at, "loopGain", request)
			require.Equal(t, "ok", a["status"])
			s := a["synthesis"]
			require.InEpsilon(t, c.synthesis["crossover_hz"], within(s, "ideal_crossover_hz"), 1e-4)
			require.InDelta(t, c.synthesis["phase_margin_deg"], within(s, "ideal_phase_margin_deg"), 1e-3)
			require.InEpsilon(t, c.synthesis["crossover_hz"], within(s, "crossover_hz"), 0.06)
			require.InDelta(t, c.synthesis["phase_margin_deg"], within(s, "phase_margin_deg"), 4)
			require.Equal(t, within(s, "preferred"), within(a, "stage", "compensator"))
			require.Equal(t, within(s, "phase_margin_deg"), within(a, "items", 0, "phase_margin_deg"))

			again := asked(t, at, "loopGain", object{"stage": a["stage"], "points": request["points"], "frequencies": request["frequencies"]})
			require.Equal(t, a["items"], again["items"])
		})
	}
}

func TestWhatCannotBeReachedIsToldWithWhatCan(t *testing.T) {
	at := server(t)
	request := loopOf(t, "buoy-5v0", object{"curves": false, "synthesis": object{"type": "op-amp-2", "crossover_hz": 60e3, "phase_margin_deg": 50}})
	f := refusedAt(t, at, "/v1/loop-gain", request, "/synthesis/phase_margin_deg")
	require.Equal(t, "unreachable", f["keyword"])
	require.NotContains(t, f["limit"], "phase margin up to", "none above zero can be had there")
	require.Contains(t, f["limit"], "a crossover up to")

	request["synthesis"] = object{"type": "op-amp-3", "crossover_hz": 120e3, "phase_margin_deg": 85, "series": "E192"}
	r := send(t, "POST", at+"/v1/loop-gain", encode(t, request))
	require.Equal(t, 422, r.status, "%s", r.body)
	limit := within(r.tree(t), "errors", 0, "limit").(string)
	_, margin, found := strings.Cut(limit, "a phase margin up to ")
	require.True(t, found, limit)
	margin, _, _ = strings.Cut(margin, " deg")
	request["synthesis"].(object)["phase_margin_deg"] = parsed(t, margin)
	require.InDelta(t, parsed(t, margin), within(asked(t, at, "loopGain", request), "synthesis", "ideal_phase_margin_deg"), 1e-3)

	request["synthesis"] = object{"type": "transconductance-2", "crossover_hz": 200e3, "phase_margin_deg": 70}
	request["stage"] = loopOf(t, "buoy-3v3", nil)["stage"]
	f = refusedAt(t, at, "/v1/loop-gain", request, "/synthesis/phase_margin_deg")
	_, words, found := strings.Cut(f["limit"].(string), "a crossover up to ")
	require.True(t, found, f["limit"])
	bound, _, _ := strings.Cut(words, " Hz")
	request["synthesis"] = object{"type": "transconductance-2", "crossover_hz": json.RawMessage(bound), "phase_margin_deg": 70}
	r = send(t, "POST", at+"/v1/loop-gain", encode(t, request))
	require.Equal(t, 200, r.status, "%s", r.body)
}

func parsed(t testing.TB, text string) (v float64) {
	t.Helper()
	require.NoError(t, json.Unmarshal([]byte(text), &v))
	return v
}

func TestLoopsWithoutMeaningAreRefused(t *testing.T) {
	at := server(t)
	reasons := map[string]struct{ why, bound string }{
		"zero-ramp":               {"a comparator without a rising ramp has no finite gain", "at least 0.001"},
		"zero-ramp-in-the-middle": {"a comparator without a rising ramp has no finite gain", "at least 0.001"},
		"zero-integrator":         {"has no integrator", "at least 1e-13"},
		"no-integrator":           {"has no integrator", "a number"},
		"negative-gain":           {"would make the feedback positive", "at least 1e-07"},
		"crossover-too-high":      {"cannot cross at or above half the rate", "250000 Hz"},
	}
	for name, c := range map[string]struct {
		rail    string
		change  func(r object)
		pointer string
	}{
		"zero-ramp": {"buoy-5v0", func(r object) { within(r, "stage", "modulator").(object)["ramp_v"] = 0 }, "/stage/modulator/ramp_v"},
		"zero-ramp-in-the-middle": {"buoy-5v0", func(r object) {
			within(r, "stage", "modulator").(object)["ramp_v"] = object{"typ": 0, "tol": 0.1}
		}, "/stage/modulator/ramp_v/typ"},
		"zero-integrator":    {"buoy-5v0", func(r object) { within(r, "stage", "compensator").(object)["feedback_f"] = 0 }, "/stage/compensator/feedback_f"},
		"negative-gain":      {"buoy-3v3", func(r object) { within(r, "stage", "compensator").(object)["transconductance_s"] = -4e-4 }, "/stage/compensator/transconductance_s"},
		"no-integrator":      {"buoy-5v0", func(r object) { delete(within(r, "stage", "compensator").(object), "feedback_f") }, "/stage/compensator/feedback_f"},
		"no-modulator":       {"buoy-5v0", func(r object) { delete(r["stage"].(object), "modulator") }, "/stage/modulator"},
		"no-compensator":     {"buoy-5v0", func(r object) { delete(r["stage"].(object), "compensator") }, "/stage/compensator"},
		"no-feedback":        {"buoy-5v0", func(r object) { delete(r["stage"].(object), "feedback") }, "/stage/feedback"},
		"slow-comparator":    {"buoy-5v0", func(r object) { within(r, "stage", "modulator").(object)["delay_s"] = 1e-6 }, "/stage/modulator/delay_s"},
		"feed-forward-where": {"buoy-5v0", func(r object) { delete(within(r, "stage", "modulator").(object), "feed_forward_at_v") }, "/stage/modulator/feed_forward_at_v"},
		"fixed-duty":         {"buoy-5v0", func(r object) { within(r, "points", 1).(object)["control"] = object{"duty_ratio": 0.2} }, "/points/1/control/duty_ratio"},
		"crossover-too-high": {"buoy-5v0", func(r object) {
			r["synthesis"] = object{"type": "op-amp-3", "crossover_hz": 260e3, "phase_margin_deg": 50}
		}, "/synthesis/crossover_hz"},
		"no-transconductance": {"buoy-5v0", func(r object) {
			r["synthesis"] = object{"type": "transconductance-2", "crossover_hz": 20e3, "phase_margin_deg": 50}
		}, "/synthesis/transconductance_s"},
		"curves-too-high":    {"buoy-5v0", func(r object) { r["frequencies"] = object{"to_hz": 300e3} }, "/frequencies/to_hz"},
		"curves-upside-down": {"buoy-5v0", func(r object) { r["frequencies"] = object{"from_hz": 2e5, "to_hz": 1e5} }, "/frequencies/from_hz"},
		"damping-of-nothing": {"buoy-5v0", func(r object) {
			r["input_filter"] = object{"inductance_h": 1e-6, "capacitance_f": 1e-5, "esr_ohm": 1e-3, "damping_ohm": 1}
		}, "/input_filter/damping_ohm"},
		"filter-without-esr": {"buoy-5v0", func(r object) {
			r["input_filter"] = object{"inductance_h": 1e-6, "capacitance_f": 1e-5, "esr_ohm": 0}
		}, "/input_filter/esr_ohm"},
		"nowhere-to-design-for": {"buoy-5v0", func(r object) {
			within(r, "points", 0).(object)["input_v"] = 5.02
			r["synthesis"] = object{"type": "op-amp-3", "crossover_hz": 40e3, "phase_margin_deg": 50}
		}, "/points/0"},
	} {
		t.Run(name, func(t *testing.T) {
			request := loopOf(t, c.rail, object{"curves": false})
			c.change(request)
			f := refusedAt(t, at, "/v1/loop-gain", request, c.pointer)
			require.NotEmpty(t, f["detail"])
			if said, is := reasons[name]; is {
				require.Contains(t, f["detail"], said.why)
				require.Contains(t, f["limit"], said.bound)
			}
		})
	}
}

// Where there is no crossover, no phase crossing or no loop at all, the answer says
// so and gives no number.
func TestStatesThatHaveNoMargins(t *testing.T) {
	at := server(t)
	t.Run("no-crossover", func(t *testing.T) {
		request := loopOf(t, "buoy-3v3", nil)
		within(request, "stage").(object)["compensator"] = object{"type": "transconductance-2", "feedback_ohm": 100, "feedback_f": 1e-9, "shunt_f": 1e-11, "transconductance_s": 1e-6, "output_ohm": 2000}
		item := within(asked(t, at, "loopGain", request), "items", 0)
		// The loop gain at rest is the inverse of the output's error: with neither a
		// crossover nor an integrator nothing holds the output.
		require.Equal(t, "no-operating-point", within(item, "status"))
		for _, key := range []string{"crossing", "stability", "crossover_hz", "phase_margin_deg", "gain_margin_db"} {
			require.NotContains(t, item, key)
		}
		require.NotEmpty(t, within(item, "detail"))
	})
	t.Run("current-alternates", func(t *testing.T) {
		request := loopOf(t, "buoy-3v3", object{"points": nil, "point": object{"input_v": 5, "load": object{"current_a": 2}, "ambient_degc": 25}})
		within(request, "stage", "modulator").(object)["slope_v_per_s"] = 0
		a := asked(t, at, "loopGain", request)
		require.Equal(t, "unstable", a["status"])
		item := within(a, "items", 0)
		require.Equal(t, false, within(item, "current_loop", "stable"))
		require.Less(t, within(item, "current_loop", "eigenvalue_ratio"), -1.0)
		require.Positive(t, within(item, "current_loop", "slope_needed_v_per_s"))
		remark := within(item, "remarks", 0)
		require.Equal(t, "current-alternates", within(remark, "topic"))
		require.Equal(t, "/stage/modulator/slope_v_per_s", within(remark, "pointer"))
		// with what the answer says is needed, and a little more, it settles
		within(request, "stage", "modulator").(object)["slope_v_per_s"] = 1.3*within(item, "current_loop", "slope_needed_v_per_s").(float64) + 1000
		require.Equal(t, true, within(asked(t, at, "loopGain", request), "items", 0, "current_loop", "stable"))
	})
	t.Run("no-comparison", func(t *testing.T) {
		request := loopOf(t, "buoy-3v3", nil)
		within(request, "stage").(object)["compensator"] = object{"type": "op-amp-1", "feedback_f": 1e-13}
		a := asked(t, at, "loopGain", request)
		require.Equal(t, "no-comparison", a["status"])
		item := within(a, "items", 0)
		require.NotContains(t, item, "stability")
		require.NotContains(t, item, "curves")
		require.Contains(t, within(item, "detail"), "ramp")
	})
	t.Run("no-load", func(t *testing.T) {
		request := loopOf(t, "buoy-5v0", nil)
		delete(within(request, "points", 1).(object), "load")
		item := within(asked(t, at, "loopGain", request), "items", 1)
		require.Equal(t, "stable", within(item, "source", "stability"))
		require.NotContains(t, within(item, "curves"), "input_impedance_ohm", "it draws no current")
	})
	t.Run("drop-out", func(t *testing.T) {
		request := loopOf(t, "buoy-5v0", nil)
		within(request, "points", 1).(object)["input_v"] = 5.05
		a := asked(t, at, "loopGain", request)
		require.Equal(t, "drop-out", a["status"])
		require.Equal(t, "ok", within(a, "items", 0, "status"))
		require.NotContains(t, within(a, "items", 1), "stability")
		require.Contains(t, within(a, "items", 1), "nearest_operable")
	})
}

// An undamped filter makes the regulated stage oscillate; damped with the resistor of
// least peak it does not. The impedances and the exact loop agree.
func TestInputFilterAndLoop(t *testing.T) {
	at := server(t)
	const lf, cf = 22e-6, 10e-6
	undamped := object{"inductance_h": lf, "capacitance_f": cf, "esr_ohm": 2e-3}
	damped := object{"inductance_h": lf, "capacitance_f": cf, "esr_ohm": 2e-3, "damping_capacitance_f": 200e-6, "damping_ohm": 0.4}
	for name, c := range map[string]struct {
		filter object
		want   string
	}{"undamped": {undamped, "unstable"}, "damped": {damped, "stable"}} {
		t.Run(name, func(t *testing.T) {
			request := loopOf(t, "buoy-5v0", object{"input_filter": c.filter, "points": nil, "point": object{"input_v": 24, "source_ohm": 1e-3, "load": object{"current_a": 6}, "ambient_degc": 25}})
			a := asked(t, at, "loopGain", request)
			item := within(a, "items", 0)
			source := within(item, "source")
			require.Equal(t, "stable", within(item, "stability"), "from a stiff source")
			require.Equal(t, c.want, within(source, "stability"))
			require.Equal(t, map[string]string{"stable": "ok", "unstable": "unstable"}[c.want], a["status"])
			require.Equal(t, c.want == "stable", within(source, "input_separation_db").(float64) > 6, "%v", source)
			z := floats(within(item, "curves", "filter_output_impedance_ohm"))
			require.Len(t, z, 200)
			require.Len(t, within(item, "curves", "input_impedance_ohm"), 200)
		})
	}
}

func TestLoopAsTable(t *testing.T) {
	at := server(t)
	for _, curves := range []bool{true, false} {
		r := send(t, "POST", at+"/v1/loop-gain", encode(t, loopOf(t, "buoy-5v0", object{"curves": curves})), "Accept", "text/csv")
		require.Equal(t, 200, r.status, "%s", r.body)
		rows, err := csv.NewReader(strings.NewReader(string(r.body))).ReadAll()
		require.NoError(t, err)
		if curves {
			require.Len(t, rows, 1+3*200)
			require.Contains(t, rows[0], "loop_phase_deg [deg]")
			continue
		}
		require.Len(t, rows, 1+3)
		require.Contains(t, rows[0], "phase_margin_deg [deg]")
		require.Equal(t, "stable", rows[1][5])
	}
}

// Phases of their own stay apart wherever margins are told.
func TestUnequalPhasesAreAnalysedAsTheyAre(t *testing.T) {
	at := server(t)
	request := loopOf(t, "buoy-5v0", object{"curves": false})
	st := request["stage"].(object)
	st["modulator"].(object)["current_limit_a"] = 100
	inductor := st["inductor"].(object)["inductance_h"].(object)["typ"].(float64)
	analysed := func(first, second float64) object {
		st["phase_count"], st["phases"] = 2, []any{object{"inductance_h": first * inductor}, object{"inductance_h": second * inductor}}
		a := asked(t, at, "loopGain", request)
		require.Equal(t, "ok", a["status"])
		for _, w := range a["warnings"].([]any) {
			require.NotContains(t, within(w, "code"), "averaged")
		}
		item := within(a, "items", 0).(object)
		require.Equal(t, "stable", item["stability"])
		require.LessOrEqual(t, within(item, "model_deviation", 0, "stage_ratio"), 0.01, "at a thousandth of the switching frequency")
		return item
	}
	equal, unequal := analysed(1, 1), analysed(0.8, 1.2)
	mean := 2 / (1/0.8 + 1/1.2) // of the inductances in parallel
	like := analysed(mean, mean)
	require.NotEqual(t, equal["crossover_hz"], unequal["crossover_hz"])
	require.InEpsilon(t, like["crossover_hz"], unequal["crossover_hz"], 0.02, "far below the switching frequency the phases are in parallel")
	require.NotEqual(t, like["phase_margin_deg"], unequal["phase_margin_deg"])

	corners := exampleWith(t, "buoy-5v0/corners.json", object{"stage": st, "methods": []any{"extreme-value"}, "limits": []any{object{"quantity": "phase_margin_deg", "min": 30}}})
	a := asked(t, at, "corners", corners)
	require.Equal(t, "ok", a["status"])
	require.Equal(t, "phase_margin_deg", within(a, "quantities", 0, "quantity"))
}

// Where the current limit ends the pulses, the comparator does not, and a margin would
// be that of a loop that is not there.
func TestALoopAtItsCurrentLimitHasNoMargins(t *testing.T) {
	at := server(t)
	request := loopOf(t, "buoy-5v0", object{"curves": false})
	st := request["stage"].(object)
	st["modulator"].(object)["current_limit_a"] = 5
	a := asked(t, at, "loopGain", request)
	require.Equal(t, "no-operating-point", a["status"])
	item := within(a, "items", 0)
	require.Contains(t, within(item, "detail"), "current limit of 5 A")
	require.NotContains(t, item, "phase_margin_deg")

	// In voltage mode small differences between the comparators decide how unequal phases
	// share the current.
	st["modulator"].(object)["current_limit_a"] = 10
	inductor := st["inductor"].(object)["inductance_h"].(object)["typ"].(float64)
	st["phase_count"], st["phases"] = 2, []any{object{"inductance_h": 0.8 * inductor}, object{"inductance_h": 1.2 * inductor}}
	a = asked(t, at, "loopGain", request)
	require.Equal(t, "no-operating-point", a["status"])
	require.Contains(t, within(a, "items", 0, "detail"), "nothing makes unequal phases share")
}

// An amplifier without direct gain brings about another output: margins at the point
// asked for would be those of a state that the loop never takes.
func TestALoopWithoutDirectGainHasNoMargins(t *testing.T) {
	at := server(t)
	request := loopOf(t, "buoy-5v0", object{"curves": false})
	st := request["stage"].(object)
	st["compensator"].(object)["open_loop_gain_ratio"] = 10
	st["modulator"].(object)["ramp_v"] = 4
	a := asked(t, at, "loopGain", request)
	require.Equal(t, "no-operating-point", a["status"])
	item := within(a, "items", 0)
	require.Contains(t, within(item, "detail"), "open_loop_gain_ratio")
	for _, margin := range []string{"phase_margin_deg", "gain_margin_db", "modulus_margin_ratio", "crossover_hz"} {
		require.NotContains(t, item, margin)
	}
}
