package switched

import "math"

const (
	planeReach = 0.5 // greatest |A| t/2 for the series of plane
	planeShort = 9   // order of the series for |A| t/2 ≤ 0.08
	planeOrder = 16  // for planeReach; 0.5^15/16! = 1e-18
)

// plane is one interval of the circuit with one phase and one bank, a system in
// the plane: deviation ι of the current, ν of the bank voltage. With h half of
// the interval's length, X = A h and
//
//	A = | −(R+αr)/L  −α/L  |     r = ESR, α = 1/(1 + r G)
//	    |  α/C       −αG/C |
//
// By Cayley and Hamilton, X² = tr X − det, every power series in X is
// p_0 + p_1 X with two numbers, which is the closed form for 2x2. For |X| ≤ 1/2
// the series are shorter than exp, sin and sinh, free of cancellation, and
// indifferent to whether the eigenvalues are real, equal or complex; beyond,
// the general solver takes over.
type plane struct {
	h                  float64 // [s] half of the length
	x11, x12, x21, x22 float64 // X
	bh                 float64 // h times the rate of the current at the reference
	order              int
	half, full         affine // map over the first half, over the whole
	i0, v0             float64
	i1, v1             float64
	ci, cv             [planeOrder + 1]float64 // Taylor about the middle, argument −1 to 1
}

// affine maps (ι, ν) to (ι, ν) + F (ι, ν) + d.
type affine struct{ f11, f12, f21, f22, d1, d2 float64 }

// set prepares the maps of the interval of length t, path resistance r and
// driving voltage u at the reference.
func (pl *plane) set(ob *oneBank, t, r, u float64) bool {
	h := 0.5 * t
	hl := h * ob.invL
	pl.h = h
	pl.x11 = -(r + ob.rho) * hl
	pl.x12 = -ob.alpha * hl
	pl.x21 = ob.inject * h
	pl.x22 = -ob.conductance * pl.x21
	pl.bh = u * hl
	cross := pl.x12 * pl.x21
	size := math.Max(-pl.x11, -pl.x22)
	size2 := size*size - cross
	switch {
	case size2 <= 0.08*0.08/2:
		pl.order = planeShort
	case size2 <= planeReach*planeReach/2:
		pl.order = planeOrder
	default:
		return false
	}
	tr := pl.x11 + pl.x22
	det := pl.x11*pl.x22 - cross
	// φ1(X) = 1 + X/2 (1 + X/3 (1 + ...)) = a + b X
	a, b := 1.0, 0.0
	for k := pl.order; k >= 2; k-- {
		q := inverse[k]
		a, b = 1-b*det*q, (a+b*tr)*q
	}
	// exp(X) − 1 = X φ1 = fa + fb X, its square, and (2 + exp(X) − 1) φ1 = 2 φ1(2X)
	fa, fb := -b*det, a+b*tr
	ga, gb := 2*fa+fa*fa-fb*fb*det, 2*fb+2*fa*fb+fb*fb*tr
	ea, eb := 2+fa, fb
	da, db := ea*a-eb*b*det, ea*b+eb*a+eb*b*tr
	bh := pl.bh
	pl.half = affine{fa + fb*pl.x11, fb * pl.x12, fb * pl.x21, fa + fb*pl.x22, (a + b*pl.x11) * bh, b * pl.x21 * bh}
	pl.full = affine{ga + gb*pl.x11, gb * pl.x12, gb * pl.x21, ga + gb*pl.x22, (da + db*pl.x11) * bh, db * pl.x21 * bh}
	return true
}

// start sets the state at the beginning and the one at the end.
func (pl *plane) start(i, v float64) {
	f := &pl.full
	pl.i0, pl.v0 = i, v
	pl.i1 = i + (f.f11*i + f.f12*v + f.d1)
	pl.v1 = v + (f.f21*i + f.f22*v + f.d2)
}

// expand fills the Taylor series about the middle.
func (pl *plane) expand() {
	f := &pl.half
	i := pl.i0 + (f.f11*pl.i0 + f.f12*pl.v0 + f.d1)
	v := pl.v0 + (f.f21*pl.i0 + f.f22*pl.v0 + f.d2)
	pl.ci[0], pl.cv[0] = i, v
	i, v = pl.x11*i+pl.x12*v+pl.bh, pl.x21*i+pl.x22*v
	pl.ci[1], pl.cv[1] = i, v
	for k := 2; k <= pl.order; k++ {
		q := inverse[k]
		i, v = (pl.x11*i+pl.x12*v)*q, (pl.x21*i+pl.x22*v)*q
		pl.ci[k], pl.cv[k] = i, v
	}
}

// legendreSeries is the expansion of a function over an interval in Legendre
// polynomials, up to the order that matters in the mean of its square.
type legendreSeries [8]float64

// project turns a Taylor series about the middle into Legendre's: the first
// entry is the mean.
func project(c *[planeOrder + 1]float64, order int, l *legendreSeries) {
	l[0] = c[0] + c[2]/3 + c[4]/5 + c[6]/7 + c[8]/9
	l[1] = c[1] + c[3]*(3./5) + c[5]*(3./7) + c[7]*(1./3) + c[9]*(3./11)
	l[2] = c[2]*(2./3) + c[4]*(4./7) + c[6]*(10./21) + c[8]*(40./99)
	l[3] = c[3]*(2./5) + c[5]*(4./9) + c[7]*(14./33) + c[9]*(56./143)
	l[4] = c[4]*(8./35) + c[6]*(24./77) + c[8]*(48./143)
	l[5] = c[5]*(8./63) + c[7]*(8./39) + c[9]*(16./65)
	l[6], l[7] = 0, 0
	if order > planeShort {
		l[6] = c[6] * legendre[6][6]
		l[6] += c[8] * legendre[8][6]
		l[7] = c[7]*legendre[7][7] + c[9]*legendre[9][7]
		for k := planeShort + 1; k <= order; k++ {
			for j := k & 1; j < len(l); j += 2 {
				l[j] += c[k] * legendre[k][j]
			}
		}
	}
}

// spread returns the mean of the square of the function about its mean.
func (l *legendreSeries) spread() float64 {
	return l[1]*l[1]*(1./3) + l[2]*l[2]*(1./5) + l[3]*l[3]*(1./7) + l[4]*l[4]*(1./9) + l[5]*l[5]*(1./11) + l[6]*l[6]*(1./13) + l[7]*l[7]*(1./15)
}

// interior returns the extreme of the series c inside the interval, if there is
// one: the zero of its derivative, which has at most one within half a radian
// of the circuit's own oscillation.
func interior(c *[planeOrder + 1]float64, order int) (value float64, found bool) {
	odd := c[1] + 3*c[3] + 5*c[5] + 7*c[7] + 9*c[9]
	even := 2*c[2] + 4*c[4] + 6*c[6] + 8*c[8]
	for k := planeShort + 1; k <= order; k++ {
		if k&1 == 0 {
			even += float64(k) * c[k]
		} else {
			odd += float64(k) * c[k]
		}
	}
	if !(math.Abs(even) > math.Abs(odd)) {
		return 0, false
	}
	x := -odd / even
	for range 3 {
		value, rate, bend := 0.0, 0.0, 0.0
		for k := order; k >= 0; k-- {
			bend = bend*x + rate
			rate = rate*x + value
			value = value*x + c[k]
		}
		dx := rate / (2 * bend)
		if !(math.Abs(dx) > 1e-7) {
			return value - 0.5*rate*dx, true
		}
		x = math.Max(-1, math.Min(1, x-dx))
	}
	for k := order; k >= 0; k-- {
		value = value*x + c[k]
	}
	return value, true
}
