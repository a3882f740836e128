package stage

import (
	"fmt"
	"strconv"
	"strings"

	"railproof/calc/parts"
)

// toAmbient returns the resistance from a part to ambient [K/W], of a bank that
// of all its pieces together; false if the stage has no such part.
func (s *Stage) toAmbient(role string) (resistance float64, present bool) {
	switch role {
	case "high_side":
		return s.HighSide.Thermal.JunctionToAmbient, true
	case "low_side":
		return s.LowSide.Thermal.JunctionToAmbient, s.Rectifier != DiodeRectified
	case "diode":
		return s.Diode.Thermal.JunctionToAmbient, s.Rectifier == DiodeRectified
	case "inductor":
		return s.Inductor.Thermal.JunctionToAmbient, true
	case "controller":
		return s.Controller.Thermal.JunctionToAmbient, true
	}
	list, index, _ := strings.Cut(role, "/")
	banks := map[string][]parts.Capacitor{"output_capacitors": s.OutputCapacitors, "input_capacitors": s.InputCapacitors}[list]
	k, err := strconv.Atoi(index)
	if err != nil || k < 0 || k >= len(banks) {
		return parts.Unknown, false
	}
	return banks[k].Thermal.JunctionToAmbient / banks[k].Pieces(), true
}

// couplings checks the mutual resistances: between two parts that the stage has,
// each pair once, and none above what either part has to ambient. A source heats
// its own junction more than any other place, so a larger one cannot be.
func (f *faults) couplings(s *Stage) {
	seen := map[[2]string]bool{}
	for i, c := range s.ThermalCouplings {
		at := "thermal_couplings/" + strconv.Itoa(i)
		refuse := func(field, accepted, detail string) {
			*f = append(*f, Fault{Field: at + field, Given: parts.Unknown, Limit: parts.Unknown, Accepted: accepted, Detail: detail})
		}
		a, hasA := s.toAmbient(c.A)
		b, hasB := s.toAmbient(c.B)
		switch {
		case !hasA:
			refuse("/a", "a part of this stage", fmt.Sprintf("the stage has no %q", c.A))
		case !hasB:
			refuse("/b", "a part of this stage", fmt.Sprintf("the stage has no %q", c.B))
		case c.A == c.B:
			refuse("/b", "another part", "a part's own resistance is its junction_to_ambient_k_per_w")
		case seen[[2]string{c.A, c.B}]:
			refuse("", "each pair once", "this pair of parts is coupled already")
		default:
			f.within(at+"/coupling_k_per_w", c.Resistance, 0, min(a, b), "K/W, the smaller of both parts' resistances to ambient")
		}
		seen[[2]string{c.A, c.B}], seen[[2]string{c.B, c.A}] = true, true
	}
}
