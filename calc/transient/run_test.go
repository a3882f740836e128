package transient

import (
	"fmt"
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// atLoad moves the plant to another constant-current load.
func atLoad(t testing.TB, p loop.Plant, current float64) loop.Plant {
	c := p.Circuit
	c.Current = current
	return solved(t, c, p.Modulator, p.Compensator)
}

func TestSettledStateIsTheSteadyState(t *testing.T) {
	for name, p := range stages(t) {
		t.Run(name, func(t *testing.T) {
			if testing.Short() && p.Circuit.Phases > 1 {
				t.Skip("takes thousands of periods: phases share their currents slowly; run without -short")
			}
			period := p.Circuit.Period
			setup := Setup{
				Plant: p, Bounds: bounds(&p), Duration: 6000 * period, Band: 0.02, Saturation: parts.Unknown,
				Events: []Event{{Kind: LoadStep, At: 10.37 * period, Change: 0.5 * p.Circuit.Current, Slew: 1e6}},
			}
			_, r := run(t, &setup)
			require.Equal(t, Finished, r.Status)
			require.True(t, r.Settled, "change %g", r.FinalChange)
			require.False(t, r.Alternates)
			c := p.Circuit
			c.Current *= 1.5
			var solver switched.Solver
			var s switched.Solution
			solver.Regulated(&c, 5, 0, 1, &s)
			require.True(t, s.Status.OK())
			require.InEpsilon(t, 5, r.StartMean, 1e-5, "an amplifier of finite gain leaves a small error")
			tolerance := 1e-6
			if gain := p.Compensator.OpenLoopGain; gain > 0 && !math.IsInf(gain, 1) {
				// It regulates the load to the change of control voltage over gain.
				tolerance += 1 / gain
			}
			require.InEpsilon(t, r.StartMean, r.Final.Mean, tolerance)
			ripple := s.OutputMax - s.OutputMin
			require.InDelta(t, s.OutputMax-s.OutputMean, r.FinalMost-r.Final.Mean, 1e-3*ripple)
			require.InDelta(t, s.OutputMin-s.OutputMean, r.FinalLeast-r.Final.Mean, 1e-3*ripple)
			require.InDelta(t, s.Leg.TurnOn, r.Final.Inductor, 1e-6*s.Leg.Peak)
			require.False(t, math.IsNaN(r.Outcomes[1].Recovery))
		})
	}
}

func TestNothingMovesWithoutAnEvent(t *testing.T) {
	for name, p := range stages(t) {
		t.Run(name, func(t *testing.T) {
			setup := Setup{Plant: p, Bounds: bounds(&p), Duration: 200 * p.Circuit.Period, Band: 1e-6, Saturation: parts.Unknown}
			_, r := run(t, &setup)
			require.True(t, r.Settled)
			require.Less(t, r.FinalChange, 1e-9)
			require.Zero(t, r.Outcomes[0].Recovery, "it never leaves the band")
			require.Zero(t, r.Outcomes[0].Skipped)
		})
	}
}

func TestStartUpFromRestAndIntoAPrechargedOutput(t *testing.T) {
	synchronous := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 60)
	for name, c := range map[string]struct {
		precharge, softStart, loadFrom, overshoot float64
	}{
		"from-zero":             {0, 1e-3, 2.5, 0.01},
		"precharged":            {3, 1e-3, 4, 0.01},
		"precharged-above":      {5.5, 1e-3, 2.5, 0.51},
		"quicker-than-the-loop": {0, 20e-6, 2.5, 0.3},
		"without-soft-start":    {0, 0, 2.5, 0.3},
		"load-connects-last":    {0, 1e-3, 5, 0.03},
	} {
		t.Run(name, func(t *testing.T) {
			setup := Setup{
				Plant: synchronous, Bounds: bounds(&synchronous), Duration: 4e-3, Band: 0.05, Saturation: parts.Unknown,
				Start: Start{Kind: AtRest, Precharge: c.precharge, SoftStart: c.softStart, LoadFrom: c.loadFrom}, Record: Record{Points: 400},
			}
			e, r := run(t, &setup)
			o := r.Outcomes[0]
			require.Equal(t, Finished, r.Status)
			require.InEpsilon(t, 5, r.Final.Mean, 1e-6)
			require.LessOrEqual(t, o.Up, c.overshoot)
			require.False(t, math.IsNaN(o.Recovery))
			if c.precharge > 0 && c.precharge < 5 {
				// Nothing is drawn from the precharged output before the reference
				// passes it; then the load connects.
				require.Greater(t, o.Lowest.Value, c.precharge-1e-2)
				require.GreaterOrEqual(t, o.InductorLeast.Value, -1.5, "the precharge is not drawn back into the input")
			}
			w := e.Rows()
			require.Greater(t, len(w), 200)
			require.LessOrEqual(t, len(w), 400)
			for i := 1; i < len(w); i++ {
				require.GreaterOrEqual(t, w[i].At, w[i-1].At)
			}
		})
	}
}

func TestInputAndReferenceSteps(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 60)
	forward := p
	forward.Modulator.FeedForward, forward.Modulator.FeedForwardAt = true, 24
	deviation := func(p loop.Plant) float64 {
		setup := Setup{
			Plant: p, Bounds: bounds(&p), Duration: 1e-3, Band: 0.02, Saturation: parts.Unknown,
			Events: []Event{{Kind: InputStep, At: 1e-4, Change: 6, Slew: 1e6}},
		}
		_, r := run(t, &setup)
		require.True(t, r.Settled)
		require.InEpsilon(t, 5, r.Final.Mean, 1e-6)
		return r.Outcomes[1].Up
	}
	plain, fed := deviation(p), deviation(forward)
	require.Greater(t, plain, 5*fed, "feed-forward keeps an input step from the output: %g against %g", plain, fed)

	setup := Setup{
		Plant: p, Bounds: bounds(&p), Duration: 2e-3, Band: 0.02, Saturation: parts.Unknown,
		Events: []Event{{Kind: ReferenceStep, At: 1e-4, Change: 0.08, Slew: 2e3}},
	}
	_, r := run(t, &setup)
	require.InEpsilon(t, 5.5, r.Outcomes[1].Target, 1e-9)
	require.InEpsilon(t, 5.5, r.Final.Mean, 1e-6)
}

func TestDeviationScalesWithSmallStepsAndMatchesTheAveragedLoop(t *testing.T) {
	for name, p := range stages(t) {
		if p.Mode == switched.Discontinuous {
			continue
		}
		t.Run(name, func(t *testing.T) {
			p := designed(t, p, p.Compensator.Type, 10e3, 60)
			var l loop.LinearStep
			require.True(t, l.Set(&p))
			const change = 0.01
			want, ok := l.Run(change, 500e-6, 3000)
			require.True(t, ok)
			period := p.Circuit.Period
			at := 5 * period
			setup := Setup{Plant: p, Bounds: bounds(&p), Duration: at + 500e-6, Saturation: parts.Unknown}
			still, err := New(&setup)
			require.NoError(t, err)
			setup.Events = []Event{{Kind: LoadStep, At: at, Change: change}}
			moved, err := New(&setup)
			require.NoError(t, err)
			got := 0.0
			for until := at; until < setup.Duration; until += period / 8 {
				still.advance(until)
				moved.advance(until)
				got = max(got, still.joint.Output.At(&still.now.z, still.width)-moved.joint.Output.At(&moved.now.z, moved.width))
			}
			// The averaged loop answers at once, the switched one with its next edge;
			// the averaged current loop leaves its sampling out.
			tolerance := 0.03
			if p.Modulator.Mode == parts.PeakCurrentMode {
				tolerance = 0.05
			}
			require.InEpsilon(t, want.Peak, got, tolerance)
		})
	}
}

func TestPhasesShareTheStep(t *testing.T) {
	c := buoy()
	c.Phases = 2
	unequal := c
	unequal.Legs = &[switched.MaxPhases]switched.Leg{c.Leg, c.Leg}
	unequal.Legs[1].L *= 1.3
	for name, c := range map[string]switched.Circuit{"equal": c, "unequal": unequal} {
		t.Run(name, func(t *testing.T) {
			p := solved(t, c, voltageMode(), opAmp())
			p = designed(t, p, parts.OpAmpType3, 60e3, 55)
			setup := Setup{
				Plant: p, Bounds: bounds(&p), Duration: 10e-3, Band: 0.02, Saturation: parts.Unknown,
				Events: []Event{{Kind: LoadStep, At: 1e-4, Change: 3}}, Record: Record{Points: 100},
			}
			e, r := run(t, &setup)
			require.Equal(t, Finished, r.Status)
			require.True(t, r.Settled, "change %g", r.FinalChange)
			require.InEpsilon(t, 5, r.Final.Mean, 1e-6)
			last := e.Rows()
			require.InDelta(t, last[len(last)-1].Load, 6, 1e-9)
			require.NotZero(t, last[len(last)-1].Inductor[1])
		})
	}
}

func TestChunksDoNotChangeTheRun(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	setup := Setup{
		Plant: p, Bounds: bounds(&p), Duration: 4e-4, Band: 0.02, Saturation: 5,
		Events: []Event{{Kind: LoadStep, At: 1e-4, Change: 3}}, Record: Record{Points: 50},
	}
	whole, err := New(&setup)
	require.NoError(t, err)
	whole.Advance(math.MaxInt32)
	pieces, err := New(&setup)
	require.NoError(t, err)
	for pieces.Advance(1) {
	}
	a, b := whole.Result(), pieces.Result()
	require.InDelta(t, a.Outcomes[1].Down, b.Outcomes[1].Down, 1e-12)
	require.InDelta(t, a.Final.Mean, b.Final.Mean, 1e-12)
	require.True(t, a.Outcomes[1].Saturates)
	require.Len(t, pieces.Rows(), len(whole.Rows()))
}

func TestRecordKeepsTheTrueExtremes(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	setup := Setup{
		Plant: p, Bounds: bounds(&p), Duration: 3e-4, Band: 0.02, Saturation: parts.Unknown,
		Events: []Event{{Kind: LoadStep, At: 1e-4, Change: 3}}, Record: Record{Points: 20},
	}
	coarse, r := run(t, &setup)
	setup.Record.Points = 5000
	fine, _ := run(t, &setup)
	extremes := func(w []Row) (least, greatest float64) {
		least, greatest = math.Inf(1), math.Inf(-1)
		for _, s := range w {
			least, greatest = min(least, s.Output), max(greatest, s.Output)
		}
		return least, greatest
	}
	a, b := extremes(coarse.Rows())
	c, d := extremes(fine.Rows())
	require.InDelta(t, a, c, 1e-6)
	require.InDelta(t, b, d, 1e-6)
	require.InDelta(t, r.Outcomes[1].Lowest.Value, a, 1e-6)
	require.LessOrEqual(t, len(coarse.Rows()), 20)
	for _, row := range fine.Rows()[:len(fine.Rows())-20] {
		require.False(t, math.IsNaN(row.Duty), "at %g", row.At)
		require.InDelta(t, 0.2, row.Duty, 0.2+0.81)
	}
}

func TestMeaninglessSetupsAreRefusedWithTheirFields(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	good := Setup{Plant: p, Bounds: bounds(&p), Duration: 1e-4, Saturation: parts.Unknown}
	for field, change := range map[string]func(s *Setup){
		"duration_s":                func(s *Setup) { s.Duration = 0 },
		"modulator/ramp_v":          func(s *Setup) { s.Plant.Modulator.Ramp = 0 },
		"compensator/feedback_f":    func(s *Setup) { s.Plant.Compensator.FeedbackF = 0 },
		"controller/min_on_time_s":  func(s *Setup) { s.Bounds.MinOn = -1 },
		"controller/max_duty_ratio": func(s *Setup) { s.Bounds.MaxDuty = 1.5 },
		"events/1/at_s":             func(s *Setup) { s.Events = []Event{{At: 5e-5}, {At: 1e-5}} },
		"events/0/change":           func(s *Setup) { s.Events = []Event{{Change: math.NaN()}} },
		"events/0/frequency_hz":     func(s *Setup) { s.Events = []Event{{Kind: ControlTone, Frequency: 400e3}} },
		"start/precharge_v":         func(s *Setup) { s.Start = Start{Kind: AtRest, Precharge: 30} },
		"record/points":             func(s *Setup) { s.Record.Points = MaxPoints + 1 },
		"modulator/current_limit_a": func(s *Setup) { s.Plant.Modulator.CurrentLimit = -1 },
		"band_v":                    func(s *Setup) { s.Band = math.NaN() },
		"control_high_v":            func(s *Setup) { s.Bounds.ControlHigh = -1 },
		"start/soft_start_s":        func(s *Setup) { s.Start = Start{Kind: AtRest, SoftStart: 1} },
		"compensator/lead_ohm":      func(s *Setup) { s.Plant.Compensator.LeadOhm = 0 },
		"events/0/slew":             func(s *Setup) { s.Events = []Event{{Slew: -1}} },
		"record/to_s":               func(s *Setup) { s.Record.To = 1 },
		"controller/min_off_time_s": func(s *Setup) { s.Bounds.MinOff = 1 },
		"start/load_from_v":         func(s *Setup) { s.Start = Start{Kind: AtRest, LoadFrom: 6} },
	} {
		t.Run(field, func(t *testing.T) {
			s := good
			change(&s)
			_, err := New(&s)
			var invalid *stage.InvalidError
			require.ErrorAs(t, err, &invalid)
			require.Equal(t, field, invalid.Faults[0].Field)
		})
	}
}

func TestControllerLimitsAreKept(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	p = atLoad(t, p, 1)
	step := func(change float64, edit func(s *Setup)) (Setup, Outcome, Result) {
		s := Setup{
			Plant: p, Bounds: bounds(&p), Duration: 4e-4, Band: 0.05, Saturation: parts.Unknown,
			Events: []Event{{Kind: LoadStep, At: 1e-4, Change: change}}, Record: Record{Points: 2000},
		}
		edit(&s)
		_, r := run(t, &s)
		return s, r.Outcomes[1], r
	}
	t.Run("greatest-duty", func(t *testing.T) {
		_, free, _ := step(8, func(*Setup) {})
		_, bound, r := step(8, func(s *Setup) { s.Bounds.MaxDuty = 0.5 })
		require.Positive(t, bound.AtMaxDuty)
		require.Greater(t, bound.Down, free.Down)
		require.Equal(t, Finished, r.Status)
	})
	t.Run("least-off-time", func(t *testing.T) {
		_, bound, _ := step(8, func(s *Setup) { s.Bounds.MinOff = 1.2e-6 })
		require.Positive(t, bound.AtMaxDuty)
	})
	t.Run("least-on-time", func(t *testing.T) {
		s := Setup{
			Plant: p, Bounds: bounds(&p), Duration: 4e-4, Band: 0.05, Saturation: parts.Unknown,
			Events: []Event{{Kind: LoadStep, At: 1e-4, Change: -1}}, Record: Record{Points: 4000},
		}
		s.Bounds.MinOn = 200e-9
		e, _ := run(t, &s)
		for _, row := range e.Rows() {
			require.True(t, math.IsNaN(row.Duty) || row.Duty == 0 || row.Duty >= 0.1-1e-9, "duty %g at %g", row.Duty, row.At)
		}
	})
	t.Run("current-limit", func(t *testing.T) {
		_, o, r := step(5, func(s *Setup) { s.Plant.Modulator.CurrentLimit = 7.5 })
		require.Positive(t, o.Limited)
		require.LessOrEqual(t, o.InductorPeak.Value, 7.5+1e-9)
		require.Equal(t, Finished, r.Status)
	})
	t.Run("current-limit-below-the-load", func(t *testing.T) {
		_, _, r := step(8, func(s *Setup) { s.Plant.Modulator.CurrentLimit = 5 })
		require.Equal(t, Collapsed, r.Status)
		require.Less(t, r.At, 4e-4)
	})
	t.Run("delay-passes-the-limit", func(t *testing.T) {
		_, o, _ := step(5, func(s *Setup) {
			s.Plant.Modulator.CurrentLimit = 6.8
			s.Plant.Modulator.Delay = 50e-9
		})
		require.Positive(t, o.Limited)
		rise := (24 - 4.9) / 6.8e-6 * 50e-9
		require.InDelta(t, 6.8+rise, o.InductorPeak.Value, 0.05*rise)
	})
}

func TestLightLoadLeavesOutPulses(t *testing.T) {
	c := buoy()
	c.Leg.Rectifier.Blocks = true
	design := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	c.Current = 0.02
	p := solved(t, c, voltageMode(), design.Compensator)
	s := Setup{Plant: p, Bounds: bounds(&p), Duration: 2e-3, Band: 0.1, Saturation: parts.Unknown}
	s.Bounds.MinOn = 200e-9 // five times what this load takes
	_, r := run(t, &s)
	require.Equal(t, Finished, r.Status)
	require.True(t, r.Restless)
	require.Positive(t, r.Outcomes[0].Skipped)
	require.InDelta(t, 5, r.StartMean, 0.05)
}

func TestStageBehindAnInputFilter(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 40e3, 60)
	const lf, cf = 22e-6, 10e-6
	o := loop.OptimumDamping(loop.CapacitorBranch, lf, cf, 8)
	for name, c := range map[string]struct {
		banks   []switched.Bank
		settles bool
	}{
		"undamped": {[]switched.Bank{{C: cf, ESR: 2e-3}}, false},
		"damped":   {[]switched.Bank{{C: cf, ESR: 2e-3}, {C: 8 * cf, ESR: o.Resistance}}, true},
	} {
		t.Run(name, func(t *testing.T) {
			q := p
			q.Source = loop.FromBanks(lf, 1e-3, c.banks)
			setup := Setup{
				Plant: q, Bounds: bounds(&q), Duration: 5e-3, Band: 0.05, Saturation: parts.Unknown,
				Events: []Event{{Kind: LoadStep, At: 1e-4, Change: 1}, {Kind: InputStep, At: 2.5e-3, Change: 2, Slew: 1e5}},
			}
			_, r := run(t, &setup)
			require.Equal(t, Finished, r.Status)
			require.Equal(t, c.settles, r.Settled, "change %g", r.FinalChange)
			if c.settles {
				require.InEpsilon(t, 5, r.Final.Mean, 1e-6)
			}
		})
	}
}

// An engine that ran something else gives the same run, to the bit, as a new one.
func TestResetGivesTheRunOfANewEngine(t *testing.T) {
	p := designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
	setup := Setup{
		Plant: p, Bounds: bounds(&p), Duration: 2e-4, Band: 0.025, Saturation: 12,
		Events: []Event{{Kind: LoadStep, At: 2e-5, Change: 3, Slew: 1e6}}, Record: Record{Points: 200},
	}
	run := func(e *Engine) (Result, []Row) {
		for e.Advance(7) {
		}
		return e.Result(), e.Rows()
	}
	fresh, err := New(&setup)
	require.NoError(t, err)
	want, rows := run(fresh)
	require.True(t, want.Status.OK())

	used := new(Engine)
	other := setup
	other.Start, other.Record = Start{Kind: AtRest, SoftStart: 1e-4}, Record{}
	require.NoError(t, used.Reset(&other))
	run(used)
	require.Error(t, used.Reset(&Setup{}))
	for range 2 {
		require.NoError(t, used.Reset(&setup))
		got, gotRows := run(used)
		require.Equal(t, fmt.Sprint(want), fmt.Sprint(got))
		require.Equal(t, fmt.Sprint(rows), fmt.Sprint(gotRows))
	}
}
