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
func (s *Stage) Check() error {
	var faults []Fault
	for _, f := range s.Fields() {
		v := *f.Value
		switch {
		case !parts.Known(v):
			if f.Required {
				faults = append(faults, Fault{Field: f.ID, Given: v, Limit: parts.Unknown, Accepted: "a number", Detail: "required for this stage"})
			}
		case f.Default != nil && v == f.Default.Value:
		case !(v >= f.Least):
			faults = append(faults, Fault{Field: f.ID, Given: v, Limit: f.Least, Accepted: fmt.Sprintf("at least %g", f.Least), Detail: "below the physical range"})
		case !(v <= f.Greatest):
			faults = append(faults, Fault{Field: f.ID, Given: v, Limit: f.Greatest, Accepted: fmt.Sprintf("at most %g", f.Greatest), Detail: "above the physical range"})
		}
	}
	if s.PhaseCount < 1 || s.PhaseCount > MaxPhases {
		faults = append(faults, Fault{Field: "phase_count", Given: float64(s.PhaseCount), Limit: MaxPhases, Accepted: fmt.Sprintf("1 to %d", MaxPhases), Detail: "phases"})
	}
	if n := len(s.OutputCapacitors); n < 1 || n > MaxBanks {
		faults = append(faults, Fault{Field: "output_capacitors", Given: float64(n), Limit: MaxBanks, Accepted: fmt.Sprintf("1 to %d banks", MaxBanks), Detail: "output capacitor banks"})
	}
	if n := len(s.InputCapacitors); n > MaxBanks {
		faults = append(faults, Fault{Field: "input_capacitors", Given: float64(n), Limit: MaxBanks, Accepted: fmt.Sprintf("at most %d banks", MaxBanks), Detail: "input capacitor banks"})
	}
	if len(faults) > 0 {
		return &InvalidError{faults}
	}
	return nil
}
