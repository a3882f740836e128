package caution

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Seen gathers the extremes of everything a stage was evaluated or declared for.
// The zero value has seen nothing.
type Seen struct {
	Input            float64 // [V] greatest
	InputPointer     string  // where the greatest input voltage was given
	SourceResistance float64 // [ohm] least
	Output           float64 // [V] greatest that was asked for or found
	Greatest         quantity.Vector
	Least            quantity.Vector
	PartDegC         [losses.PartCount]float64 // [degC] greatest
	Runaway          bool
	RunawayPointer   string
	Precharged       bool // a start into a pre-charged output was followed
	points           int
}

// sameVoltage is the relative excess of a regulated output over what was asked
// for that comes from the solver.
const sameVoltage = 1e-6 // [1]

// Add takes in an operating point and its result. at is the point's pointer in
// the request ("/point", "/points/3"). r is nil where nothing was evaluated.
func (s *Seen) Add(at string, st *stage.Stage, p *stage.Point, r *evaluate.Result) {
	s.widen(at+"/input_v", p.Input, p.SourceResistance, asked(st, &p.Control))
	if r == nil {
		return
	}
	if r.Status == evaluate.Runaway && !s.Runaway {
		s.Runaway, s.RunawayPointer = true, at
	}
	switch r.Status {
	case evaluate.OK, evaluate.OverTemperature, evaluate.DropOut, evaluate.TooShortOnTime:
	default:
		return
	}
	s.AddQuantities(&r.Quantities, &r.Quantities)
	for i, t := range r.PartDegC {
		s.PartDegC[i] = greatest(s.PartDegC[i], t)
	}
}

// AddConditions takes in the ranges of conditions; at is their pointer
// ("/conditions").
func (s *Seen) AddConditions(at string, st *stage.Stage, c *stage.Conditions) {
	s.widen(at+"/input_v/max", c.Input.Max, c.SourceResistance, asked(st, &c.Control))
}

// AddRequirement takes in the ranges of a requirement; at is its pointer
// ("/requirement").
func (s *Seen) AddRequirement(at string, r *stage.Requirement) {
	s.widen(at+"/input/max_v", r.Input.Max, r.SourceResistance, r.Output)
}

// AddQuantities takes in the least and the greatest value of every quantity,
// NaN where one is not known.
func (s *Seen) AddQuantities(least, most *quantity.Vector) {
	s.start()
	for i := range most {
		s.Greatest[i] = greatest(s.Greatest[i], most[i])
		s.Least[i] = -greatest(-s.Least[i], -least[i])
	}
	if found := most[quantity.OutputMean]; !(found <= s.Output*(1+sameVoltage)) {
		s.Output = greatest(s.Output, found)
	}
}

func (s *Seen) start() {
	if s.points > 0 {
		return
	}
	s.points = 1
	s.Input, s.SourceResistance, s.Output = math.NaN(), math.NaN(), math.NaN()
	for i := range s.Greatest {
		s.Greatest[i], s.Least[i] = math.NaN(), math.NaN()
	}
	for i := range s.PartDegC {
		s.PartDegC[i] = math.NaN()
	}
}

func (s *Seen) widen(at string, input, source, output float64) {
	s.start()
	if !parts.Known(s.Input) || input > s.Input {
		s.Input, s.InputPointer = input, at
	}
	if !(s.SourceResistance <= source) {
		s.SourceResistance = source
	}
	s.Output = greatest(s.Output, output)
}

// asked returns the output voltage that a control asks for, NaN at fixed duty.
func asked(s *stage.Stage, c *stage.Control) float64 {
	switch c.Kind {
	case stage.RegulateTo:
		return c.Voltage
	case stage.ByFeedback:
		if s != nil {
			return s.Feedback.OutputVoltage()
		}
	}
	return parts.Unknown
}

// greatest returns the larger of two values of which either may be unknown.
func greatest(a, b float64) float64 {
	if !parts.Known(a) || b > a {
		return b
	}
	return a
}
