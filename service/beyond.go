package service

import (
	"strconv"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// tableUse is a table of the stage that a point reads beyond its ends.
type tableUse struct {
	tail  string // pointer below the stage
	table func(*stage.Stage) *numeric.Table
}

// beyondTables lists the tables that the point reads beyond their ends. Their
// effect is the change that appears if each stayed at its last value instead of
// going on with its last slope.
func (s *Service) beyondTables(d *Design, base *basis) []Assumption {
	var list []Assumption
	for _, use := range tablesBeyond(d.Stage, base) {
		a := numberless(d.At+use.tail, "read beyond its ends: the last slope goes on; the effect compares with the last value held")
		held := d.Stage.Clone()
		t := use.table(held)
		*t = flatBeyond(*t)
		var r evaluate.Result
		e := s.evaluator(held)
		e.Eval(base.point, &r)
		s.release(e)
		if a.Effect = effect(base.result, &r, &r); a.Effect != nil {
			a.Effect.AtLow, a.Effect.AtHigh = parts.Unknown, parts.Unknown
		}
		list = append(list, a)
	}
	return list
}

// flatBeyond returns the table with a level piece at each end.
func flatBeyond(t numeric.Table) numeric.Table {
	n := len(t.X)
	var flat numeric.Table
	flat.X = append(append(append(flat.X, t.X[0]-1), t.X...), t.X[n-1]+1)
	flat.Y = append(append(append(flat.Y, t.Y[0]), t.Y...), t.Y[n-1])
	return flat
}

func tablesBeyond(s *stage.Stage, b *basis) []tableUse {
	q, degC := &b.result.Quantities, &b.result.PartDegC
	var list []tableUse
	add := func(part string, b parts.Beyond, tables map[string]func(*stage.Stage) *numeric.Table) {
		for _, name := range b.Fields() {
			if t := tables[name]; t != nil {
				list = append(list, tableUse{part + "/" + name, t})
			}
		}
	}
	bridge := q[quantity.BridgeVoltage]
	add("/high_side", s.HighSide.Beyond(degC[losses.HighSide], s.Controller.Drive, bridge), switchTables(func(s *stage.Stage) *parts.MOSFET { return &s.HighSide }))
	if s.Rectifier == stage.DiodeRectified {
		add("/diode", s.Diode.Beyond(degC[losses.Diode]), map[string]func(*stage.Stage) *numeric.Table{
			"leakage": func(s *stage.Stage) *numeric.Table { return &s.Diode.Leakage },
		})
	} else {
		add("/low_side", s.LowSide.Beyond(degC[losses.LowSide], s.Controller.Drive, bridge), switchTables(func(s *stage.Stage) *parts.MOSFET { return &s.LowSide }))
	}
	add("/inductor", s.Inductor.Beyond(q[quantity.InductorValley], q[quantity.InductorPeak], degC[losses.Inductor]), map[string]func(*stage.Stage) *numeric.Table{
		"inductance_at_current": func(s *stage.Stage) *numeric.Table { return &s.Inductor.InductanceAtCurrent },
		"core/temp":             func(s *stage.Stage) *numeric.Table { return &s.Inductor.Core.Temp },
	})
	for i := range s.OutputCapacitors {
		at := func(s *stage.Stage) *parts.Capacitor { return &s.OutputCapacitors[i] }
		add(bankAt("/output_capacitors/", i), at(s).Beyond(q[quantity.OutputMean], degC[losses.OutputCapacitor+losses.Part(i)], b.point.AgeRatio), capacitorTables(at))
	}
	for i := range s.InputCapacitors {
		at := func(s *stage.Stage) *parts.Capacitor { return &s.InputCapacitors[i] }
		add(bankAt("/input_capacitors/", i), at(s).Beyond(bridge, degC[losses.InputCapacitor+losses.Part(i)], b.point.AgeRatio), capacitorTables(at))
	}
	return list
}

func switchTables(of func(*stage.Stage) *parts.MOSFET) map[string]func(*stage.Stage) *numeric.Table {
	return map[string]func(*stage.Stage) *numeric.Table{
		"on_resistance_temp":  func(s *stage.Stage) *numeric.Table { return &of(s).OnResistanceTemp },
		"on_resistance_drive": func(s *stage.Stage) *numeric.Table { return &of(s).OnResistanceDrive },
		"output_charge_table": func(s *stage.Stage) *numeric.Table { return &of(s).OutputChargeTable },
	}
}

func capacitorTables(of func(*stage.Stage) *parts.Capacitor) map[string]func(*stage.Stage) *numeric.Table {
	return map[string]func(*stage.Stage) *numeric.Table{
		"capacitance_at_bias": func(s *stage.Stage) *numeric.Table { return &of(s).CapacitanceAtBias },
		"capacitance_temp":    func(s *stage.Stage) *numeric.Table { return &of(s).CapacitanceTemp },
		"esr_temp":            func(s *stage.Stage) *numeric.Table { return &of(s).ESRTemp },
		"ageing":              func(s *stage.Stage) *numeric.Table { return &of(s).CapacitanceAgeing },
	}
}

func bankAt(list string, i int) string { return list + strconv.Itoa(i) }
