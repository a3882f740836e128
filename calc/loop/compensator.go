package loop

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// MaxCompensatorStates is the greatest order of a compensator: three capacitors
// and the amplifier's own pole.
const MaxCompensatorStates = 4 // [1]

// Drive tells what the error amplifier's output does.
type Drive uint8

const (
	Linear      Drive = iota // follows its input
	HeldLow                  // rests at its lower limit
	HeldHigh                 // rests at its upper limit
	DriveStates = 3
)

// Network is the error amplifier with its passive parts as a linear system with
// the inputs output voltage, reference and constant:
//
//	x' = A x + B [vo, vref, 1],  vc = C x + D [vo, vref, 1]
//
// The states are capacitor voltages in the order of the parts list (feedback,
// shunt, lead), then the output of an op-amp of finite bandwidth.
// The divider's load on the output is neglected.
type Network struct {
	N         int
	A         [MaxCompensatorStates][MaxCompensatorStates]float64 // [1/s]
	B         [MaxCompensatorStates][3]float64                    // [1/s]
	C         [MaxCompensatorStates]float64                       // [1]
	D         [3]float64                                          // [1]
	FeedbackC [MaxCompensatorStates]float64                       // [1] feedback node voltage
	FeedbackD [3]float64                                          // [1]
	Push      [MaxCompensatorStates]float64                       // [any] what drives the output up, see Held
	PushD     [3]float64                                          // [any]
}

// amplifier holds one compensator's numbers while its network is built.
type amplifier struct {
	c            *parts.Compensator
	upper, lower float64 // [ohm]
	transconduct bool
	lead         bool
	feedback     feedbackKind
	slow         bool // the op-amp's output is a state
	low, high    float64
	drive        Drive
	n            int
	shunt, lead3 int // state index of the shunt and the lead capacitor
	slowAt       int
	seriesC      float64 // [F]
}

type feedbackKind uint8

const (
	oneCapacitor      feedbackKind = iota // resistor absent or zero: the capacitors are one
	resistorCapacitor                     // no shunt capacitor
	twoCapacitors
)

// Limits are the voltages between which the amplifier's output can move.
type Limits struct {
	Low, High float64 // [V]
}

// Build sets n to the network of the compensator with its divider. In a held
// drive the output rests at its limit and the capacitors move as the circuit
// makes them.
func (n *Network) Build(c *parts.Compensator, f *stage.Feedback, drive Drive, limits Limits) {
	a := describe(c, f, drive, limits)
	*n = Network{N: a.n}
	var z [MaxCompensatorStates + 3]float64
	for k := 0; k < a.n+3; k++ {
		at := k
		if k >= a.n {
			at = MaxCompensatorStates + k - a.n
		}
		z[at] = 1
		vfb, vc, current := a.solve(&z)
		var dx [MaxCompensatorStates]float64
		a.derivative(&z, vfb, vc, current, &dx)
		push := a.push(&z, vfb, vc)
		z[at] = 0
		for i := 0; i < a.n; i++ {
			if k < a.n {
				n.A[i][k] = dx[i]
			} else {
				n.B[i][k-a.n] = dx[i]
			}
		}
		if k < a.n {
			n.C[k], n.FeedbackC[k], n.Push[k] = vc, vfb, push
		} else {
			n.D[k-a.n], n.FeedbackD[k-a.n], n.PushD[k-a.n] = vc, vfb, push
		}
	}
}

func describe(c *parts.Compensator, f *stage.Feedback, drive Drive, limits Limits) amplifier {
	a := amplifier{c: c, upper: f.Upper, lower: f.Lower, drive: drive, low: limits.Low, high: limits.High}
	a.transconduct = c.Type == parts.TransconductanceType2 || c.Type == parts.TransconductanceType3
	a.lead = (c.Type == parts.OpAmpType3 || c.Type == parts.TransconductanceType3) && c.LeadF > 0
	a.slow = !a.transconduct && limited(c.GainBandwidth)
	a.seriesC = c.FeedbackF
	switch {
	case c.Type == parts.OpAmpType1:
	case !(c.FeedbackOhm > 0):
		a.seriesC += c.ShuntF
	case c.ShuntF > 0:
		a.feedback = twoCapacitors
	default:
		a.feedback = resistorCapacitor
	}
	a.n = 1
	if a.feedback == twoCapacitors {
		a.shunt = a.n
		a.n++
	}
	if a.lead {
		a.lead3 = a.n
		a.n++
	}
	if a.slow {
		a.slowAt = a.n
		a.n++
	}
	return a
}

// held returns the voltage at which the output rests.
func (a *amplifier) held() float64 {
	if a.drive == HeldLow {
		return a.low
	}
	return a.high
}

// solve returns the feedback node voltage, the output voltage and the current
// into the feedback (or load) network for states and inputs z, from the node
// equation, the amplifier and the network: three linear equations.
func (a *amplifier) solve(z *[MaxCompensatorStates + 3]float64) (vfb, vc, current float64) {
	vo, vref, one := z[MaxCompensatorStates], z[MaxCompensatorStates+1], z[MaxCompensatorStates+2]
	var m [3][4]float64 // vfb, vc, current | right side
	node, source := a.node(z, vo)
	if a.transconduct {
		m[0] = [4]float64{node, 0, 0, source}
	} else {
		m[0] = [4]float64{node, 0, 1, source}
	}
	switch {
	case a.drive != Linear:
		m[1] = [4]float64{0, 1, 0, a.held() * one}
	case a.transconduct:
		m[1] = [4]float64{a.c.Transconductance, reciprocalOf(a.c.OutputOhm), 1, a.c.Transconductance * vref}
	case a.slow:
		m[1] = [4]float64{0, 1, 0, z[a.slowAt]}
	default:
		m[1] = [4]float64{1, reciprocalOf(a.c.OpenLoopGain), 0, vref}
	}
	side, out := 1.0, -1.0 // the op-amp's network stands between feedback node and output,
	if a.transconduct {
		side, out = 0, 1 // that of a transconductance amplifier between output and ground
	}
	switch a.feedback {
	case twoCapacitors:
		m[2] = [4]float64{side, out, 0, z[a.shunt]}
	case resistorCapacitor:
		m[2] = [4]float64{side, out, -a.c.FeedbackOhm, z[0]}
	default:
		m[2] = [4]float64{side, out, 0, z[0]}
	}
	if a.transconduct && a.drive != Linear && a.feedback != resistorCapacitor {
		// The clamp carries whatever current is left over; the capacitor at the
		// output rests, which derivative sees to.
		m[2] = [4]float64{0, 0, 1, 0}
	}
	return solve3(&m)
}

// node returns conductance and source of the feedback node's equation
// node*vfb + current = source.
func (a *amplifier) node(z *[MaxCompensatorStates + 3]float64, vo float64) (node, source float64) {
	if a.lead && !(a.c.LeadOhm > 0) {
		return 1, vo - z[a.lead3] // only a transconductance amplifier comes here
	}
	node = 1/a.upper + 1/a.lower
	source = vo / a.upper
	if a.lead {
		node += 1 / a.c.LeadOhm
		source += (vo - z[a.lead3]) / a.c.LeadOhm
	}
	return node, source
}

// derivative sets dx to the rates of the capacitor voltages and of the op-amp.
func (a *amplifier) derivative(z *[MaxCompensatorStates + 3]float64, vfb, vc, current float64, dx *[MaxCompensatorStates]float64) {
	vo, vref := z[MaxCompensatorStates], z[MaxCompensatorStates+1]
	clamped := a.transconduct && a.drive != Linear
	switch a.feedback {
	case twoCapacitors:
		branch := (z[a.shunt] - z[0]) / a.c.FeedbackOhm
		dx[0] = branch / a.seriesC
		if !clamped {
			dx[a.shunt] = (current - branch) / a.c.ShuntF
		}
	case resistorCapacitor:
		dx[0] = current / a.seriesC
	default:
		if !clamped {
			dx[0] = current / a.seriesC
		}
	}
	if a.lead {
		if a.c.LeadOhm > 0 {
			dx[a.lead3] = (vo - vfb - z[a.lead3]) / (a.c.LeadOhm * a.c.LeadF)
		} else {
			dx[a.lead3] = (vfb/a.lower - (vo-vfb)/a.upper) / a.c.LeadF
		}
	}
	if a.slow && a.drive == Linear {
		dx[a.slowAt] = 2 * math.Pi * a.c.GainBandwidth * (vref - vfb - vc*reciprocalOf(a.c.OpenLoopGain))
	}
}

// push returns what would move a held output upwards: the amplifier's input
// error less what its own finite gain asks for, as a voltage (op-amp), or the
// current left over at the output node (transconductance).
func (a *amplifier) push(z *[MaxCompensatorStates + 3]float64, vfb, vc float64) float64 {
	vref := z[MaxCompensatorStates+1]
	if !a.transconduct {
		return vref - vfb - vc*reciprocalOf(a.c.OpenLoopGain)
	}
	current := a.c.Transconductance*(vref-vfb) - vc*reciprocalOf(a.c.OutputOhm)
	if a.feedback != oneCapacitor {
		current -= (vc - z[0]) / a.c.FeedbackOhm
	}
	return current
}

// limited reports whether a figure of the amplifier was given and is finite.
func limited(x float64) bool { return parts.Known(x) && !math.IsInf(x, 1) }

// reciprocalOf returns 1/x, and 0 for the ideal amplifier's infinite figure.
func reciprocalOf(x float64) float64 {
	if !limited(x) {
		return 0
	}
	return 1 / x
}

// solve3 solves three equations by Cramer's rule; the networks built here are
// never singular.
func solve3(m *[3][4]float64) (x, y, z float64) {
	det := func(a, b, c int) float64 {
		return m[0][a]*(m[1][b]*m[2][c]-m[1][c]*m[2][b]) -
			m[0][b]*(m[1][a]*m[2][c]-m[1][c]*m[2][a]) +
			m[0][c]*(m[1][a]*m[2][b]-m[1][b]*m[2][a])
	}
	d := det(0, 1, 2)
	return det(3, 1, 2) / d, det(0, 3, 2) / d, det(0, 1, 3) / d
}

// Rest returns the states of the network with the output voltage vo and the
// control voltage vc standing still and no current in any capacitor.
func Rest(c *parts.Compensator, f *stage.Feedback, vo, vc float64) [MaxCompensatorStates]float64 {
	a := describe(c, f, HeldLow, Limits{Low: vc})
	vfb := vo * f.Lower / (f.Upper + f.Lower)
	var x [MaxCompensatorStates]float64
	x[0] = vfb - vc
	if a.transconduct {
		x[0] = vc
	}
	if a.feedback == twoCapacitors {
		x[a.shunt] = x[0]
	}
	if a.lead {
		x[a.lead3] = vo - vfb
	}
	if a.slow {
		x[a.slowAt] = vc
	}
	return x
}
