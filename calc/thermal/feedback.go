package thermal

import "math"

const (
	gainSteps     = 40    // [1] the iterations converge quadratically; the bound ends a cycle of roundings
	gainTolerance = 1e-6  // [1] relative step at which Newton ends: what is left is its square, or as much where two gains agree
	nodaTolerance = 1e-12 // [1] relative width of Noda's bounds
)

// gains is the matrix R J over the nodes that heat one another.
type gains struct {
	m     int
	place [MaxNodes]int // of each of its nodes among the joined ones
	rj    matrix
}

// Feedback returns the largest gain of the loop from temperature over losses back
// to temperature, and the node that carries most of it, -1 for none.
//
//	ρ = spectral radius of R J,  R [K/W] the network, J = diag(dP/dT) [W/K]
//
// Below one an equilibrium is stable; at one and above a disturbance grows:
// runaway. A loss that falls as its part warms never runs away; its slope counts
// as zero, which leaves ρ a little high where such a part is coupled to others.
//
// With J >= 0 the eigenvalues are real (R J is similar to the symmetric √J R √J).
// The largest is found in closed form up to two coupled nodes, by Newton on the
// characteristic polynomial for three, and by Noda's iteration beyond, each from
// above.
//
// Source: perturbation of T = Tamb + R P(T). T. Noda, Numerische Mathematik 17,
// 1971 (remembered, unverified). Checked against a dense eigenvalue solver in
// TestFeedbackIsLargestEigenvalue.
func (n *Network) Feedback(slope *Vector) (ratio float64, node int) {
	node = -1
	for _, i := range n.node[:n.n] {
		if r := n.self[i] * slope[i]; r > ratio {
			ratio, node = r, int(i)
		}
	}
	if n.joined == 0 || node < 0 {
		return ratio, node
	}
	g := &n.gains
	g.gather(n, slope)
	if g.m < 2 {
		return ratio, node
	}
	var coupled float64
	switch g.m {
	case 2:
		coupled = g.largestOfTwo()
	case 3:
		coupled = g.largestOfThree()
	default:
		coupled = g.largestNoda()
	}
	return max(ratio, coupled), node
}

// Stable reports whether Feedback is below one, most often by the greatest sum of a row
// of R J, which no eigenvalue exceeds.
func (n *Network) Stable(slope *Vector) bool {
	g := &n.gains
	g.gather(n, slope)
	for a := range g.m {
		sum := 0.0
		for _, r := range g.rj[a][:g.m] {
			sum += r
		}
		if !(sum < 1) {
			ratio, _ := n.Feedback(slope)
			return ratio < 1
		}
	}
	for _, i := range n.node[n.joined:n.n] {
		if !(n.self[i]*slope[i] < 1) {
			return false
		}
	}
	return true
}

// gather fills the matrix from the coupled nodes whose loss rises with their
// temperature.
func (g *gains) gather(n *Network, slope *Vector) {
	g.m = 0
	for k, i := range n.node[:n.joined] {
		if slope[i] > 0 {
			g.place[g.m] = k
			g.m++
		}
	}
	for a, k := range g.place[:g.m] {
		row, mutual := &g.rj[a], &n.mutual[k]
		for b, l := range g.place[:g.m] {
			row[b] = mutual[l] * slope[n.node[l]]
		}
		i := n.node[k]
		row[a] = n.self[i] * slope[i]
	}
}

// largestOfTwo is the larger root of the quadratic.
func (g *gains) largestOfTwo() float64 {
	a, b := g.rj[0][0], g.rj[1][1]
	half := (a - b) / 2
	return (a+b)/2 + math.Sqrt(half*half+g.rj[0][1]*g.rj[1][0])
}

// largestOfThree runs Newton on the characteristic polynomial, whose roots are
// real: from the bound that belongs to its trace and minors (met when the two
// smaller roots are equal) it falls monotonically onto the largest.
func (g *gains) largestOfThree() float64 {
	r, s, t := &g.rj[0], &g.rj[1], &g.rj[2]
	trace := r[0] + s[1] + t[2]
	minor := s[1]*t[2] - s[2]*t[1]
	minors := r[0]*s[1] - r[1]*s[0] + r[0]*t[2] - r[2]*t[0] + minor
	det := r[0]*minor - r[1]*(s[0]*t[2]-s[2]*t[0]) + r[2]*(s[0]*t[1]-s[1]*t[0])
	x := (trace + 2*math.Sqrt(max(0, trace*trace-3*minors))) / 3
	for range gainSteps {
		p := ((x-trace)*x+minors)*x - det
		slope := (3*x-2*trace)*x + minors
		if !(slope > 0) {
			break
		}
		step := p / slope
		x -= step
		if !(step > gainTolerance*x) {
			break
		}
	}
	return x
}

// largestNoda runs Noda's iteration for non-negative matrices: with the bound
// μ = max (R J x)i/xi it solves (μ − R J) y = x, y towards the positive eigenvector.
func (g *gains) largestNoda() float64 {
	m := g.m
	var x [MaxNodes]float64
	for i := range m {
		x[i] = 1
	}
	bound := math.Inf(1)
	for range gainSteps {
		mu, low := 0.0, math.Inf(1)
		for i := range m {
			sum := 0.0
			for j := range m {
				sum += g.rj[i][j] * x[j]
			}
			mu, low = max(mu, sum/x[i]), min(low, sum/x[i])
		}
		if !(mu < bound) {
			break
		}
		bound = mu
		if mu-low <= nodaTolerance*mu || !g.solveShifted(mu*(1+nodaTolerance), &x) {
			break
		}
	}
	return bound
}

// solveShifted replaces x by (shift − R J)⁻¹ x, normed to a sum of m. For a shift
// above the largest eigenvalue the matrix is an M-matrix: elimination needs no
// pivoting. It reports false when the shift is not above.
func (g *gains) solveShifted(shift float64, x *[MaxNodes]float64) bool {
	m := g.m
	var a matrix
	for i := range m {
		for j := range m {
			a[i][j] = -g.rj[i][j]
		}
		a[i][i] += shift
	}
	for k := range m {
		if !(a[k][k] > 0) {
			return false
		}
		for i := k + 1; i < m; i++ {
			f := a[i][k] / a[k][k]
			for j := k; j < m; j++ {
				a[i][j] -= f * a[k][j]
			}
			x[i] -= f * x[k]
		}
	}
	sum := 0.0
	for k := m - 1; k >= 0; k-- {
		for j := k + 1; j < m; j++ {
			x[k] -= a[k][j] * x[j]
		}
		x[k] /= a[k][k]
		sum += x[k]
	}
	for i := range m {
		x[i] = max(x[i]*float64(m)/sum, 1e-12)
	}
	return true
}
