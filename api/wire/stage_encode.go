package wire

import (
	"math"
	"reflect"

	"railproof/calc/parts"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// EncodeStage writes a stage of calc in the contract's shape: every known finite
// number, as a spread where a variable names it.
func EncodeStage(s *stage.Stage, variables []spread.Variable) *Stage {
	w := outline(s)
	fields := s.Fields()
	values := make(map[string]float64, len(fields))
	for _, f := range fields {
		if parts.Known(*f.Value) && !math.IsInf(*f.Value, 0) {
			values[f.ID] = *f.Value
		}
	}
	wide := make(map[string]*spread.Variable, len(variables))
	for i := range variables {
		wide[variables[i].Field] = &variables[i]
	}
	walk(reflect.ValueOf(w).Elem(), "", true, func(id string, place slot) {
		v, found := values[id]
		switch {
		case !found:
		case place.plain != nil:
			*place.plain = &v
		case place.whole != nil:
			*place.whole = whole(int(v))
		case wide[id] != nil:
			*place.number = spreadOf(wide[id])
		default:
			*place.number = Of(v)
		}
	})
	prune(reflect.ValueOf(w).Elem())
	return w
}

// outline builds the objects that exist in the stage, with all that is not a
// registered number.
func outline(s *stage.Stage) *Stage {
	w := &Stage{Name: s.Name, Rectifier: nameOf(rectifiers, s.Rectifier), PhaseCount: whole(s.PhaseCount), HighSide: outlineMOSFET(&s.HighSide), Inductor: outlineInductor(&s.Inductor)}
	if s.Rectifier == stage.DiodeRectified {
		d := &s.Diode
		w.Diode = &Diode{PartNumber: d.PartNumber, Assumed: mark(d.Assumed), Leakage: rows(d.Leakage, func(x, y float64) JunctionCurrent { return JunctionCurrent{x, y} })}
	} else {
		w.LowSide = outlineMOSFET(&s.LowSide)
	}
	for i := range s.OutputCapacitors {
		w.OutputCapacitors = append(w.OutputCapacitors, outlineCapacitor(&s.OutputCapacitors[i]))
	}
	for i := range s.InputCapacitors {
		w.InputCapacitors = append(w.InputCapacitors, outlineCapacitor(&s.InputCapacitors[i]))
	}
	w.Controller = &Controller{PartNumber: s.Controller.PartNumber, DriveSupply: nameOf(driveSupplies, s.Controller.DriveSupply)}
	if m := &s.Modulator; m.Present {
		w.Modulator = &Modulator{Mode: nameOf(modulatorModes, m.Mode), FeedForward: mark(m.FeedForward)}
	}
	if c := &s.Compensator; c.Present {
		w.Compensator = &Compensator{Type: nameOf(compensatorTypes, c.Type)}
	}
	if s.Feedback.Present {
		w.Feedback = new(Feedback)
	}
	for range s.Phases {
		w.Phases = append(w.Phases, new(PhaseOverride))
	}
	for _, c := range s.ThermalCouplings {
		w.ThermalCouplings = append(w.ThermalCouplings, ThermalCoupling{c.A, c.B, c.Resistance})
	}
	return w
}

func outlineMOSFET(m *parts.MOSFET) *MOSFET {
	return &MOSFET{
		PartNumber: m.PartNumber, Assumed: mark(m.Assumed),
		OnResistanceTemp:  rows(m.OnResistanceTemp, func(x, y float64) JunctionFactor { return JunctionFactor{x, y} }),
		OnResistanceDrive: rows(m.OnResistanceDrive, func(x, y float64) DriveFactor { return DriveFactor{x, y} }),
		OutputChargeTable: rows(m.OutputChargeTable, func(x, y float64) VoltageCharge { return VoltageCharge{x, y} }),
	}
}

func outlineInductor(l *parts.Inductor) *Inductor {
	w := &Inductor{
		PartNumber: l.PartNumber, Assumed: mark(l.Assumed),
		InductanceAtCurrent: rows(l.InductanceAtCurrent, func(x, y float64) CurrentFactor { return CurrentFactor{x, y} }),
	}
	if l.Core.Present {
		w.Core = &Core{Temp: rows(l.Core.Temp, func(x, y float64) CoreFactor { return CoreFactor{x, y} })}
	}
	return w
}

func outlineCapacitor(c *parts.Capacitor) *Capacitor {
	w := &Capacitor{
		PartNumber: c.PartNumber, Assumed: mark(c.Assumed), Kind: nameOf(capacitorKinds, c.Kind), Count: whole(c.Count),
		CapacitanceAtBias: rows(c.CapacitanceAtBias, func(x, y float64) BiasFactor { return BiasFactor{x, y} }),
		CapacitanceTemp:   rows(c.CapacitanceTemp, func(x, y float64) CapacitorFactor { return CapacitorFactor{x, y} }),
		ESRTemp:           rows(c.ESRTemp, func(x, y float64) CapacitorFactor { return CapacitorFactor{x, y} }),
	}
	for i, x := range c.CapacitanceAgeing.X {
		w.Ageing = append(w.Ageing, AgeFactor{x, c.CapacitanceAgeing.Y[i], c.ESRAgeing.At(x)})
	}
	return w
}

func spreadOf(v *spread.Variable) *Number {
	s := &Spread{Min: &v.Min, Typ: &v.Typ, Max: &v.Max, Group: v.Group}
	if v.Distribution != spread.Uniform {
		s.Distribution = nameOf(distributions, v.Distribution)
	}
	if v.MatchTol != 0 {
		s.MatchTol = &v.MatchTol
	}
	return &Number{Spread: s}
}

func whole(n int) *Integer {
	i := Integer(n)
	return &i
}

func mark(b bool) *bool {
	if !b {
		return nil
	}
	return &b
}

// prune removes objects in which nothing was set, and reports whether v itself is
// such an object.
func prune(v reflect.Value) (empty bool) {
	empty = true
	for i := range v.NumField() {
		f := v.Field(i)
		switch {
		case f.Kind() == reflect.Pointer && f.Type() != numberType && f.Type().Elem().Kind() == reflect.Struct:
			if !f.IsNil() && prune(f.Elem()) {
				f.SetZero()
			}
		case f.Kind() == reflect.Slice && f.Type().Elem().Kind() == reflect.Pointer:
			for j := range f.Len() {
				prune(f.Index(j).Elem())
			}
		}
		empty = empty && f.IsZero()
	}
	return empty
}
