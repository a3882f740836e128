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
	n.shortfall(ambientDegC, power, degC)
	if !n.factor(slope) {
		return n.climb(slope, degC)
	}
	return n.move(degC)
}

// Refine is Step with the slopes of the last one, for temperatures that have moved
// little since: a step of a fifth of the effort, which leaves of the distance what the
// gains have changed. The last Step must not have climbed.
func (n *Network) Refine(ambientDegC float64, power, degC *Vector) (change float64, state State) {
	n.shortfall(ambientDegC, power, degC)
	return n.move(degC)
}

// shortfall writes by how much each node is below what the powers heat it to [K].
func (n *Network) shortfall(ambientDegC float64, power, degC *Vector) {
	nodes, lack, p := n.node[:n.n], n.lack[:n.n], n.power[:n.n]
	for k, i := range nodes {
		p[k] = power[i]
		lack[k] = ambientDegC + n.self[i]*p[k] - degC[i]
	}
	p = p[:n.joined]
	for k := range p {
		sum, mutual := lack[k], n.mutual[k][:len(p)]
		for l, w := range p {
			sum += mutual[l] * w
		}
		lack[k] = sum
	}
}

// factor eliminates 1 − R J and reports whether its gains are below one.
//
// Elimination without exchange of rows does both. The leading minors of 1 − R J
// are those of the network as its nodes get their slopes one after the other. Each
// slope moves at most one gain through one, and the sign of the minor with it; so
// as long as every pivot is positive all gains are below one, and with rising
// losses only, one that is not means a gain of one or more. A falling loss that
// just holds a part whose own gain reaches one is not given credit.
func (n *Network) factor(slope *Vector) bool {
	for k, i := range n.node[:n.n] {
		d := 1 - n.self[i]*slope[i]
		if !(d > 0) {
			return false
		}
		if k >= n.joined && d != 1 {
			d = 1 / d
		}
		n.inverse[k] = d // of the joined ones it is not used
	}
	m := n.joined
	for k, i := range n.node[:m] {
		row, mutual := &n.coupled[k], &n.mutual[k]
		for l, j := range n.node[:m] {
			row[l] = mutual[l] * slope[j] // of −R J, both signs left out
		}
		row[k] = n.self[i] * slope[i]
	}
	for k := range m {
		row := &n.coupled[k]
		pivot := 1 - row[k]
		if !(pivot > 0) {
			return false
		}
		row[k] = 1 / pivot
		for j := k + 1; j < m; j++ {
			below := &n.coupled[j]
			f := below[k] * row[k]
			below[k] = f
			if f == 0 {
				continue
			}
			for l := k + 1; l < m; l++ {
				below[l] += f * row[l]
			}
		}
	}
	return true
}

// move changes every temperature by the solution of the factored equation.
func (n *Network) move(degC *Vector) (change float64, state State) {
	x := n.lack[:n.n]
	for k := n.joined; k < len(x); k++ {
		x[k] *= n.inverse[k]
	}
	joined := x[:n.joined]
	for k := range joined {
		sum, row := joined[k], &n.coupled[k]
		for l, y := range joined[:k] {
			sum += row[l] * y
		}
		joined[k] = sum
	}
	for k := len(joined) - 1; k >= 0; k-- {
		sum, row := joined[k], n.coupled[k][:len(joined)]
		for l := k + 1; l < len(joined); l++ {
			sum += row[l] * joined[l]
		}
		joined[k] = sum * row[k]
	}
	for k, i := range n.node[:n.n] {
		d := x[k]
		size := math.Abs(d)
		if size > Reach {
			d, size = math.Copysign(Reach, d), Reach
		}
		degC[i] += d
		if size > change {
			change = size
		}
		if !(degC[i] <= CeilingDegC) {
			state = Runaway
		}
	}
	return change, state
}

// climb moves every part by what it is short of, and at least by Climb where the
// loss rises.
func (n *Network) climb(slope, degC *Vector) (change float64, state State) {
	state = Climbed
	for k, i := range n.node[:n.n] {
		up := n.lack[k]
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
