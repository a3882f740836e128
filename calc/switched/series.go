package switched

// taylor holds the coefficients of a function over an interval about its middle,
// argument −1 to 1; those above its order are not used.
type taylor [planeOrder + 1]float64

// legendreSeries is the expansion of a function over an interval in Legendre
// polynomials, up to the order that matters in the mean of its square.
type legendreSeries [9]float64

// mean returns the mean over the interval.
func (c *taylor) mean(order int) float64 {
	m := c[0] + c[2]*(1./3) + c[4]*(1./5) + c[6]*(1./7) + c[8]*(1./9)
	for k := planeShort + 2; k <= order; k += 2 {
		m += c[k] * inverse[k+1]
	}
	return m
}

// spread returns the mean of the square of the function about its mean, from its
// Legendre coefficients l_j = Σ_k c_k w_kj: Σ_j l_j²/(2j+1). Orders left out of
// the short form are below 1e-15 of the sum.
func (c *taylor) spread(order int) float64 {
	if order > planeShort {
		var l legendreSeries
		c.project(order, &l)
		return l.spread()
	}
	l1 := c[1] + c[3]*(3./5) + c[5]*(3./7) + c[7]*(1./3)
	l2 := c[2]*(2./3) + c[4]*(4./7) + c[6]*(10./21)
	l3 := c[3]*(2./5) + c[5]*(4./9)
	l4 := c[4] * (8. / 35)
	return l1*l1*(1./3) + l2*l2*(1./5) + l3*l3*(1./7) + l4*l4*(1./9)
}

// project fills the Legendre coefficients above the mean.
func (c *taylor) project(order int, l *legendreSeries) {
	*l = legendreSeries{}
	for k := 1; k <= order; k++ {
		j := k
		for j >= len(l) {
			j -= 2
		}
		for ; j >= 1; j -= 2 {
			l[j] += c[k] * legendre[k][j]
		}
	}
}

func (l *legendreSeries) spread() float64 {
	sum := 0.0
	for j := len(l) - 1; j >= 1; j-- {
		sum += l[j] * l[j] * inverse[2*j+1]
	}
	return sum
}

// ends returns the derivative at −1 and at 1.
func (c *taylor) ends(order int) (first, last float64) {
	odd, even := 0.0, 0.0
	for k := 1; k < order; k += 2 {
		odd += float64(k) * c[k]
		even += float64(k+1) * c[k+1]
	}
	return odd - even, odd + even
}

// extremes widens the range by the extreme inside the interval, if there is one:
// the zero of the derivative. There is at most one, for the interval is at most
// two radians of the circuit's own oscillation and zeros lie π apart. The chord
// of the derivative gives its place x; the value is corrected for what is left of
// the derivative there, to third order, or the place is improved where that is
// not enough.
func (c *taylor) extremes(order int, e *extent) {
	odd := c[1] + 3*c[3] + 5*c[5] + 7*c[7]
	even := 2*c[2] + 4*c[4] + 6*c[6] + 8*c[8]
	for k := planeShort + 1; k < order; k += 2 {
		odd += float64(k) * c[k]
		even += float64(k+1) * c[k+1]
	}
	if odd >= even && odd >= -even || odd <= even && odd <= -even {
		return
	}
	x := -odd / even
	xx := x * x
	rate := c[1] + xx*(3*c[3]+xx*(5*c[5]+xx*(7*c[7]))) + x*(2*c[2]+xx*(4*c[4]+xx*(6*c[6]+xx*(8*c[8]))))
	bend := 2*c[2] + xx*(12*c[4]+xx*(30*c[6])) + x*(6*c[3]+xx*(20*c[5]+xx*(42*c[7])))
	dx := rate / bend
	if order > planeShort || dx > 1e-3 || dx < -1e-3 {
		e.add(c.stationary(x, order))
		return
	}
	e.add(c[0] + xx*(c[2]+xx*(c[4]+xx*(c[6]+xx*c[8]))) + x*(c[1]+xx*(c[3]+xx*(c[5]+xx*c[7]))) - 0.5*rate*dx)
}

// stationary returns the value where the derivative is zero, near x.
func (c *taylor) stationary(x float64, order int) float64 {
	v := 0.0
	for range 8 {
		value, rate, bend := c.at(x, order)
		dx := rate / bend
		v = value - 0.5*rate*dx
		if !(dx > 1e-5 || dx < -1e-5) {
			break
		}
		x = max(-1, min(1, x-dx))
	}
	return v
}

// at returns the value and two derivatives at x.
func (c *taylor) at(x float64, order int) (value, rate, bend float64) {
	for k := order; k >= 0; k-- {
		bend = bend*x + 2*rate
		rate = rate*x + value
		value = value*x + c[k]
	}
	return value, rate, bend
}
