package switched

import "math"

// Waveform is one period of a solution, from the turn-on of phase 0. Every edge
// stands twice, just before and just after, so that steps are steps.
type Waveform struct {
	Time        []float64   // [s]
	Output      []float64   // [V] at the output node
	Input       []float64   // [A] sum over phases of the high-side current
	Inductor    [][]float64 // [A] per phase
	SwitchNode  [][]float64 // [V] per phase
	BankCurrent [][]float64 // [A] per bank, into the bank
	BankVoltage [][]float64 // [V] per bank, at its capacitance

	InputNode    []float64   // [V] alternating part at the input banks; nil without them
	InputCurrent [][]float64 // [A] per input bank, into the bank
}

// Waveform solves the circuit at the duty ratio of sol and samples it at points
// instants or a few more: both ends of every interval, and equal steps between
// them, so many in each interval as its share of the period asks for. It reports
// false if there is no solution there.
func (s *Solver) Waveform(c *Circuit, sol *Solution, points int) (*Waveform, bool) {
	return s.WaveformWithInput(c, sol, points, 0, nil)
}

// WaveformWithInput is Waveform with input banks, which share the alternating part
// of the input current as in InputBanks.
func (s *Solver) WaveformWithInput(c *Circuit, sol *Solution, points, banks int, bank *[MaxBanks]Bank) (*Waveform, bool) {
	s.prepare(c)
	if c.idle() {
		return c.idleWaveform(sol.Duty, banks), true
	}
	if s.settle(c, sol.Duty) != Solved {
		return nil, false
	}
	if banks > 0 {
		s.nw.input.set(banks, bank, sol.InputMean)
		s.nw.n = s.nw.phases + s.nw.banks + banks
		if !s.periodic(c) {
			return nil, false
		}
	}
	w := c.newWaveform(banks)
	turns := 1
	if s.cyclic {
		turns = c.Phases
	}
	spare := float64(max(0, points-2*s.count*turns))
	begin := 0.0
	for turn := range turns {
		for k := range s.count {
			v := &s.iv[k]
			steps := 1 + int(math.Ceil(spare*v.t/c.Period))
			s.sample(c, w, k, turn, steps, begin)
			begin += v.t
		}
	}
	return w, true
}

func (c *Circuit) newWaveform(inputs int) *Waveform {
	return &Waveform{
		Inductor: make([][]float64, c.Phases), SwitchNode: make([][]float64, c.Phases),
		BankCurrent: make([][]float64, c.Banks), BankVoltage: make([][]float64, c.Banks), InputCurrent: make([][]float64, inputs),
	}
}

// idleWaveform is that of a circuit that stands still with its output at the
// input voltage, which is on every switch node whether its high side is on or not.
func (c *Circuit) idleWaveform(duty float64, inputs int) *Waveform {
	w := c.newWaveform(inputs)
	w.Time = []float64{0, duty * c.Period, c.Period}
	zero, vin := []float64{0, 0, 0}, []float64{c.Vin, c.Vin, c.Vin}
	w.Output, w.Input = vin, zero
	for p := range c.Phases {
		w.Inductor[p], w.SwitchNode[p] = zero, vin
	}
	for k := range c.Banks {
		w.BankCurrent[k], w.BankVoltage[k] = zero, vin
	}
	for k := range inputs {
		w.InputCurrent[k], w.InputNode = zero, zero
	}
	return w
}

// sample appends interval k of the given turn, from begin on.
func (s *Solver) sample(c *Circuit, w *Waveform, k, turn, steps int, begin float64) {
	nw, n := &s.nw, s.nw.n
	v := &s.iv[k]
	ld := &s.ladders[0]
	ld.owner = -1
	ld.build(&s.scratch, nw, &v.top, v.t/float64(steps))
	x := v.start
	for i := 0; i <= steps; i++ {
		if i == steps {
			x = v.stop
		}
		s.point(c, w, k, turn, &x, begin+v.t*float64(i)/float64(steps))
		ld.step(ld.levels, &x, &x, n)
	}
}

// point appends one instant. In turn q phase p is in place (q − p) mod N.
func (s *Solver) point(c *Circuit, w *Waveform, k, turn int, x *vec, at float64) {
	nw := &s.nw
	v := &s.iv[k]
	var rate vec
	v.top.slope(nw, x, &rate)
	vo := s.ref.node + nw.node(x)
	w.Time = append(w.Time, at)
	w.Output = append(w.Output, vo)
	input := 0.0
	for p := range nw.phases {
		j := (turn - p + nw.phases) % nw.phases
		if !s.cyclic {
			j = p
		}
		leg := c.leg(p)
		i := s.ref.i[j] + x[j]
		node := vo
		switch v.top.pos[j] {
		case high:
			input += i
			node = c.Vin - leg.HighSide*i
		case rectifying:
			node = -leg.Rectifier.Threshold - leg.Rectifier.Slope*i
		case resting:
			i = 0
		}
		w.Inductor[p] = append(w.Inductor[p], i)
		w.SwitchNode[p] = append(w.SwitchNode[p], node)
	}
	w.Input = append(w.Input, input)
	for b := range nw.banks {
		w.BankCurrent[b] = append(w.BankCurrent[b], nw.capacitance[b]*rate[nw.phases+b])
		w.BankVoltage[b] = append(w.BankVoltage[b], s.ref.v+x[nw.phases+b])
	}
	if len(w.InputCurrent) == 0 {
		return
	}
	in, first := &nw.input, nw.phases+nw.banks
	node := in.rho * (in.mean - input)
	for b := range w.InputCurrent {
		node += in.couple[b] * x[first+b]
		w.InputCurrent[b] = append(w.InputCurrent[b], in.capacitance[b]*rate[first+b])
	}
	w.InputNode = append(w.InputNode, node)
}
