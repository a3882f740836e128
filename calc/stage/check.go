package stage

import (
	"fmt"
	"strings"

	"railproof/calc/parts"
)

// Fault is one thing about a stage, point or requirement that physics forbids.
type Fault struct {
	Field    string  // field id, or "" for the whole
	Given    float64 // [any] parts.Unknown where nothing was given
	Accepted string  // what would be accepted, in words with units
	Limit    float64 // [any] the bound that was crossed; parts.Unknown: none
	Detail   string
}

// InvalidError lists every fault of a document at once.
type InvalidError struct{ Faults []Fault }

// Error names the faults' fields.
func (e *InvalidError) Error() string {
	ids := make([]string, len(e.Faults))
	for i, f := range e.Faults {
		ids[i] = f.Field
	}
	return fmt.Sprintf("stage: invalid: %s", strings.Join(ids, ", "))
}

// Check reports what is missing from the stage or outside its physical bounds.
// Call it after ApplyDefaults. The error is an *InvalidError.
func (s *Stage) Check() error { return s.check(s.Fields()) }

func (s *Stage) check(fields []Field) error {
	var f faults
	for i := range fields {
		x := &fields[i]
		v := *x.Value
		switch {
		case !parts.Known(v):
			if x.Required {
				f = append(f, Fault{Field: x.ID, Given: v, Limit: parts.Unknown, Accepted: "a number", Detail: strings.TrimSuffix("required for this stage: "+x.Why, ": ")})
			}
		case x.Default != nil && v == x.Default.Value:
		default:
			f.within(x.ID, v, x.Least, x.Greatest, "")
		}
	}
	if drive, plateau := s.Controller.Drive, s.HighSide.Plateau; drive <= plateau {
		f = append(f, Fault{Field: "controller/drive_v", Given: drive, Limit: plateau, Accepted: fmt.Sprintf("above the high side's gate plateau of %g V", plateau), Detail: "the gate is never driven beyond its plateau: the switch does not turn on"})
	}
	f.within("phase_count", float64(s.PhaseCount), 1, MaxPhases, "phases")
	f.within("output_capacitors", float64(len(s.OutputCapacitors)), 1, MaxBanks, "banks")
	f.within("input_capacitors", float64(len(s.InputCapacitors)), 0, MaxBanks, "banks")
	if n := len(s.Phases); n > 0 && n != s.PhaseCount {
		f = append(f, Fault{Field: "phases", Given: float64(n), Limit: float64(s.PhaseCount), Accepted: fmt.Sprintf("%d entries, one for each phase", s.PhaseCount), Detail: "phase overrides"})
	}
	f.couplings(s)
	return f.err()
}
