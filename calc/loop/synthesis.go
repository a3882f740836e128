package loop

import (
	"fmt"
	"math"
	"math/cmplx"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// Target is what a compensator is to be designed for. The plant's own
// Compensator gives the amplifier; its passive parts are ignored.
type Target struct {
	Crossover   float64 // [Hz]
	PhaseMargin float64 // [deg]
	Type        parts.CompensatorType
	Rounding    Rounding
}

// Design is a compensator with its way there.
type Design struct {
	Exact        parts.Compensator // before rounding
	Compensator  parts.Compensator // after
	Boost        float64           // [deg] phase above -90° that the network adds at the crossover
	K            float64           // [1] K factor of the network; of its feedback part for a transconductance type III
	StageGain    float64           // [1] control to output at the crossover, everything but the ideal network
	StagePhase   float64           // [deg]
	Margins      Margins           // of the rounded design
	ExactMargins Margins
}

// UnreachableError says that no network of the wanted type meets the target.
type UnreachableError struct {
	Field  string  // field of the target or the stage that stands in the way
	Asked  float64 // [any] in the field's unit
	Bound  float64 // [any] what can be reached
	Detail string
}

// Error names the field and the bound.
func (e *UnreachableError) Error() string {
	return fmt.Sprintf("loop: %s: %g asked, %g can be reached: %s", e.Field, e.Asked, e.Bound, e.Detail)
}

const (
	synthesisRounds = 40   // [1] four are usual
	targetGain      = 1e-6 // [1] relative error of the loop gain at which the search ends
)

// Synthesise designs a compensator by the K factor so that the exact loop crosses
// 1 at the target's crossover with its phase margin, then rounds the parts and
// analyses the loop again. Errors are *stage.InvalidError for a target without a
// meaning and *UnreachableError for one that cannot be met.
//
// The stage's gain at the crossover is taken from the averaged model first and
// then from the exact loop with the network just found, amplifier limits, ripple
// and sampling included, until both agree. A type I has no phase to give: it
// keeps the crossover, and the margin must come of itself.
func (s *Sampled) Synthesise(p *Plant, t Target) (Design, error) {
	plant := *p
	plant.Compensator.Type, plant.Compensator.Present = t.Type, true
	if err := t.check(&plant); err != nil {
		return Design{}, err
	}
	var a Averaged
	a.Set(&plant)
	stageGain := a.At(t.Crossover).Control
	least, greatest := boostRange(t.Type, &plant.Feedback)
	var d Design
	for range synthesisRounds {
		phase := degrees(cmplx.Phase(stageGain))
		if phase > 0 {
			phase -= 360
		}
		d.StageGain, d.StagePhase = cmplx.Abs(stageGain), phase
		boost := t.PhaseMargin - phase - 90
		d.Boost = min(max(boost, least), greatest)
		w := want{t.Crossover, 1 / d.StageGain, d.Boost}
		plant.Compensator = w.network(plant.Compensator, &plant.Feedback)
		if s.Set(&plant) != Analysed {
			return d, &UnreachableError{
				"target/crossover_hz", t.Crossover, parts.Unknown,
				"the ripple at the control voltage outruns the comparator's ramp",
			}
		}
		// What the ideal network does not explain belongs to the stage.
		ideal := plant.Compensator
		ideal.GainBandwidth, ideal.OpenLoopGain, ideal.OutputOhm = math.Inf(1), math.Inf(1), math.Inf(1)
		next := s.Loop(t.Crossover) / CompensatorGain(&ideal, &plant.Feedback, t.Crossover)
		change := cmplx.Abs(next/stageGain - 1)
		stageGain = next
		if change <= targetGain {
			if boost > greatest {
				// The network with all its boost is the one just analysed.
				adds := fmt.Sprintf("at most %.1f°", greatest)
				if greatest == 0 {
					adds = "nothing"
				}
				return d, &UnreachableError{
					"target/phase_margin_deg", t.PhaseMargin, phase + 90 + greatest,
					fmt.Sprintf("the stage has a phase of %.1f° at %g Hz and this network adds %s above -90°", phase, t.Crossover, adds),
				}
			}
			d.K = w.factor(t.Type, &plant.Feedback)
			d.Exact = plant.Compensator
			s.Margins(&d.ExactMargins)
			plant.Compensator = t.Rounding.apply(d.Exact, &plant.Feedback, t.Crossover)
			d.Compensator = plant.Compensator
			s.Set(&plant)
			s.Margins(&d.Margins)
			return d, nil
		}
		if !(change < 1e6) {
			break
		}
	}
	return d, &UnreachableError{
		"target/crossover_hz", t.Crossover, parts.Unknown,
		"no network of this type crosses there: amplifier limits or sampling take the gain away",
	}
}

// factor returns K of the network.
func (w want) factor(t parts.CompensatorType, f *stage.Feedback) float64 {
	switch t {
	case parts.OpAmpType1:
		return 1
	case parts.OpAmpType3:
		return KFactorThree(w.boost)
	case parts.TransconductanceType3:
		return KFactorTwo(w.boost - min(w.boost/2, leadBound(f)))
	}
	return KFactorTwo(w.boost)
}

// check refuses a target or a plant that has no meaning.
func (t *Target) check(p *Plant) error {
	var f []stage.Fault
	if nyquist := p.Nyquist(); !(t.Crossover > 0 && t.Crossover < nyquist) {
		f = append(f, stage.Fault{
			Field: "target/crossover_hz", Given: t.Crossover, Limit: nyquist,
			Accepted: "above 0 and below " + number(nyquist) + " Hz", Detail: "a loop cannot cross at or above half the rate at which its comparators decide",
		})
	}
	if !(t.PhaseMargin > 0 && t.PhaseMargin < 180) {
		f = append(f, stage.Fault{Field: "target/phase_margin_deg", Given: t.PhaseMargin, Limit: 180, Accepted: "above 0° and below 180°", Detail: "phase margin"})
	}
	// The passive parts are still to come: any do for the check of the rest.
	probe := *p
	c := &probe.Compensator
	c.FeedbackF, c.FeedbackOhm, c.ShuntF, c.LeadOhm, c.LeadF = 1e-9, 1e3, 0, 1e3, 1e-9
	f = append(f, probe.Faults()...)
	if len(f) > 0 {
		return &stage.InvalidError{Faults: f}
	}
	return nil
}
