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
	// Reach is the longest step [K] of a node: beyond it the slope at hand says
	// nothing, and a loss curve that flattens must not be passed by.
	Reach = 100.0 // [K]
	// Mutual heating is a small share of own heating as a rule: few sweeps solve
	// the coupled equation to a thousandth of the step, and the next step, smaller
	// by far, corrects what is left. Where they do not, elimination does.
	sweepLimit     = 5
	sweepTolerance = 1e-3 // [1] of the largest change
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
			stable = stable && d > 0
			n.inverse[i] = 1 / d
		}
		n.delta[i] = n.lack[i] * n.inverse[i]
	}
	if stable && n.couplings > 0 && !n.sweep(slope) {
		stable = n.eliminate(slope)
	}
	if !stable {
		return n.climb(slope, degC)
	}
	for _, i := range n.node[:n.n] {
		d := min(max(n.delta[i], -Reach), Reach)
		degC[i] += d
		change = max(change, math.Abs(d))
		if !(degC[i] <= CeilingDegC) {
			state = Runaway
		}
	}
	return change, state
}

// sweep refines delta of the coupled nodes by Jacobi's iteration and reports
// whether it has converged.
func (n *Network) sweep(slope *Vector) bool {
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
	}
	return false
}

// eliminate replaces delta of the coupled nodes by the solution of the whole
// equation, and reports whether the gain of the coupled nodes is below one.
//
// Elimination without exchange of rows does both. The leading minors of 1 − R J
// are those of the network as its nodes get their slopes one after the other. Each
// slope moves at most one gain through one, and the sign of the minor with it; so
// as long as every pivot is positive all gains are below one, and with rising
// losses only, one that is not means a gain of one or more. A falling loss that
// just holds a part whose own gain reaches one is not given credit.
func (n *Network) eliminate(slope *Vector) bool {
	a := &n.coupled
	a.gather(n, slope, false)
	m := a.m
	for k, i := range a.node[:m] {
		a.x[k] = n.lack[i]
	}
	for k := range m {
		row := &a.rj[k]
		pivot := 1 - row[k]
		if !(pivot > 0) {
			return false
		}
		inverse := 1 / pivot
		for j := k + 1; j < m; j++ {
			below := &a.rj[j]
			f := below[k] * inverse // both carry the sign of −R J
			if f == 0 {
				continue
			}
			for l := k + 1; l < m; l++ {
				below[l] += f * row[l]
			}
			a.x[j] += f * a.x[k]
		}
		row[k] = inverse
	}
	for k := m - 1; k >= 0; k-- {
		row := &a.rj[k]
		sum := a.x[k]
		for j := k + 1; j < m; j++ {
			sum += row[j] * a.x[j]
		}
		a.x[k] = sum * row[k]
		n.delta[a.node[k]] = a.x[k]
	}
	n.heatOthers(slope)
	return true
}

// heatOthers finds delta of the coupled nodes whose own loss is constant.
func (n *Network) heatOthers(slope *Vector) {
	for _, i := range n.join[:n.joined] {
		if slope[i] == 0 {
			n.delta[i] = n.lack[i]
		}
	}
	for k := range n.coupling[:n.couplings] {
		c := &n.coupling[k]
		if slope[c.A] == 0 {
			n.delta[c.A] += c.OntoA * slope[c.B] * n.delta[c.B]
		}
		if slope[c.B] == 0 {
			n.delta[c.B] += c.OntoB * slope[c.A] * n.delta[c.A]
		}
	}
}

// climb moves every part by what it is short of, and at least by Climb where the
// loss rises.
func (n *Network) climb(slope, degC *Vector) (change float64, state State) {
	state = Climbed
	for _, i := range n.node[:n.n] {
		up := n.lack[i]
		if up > 0 && slope[i] > 0 {
			up = max(up, Climb)
		}
		degC[i] += up
		change = max(change, math.Abs(up))
		if !(degC[i] <= CeilingDegC) {
			state = Runaway
		}
	}
	return change, state
}

// Settled reports whether every node lies within a distance [K] of the
// equilibrium that the losses and their slopes at the present temperatures point
// to.
//
//	|T − Teq| ≤ max |T(P) − T| / (1 − ‖R J‖∞)
//
// It costs less than a step and is false where the gain is too large to tell.
func (n *Network) Settled(ambientDegC float64, power, slope, degC *Vector, within float64) bool {
	n.Temperatures(ambientDegC, power, &n.lack)
	for _, i := range n.node[:n.n] {
		n.next[i] = n.self[i] * math.Abs(slope[i])
	}
	for k := range n.coupling[:n.couplings] {
		c := &n.coupling[k]
		n.next[c.A] += c.OntoA * math.Abs(slope[c.B])
		n.next[c.B] += c.OntoB * math.Abs(slope[c.A])
	}
	lack, gain := 0.0, 0.0
	for _, i := range n.node[:n.n] {
		lack = max(lack, math.Abs(n.lack[i]-degC[i]))
		gain = max(gain, n.next[i])
	}
	return lack <= within*(1-gain)
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
