package transient

import (
	"math"
	"math/cmplx"
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

// inject runs the closed loop with a tone of cycles in periods, waits until it has
// settled, and correlates. Between two decisions the output is read often enough
// for its aliases to vanish.
func inject(t *testing.T, p loop.Plant, kind EventKind, amplitude float64, cycles, periods, perPeriod int) injected {
	t.Helper()
	const before = 2e-10 // [s] the state is read just before the decision, whose instant the tone moves by less
	c := &p.Circuit
	frequency := float64(cycles) / (float64(periods) * c.Period)
	settle := periods * int(math.Ceil(600/float64(periods)))
	total := settle + periods
	s := Setup{
		Plant: p, Bounds: Bounds{MaxDuty: 1, ControlLow: -1e3, ControlHigh: 1e3}, Duration: float64(total+2) * c.Period,
		Saturation: parts.Unknown, Events: []Event{{Kind: kind, Change: amplitude, Frequency: frequency}},
	}
	e, err := New(&s)
	require.NoError(t, err)
	require.Equal(t, Running, e.status)
	decide := p.Duty*c.Period - p.Modulator.Delay
	e.advance(float64(settle)*c.Period + decide - before)

	var x injected
	origin := float64(settle)*c.Period + decide
	w := 2 * math.Pi * frequency
	decisions := periods * c.Phases
	control := &e.control[loop.Linear]
	meanOut, meanControl := 0.0, 0.0
	outputs := make([]float64, 0, perPeriod*decisions)
	controls, tones := make([]float64, 0, decisions), make([]float64, 0, decisions)
	for n := range decisions {
		controls = append(controls, control.At(&e.now.z, e.width))
		tones = append(tones, e.now.z[e.joint.Tone])
		for k := range perPeriod {
			outputs = append(outputs, e.joint.Output.At(&e.now.z, e.width))
			e.advance(origin - before + (float64(n)+float64(k+1)/float64(perPeriod))*c.Period/float64(c.Phases))
		}
	}
	require.Equal(t, Running, e.status)
	for _, v := range outputs {
		meanOut += v / float64(len(outputs))
	}
	for _, v := range controls {
		meanControl += v / float64(len(controls))
	}
	step := c.Period / float64(c.Phases)
	for n := range decisions {
		turn := cmplx.Exp(complex(0, -w*step*float64(n))) * complex(2/float64(decisions), 0)
		x.fed += complex(controls[n]-meanControl, 0) * turn
		x.tone += complex(tones[n], 0) * turn
	}
	for i, v := range outputs {
		at := step*float64(i)/float64(perPeriod) - before
		x.output += complex(v-meanOut, 0) * cmplx.Exp(complex(0, -w*at)) * complex(2/float64(len(outputs)), 0)
	}
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

func TestSampledModelAgainstInjection(t *testing.T) {
	for name, p := range stages(t) {
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
				x := inject(t, p, ControlTone, 1e-6, cycles, periods, 60)
				closeTo(t, "loop gain"+at, -x.fed/x.compared, want.Loop)
				closeTo(t, "control to output"+at, x.output/x.compared, want.Control)
			}
		})
	}
}

func TestClosedLoopImpedanceAndLineAgainstInjection(t *testing.T) {
	for name, p := range stages(t) {
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
