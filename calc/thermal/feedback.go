package thermal

import "math"

const (
	gainSteps     = 40    // [1] the iterations converge quadratically; the bound ends a cycle of roundings
	gainTolerance = 1e-12 // [1] relative
)

// gains is the symmetric matrix √J R √J over the nodes that heat one another.
type gains struct {
	m    int
	node [MaxNodes]uint8
	at   [MaxNodes]int8 // place of a node in the matrix, -1 for none
	root [MaxNodes]float64
	s    [MaxNodes][MaxNodes]float64
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
// With J >= 0, R J has the eigenvalues of the symmetric √J R √J. Its largest is
// found in closed form up to two coupled nodes, by Newton on the characteristic
// polynomial for three, and by Noda's iteration beyond, each from above.
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
	if n.couplings == 0 || node < 0 {
		return ratio, node
	}
	g := &n.gain
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

// gather fills the matrix from the coupled nodes whose loss rises.
func (g *gains) gather(n *Network, slope *Vector) {
	g.m = 0
	for _, i := range n.join[:n.joined] {
		g.at[i] = -1
		if slope[i] > 0 {
			g.at[i] = int8(g.m)
			g.node[g.m] = i
			g.root[g.m] = math.Sqrt(slope[i])
			g.m++
		}
	}
	for a := range g.m {
		for b := range g.m {
			g.s[a][b] = 0
		}
		i := g.node[a]
		g.s[a][a] = n.self[i] * slope[i]
	}
	for k := range n.coupling[:n.couplings] {
		c := &n.coupling[k]
		a, b := g.at[c.A], g.at[c.B]
		if a >= 0 && b >= 0 {
			// The geometric mean serves a coupling of unequal counts.
			r := c.OntoA
			if c.OntoA != c.OntoB {
				r = math.Sqrt(c.OntoA * c.OntoB)
			}
			r *= g.root[a] * g.root[b]
			g.s[a][b] += r
			g.s[b][a] += r
		}
	}
}

// largestOfTwo is the larger root of the quadratic.
func (g *gains) largestOfTwo() float64 {
	a, b, c := g.s[0][0], g.s[1][1], g.s[0][1]
	half := (a - b) / 2
	return (a+b)/2 + math.Sqrt(half*half+c*c)
}

// largestOfThree runs Newton down from a bound on the characteristic polynomial,
// whose roots are real: the iteration falls monotonically onto the largest.
func (g *gains) largestOfThree() float64 {
	a, b, c := g.s[0][0], g.s[1][1], g.s[2][2]
	d, e, f := g.s[0][1], g.s[0][2], g.s[1][2]
	trace := a + b + c
	minors := a*b + a*c + b*c - d*d - e*e - f*f
	det := a*(b*c-f*f) - d*(d*c-e*f) + e*(d*f-b*e)
	x := max(a+d+e, b+d+f, c+e+f)
	for range gainSteps {
		p := ((x-trace)*x+minors)*x - det
		dp := (3*x-2*trace)*x + minors
		if !(dp > 0) {
			break
		}
		next := x - p/dp
		if !(next < x*(1-gainTolerance)) {
			break
		}
		x = next
	}
	return x
}

// largestNoda runs Noda's iteration for non-negative matrices: with the bound
// μ = max (S x)i/xi it solves (μ − S) y = x, y towards the positive eigenvector.
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
				sum += g.s[i][j] * x[j]
			}
			mu, low = max(mu, sum/x[i]), min(low, sum/x[i])
		}
		if !(mu < bound) {
			break
		}
		bound = mu
		if mu-low <= gainTolerance*mu || !g.solveShifted(mu*(1+gainTolerance), &x) {
			break
		}
	}
	return bound
}

// solveShifted replaces x by (shift − S)⁻¹ x, normed to a sum of m. For a shift
// above the largest eigenvalue the matrix is an M-matrix: elimination needs no
// pivoting. It reports false when the shift is not above.
func (g *gains) solveShifted(shift float64, x *[MaxNodes]float64) bool {
	m := g.m
	var a [MaxNodes][MaxNodes]float64
	for i := range m {
		for j := range m {
			a[i][j] = -g.s[i][j]
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
