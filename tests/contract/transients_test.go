package contract

import (
	"context"
	"encoding/csv"
	"math"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
	"railproof/service"
)

func runOf(t testing.TB, rail string, members object) object {
	t.Helper()
	return exampleWith(t, rail+"/transients.json", members)
}

// idealise makes the error amplifier's direct gain infinite, so that the loop brings
// about just what the divider sets.
func idealise(request object) object {
	c := within(request, "stage", "compensator").(object)
	delete(c, "open_loop_gain_ratio")
	delete(c, "output_ohm")
	return request
}

// steadyMean returns the mean output of the exact steady state at a point.
func steadyMean(t testing.TB, at string, stage, point any) float64 {
	t.Helper()
	r := send(t, "POST", at+"/v1/steady-state", encode(t, object{"stage": stage, "point": point}))
	require.Equal(t, 200, r.status, "%s", r.body)
	return within(r.tree(t), "quantities", "output_mean_v").(float64)
}

func TestLoadStepsOfTheRails(t *testing.T) {
	at := server(t)
	for _, rail := range rails {
		t.Run(rail, func(t *testing.T) {
			request := idealise(runOf(t, rail, object{"duration_s": 4e-3}))
			a := asked(t, at, "transients", request)
			require.Equal(t, "ok", a["status"])
			require.Equal(t, true, a["recovered"])
			require.Positive(t, a["deviation_down_v"])
			require.Equal(t, false, a["saturated"])
			require.Equal(t, true, a["settled"])

			// before and after are the steady states at either load
			point := request["point"].(object)
			require.InEpsilon(t, steadyMean(t, at, request["stage"], point), a["before_v"], 1e-6)
			point["load"] = object{"current_a": within(request, "event", "load_step", "to_a")}
			require.InEpsilon(t, steadyMean(t, at, request["stage"], point), a["after_v"], 1e-6)
			require.InEpsilon(t, a["expected_after_v"], a["after_v"], 1e-6)

			// the waveforms hold the extremes that are told, and time is counted from the event
			w := a["waveforms"].(object)
			time, output := floats(w["time_s"]), floats(w["output_v"])
			least := math.Inf(1)
			for i, v := range output {
				require.True(t, i == 0 || time[i] >= time[i-1])
				if time[i] > 0 {
					least = math.Min(least, v)
				}
			}
			require.InEpsilon(t, a["output_least_v"], least, 1e-5)
			require.InDelta(t, a["before_v"].(float64)-a["output_least_v"].(float64), a["deviation_down_v"], 1e-12)
			require.Negative(t, time[0])
			require.InDelta(t, 4e-3, time[len(time)-1], 1e-5)
			require.LessOrEqual(t, len(time), 1000)
			require.Greater(t, floats(w["load_a"])[len(time)-1], floats(w["load_a"])[0])
		})
	}
}

// The amplifier's finite gain leaves the output off what the divider sets by what
// the loop says.
func TestWantOfDirectGainIsInBothAnswers(t *testing.T) {
	at := server(t)
	a := asked(t, at, "transients", runOf(t, "buoy-5v0", object{"duration_s": 4e-3}))
	require.InEpsilon(t, a["expected_after_v"], a["after_v"], 1e-6)
	request := loopOf(t, "buoy-5v0", object{"points": nil, "point": runOf(t, "buoy-5v0", nil)["point"]})
	set := 0.8 * (1 + 56.2/10.7)
	off := within(asked(t, at, "loopGain", request), "items", 0, "direct_error_ratio").(float64)
	require.InDelta(t, off, 1-a["before_v"].(float64)/set, 1e-7)
}

func TestKindsOfEvents(t *testing.T) {
	at := server(t)
	run := func(t *testing.T, rail string, event object, members object) object {
		t.Helper()
		request := idealise(runOf(t, rail, members))
		request["event"] = event
		a := asked(t, at, "transients", request)
		require.Equal(t, "ok", a["status"], "%v", a["detail"])
		return a
	}
	t.Run("load-there-and-back", func(t *testing.T) {
		a := run(t, "buoy-5v0", object{"load_step": object{"to_a": 6, "back_after_s": 2e-4}}, object{"duration_s": 3e-3})
		require.InEpsilon(t, a["before_v"], a["after_v"], 1e-6)
		require.Greater(t, a["deviation_up_v"], 0.05)
		require.Greater(t, a["deviation_down_v"], 0.05)
	})
	t.Run("release", func(t *testing.T) {
		a := run(t, "buoy-5v0", object{"load_step": object{"to_a": 0.5}}, object{"duration_s": 1e-3, "point": object{"input_v": 24, "load": object{"current_a": 6}, "ambient_degc": 25}})
		require.Greater(t, a["deviation_up_v"], a["deviation_down_v"])
	})
	t.Run("input", func(t *testing.T) {
		a := run(t, "buoy-3v3", object{"input_step": object{"to_v": 32, "slew_v_per_s": 1e6}}, object{"duration_s": 4e-3})
		require.InEpsilon(t, a["expected_after_v"], a["after_v"], 1e-6)
		v := floats(within(a, "waveforms", "input_v"))
		require.InDelta(t, 8, v[len(v)-1]-v[0], 0.05)
		duty := floats(within(a, "waveforms", "duty_ratio"))
		require.Less(t, duty[len(duty)-1], duty[0])
	})
	t.Run("reference", func(t *testing.T) {
		a := run(t, "buoy-5v0", object{"reference_step": object{"to_ratio": 1.02}}, object{"duration_s": 4e-3})
		require.InEpsilon(t, 1.02*a["before_v"].(float64), a["after_v"], 1e-6)
		require.InEpsilon(t, a["expected_after_v"], a["after_v"], 1e-6)
		require.Positive(t, a["overshoot_ratio"])
		require.Less(t, a["overshoot_ratio"], 1.0)
	})
	t.Run("start", func(t *testing.T) {
		a := run(t, "buoy-5v0", object{"start_up": object{"soft_start_s": 2e-3}}, object{"duration_s": 5e-3})
		require.InEpsilon(t, a["expected_after_v"], a["after_v"], 1e-6)
		require.NotContains(t, a, "before_v")
		require.Equal(t, true, a["recovered"])
		require.Greater(t, a["recovery_s"], 1.8e-3, "not before the reference is there")
		require.Less(t, a["overshoot_ratio"], 0.05)
		require.InDelta(t, 0, floats(within(a, "waveforms", "output_v"))[0], 1e-9)
		found := false
		for _, x := range a["assumptions"].([]any) {
			found = found || within(x, "pointer") == "/event/start_up/load_from_v"
		}
		require.True(t, found, "from where the load draws was not given")
		require.Contains(t, notAnalysed(a), "start into a pre-charged output")
	})
	t.Run("pre-biased-start", func(t *testing.T) {
		a := run(t, "buoy-5v0", object{"start_up": object{"soft_start_s": 2e-3, "pre_bias_v": 2.5, "load_from_v": 4.5}}, object{"duration_s": 5e-3})
		require.Less(t, a["deviation_down_v"], 0.02, "a precharged output is not discharged")
		require.Contains(t, notAnalysed(a), "output short")
		require.NotContains(t, notAnalysed(a), "pre-charged", "it is what was run")
		require.InEpsilon(t, a["expected_after_v"], a["after_v"], 1e-6)
	})
	t.Run("both-conduction-modes", func(t *testing.T) {
		a := run(t, "mast-12v0", object{"load_step": object{"to_a": 0.05}}, object{"duration_s": 5e-3})
		require.ElementsMatch(t, []any{"continuous", "discontinuous"}, a["conduction_modes"])
	})
}

// notAnalysed returns the detail of the caution of that name.
func notAnalysed(a object) string {
	for _, c := range a["cautions"].([]any) {
		if within(c, "code") == "faults-not-analysed" {
			return within(c, "detail").(string)
		}
	}
	return ""
}

// A start without soft start runs into the current limit; a limit beyond saturation
// lets the current pass it, and the answer warns.
func TestLimitAndSaturation(t *testing.T) {
	at := server(t)
	request := runOf(t, "buoy-5v0", object{"event": object{"start_up": object{"soft_start_s": 0}}, "duration_s": 2e-3})
	a := asked(t, at, "transients", request)
	require.Positive(t, a["current_limit_cycles"])
	require.Less(t, a["inductor_peak_a"], 12.0)
	within(request, "stage", "modulator").(object)["current_limit_a"] = 16
	a = asked(t, at, "transients", request)
	require.Greater(t, a["inductor_peak_a"], 12.0)
	require.Equal(t, true, a["saturated"])
	codes := map[any]bool{}
	for _, w := range a["warnings"].([]any) {
		codes[within(w, "code")] = true
	}
	require.True(t, codes["saturation"] && codes["inductance-held"], "%v", codes)
}

func TestRunsThatDoNotHold(t *testing.T) {
	at := server(t)
	t.Run("unstable", func(t *testing.T) {
		request := runOf(t, "buoy-5v0", nil)
		request["stage"] = exampleWith(t, "buoy-5v0/loop-gain-unstable.json", nil)["stage"]
		a := asked(t, at, "transients", request)
		require.Equal(t, "unstable", a["status"])
		require.Equal(t, false, a["settled"])
		require.NotEmpty(t, a["detail"])
	})
	t.Run("subharmonic", func(t *testing.T) {
		request := runOf(t, "buoy-3v3", object{"point": object{"input_v": 5.2, "load": object{"current_a": 1.5}, "ambient_degc": 25}, "event": object{"load_step": object{"to_a": 2}}, "duration_s": 2e-3})
		within(request, "stage", "modulator").(object)["slope_v_per_s"] = 0
		a := asked(t, at, "transients", request)
		require.Equal(t, "unstable", a["status"])
	})
	t.Run("drop-out", func(t *testing.T) {
		request := runOf(t, "buoy-5v0", nil)
		request["point"].(object)["input_v"] = 5.05
		a := asked(t, at, "transients", request)
		require.Equal(t, "drop-out", a["status"])
		require.NotContains(t, a, "waveforms")
		require.EqualValues(t, 0, a["cycles"])
	})
	t.Run("load-that-never-comes-back", func(t *testing.T) {
		a := asked(t, at, "transients", runOf(t, "buoy-5v0", object{"event": object{"load_step": object{"to_a": 14}}}))
		require.Equal(t, false, a["recovered"])
		require.NotContains(t, a, "recovery_s")
		require.Positive(t, a["current_limit_cycles"])
	})
}

func TestRunsWithoutMeaningAreRefused(t *testing.T) {
	at := server(t)
	for name, c := range map[string]struct {
		members object
		pointer string
	}{
		"no-event":         {object{"event": object{}}, "/event"},
		"two-events":       {object{"event": object{"load_step": object{"to_a": 5}, "input_step": object{"to_v": 20}}}, "/event"},
		"nothing-happens":  {object{"event": object{"load_step": object{"to_a": 3}}}, "/event/load_step/to_a"},
		"too-long":         {object{"duration_s": 1}, "/duration_s"},
		"held-output":      {object{"point": object{"input_v": 24, "load": object{"current_a": 3}, "ambient_degc": 25, "control": object{"regulate_to_v": 5}}}, "/point/control"},
		"returns-too-late": {object{"event": object{"load_step": object{"to_a": 6, "back_after_s": 2e-3}}, "duration_s": 1e-3}, "/event/load_step/back_after_s"},
		"returns-at-once":  {object{"event": object{"load_step": object{"to_a": 6, "slew_a_per_s": 1e4, "back_after_s": 1e-5}}, "duration_s": 1e-3}, "/event/load_step/back_after_s"},
		"biased-too-high":  {object{"event": object{"start_up": object{"soft_start_s": 1e-4, "pre_bias_v": 30}}}, "/event/start_up/pre_bias_v"},
		"soft-too-long":    {object{"event": object{"start_up": object{"soft_start_s": 1e-2}}}, "/event/start_up/soft_start_s"},
		"above-the-input":  {object{"event": object{"reference_step": object{"to_ratio": 2}}, "point": object{"input_v": 9, "load": object{"current_a": 3}, "ambient_degc": 25}}, "/event/reference_step/to_ratio"},
	} {
		t.Run(name, func(t *testing.T) {
			f := refusedAt(t, at, "/v1/transients", runOf(t, "buoy-5v0", c.members), c.pointer)
			if name == "too-long" {
				require.Contains(t, f["detail"], "500000")
				require.Contains(t, f["limit"], "at most 0.99999")
			}
		})
	}
}

func TestTransientsAsTable(t *testing.T) {
	r := send(t, "POST", server(t)+"/v1/transients", encode(t, runOf(t, "buoy-5v0", object{"waveform_points": 200})), "Accept", "text/csv")
	require.Equal(t, 200, r.status, "%s", r.body)
	rows, err := csv.NewReader(strings.NewReader(string(r.body))).ReadAll()
	require.NoError(t, err)
	require.Equal(t, "time_s [s]", rows[0][0])
	require.Equal(t, "inductor_a/0 [A]", rows[0][7])
	require.Greater(t, len(rows), 100)
}

func TestSteadyStateAsTable(t *testing.T) {
	for _, c := range []struct {
		rail    string
		points  int
		columns []string
	}{
		{"buoy-5v0", 40, []string{"time_s [s]", "output_v [V]", "input_a [A]", "input_v [V]", "inductor_a/0 [A]", "switch_node_v/0 [V]", "output_capacitor_a/0 [A]", "input_capacitor_a/0 [A]"}},
		{"mast-12v0", 40, []string{
			"time_s [s]", "output_v [V]", "input_a [A]", "input_v [V]", "inductor_a/0 [A]", "switch_node_v/0 [V]",
			"output_capacitor_a/0 [A]", "output_capacitor_a/1 [A]", "input_capacitor_a/0 [A]", "input_capacitor_a/1 [A]",
		}},
		{"buoy-5v0", 0, []string{"time_s [s]", "output_v [V]", "input_a [A]"}},
	} {
		r := send(t, "POST", server(t)+"/v1/steady-state", encode(t, exampleWith(t, c.rail+"/steady-state.json", object{"waveform_points": c.points})), "Accept", "text/csv")
		require.Equal(t, 200, r.status, "%s", r.body)
		rows, err := csv.NewReader(strings.NewReader(string(r.body))).ReadAll()
		require.NoError(t, err)
		require.Equal(t, c.columns, rows[0])
		if c.points == 0 {
			require.Len(t, rows, 1)
		} else {
			require.Greater(t, len(rows), c.points)
		}
	}
}

// A run whose client leaves ends soon after, so that its slot is free again.
func TestRunsEndWithTheirClient(t *testing.T) {
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	request := encode(t, runOf(t, "buoy-5v0", object{"duration_s": 0.9, "waveform_points": 0}))
	ctx, cancel := context.WithCancel(t.Context())
	var left time.Time
	time.AfterFunc(100*time.Millisecond, func() {
		left = time.Now()
		cancel()
	})
	_, problem := x.Do(ctx, "transients", request)
	took := time.Since(left)
	require.NotNil(t, problem, "the run was over before it could be left")
	require.Equal(t, exchange.Deadline, problem.Kind)
	require.Less(t, took, time.Second, "100 ms and what a busy machine adds")
	t.Logf("ended %v after its client had left", took)
}

func TestAnEventThatEndsInDropOutIsNoSuccess(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "buoy-5v0/transients.json", object{"event": object{"input_step": object{"to_v": 5.1}}, "waveform_points": 0})
	a := asked(t, at, "transients", request)
	require.Equal(t, "drop-out", a["status"])
	require.Contains(t, a["detail"], "follows the event")
	require.NotContains(t, a, "expected_after_v")
	require.Equal(t, false, a["recovered"])
}

func TestUnequalPhasesShareTheirOwnWay(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "buoy-3v3/transients.json", object{"waveform_points": 0})
	st := request["stage"].(object)
	st["phase_count"], st["phases"] = 2, []any{object{}, object{"inductance_h": 9e-6}}
	require.Equal(t, "phase-sharing", within(asked(t, at, "transients", request), "warnings", 0, "code"))
}
