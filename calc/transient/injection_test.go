package transient

import (
	"cmp"
	"maps"
	"math"
	"math/cmplx"
	"slices"
	"strconv"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/switched"
)

// injected is what a tone in the running stage shows: phasors, with the decision
// of the comparator as the origin of time.
type injected struct {
	output   complex128 // component of the output at the tone's frequency
	compared complex128 // control voltage as the comparator decides, with the tone
	fed      complex128 // without it
	tone     complex128 // at that instant
}

// decisionsOf returns when the comparators of the periodic run decide, in order of
// time, within a period from the first clock of phase 0 on.
func decisionsOf(t *testing.T, p *loop.Plant) []float64 {
	t.Helper()
	period, n := p.Circuit.Period, p.Circuit.Phases
	e, err := New(&Setup{Plant: *p, Bounds: wide, Duration: 10 * period, Saturation: parts.Unknown})
	require.NoError(t, err)
	require.Equal(t, Running, e.status)
	list := make([]float64, n)
	for i := range list {
		clock := (1 + float64(i)/float64(n)) * period
		e.advance(clock)
		before, on := e.now, clock
		for span := period / 2; span > 1e-9*period; span /= 2 {
			e.now = before
			if e.advance(on + span); e.now.legs[i] == loop.High && e.now.phases[i].since == before.phases[i].since {
				on += span
			}
		}
		e.now = before
		list[i] = math.Mod(on-p.Modulator.Delay, period)
	}
	slices.Sort(list)
	return list
}

// wide are bounds that no comparator reaches.
var wide = Bounds{MaxDuty: 1, ControlLow: -1e3, ControlHigh: 1e3}

// inject runs the closed loop with a tone of cycles in periods, waits until it has
// settled, and correlates: the control voltage as the comparators decide, the output
// often enough for its aliases to vanish.
func inject(t *testing.T, p loop.Plant, kind EventKind, amplitude float64, cycles, periods, perPeriod int) injected {
	t.Helper()
	const before = 2e-10 // [s] the state is read just before the decision, whose instant the tone moves by less
	c := &p.Circuit
	frequency := float64(cycles) / (float64(periods) * c.Period)
	settle := periods * int(math.Ceil(600/float64(periods)))
	s := Setup{
		Plant: p, Bounds: wide, Duration: float64(settle+periods+2) * c.Period,
		Saturation: parts.Unknown, Events: []Event{{Kind: kind, Change: amplitude, Frequency: frequency}},
	}
	type reading struct {
		at      float64
		decides bool
	}
	var readings []reading
	each := decisionsOf(t, &p)
	outputs := periods * c.Phases * perPeriod
	for n := range periods {
		for _, at := range each {
			readings = append(readings, reading{float64(settle+n)*c.Period + at - before, true})
		}
	}
	for n := range outputs {
		readings = append(readings, reading{(float64(settle) + float64(n)/float64(c.Phases*perPeriod)) * c.Period, false})
	}
	slices.SortFunc(readings, func(a, b reading) int { return cmp.Compare(a.at, b.at) })

	e, err := New(&s)
	require.NoError(t, err)
	require.Equal(t, Running, e.status)
	var x injected
	control := &e.control[loop.Linear]
	meanOut, meanControl := math.NaN(), math.NaN()
	for _, r := range readings {
		e.advance(r.at)
		turn := cmplx.Exp(complex(0, -2*math.Pi*frequency*r.at))
		if !r.decides {
			v := e.joint.Output.At(&e.now.z, e.width)
			if math.IsNaN(meanOut) {
				meanOut = v // what is constant vanishes anyway, this keeps the digits
			}
			x.output += complex((v-meanOut)*2/float64(outputs), 0) * turn
			continue
		}
		v := control.At(&e.now.z, e.width)
		if math.IsNaN(meanControl) {
			meanControl = v
		}
		turn *= complex(2/float64(periods*c.Phases), 0)
		x.fed += complex(v-meanControl, 0) * turn
		x.tone += complex(e.now.z[e.joint.Tone], 0) * turn
	}
	require.Equal(t, Running, e.status)
	x.compared = x.fed
	if kind == ControlTone {
		x.compared += x.tone
	}
	return x
}

// commensurate lists tones from a fortieth to 0.45 of the decision rate.
var commensurate = [][2]int{{1, 40}, {1, 25}, {1, 16}, {1, 10}, {3, 20}, {1, 5}, {1, 4}, {3, 10}, {7, 20}, {3, 8}, {2, 5}, {9, 20}}

// some leaves a sixth of the tones when the tests are to be short.
func some(tones [][2]int) [][2]int {
	if testing.Short() {
		return tones[:(len(tones)+5)/6]
	}
	return tones
}

func closeTo(t *testing.T, what string, got, want complex128) {
	t.Helper()
	ratio := got / want
	require.InDelta(t, 1, cmplx.Abs(ratio), 0.01, "%s: gain, measured %v, model %v", what, got, want)
	require.InDelta(t, 0, cmplx.Phase(ratio)*180/math.Pi, 1, "%s: phase, measured %v, model %v", what, got, want)
}

func stages(t *testing.T) map[string]loop.Plant {
	two := buoy()
	two.Banks = 2
	two.Bank[1] = switched.Bank{C: 330e-6, ESR: 18e-3}
	diode := buoy()
	diode.Leg.Rectifier = switched.Rectifier{Threshold: 0.42, Slope: 20e-3, Blocks: true}
	diode.Current, diode.Conductance = 0.1, 0.02
	triple := two
	triple.Phases = 3
	late := voltageMode()
	late.Delay = 60e-9
	slow := opAmp()
	slow.GainBandwidth, slow.OpenLoopGain = 10e6, 1e5
	ota := parts.Compensator{Present: true, Transconductance: 1e-3, OutputOhm: math.Inf(1)}
	lateCurrent := currentMode()
	lateCurrent.Delay = 40e-9
	return map[string]loop.Plant{
		"voltage/ccm":               designed(t, solved(t, buoy(), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55),
		"voltage/ccm/two-banks":     designed(t, solved(t, two, late, slow), parts.OpAmpType3, 40e3, 50),
		"voltage/dcm":               designed(t, solved(t, diode, voltageMode(), opAmp()), parts.OpAmpType2, 20e3, 60),
		"voltage/three-phases":      designed(t, solved(t, triple, voltageMode(), opAmp()), parts.OpAmpType3, 80e3, 50),
		"current/ccm":               designed(t, solved(t, buoy(), currentMode(), ota), parts.TransconductanceType2, 50e3, 60),
		"current/ccm/delay":         designed(t, solved(t, two, lateCurrent, ota), parts.TransconductanceType2, 40e3, 60),
		"current/dcm":               designed(t, solved(t, diode, currentMode(), ota), parts.TransconductanceType2, 15e3, 60),
		"current/three-phases":      designed(t, solved(t, triple, currentMode(), ota), parts.TransconductanceType2, 60e3, 60),
		"current/type-three-op-amp": designed(t, solved(t, buoy(), currentMode(), slow), parts.OpAmpType3, 60e3, 70),
	}
}

// every are the stages with equal phases and those with unequal ones.
func every(t *testing.T) map[string]loop.Plant {
	list := stages(t)
	maps.Copy(list, unequal(t))
	return list
}

// unequal are stages whose phases differ by up to a fifth.
func unequal(t *testing.T) map[string]loop.Plant {
	t.Helper()
	phases := func(c switched.Circuit, n int) switched.Circuit {
		legs := [switched.MaxPhases]switched.Leg{}
		for k := range n {
			legs[k] = c.Leg
		}
		legs[n-1].L *= 1.2
		legs[0].Winding *= 1.2
		c.Phases, c.Legs = n, &legs
		return c
	}
	banks := buoy()
	banks.Banks = 2
	banks.Bank[1] = switched.Bank{C: 330e-6, ESR: 18e-3}
	diode := buoy()
	diode.Leg.Rectifier = switched.Rectifier{Threshold: 0.42, Slope: 20e-3, Blocks: true}
	diode.Current, diode.Conductance = 0.1, 0.02
	late := voltageMode()
	late.Delay = 60e-9
	lateCurrent := currentMode()
	lateCurrent.Delay = 40e-9
	ota := parts.Compensator{Present: true, Transconductance: 1e-3, OutputOhm: math.Inf(1)}
	behind := designed(t, solved(t, phases(buoy(), 2), voltageMode(), opAmp()), parts.OpAmpType3, 60e3, 55)
	behind.Source = loop.Source{Present: true, Inductance: 1e-6, Resistance: 20e-3, Shunts: 2}
	behind.Source.Shunt[0], behind.Source.Shunt[1] = switched.Bank{C: 22e-6, ESR: 3e-3}, switched.Bank{C: 100e-6, ESR: 0.1}
	return map[string]loop.Plant{
		"unequal/voltage/two-phases/source": behind,
		"unequal/voltage/one-phase":         designed(t, solved(t, phases(buoy(), 1), voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55),
		"unequal/voltage/two-phases":        designed(t, solved(t, phases(buoy(), 2), voltageMode(), opAmp()), parts.OpAmpType3, 60e3, 55),
		"unequal/voltage/three-phases":      designed(t, solved(t, phases(banks, 3), late, opAmp()), parts.OpAmpType3, 80e3, 50),
		"unequal/voltage/dcm/two-phases":    designed(t, solved(t, phases(diode, 2), voltageMode(), opAmp()), parts.OpAmpType2, 20e3, 60),
		"unequal/current/one-phase":         designed(t, solved(t, phases(buoy(), 1), currentMode(), ota), parts.TransconductanceType2, 50e3, 60),
		"unequal/current/two-phases":        designed(t, solved(t, phases(banks, 2), lateCurrent, ota), parts.TransconductanceType2, 50e3, 60),
		"unequal/current/three-phases":      designed(t, solved(t, phases(banks, 3), currentMode(), ota), parts.TransconductanceType2, 60e3, 60),
		"unequal/current/dcm/three-phases":  designed(t, solved(t, phases(diode, 3), currentMode(), ota), parts.TransconductanceType2, 15e3, 60),
	}
}

func TestSampledModelAgainstInjection(t *testing.T) {
	for name, p := range every(t) {
		t.Run(name, func(t *testing.T) {
			var model loop.Sampled
			require.True(t, model.Set(&p).OK())
			rate := float64(p.Circuit.Phases) / p.Circuit.Period
			for _, c := range some(commensurate) {
				f := float64(c[0]) / float64(c[1]) * rate
				want := model.At(f)
				at := " at " + strconv.Itoa(c[0]) + "/" + strconv.Itoa(c[1])
				// In periods: the tone's count of cycles goes with the decision rate.
				cycles, periods := c[0]*p.Circuit.Phases, c[1]
				if p.Circuit.Legs != nil && p.Circuit.Phases > 1 && 2*cycles%periods == 0 {
					continue // a multiple of half the switching frequency: the tone falls on its own image, and what is read depends on its phase
				}
				x := inject(t, p, ControlTone, 1e-6, cycles, periods, 60)
				closeTo(t, "loop gain"+at, -x.fed/x.compared, want.Loop)
				closeTo(t, "control to output"+at, x.output/x.compared, want.Control)
			}
		})
	}
}

func TestClosedLoopImpedanceAndLineAgainstInjection(t *testing.T) {
	for name, p := range every(t) {
		t.Run(name, func(t *testing.T) {
			var model loop.Sampled
			require.True(t, model.Set(&p).OK())
			rate := float64(p.Circuit.Phases) / p.Circuit.Period
			for _, c := range some([][2]int{{9, 20}, {1, 40}, {1, 10}, {3, 10}}) {
				f := float64(c[0]) / float64(c[1]) * rate
				want := model.At(f)
				at := " at " + strconv.Itoa(c[0]) + "/" + strconv.Itoa(c[1])
				cycles, periods := c[0]*p.Circuit.Phases, c[1]
				x := inject(t, p, LoadTone, 1e-5, cycles, periods, 60)
				closeTo(t, "output impedance"+at, -x.output/x.tone, want.ClosedImpedance)
				// The sidebands are a hundred times the component sought.
				x = inject(t, p, InputTone, 1e-3, cycles, periods, 240)
				closeTo(t, "line to output"+at, x.output/x.tone, want.ClosedLine)
			}
		})
	}
}
