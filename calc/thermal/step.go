package thermal

import "math"

// State tells what a step found.
type State uint8

const (
	Stepped State = iota // a Newton step was taken
	Climbed              // the gain is one or more here: walked up to look for an equilibrium further on
	Runaway              // none below CeilingDegC
)

const (
	// CeilingDegC is where the search for an equilibrium ends: near the melting
	// point of copper no part is one any more. Tables go on with their last slope
	// up to there.
	CeilingDegC = 1000.0 // [degC]
	// Climb is the step upwards [K] where Newton's direction is of no use; losses
	// of real parts do not bend back within less.
	Climb = 25.0 // [K]
	// sweeps of the coupled Newton equation; each reduces the error by the share
	// of mutual heating, and the next outer step corrects what is left.
	sweeps         = 4
	sweepTolerance = 1e-6 // [K] far below the thousandth of a kelvin that is asked for
)

// Step moves temperatures towards the equilibrium by one Newton step, given the
// powers [W] and their slopes over the own temperature [W/K] at the present
// temperatures [degC]. It returns the largest change [K].
//
//	(1 − Rii Ji) δi = gi + Σj≠i Rij Jj δj,  gi = Tamb + Σj Rij Pj − Ti
//
// Start at or below the equilibrium, ambient for instance. While losses grow
// faster than linearly with temperature, Newton then rises monotonically to the
// lowest equilibrium, which is the one that a stage warming from cold reaches.
// Where the local gain reaches one with power left over, the step climbs by a
// fixed amount instead: an equilibrium further up, where a loss curve flattens,
// is still found, and Runaway is returned above CeilingDegC only.
//
// The change is that of the inexact Newton step. A converged answer is checked by
// the caller with Residual.
func (n *Network) Step(ambientDegC float64, power, slope, degC *Vector) (change float64, state State) {
	var g, delta, target Vector
	n.Temperatures(ambientDegC, power, &target)
	climbs := false
	for _, i := range n.node[:n.n] {
		g[i] = target[i] - degC[i]
		d := 1 - n.self[i]*slope[i]
		if !(d > 0) && g[i] > 0 {
			climbs = true
			break
		}
		delta[i] = g[i] / d
	}
	if !climbs && n.couplings > 0 {
		climbs = !n.sweep(&g, slope, &delta)
	}
	if climbs {
		return n.climb(&g, slope, degC)
	}
	for _, i := range n.node[:n.n] {
		t := degC[i] + delta[i]
		change = max(change, math.Abs(delta[i]))
		degC[i] = t
		if !(t <= CeilingDegC) {
			state = Runaway
		}
	}
	return change, state
}

// sweep refines delta for the couplings; false if the coupled gain is one or more.
func (n *Network) sweep(g, slope, delta *Vector) bool {
	last := math.Inf(1)
	for range sweeps {
		next := *g
		for k := range n.coupling[:n.couplings] {
			c := &n.coupling[k]
			next[c.A] += c.OntoA * slope[c.B] * delta[c.B]
			next[c.B] += c.OntoB * slope[c.A] * delta[c.A]
		}
		moved := 0.0
		for _, i := range n.node[:n.n] {
			next[i] /= 1 - n.self[i]*slope[i]
			moved = max(moved, math.Abs(next[i]-delta[i]))
		}
		*delta = next
		if moved <= sweepTolerance {
			break
		}
		if !(moved < last) {
			return false
		}
		last = moved
	}
	return true
}

func (n *Network) climb(g, slope, degC *Vector) (change float64, state State) {
	for _, i := range n.node[:n.n] {
		if g[i] > 0 && slope[i] > 0 {
			degC[i] += Climb
			change = Climb
		}
		if !(degC[i] <= CeilingDegC) {
			state = Runaway
		}
	}
	if state == Runaway {
		return change, state
	}
	return change, Climbed
}

// Residual returns the largest |T(P) − T| [K] over the nodes.
func (n *Network) Residual(ambientDegC float64, power, degC *Vector) float64 {
	var target Vector
	n.Temperatures(ambientDegC, power, &target)
	worst := 0.0
	for _, i := range n.node[:n.n] {
		d := math.Abs(target[i] - degC[i])
		if !(d <= worst) { // keeps a NaN
			worst = d
		}
	}
	return worst
}
