package loop

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Bind sets the plant to an evaluated stage: its circuit with every element at
// its temperature, bias and current, the operating point, and the loop around it.
// It reports whether the stage regulates there.
func (p *Plant) Bind(e *evaluate.Evaluator, s evaluate.Status) bool {
	st := e.Stage()
	source := p.Source
	*p = Plant{Circuit: *e.Circuit(), Modulator: st.Modulator, Compensator: st.Compensator, Feedback: st.Feedback, Source: source}
	p.Operate(e.Solution())
	return s == evaluate.OK || s == evaluate.OverTemperature
}

// mostDirectError is how far the want of direct gain may leave the output off [1]
// before the operating point is another one.
const mostDirectError = 0.05

// Holds reports whether the loop holds the operating point that it was linearised
// about, or at least was not found to leave it: an amplifier without direct gain
// brings about another output, to which the margins here do not belong, and so does a
// current limit that ends pulses before the comparator.
func (s *Sampled) Holds() bool {
	return !s.Status.OK() || math.Abs(s.Error) <= mostDirectError && !s.Limited()
}

// Limited reports whether the current limit ends pulses at the operating point.
func (s *Sampled) Limited() bool { return s.Peak >= s.plant.Modulator.CurrentLimit }

// Analyser fills the loop quantities of evaluated stages. It keeps its workspace;
// one per goroutine.
type Analyser struct {
	Plant   Plant
	Sampled Sampled
	Margins Margins
}

// Fill analyses the loop of the stage just evaluated into q and returns how far it
// came. A stage whose loop has no meaning is reported by the error of Check.
func (a *Analyser) Fill(e *evaluate.Evaluator, s evaluate.Status, q *quantity.Vector) (Status, error) {
	a.Margins = Margins{}
	a.Margins.Fill(q)
	if !a.Plant.Bind(e, s) {
		a.Margins.Status = NotRegulating
		return NotRegulating, nil
	}
	if err := a.Plant.Check(); err != nil {
		return NotRun, err
	}
	a.Sampled.Set(&a.Plant)
	if !a.Sampled.Holds() {
		a.Margins.Status = NotRegulating
		return NotRegulating, nil
	}
	a.Sampled.Margins(&a.Margins)
	a.Margins.Fill(q)
	return a.Margins.Status, nil
}

// GainMarginCeiling is the greatest gain margin that is reported as a quantity
// [dB]: a loop gain that is nowhere negative real has no gain margin, and for a
// limit it has enough.
const GainMarginCeiling = 60.0

// Reliable returns phase margin [deg], gain margin [dB] and modulus margin [1] as they
// may be judged, NaN where there is none. Of an unstable loop the modulus margin is the
// distance to -1 with a negative sign, phase and gain margin are given where they are
// negative too: no margin of an unstable loop can pass a limit.
func (m *Margins) Reliable() (phase, gain, modulus float64) {
	if m.Stability == Stable {
		return m.PhaseMargin, m.GainMargin, m.Modulus
	}
	phase, gain = math.NaN(), math.NaN()
	if m.PhaseMargin < 0 {
		phase = m.PhaseMargin
	}
	if m.GainReduction > 0 {
		gain = -m.GainReduction
	}
	return phase, gain, -m.Modulus
}

// Fill writes the loop quantities, as Reliable has them. NaN stands where there is
// none: no analysis, no crossover. A stable loop without a phase crossing has the
// ceiling for its gain margin.
func (m *Margins) Fill(q *quantity.Vector) {
	nan := math.NaN()
	q[quantity.Crossover], q[quantity.PhaseMargin], q[quantity.GainMargin], q[quantity.ModulusMargin] = nan, nan, nan, nan
	if !m.Status.OK() {
		return
	}
	q[quantity.Crossover] = m.Crossover
	q[quantity.PhaseMargin], q[quantity.GainMargin], q[quantity.ModulusMargin] = m.Reliable()
	if m.Stability == Stable && !(m.GainMargin < GainMarginCeiling) {
		q[quantity.GainMargin] = GainMarginCeiling
	}
}

// Present reports whether a stage has all that a loop needs.
func Present(s *stage.Stage) bool {
	return s.Modulator.Present && s.Compensator.Present && s.Feedback.Present
}

// Behind sets the plant's source: the stage's input banks, which a stiff source
// leaves out, fed through the given source. Its own branches, such as a filter's
// capacitor and damping, stand beside the banks.
func (p *Plant) Behind(e *evaluate.Evaluator, source Source) {
	source.Present = true
	banks := e.InputBanks()
	n := min(len(banks), MaxShunts-source.Shunts)
	source.Shunts += copy(source.Shunt[source.Shunts:], banks[:n])
	p.Source = source
}
