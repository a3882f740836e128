package service

import (
	"fmt"
	"math"
	"slices"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
)

// coverSlack is the relative difference below which two ends of a range are the same.
const coverSlack = 1e-9 // [1]

// uncovered lists what the requirement asks for beyond the conditions: what was not
// looked at there cannot pass. Age counts where a part has an ageing table.
func uncovered(r *worstRequest) (list []rules.Gap) {
	c, q := &r.conditions, r.requirement
	gap := func(field, unit string, asked, looked stage.Range) {
		slack := coverSlack * math.Max(math.Abs(asked.Min), math.Abs(asked.Max))
		if looked.Min <= asked.Min+slack && looked.Max >= asked.Max-slack {
			return
		}
		list = append(list, rules.Gap{Pointer: r.at + "/" + field, Detail: fmt.Sprintf(
			"The requirement asks for %.6g to %.6g %s; the conditions reach from %.6g to %.6g %s.", asked.Min, asked.Max, unit, looked.Min, looked.Max, unit)})
	}
	gap("input_v", "V", q.Input, c.Input)
	gap("ambient_degc", "°C", q.AmbientDegC, c.AmbientDegC)
	load := c.LoadCurrent
	load.Min += q.Output * c.LoadConductance.Min
	load.Max += q.Output * c.LoadConductance.Max
	gap("load", "A", q.LoadCurrent, load)
	if math.Abs(c.SourceResistance-q.SourceResistance) > coverSlack*q.SourceResistance {
		list = append(list, rules.Gap{Pointer: r.at + "/source_ohm", Detail: fmt.Sprintf("The requirement's source has %.6g Ω; the conditions have %.6g Ω.", q.SourceResistance, c.SourceResistance)})
	}
	if slices.ContainsFunc(slices.Concat(r.design.Stage.OutputCapacitors, r.design.Stage.InputCapacitors), ages) {
		gap("age_ratio", "of the life", stage.Range{Max: 1}, c.AgeRatio)
	}
	if q.Targets.HoldUp.Time > 0 {
		list = append(list, rules.Gap{Pointer: r.requirementAt + "/targets/hold_up", Detail: "A hold-up time is asked for; the service sizes for it and has no rule that checks it."})
	}
	return list
}

func ages(c parts.Capacitor) bool {
	return len(c.CapacitanceAgeing.X) > 0 || len(c.ESRAgeing.X) > 0
}

// heldOutput tells that the voltage at the load cannot be judged where the output is held
// at a voltage: the tolerances of reference and divider, which set it, are left out.
func (w *worstCase) heldOutput(r *worstRequest) {
	if r.conditions.Control.Kind == stage.RegulateTo {
		for _, id := range []quantity.ID{quantity.LoadVoltage, quantity.OutputError} {
			w.Absent[id] = []string{"regulation by the stage's feedback: the conditions hold the output at a voltage"}
		}
	}
}
