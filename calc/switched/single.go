package switched

// linear is a quantity given by the rates of the state, a + c·y.
type linear struct {
	a float64
	c vec
}

// mean returns its integral over an interval: the rates' is the change of state.
func (l *linear) mean(v *interval, n int) float64 {
	acc := l.a * v.t
	for i := range n {
		acc += l.c[i] * (v.stop[i] - v.start[i])
	}
	return acc
}

// square returns the integral of its square, given that of the rates' products.
func (l *linear) square(v *interval, y *square, n int) float64 {
	acc := l.a * l.a * v.t
	for i := range n {
		sum := 2 * l.a * (v.stop[i] - v.start[i])
		for j := range n {
			sum += y[i*n+j] * l.c[j]
		}
		acc += l.c[i] * sum
	}
	return acc
}

// kirchhoff returns the inductor current's deviation of a single conducting
// phase in terms of the rates, from both of Kirchhoff's laws:
//
//	Σ C_k dν_k/dt = ι + κ − G ω,   κ = i_ref − I_0 − G v_ref
//	ω = β − R ι − L dι/dt,         β = u − v_ref − R i_ref
//	ι (1 + G R) = Σ C_k dν_k/dt − κ + G (β − L dι/dt)
//
// with the node's deviation ω. So the products of the rates alone give every RMS
// current, without the digits that a difference of voltages would lose.
func (s *Solver) kirchhoff(k int) (l linear) {
	nw, tp := &s.nw, &s.iv[k].top
	g := nw.conductance
	q := 1 / (1 + g*tp.r[0])
	kappa := s.ref.extra - g*nw.rho*s.ref.extra
	l.a = -kappa * q
	if g != 0 {
		inductance := 1 / tp.invL[0]
		l.a += g * tp.b[0] * inductance * q
		l.c[0] = -g * inductance * q
	}
	for b := range nw.banks {
		l.c[1+b] = nw.capacitance[b] * q
	}
	return l
}

// nodeOf returns the node's deviation likewise, given the current's.
func (s *Solver) nodeOf(k int, i *linear) (l linear) {
	tp := &s.iv[k].top
	inductance := 1 / tp.invL[0]
	l.a = tp.b[0]*inductance - tp.r[0]*i.a
	for j := range s.nw.n {
		l.c[j] = -tp.r[0] * i.c[j]
	}
	l.c[0] -= inductance
	return l
}
