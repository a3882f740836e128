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
	// Couplings enter a step by sweeps. Each shrinks the error by the share of
	// mutual heating, a few per cent as a rule; the next step corrects what is left.
	sweepLimit     = 60
	sweepTolerance = 1e-5 // [1] of the largest change
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
// A converged answer is checked by the caller with Residual.
func (n *Network) Step(ambientDegC float64, power, slope, degC *Vector) (change float64, state State) {
	n.Temperatures(ambientDegC, power, &n.lack)
	stable := true
	for _, i := range n.node[:n.n] {
		n.lack[i] -= degC[i]
		n.inverse[i] = 1
		if slope[i] != 0 {
			d := 1 - n.self[i]*slope[i]
			stable = stable && (d > 0 || !(n.lack[i] > 0))
			n.inverse[i] = 1 / d
		}
		n.delta[i] = n.lack[i] * n.inverse[i]
	}
	if stable && n.couplings > 0 {
		stable = n.sweep(slope)
	}
	if !stable {
		return n.climb(slope, degC)
	}
	for _, i := range n.node[:n.n] {
		degC[i] += n.delta[i]
		change = max(change, math.Abs(n.delta[i]))
		if !(degC[i] <= CeilingDegC) {
			state = Runaway
		}
	}
	return change, state
}

// sweep refines delta for the couplings. It reports whether that converges, which
// it does exactly if the gain of the coupled parts is below one.
func (n *Network) sweep(slope *Vector) bool {
	last := math.Inf(1)
	for range sweepLimit {
		for _, i := range n.join[:n.joined] {
			n.next[i] = n.lack[i]
		}
		for k := range n.coupling[:n.couplings] {
			c := &n.coupling[k]
			n.next[c.A] += c.OntoA * slope[c.B] * n.delta[c.B]
			n.next[c.B] += c.OntoB * slope[c.A] * n.delta[c.A]
		}
		moved, largest := 0.0, 0.0
		for _, i := range n.join[:n.joined] {
			d := n.next[i] * n.inverse[i]
			moved = max(moved, math.Abs(d-n.delta[i]))
			largest = max(largest, math.Abs(d))
			n.delta[i] = d
		}
		if moved <= sweepTolerance*largest {
			return true
		}
		if !(moved < last) {
			return false
		}
		last = moved
	}
	return true
}

// climb raises every part that is short of its temperature.
func (n *Network) climb(slope, degC *Vector) (change float64, state State) {
	state = Climbed
	for _, i := range n.node[:n.n] {
		if !(n.lack[i] > 0) {
			continue
		}
		up := n.lack[i]
		if slope[i] > 0 {
			up = max(up, Climb)
		}
		degC[i] += up
		change = max(change, up)
		if !(degC[i] <= CeilingDegC) {
			state = Runaway
		}
	}
	return change, state
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
