package loop

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strconv"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/switched"
)

// uneven returns the circuit with phases of its own, each as change leaves it.
func uneven(c switched.Circuit, change func(k int, l *switched.Leg)) switched.Circuit {
	var legs [switched.MaxPhases]switched.Leg
	for k := range c.Phases {
		legs[k] = c.Leg
		change(k, &legs[k])
	}
	c.Legs = &legs
	return c
}

// hardly makes phases unequal by so little that nothing else shows it.
func hardly(c switched.Circuit) switched.Circuit {
	return uneven(c, func(k int, l *switched.Leg) {
		if k == 0 {
			l.L *= 1 + 1e-13
		}
	})
}

// byAFifth makes the last inductor a fifth larger and the first winding too.
func byAFifth(c switched.Circuit) switched.Circuit {
	return uneven(c, func(k int, l *switched.Leg) {
		if k == c.Phases-1 {
			l.L *= 1.2
		}
		if k == 0 {
			l.Winding *= 1.2
		}
	})
}

func near(t *testing.T, want, got complex128, within float64, what string) {
	t.Helper()
	if cmplx.IsNaN(want) && cmplx.IsNaN(got) {
		return
	}
	require.LessOrEqual(t, cmplx.Abs(got-want), within*cmplx.Abs(want), "%s: want %v, got %v", what, want, got)
}

func TestEqualOverridesAreEqualPhases(t *testing.T) {
	behind := Source{Present: true, Inductance: 1e-6, Resistance: 20e-3, Shunts: 2}
	behind.Shunt[0], behind.Shunt[1] = switched.Bank{C: 22e-6, ESR: 3e-3}, switched.Bank{C: 100e-6, ESR: 0.1}
	for name, c := range families() {
		if c.Phases == 1 {
			continue // a single phase is equal to itself
		}
		for kind, p := range map[string]Plant{
			"voltage":      solvedPlant(t, c, 5, voltageMode(), typeThree()),
			"feed-forward": solvedPlant(t, c, 5, parts.Modulator{Present: true, Ramp: 1.5, FeedForward: true, FeedForwardAt: 20}, typeThree()),
			"current":      solvedPlant(t, c, 5, currentModulator(), transconductor()),
		} {
			for _, source := range []Source{{}, behind} {
				t.Run(kind+"/"+name+"/"+strconv.FormatBool(source.Present), func(t *testing.T) {
					p := p
					p.Source, p.Modulator.Delay = source, 30e-9
					q := p
					q.Circuit = hardly(p.Circuit)
					equal, own := sampledOf(t, p), sampledOf(t, q)
					require.Equal(t, 1, equal.count)
					require.Equal(t, c.Phases, own.count)
					require.InDelta(t, equal.Error, own.Error, 1e-9)
					var a, b Margins
					equal.Margins(&a)
					own.Margins(&b)
					require.Equal(t, a.Stability, b.Stability)
					require.InEpsilon(t, a.SpectralRadius, b.SpectralRadius, 1e-6)
					for _, pair := range [][2]float64{{a.Crossover, b.Crossover}, {a.PhaseMargin, b.PhaseMargin}, {a.GainMargin, b.GainMargin}, {a.Modulus, b.Modulus}, {a.Bandwidth, b.Bandwidth}} {
						if math.IsNaN(pair[0]) {
							require.True(t, math.IsNaN(pair[1]))
							continue
						}
						require.InEpsilon(t, pair[0], pair[1], 1e-6)
					}
					for _, share := range []float64{1e-4, 0.01, 0.1, 0.37, 0.8, 1} {
						f := share * p.Nyquist()
						x, y := equal.At(f), own.At(f)
						for what, pair := range map[string][2]complex128{
							"duty": {x.Duty, y.Duty}, "control": {x.Control, y.Control}, "line": {x.Line, y.Line}, "impedance": {x.Impedance, y.Impedance},
							"loop": {x.Loop, y.Loop}, "closed line": {x.ClosedLine, y.ClosedLine}, "closed impedance": {x.ClosedImpedance, y.ClosedImpedance},
						} {
							near(t, pair[0], pair[1], 1e-6, what+" at "+number(share))
						}
					}
				})
			}
		}
	}
}

func TestOneOwnPhaseIsThatPhase(t *testing.T) {
	c := byAFifth(buoy())
	p := solvedPlant(t, c, 5, voltageMode(), typeThree())
	q := p
	q.Circuit.Leg, q.Circuit.Legs = c.Legs[0], nil
	near(t, sampledOf(t, q).Loop(100e3), sampledOf(t, p).Loop(100e3), 1e-12, "loop")
}

// Without a compensator the control voltage is still, and every phase has the duty
// ratio of the steady state.
func TestDutyGainOfUnequalPhasesIsTheDerivativeOfTheSteadyState(t *testing.T) {
	for name, c := range families() {
		t.Run(name, func(t *testing.T) {
			c := byAFifth(c)
			p := solvedPlant(t, c, 5, voltageMode(), typeThree())
			p.Compensator.Present = false
			var s Sampled
			require.True(t, s.Set(&p).OK())
			for _, on := range s.instants.on[:s.count] {
				require.True(t, s.count == 1 || math.Abs(on/c.Period/p.Duty-1) < 1e-9)
			}
			got, ok := s.DutyGain()
			require.True(t, ok)
			var solver switched.Solver
			mean := func(d float64) float64 {
				var s switched.Solution
				solver.FixedDuty(&c, d, &s)
				require.True(t, s.Status.OK())
				return s.OutputMean
			}
			h := 1e-4 * p.Duty
			want := (8*(mean(p.Duty+h)-mean(p.Duty-h)) - (mean(p.Duty+2*h) - mean(p.Duty-2*h))) / (12 * h)
			require.InEpsilon(t, want, got, 1e-6)
			near(t, complex(want, 0), s.At(1e-4).Duty, 1e-4, "duty to output, nearly at rest")
		})
	}
}

// Where an eigenvalue leaves the unit circle the gain told passes through -1, at the
// frequency told.
func TestLoopGainOfUnequalPhasesReachesMinusOneAtTheEdgeOfStability(t *testing.T) {
	for name, p := range map[string]Plant{
		"voltage/two-phases":   solvedPlant(t, byAFifth(phases(buoy(), 2)), 5, voltageMode(), typeThree()),
		"voltage/three-phases": solvedPlant(t, byAFifth(phases(twoBanks(buoy()), 3)), 5, voltageMode(), typeThree()),
		"current/four-phases":  solvedPlant(t, byAFifth(phases(buoy(), 4)), 5, currentModulator(), transconductor()),
	} {
		t.Run(name, func(t *testing.T) {
			at := func(gain float64) (m Margins, ok bool) {
				q := p
				q.Modulator.Delay, q.Modulator.Ramp = 150e-9, 6
				c := &q.Compensator
				c.GainBandwidth = 3e6
				c.FeedbackF, c.ShuntF, c.FeedbackOhm = c.FeedbackF/gain, c.ShuntF/gain, c.FeedbackOhm*gain
				var s Sampled
				ok = s.Set(&q).OK()
				s.Margins(&m)
				return m, ok
			}
			lo, hi := 0.1, 0.2
			for m, ok := at(hi); m.Stability == Stable; m, ok = at(hi) {
				require.True(t, ok)
				lo, hi = hi, 1.3*hi
			}
			for range 60 {
				mid := (lo + hi) / 2
				m, ok := at(mid)
				require.True(t, ok, "the ripple outruns the ramp before the loop is unstable")
				if m.Stability == Stable {
					lo = mid
				} else {
					hi = mid
				}
			}
			m, _ := at(lo)
			require.InDelta(t, 1, m.SpectralRadius, 1e-9)
			require.Less(t, m.Modulus, 1e-4)
			// It is heard at several frequencies; the one told is one of them.
			apart := (m.ModulusAt - m.DominantAt) * p.Circuit.Period
			sum := (m.ModulusAt + m.DominantAt) * p.Circuit.Period
			require.InDelta(t, 0, min(math.Abs(apart-math.Round(apart)), math.Abs(sum-math.Round(sum))), 1e-4)
		})
	}
}

func TestAnyUnequalPlantHasAnAnswer(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 26))
	seen, analysed := map[Status]int{}, 0
	for range 400 {
		p, ok := anyPlant(r)
		if !ok || p.Circuit.Phases == 1 {
			continue
		}
		c := uneven(p.Circuit, func(_ int, l *switched.Leg) {
			l.L *= between(r, 0.8, 1.25)
			l.Winding *= between(r, 0.7, 1.4)
			l.HighSide *= between(r, 0.8, 1.25)
		})
		var solver switched.Solver
		var solution switched.Solution
		solver.Regulated(&c, p.Output, 0, 1, &solution)
		p.Circuit = c
		p.Operate(&solution)
		p.Modulator.Delay = 0.5 * r.Float64() * min(p.Duty, 1/float64(c.Phases)) * c.Period
		if !solution.Status.OK() || p.Check() != nil {
			continue
		}
		var s Sampled
		var m Margins
		s.Set(&p)
		s.Margins(&m)
		seen[m.Status]++
		if !m.Status.OK() {
			require.Equal(t, Undecided, m.Stability)
			continue
		}
		analysed++
		// The search went on until every comparator decides where it is said to.
		width := s.joint.N + Inputs
		for k := range s.count {
			d := &s.decisions[k]
			seenThere := s.control.At(&s.start, 0) + d.control.At(&s.start, width) - p.sense()*d.current.At(&s.start, width)
			require.InDelta(t, p.RampSlope()*d.since, seenThere, 1e-7*(1+math.Abs(seenThere)), "%+v", p)
		}
		for k := range c.Phases {
			require.True(t, !c.Legs[k].Rectifier.Blocks || s.instants.rest[k] < c.Period || s.rests[k].valley > -1e-6*math.Abs(s.rests[k].off), "a rectifier that blocks conducts backwards")
		}
	}
	t.Log(seen)
	require.Greater(t, analysed, 80)
	require.Less(t, seen[NotConverged]+seen[SingularPoint], analysed/20)
}

func BenchmarkMarginsOfUnequalPhases(b *testing.B) {
	for _, n := range []int{2, 3, 6} {
		p := solvedPlant(b, byAFifth(phases(twoBanks(buoy()), n)), 5, voltageMode(), typeThree())
		b.Run(strconv.Itoa(n)+"-phases", func(b *testing.B) {
			var s Sampled
			var m Margins
			for b.Loop() {
				s.Set(&p)
				s.Margins(&m)
			}
		})
	}
}

func TestAveragedModelKeepsUnequalPhasesApart(t *testing.T) {
	for name, c := range families() {
		for kind, mode := range map[string]parts.Modulator{"voltage": voltageMode(), "current": currentModulator()} {
			t.Run(kind+"/"+name, func(t *testing.T) {
				p := solvedPlant(t, c, 5, mode, transconductor())
				q := p
				q.Circuit, q.Modes = hardly(p.Circuit), [switched.MaxPhases]switched.Mode{p.Mode, p.Mode, p.Mode, p.Mode, p.Mode, p.Mode}
				source := Source{Present: true, Resistance: 20e-3, Inductance: 1e-6, Shunts: 1}
				source.Shunt[0] = switched.Bank{C: 22e-6, ESR: 3e-3}
				var a, b Averaged
				a.Set(&p)
				b.Set(&q)
				for _, f := range []float64{100, 1e4, 1e5} {
					near(t, a.At(f).Loop, b.At(f).Loop, 1e-9, "equal overrides")
					if c.Conductance == 1e-9 {
						continue // without a load there is no input admittance, but for rounding
					}
					x, y := a.InteractionAt(&source, f), b.InteractionAt(&source, f)
					near(t, x.Null, y.Null, 1e-9, "null")
					near(t, x.Driving, y.Driving, 1e-9, "driving")
					near(t, x.Closed, y.Closed, 1e-9, "closed")
				}

				p = solvedPlant(t, byAFifth(c), 5, mode, transconductor())
				var s Sampled
				require.True(t, s.Set(&p).OK())
				a.Set(&p)
				g := s.Agreement(&a)
				require.LessOrEqual(t, g.Thousandth, 0.01)
				if p.Mode == switched.Continuous {
					require.LessOrEqual(t, g.Hundredth, 0.01)
					require.LessOrEqual(t, g.Tenth, 0.02)
				}
				// One phase whose inductor is ten times as large is hardly there at all.
				if c.Phases != 2 || p.Mode != switched.Continuous {
					return
				}
				p = solvedPlant(t, uneven(c, func(k int, l *switched.Leg) {
					if k == 1 {
						l.L *= 10
					}
				}), 5, mode, transconductor())
				require.True(t, s.Set(&p).OK())
				a.Set(&p)
				require.LessOrEqual(t, s.Agreement(&a).Hundredth, 0.02)
			})
		}
	}
}

// The least damped phase sets the slope that all of them need.
func TestSubharmonicOscillationOfOneUnequalPhase(t *testing.T) {
	c := phases(buoy(), 3)
	c.Vin = 8
	c = uneven(c, func(k int, l *switched.Leg) { l.L *= [3]float64{1, 0.7, 1.3}[k] })
	still := transconductor() // with hardly any ripple of its own at the comparators
	still.FeedbackOhm, still.ShuntF = 500, 1e-9
	p := solvedPlant(t, c, 5, currentModulator(), still)
	least := p.CurrentLoop().LeastSlope
	alone := p
	alone.Circuit.Leg, alone.Circuit.Legs = c.Legs[1], nil
	require.InEpsilon(t, alone.CurrentLoop().LeastSlope, least, 1e-12, "the smallest inductor has the steepest fall")
	for _, share := range []float64{0.9, 1.1} {
		p.Modulator.Slope = share * least
		var m Margins
		sampledOf(t, p).Margins(&m)
		require.Equal(t, share < 1, m.Subharmonic, "eigenvalue %v", m.CurrentLoop)
		require.InDelta(t, p.CurrentLoop().Eigenvalue, real(m.CurrentLoop), 0.05)
		require.Zero(t, imag(m.CurrentLoop))
	}
}
