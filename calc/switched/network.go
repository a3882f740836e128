package switched

import "math"

const maxStates = MaxPhases + 2*MaxBanks

// vec holds one current per phase [A], then one voltage per output bank [V],
// then, where they are asked for, one per input bank, without gap; or the rates
// of these, a deviation, or weights of a sum over them. Entries beyond the
// circuit's size are not used.
type vec [maxStates]float64

// position tells where the switches of one phase stand.
type position uint8

const (
	resting    position = iota // both open, no current
	high                       // high side on
	rectifying                 // rectifier conducts
)

// network is what no switch touches: the output node and its banks.
//
// With g_k = 1/ESR_k and ρ = 1/(G + Σ g_k) the node voltage is
//
//	v_o = ρ (Σ g_k v_k + Σ i_p − I_0)
//
// and each capacitor moves by
//
//	C_k dv_k/dt = g_k (v_o − v_k) = ρ g_k (Σ_j g_j (v_j − v_k) + Σ i_p − I_0 − G v_k)
//
// The last form is the one used: its coefficients are formed without the
// cancellation in v_o − v_k, so a single bank of vanishing ESR stays exact.
type network struct {
	phases, banks, n int
	conductance      float64
	current          float64
	rho              float64
	couple           [MaxBanks]float64           // ρ g_k, weight of v_k in v_o
	inject           [MaxBanks]float64           // ρ g_k / C_k
	relax            [MaxBanks][MaxBanks]float64 // d(dv_k/dt)/dv_j
	capacitance      [MaxBanks]float64
	input            inputNode
}

func (nw *network) set(c *Circuit) {
	nw.phases, nw.banks, nw.n = c.Phases, c.Banks, c.Phases+c.Banks
	nw.input.banks = 0
	nw.conductance, nw.current = c.Conductance, c.Current
	var g [MaxBanks]float64
	sum := c.Conductance
	for k := range c.Banks {
		g[k] = 1 / c.Bank[k].ESR
		sum += g[k]
	}
	nw.rho = 1 / sum
	for k := range c.Banks {
		nw.capacitance[k] = c.Bank[k].C
		nw.couple[k] = g[k] * nw.rho
		nw.inject[k] = nw.couple[k] / c.Bank[k].C
		own := c.Conductance
		for j := range c.Banks {
			if j != k {
				nw.relax[k][j] = nw.inject[k] * g[j]
				own += g[j]
			}
		}
		nw.relax[k][k] = -nw.inject[k] * own
	}
}

// node returns the deviation of the output node for a deviation x of the state.
func (nw *network) node(x *vec) float64 {
	sum := 0.0
	for p := range nw.phases {
		sum += x[p]
	}
	vo := nw.rho * sum
	for k := range nw.banks {
		vo += nw.couple[k] * x[nw.phases+k]
	}
	return vo
}

// reference is the point from which the state is counted: the same voltage on
// every bank and the node, and one current per phase. Deviations are as small as
// the ripple, so differences of large numbers do not enter the solution.
type reference struct {
	v     float64
	i     [MaxPhases]float64
	node  float64 // node voltage at the reference
	extra float64 // current into the node that the load does not take
}

func (r *reference) set(nw *network, v, perPhase float64) {
	r.v = v
	sum := 0.0
	for p := range nw.phases {
		r.i[p] = perPhase
		sum += perPhase
	}
	r.extra = sum - nw.current - nw.conductance*v
	if math.Abs(r.extra) <= 1e-14*math.Abs(sum) {
		r.extra = 0 // perPhase was chosen to balance the load
	}
	r.node = v + nw.rho*r.extra
}

// topology is the linear circuit of one interval: dξ/dt = A ξ + b for the
// deviation ξ from the reference, with
//
//	L_p dι_p/dt = u_p − R_p i_p − v_o
//
// for each phase that conducts. A phase at rest has no row.
type topology struct {
	pos  [MaxPhases]position
	r    [MaxPhases]float64 // resistance in the conducting path
	invL [MaxPhases]float64 // 0 at rest
	b    vec
	norm float64 // bound on |A| with current and voltage scaled to equal energy
}

func (tp *topology) set(nw *network, ref *reference, c *Circuit) {
	inductive, capacitive, worst, trace, most := 0.0, 0.0, 0.0, 0.0, 0.0
	for p := range nw.phases {
		leg := c.leg(p)
		var u float64
		switch tp.pos[p] {
		case resting:
			tp.r[p], tp.invL[p], tp.b[p] = 0, 0, 0
			continue
		case high:
			u, tp.r[p] = c.Vin, leg.Winding+leg.HighSide
		case rectifying:
			u, tp.r[p] = -leg.Rectifier.Threshold, leg.Winding+leg.Rectifier.Slope
		}
		tp.invL[p] = 1 / leg.L
		tp.b[p] = (u - ref.node - tp.r[p]*ref.i[p]) * tp.invL[p]
		inductive += tp.invL[p]
		worst = max(worst, (tp.r[p]+nw.rho*float64(nw.phases))*tp.invL[p])
	}
	for k := range nw.banks {
		tp.b[nw.phases+k] = nw.inject[k] * ref.extra
		capacitive += nw.inject[k]
		trace -= nw.relax[k][k]
		most = max(most, -nw.relax[k][k])
	}
	// The banks' own matrix is symmetric in scaled voltages and diagonally
	// dominant: its norm is below its trace and below twice its greatest entry.
	worst = max(worst, min(trace, 2*most))
	tp.norm = worst + math.Sqrt(inductive*capacitive)
	if nw.input.banks > 0 {
		nw.input.drive(nw, ref, tp)
	}
}

// slope writes y = A x + b, the time derivative of the state.
func (tp *topology) slope(nw *network, x, y *vec) {
	sum := 0.0
	for p := range nw.phases {
		sum += x[p]
	}
	vo := nw.rho * sum
	banks := x[nw.phases : nw.phases+nw.banks]
	for k, v := range banks {
		vo += nw.couple[k] * v
	}
	for p := range nw.phases {
		y[p] = tp.b[p] - (tp.r[p]*x[p]+vo)*tp.invL[p]
	}
	for k := range banks {
		acc := tp.b[nw.phases+k] + nw.inject[k]*sum
		row := &nw.relax[k]
		for j, v := range banks {
			acc += row[j] * v
		}
		y[nw.phases+k] = acc
	}
	if nw.input.banks > 0 {
		nw.input.slope(nw, tp, x, y)
	}
}

// leg returns what phase p consists of.
func (c *Circuit) leg(p int) *Leg {
	if c.Legs != nil {
		return &c.Legs[p]
	}
	return &c.Leg
}
