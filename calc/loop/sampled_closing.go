package loop

import (
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// assemble fills the matrices of the open, the inner and the closed loop.
func (s *Sampled) assemble() {
	j := &s.joint
	n, width := j.N, j.N+Inputs
	s.open.N = n
	for i := range n {
		copy(s.open.A[i*n:i*n+n], s.whole.F[i*width:i*width+n])
	}
	if !s.plant.Compensator.Present {
		s.control = statespace.Functional{}
		for k := range s.count {
			s.decisions[k].control = statespace.Functional{}
			s.decisions[k].voltage = [switched.MaxPhases]float64{}
		}
	}
	var delays [switched.MaxPhases]statespace.Functional
	s.delays(&delays, 0)
	s.close(&s.inner, &delays)
	s.delays(&delays, 1)
	s.close(&s.closed, &delays)
	if s.count > 1 {
		s.lift.set(s, &delays)
		return
	}
	var column, row statespace.Point
	d := &s.decisions[0]
	for i := range n {
		column[i], row[i] = d.enter[i]/d.slope, -d.control[i]
	}
	s.transfer.Reduce(&s.inner, &column, &row)
}

// delays fills how far each decision is delayed by the state at the window's start,
// with the given share of the control voltage's deviation fed back.
func (s *Sampled) delays(dst *[switched.MaxPhases]statespace.Functional, fed float64) {
	n, sense := s.joint.N, s.plant.sense()
	for k := range s.count {
		d, row := &s.decisions[k], &dst[k]
		for i := range n {
			row[i] = float64(fed*d.control[i]) - float64(sense*d.current[i])
		}
		for e := range k {
			by := float64(fed*d.voltage[e]) - float64(sense*d.amperes[e])
			for i := range n {
				row[i] += float64(by * dst[e][i])
			}
		}
		for i := range n {
			row[i] /= d.slope
		}
	}
}

// close sets m to the map over the window with the decisions delayed as told.
func (s *Sampled) close(m *statespace.Real, delays *[switched.MaxPhases]statespace.Functional) {
	n := s.joint.N
	m.N = n
	copy(m.A[:n*n], s.open.A[:n*n])
	for k := range s.count {
		enter, row := &s.decisions[k].enter, &delays[k]
		for i := range n {
			for c := range n {
				m.A[i*n+c] += float64(enter[i] * row[c])
			}
		}
	}
}

// carry moves a deviation through a map, inputs unchanged.
func (s *Sampled) carry(m *statespace.Map, x *statespace.Point) {
	n, width := m.N, m.N+m.M
	var next statespace.Point
	for i := range n {
		sum := 0.0
		row := m.F[i*width : i*width+n]
		for k, a := range row {
			sum += float64(a * x[k])
		}
		next[i] = sum
	}
	copy(x[:n], next[:n])
}
