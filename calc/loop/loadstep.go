package loop

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// LinearResponse is the response of the averaged closed loop to a load step, with
// a duty ratio that knows no limits.
type LinearResponse struct {
	Peak   float64 // [V] greatest deviation of the mean output, against the step's direction
	PeakAt float64 // [s]
	Back   float64 // [V] greatest deviation to the other side
	BackAt float64 // [s]
}

// LinearStep is the averaged closed loop of a plant in continuous conduction as
// one linear system with the load current's deviation as its input.
type LinearStep struct {
	system statespace.System
	output statespace.Functional
	duty   statespace.Functional
	n      int
}

// Set prepares the averaged closed loop. It reports false in discontinuous
// conduction and for unequal phases, for which there is none.
//
// The bridge is replaced by its mean, L di/dt = D vin + Ve d - R i - vo, and the
// duty ratio by the modulator's gain times control voltage, current and output;
// the sampling of a current loop and the comparator's delay are left out.
func (l *LinearStep) Set(p *Plant) bool {
	if p.Mode == switched.Discontinuous || p.Circuit.Legs != nil {
		return false
	}
	var a Averaged
	a.Set(p)
	one := &a.limb[0]
	// One phase stands for all: L/N, R/N and N times the current.
	n := float64(p.Circuit.Phases)
	plant := *p
	plant.Source = Source{}
	c := &plant.Circuit
	c.Phases = 1
	c.Leg = switched.Leg{L: one.leg.L / n, Winding: one.r / n}
	var j Joint
	j.Set(&plant, Limits{})
	legs := Legs{Low}
	j.Assemble(&l.system, &legs, Linear)
	l.n, l.output = j.N, j.Output

	control := j.Control(Linear)
	gain, sense, output := 1/(p.RampSlope()*c.Period), 0.0, 0.0
	if p.Modulator.Mode == parts.PeakCurrentMode {
		gain, sense, output = one.mode.fm, one.mode.sense/n, one.mode.kr
	}
	for i := range l.duty {
		l.duty[i] = gain * (control[i] + output*j.Output[i])
	}
	l.duty[0] -= gain * sense
	row := l.system.Row(0)
	addTo(row, &l.duty, one.swing/c.Leg.L)
	return true
}

// Run returns the response to a step of the load by change [A], followed for the
// time span [s] in the given number of exact steps, and false for a system too
// stiff for them.
func (l *LinearStep) Run(change, span float64, steps int) (LinearResponse, bool) {
	ladder, ok := statespace.NewLadder(&l.system, span/float64(steps))
	if !ok {
		return LinearResponse{}, false
	}
	var z statespace.Point
	z[l.n+InputLoad] = change
	w := l.n + Inputs
	sign := math.Copysign(1, -change) // a rise of the load pulls the output down
	first := sign * l.output.At(&z, w)
	r := LinearResponse{Peak: max(0, first), Back: max(0, -first)}
	slope := l.slope()
	last := slope.At(&z, w)
	for k := range steps {
		start := z
		var next statespace.Point
		ladder.Whole(&next, &z)
		z = next
		is := slope.At(&z, w)
		if last*is < 0 {
			event := statespace.Event{Output: slope}
			if last > 0 {
				for i := range event.Output {
					event.Output[i] = -event.Output[i]
				}
			}
			at := float64(k)*ladder.Step + ladder.Cross(&event, &start, ladder.Step)
			v := sign * l.output.At(&start, w)
			if v > r.Peak {
				r.Peak, r.PeakAt = v, at
			}
			if -v > r.Back {
				r.Back, r.BackAt = -v, at
			}
		}
		last = is
	}
	return r, true
}

// slope returns the functional of the output's rate of change.
func (l *LinearStep) slope() statespace.Functional {
	var f statespace.Functional
	for i := range l.n {
		for k, a := range l.system.Row(i) {
			f[k] += l.output[i] * a
		}
	}
	return f
}
