package switched

// Stretch is one interval of a periodic solution with its exact linear map. An
// entry of ToInput or ToCurrent is the change of the state at its end per volt
// of input and per ampere of constant load current, both changed throughout.
type Stretch struct {
	Positions Positions
	Duration  float64 // [s]
	Start     State   // absolute, as it begins
	Stop      State   // absolute, as it ends
	Leaves    State   // rate of the state as the stretch ends
	Enters    State   // rate as it begins
	Map       Matrix  // change of the end state per change of the start state
	ToInput   State
	ToCurrent State
}

// Linearised is the one-period map of a periodic solution to first order, with
// the switching instants that the state decides (rectifier turning off) moving
// along. For equal phases it covers one N-th of the period, after which the
// currents have changed places: slot j is the phase that turned on j N-ths ago.
type Linearised struct {
	Phases, Banks, States int
	Cyclic                bool    // one N-th of the period
	Duration              float64 // [s] of what it covers
	Count                 int
	Stretches             [maxIntervals]Stretch
	Map                   Matrix
	ToDuty                State   // change of the end state per change of duty ratio, every turn-off edge moved
	ToInput               State   // per volt of input
	ToCurrent             State   // per ampere of constant load current
	NodeWeights           State   // output node: v_o = Σ w_i x_i − NodeResistance (I_0)
	NodeResistance        float64 // [ohm]
}

// Linearise solves the circuit at the duty ratio and writes its one-period map.
//
// Across an edge the state is continuous. Moving an edge by δt moves the state
// after it by (y_before − y_after) δt. A current that comes to rest is zero
// after the edge whatever it was before, so its row of the map is zero.
func (s *Solver) Linearise(c *Circuit, duty float64, dst *Linearised) Status {
	s.rounds = 0
	s.prepare(c)
	status := s.settle(c, duty, false)
	if status != Solved {
		return status
	}
	nw, n := &s.nw, s.nw.n
	dst.Phases, dst.Banks, dst.States = nw.phases, nw.banks, n
	dst.Cyclic = s.cyclic
	dst.Duration = s.horizon * c.Period
	dst.Count = s.count
	dst.NodeResistance = nw.rho
	dst.NodeWeights = State{}
	for i := range n {
		dst.NodeWeights[i] = s.weight(i)
	}
	var total, next Matrix
	var toDuty, toInput, toCurrent State
	for i := range n {
		total[i][i] = 1
	}
	for k := range s.count {
		v, st := &s.iv[k], &dst.Stretches[k]
		s.stretch(k, st)
		for p := range nw.phases {
			if v.top.pos[p] == Resting {
				total[p] = [MaxStates]float64{}
				toDuty[p], toInput[p], toCurrent[p] = 0, 0, 0
			}
		}
		for i := range n {
			for j := range n {
				acc := 0.0
				for m := range n {
					acc += st.Map[i][m] * total[m][j]
				}
				next[i][j] = acc
			}
		}
		total = next
		toDuty = st.Map.Apply(&toDuty, n)
		toInput = st.Map.Apply(&toInput, n)
		toCurrent = st.Map.Apply(&toCurrent, n)
		for i := range n {
			toInput[i] += st.ToInput[i]
			toCurrent[i] += st.ToCurrent[i]
		}
		if s.cutsAfter(k) {
			var enters State
			s.entering(k, &enters)
			for i := range n {
				toDuty[i] += (st.Leaves[i] - enters[i]) * c.Period
			}
		}
	}
	for i := range n {
		to := s.after(i)
		dst.Map[to] = total[i]
		dst.ToDuty[to], dst.ToInput[to], dst.ToCurrent[to] = toDuty[i], toInput[i], toCurrent[i]
	}
	// A current that comes to rest with the solved part is zero after it.
	for p := range nw.phases {
		if to := s.after(p); s.iv[0].top.pos[to] == Resting {
			dst.Map[to] = [MaxStates]float64{}
			dst.ToDuty[to], dst.ToInput[to], dst.ToCurrent[to] = 0, 0, 0
		}
	}
	return Solved
}

// Apply returns the product with a state of n entries.
func (m *Matrix) Apply(x *State, n int) (y State) {
	for i := range n {
		for j := range n {
			y[i] += m[i][j] * x[j]
		}
	}
	return y
}

// stretch writes interval k with absolute states.
func (s *Solver) stretch(k int, st *Stretch) {
	nw, n := &s.nw, s.nw.n
	v, ld := &s.iv[k], s.rungs(k)
	st.Positions = v.top.pos
	st.Duration = v.t
	v.top.slope(nw, &v.start, &st.Enters)
	v.top.slope(nw, &v.stop, &st.Leaves)
	var input, current State
	for i := range n {
		at := s.ref.v
		if i < nw.phases {
			at = s.ref.i[i]
		}
		st.Start[i], st.Stop[i] = at+v.start[i], at+v.stop[i]
		for j := range n {
			st.Map[i][j] = v.f[i*n+j]
		}
		st.Map[i][i]++
		switch {
		case i >= nw.phases:
			current[i] = -nw.inject[i-nw.phases]
		case v.top.pos[i] == Resting:
			st.Map[i] = [MaxStates]float64{}
			st.Map[i][i] = 1
		default:
			current[i] = nw.rho * v.top.invL[i]
			if v.top.pos[i] == High {
				input[i] = v.top.invL[i]
			}
		}
	}
	st.ToInput = s.driven(&v.top, ld, &input)
	st.ToCurrent = s.driven(&v.top, ld, &current)
}

// driven returns ∫ exp(A τ) b dτ over the whole ladder.
func (s *Solver) driven(tp *topology, ld *ladder, b *State) State {
	n := s.nw.n
	var d, e State
	tp.displace(&s.nw, b, ld.h[0], terms(firstRung), &d)
	for l := range ld.levels {
		apply(&ld.f[l], &d, &e, n)
		for i := range n {
			d[i] += d[i] + e[i]
		}
	}
	return d
}

// cutsAfter tells whether a high side turns off as interval k ends.
func (s *Solver) cutsAfter(k int) bool {
	for j := range s.nw.phases {
		if s.iv[k].top.pos[j] == High && s.next(k, j) != High {
			return true
		}
	}
	return false
}

// entering writes the rate just after interval k, in the places of interval k.
func (s *Solver) entering(k int, y *State) {
	if k+1 < s.count {
		s.iv[k+1].top.slope(&s.nw, &s.iv[k+1].start, y)
		return
	}
	var first State
	s.iv[0].top.slope(&s.nw, &s.iv[0].start, &first)
	for i := range s.nw.n {
		y[i] = first[s.after(i)]
	}
}
