package thermal

import "math"

const (
	feedbackSteps     = 60   // [1] power iteration; each step gains a factor of the ratio of the two largest gains
	feedbackTolerance = 1e-9 // [1] relative, far below any use of the figure
)

// Feedback returns the largest gain of the loop from temperature over losses back
// to temperature, and the node that carries most of it.
//
//	ρ = largest eigenvalue of R J,  R [K/W] the network, J = diag(dP/dT) [W/K]
//
// Below one an equilibrium is stable; at one and above a disturbance grows:
// runaway. R is symmetric and J diagonal, so the eigenvalues are real; where all
// slopes are positive ρ is the spectral radius. A negative gain (a loss that
// falls as its part warms) does not run away however large it is, and counts as
// zero.
//
// Source: perturbation of T = Tamb + R P(T); power iteration. Checked against a
// dense eigenvalue solver in TestFeedbackIsLargestEigenvalue.
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
	return n.powerIteration(slope, ratio)
}

// powerIteration finds the largest eigenvalue of R J + shift, where the shift
// makes every eigenvalue positive, by the Rayleigh quotient of the vector that
// R J leaves in direction.
func (n *Network) powerIteration(slope *Vector, guess float64) (ratio float64, node int) {
	shift := 0.0
	for _, i := range n.node[:n.n] {
		shift = max(shift, -n.self[i]*slope[i])
	}
	var x Vector
	for _, i := range n.node[:n.n] {
		if slope[i] > 0 {
			x[i] = n.self[i]
		}
	}
	ratio = guess
	for range feedbackSteps {
		y := x
		for _, i := range n.node[:n.n] {
			y[i] = (n.self[i]*slope[i] + shift) * x[i]
		}
		for k := range n.coupling[:n.couplings] {
			c := &n.coupling[k]
			y[c.A] += c.OntoA * slope[c.B] * x[c.B]
			y[c.B] += c.OntoB * slope[c.A] * x[c.A]
		}
		// Weighted by the slopes, R J is symmetric: this quotient errs by the
		// square of the direction's error.
		num, den, big := 0.0, 0.0, 0.0
		node = -1
		for _, i := range n.node[:n.n] {
			w := math.Abs(slope[i])
			num += w * x[i] * y[i]
			den += w * x[i] * x[i]
			if a := math.Abs(y[i]); a > big {
				big, node = a, int(i)
			}
		}
		next := num/den - shift
		for _, i := range n.node[:n.n] {
			x[i] = y[i] / big
		}
		done := math.Abs(next-ratio) <= feedbackTolerance*math.Abs(next)
		ratio = next
		if done {
			break
		}
	}
	return max(ratio, 0), node
}

// LinearEquilibrium returns the temperature [degC] at which one part settles whose
// loss is linear in temperature, in closed form.
//
//	P = Pc + P25 [1 + a (T − 25 °C)],  T = Tamb + Rth P
//	T = [Tamb + Rth (Pc + P25 (1 − 25 a))]/(1 − Rth P25 a)
//
//	rth  [K/W] junction to ambient
//	pc   [W]   loss that does not depend on temperature
//	p25  [W]   resistive loss with the resistance at 25 °C
//	a    [1/K] slope of the resistance
//
// ok is false for a gain Rth P25 a of one or more: no equilibrium.
//
// Derived; power-stage case ps-th-08.
func LinearEquilibrium(ambientDegC, rth, pc, p25, a float64) (degC float64, ok bool) {
	gain := rth * p25 * a
	if !(gain < 1) {
		return math.Inf(1), false
	}
	return (ambientDegC + rth*(pc+p25*(1-25*a))) / (1 - gain), true
}
