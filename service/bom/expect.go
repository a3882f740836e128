package bom

import (
	"math"
	"strconv"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/spread"
	"railproof/calc/stage"
	"railproof/service/notation"
)

// Expectation is what a proof rests on for one role.
type Expectation struct {
	Role       string
	HasValue   bool // false: a semiconductor, known by its part number only
	Kind       notation.Kind
	Value      float64 // SI unit of the kind
	Min, Max   float64 // ends of the proven spread
	Voltage    float64 // V, proven rating; NaN if none was given
	Saturation float64 // A, proven rating of an inductor; NaN if none was given
	Heating    float64 // A, the same
	Class      string  // of a capacitor: "class-1" or "class-2" ceramic, or noCeramic; "" if the proof does not tell
	Count      int     // pieces on the board
	PartNumber string
}

// noCeramic is the class of a capacitor of another kind than ceramic.
const noCeramic = "no ceramic"

// Roles lists the parts of a proven stage that stand on a board: those for which
// Expect knows something to compare.
func Roles(s *stage.Stage, spreads []spread.Variable) (list []string) {
	roles := []string{"high_side", "low_side", "diode", "inductor"}
	if s.Controller.PartNumber != "" {
		roles = append(roles, "controller")
	}
	for i := range s.OutputCapacitors {
		roles = append(roles, "output_capacitors/"+strconv.Itoa(i))
	}
	for i := range s.InputCapacitors {
		roles = append(roles, "input_capacitors/"+strconv.Itoa(i))
	}
	roles = append(roles, "feedback/upper_ohm", "feedback/lower_ohm", "compensator/feedback_ohm", "compensator/lead_ohm",
		"compensator/feedback_f", "compensator/shunt_f", "compensator/lead_f")
	for _, role := range roles {
		if e, ok := Expect(s, spreads, role); ok && (!e.HasValue || e.Value > 0) {
			list = append(list, role)
		}
	}
	return list
}

// Expect returns what a proven stage says about a role: high_side, low_side,
// diode, controller, inductor, a bank such as output_capacitors/0, or a field of feedback and
// compensator such as feedback/upper_ohm. ok is false if the stage has no such
// part.
func Expect(s *stage.Stage, spreads []spread.Variable, role string) (e Expectation, ok bool) {
	e = Expectation{Role: role, Count: 1, Voltage: math.NaN(), Saturation: math.NaN(), Heating: math.NaN(), Value: math.NaN(), Min: math.NaN(), Max: math.NaN()}
	phases := max(1, s.PhaseCount)
	switch role {
	case "high_side":
		e.PartNumber, e.Count = s.HighSide.PartNumber, phases
		return e, true
	case "low_side":
		e.PartNumber, e.Count = s.LowSide.PartNumber, phases
		return e, s.Rectifier != stage.DiodeRectified
	case "diode":
		e.PartNumber, e.Count = s.Diode.PartNumber, phases
		return e, s.Rectifier == stage.DiodeRectified
	case "controller":
		e.PartNumber = s.Controller.PartNumber
		return e, true
	case "inductor":
		e.PartNumber, e.Count, e.Kind = s.Inductor.PartNumber, phases, notation.Inductor
		e.Saturation, e.Heating = s.Inductor.Rating.Saturation, s.Inductor.Rating.Heating
		return e, e.value("inductor/inductance_h", s, spreads)
	}
	for _, side := range []struct {
		name  string
		banks []parts.Capacitor
	}{{"output_capacitors", s.OutputCapacitors}, {"input_capacitors", s.InputCapacitors}} {
		for i := range side.banks {
			if c := &side.banks[i]; role == side.name+"/"+strconv.Itoa(i) {
				e.PartNumber, e.Count, e.Kind, e.Voltage = c.PartNumber, max(1, c.Count), notation.Capacitor, c.Rating.Voltage
				switch c.Kind {
				case parts.CeramicClass1:
					e.Class = "class-1"
				case parts.CeramicClass2:
					e.Class = "class-2"
				case parts.CapacitorUnspecified:
				default:
					e.Class = noCeramic
				}
				return e, e.value(role+"/capacitance_f", s, spreads)
			}
		}
	}
	if !strings.HasPrefix(role, "feedback/") && !strings.HasPrefix(role, "compensator/") {
		return e, false
	}
	switch {
	case strings.HasSuffix(role, "_ohm"):
		e.Kind = notation.Resistor
	case strings.HasSuffix(role, "_f"):
		e.Kind = notation.Capacitor
	default:
		return e, false
	}
	return e, e.value(role, s, spreads)
}

// value takes the value and the ends of its spread from a field of the stage.
func (e *Expectation) value(field string, s *stage.Stage, spreads []spread.Variable) bool {
	v := s.Field(field)
	if v == nil || !parts.Known(*v) {
		return false
	}
	e.HasValue, e.Value, e.Min, e.Max = true, *v, *v, *v
	for i := range spreads {
		if spreads[i].Field == field {
			e.Value, e.Min, e.Max = spreads[i].Typ, spreads[i].Min, spreads[i].Max
		}
	}
	return true
}
