package wire

import (
	"fmt"
	"reflect"
	"slices"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Decoded is a stage with what stands beside its typical values.
type Decoded struct {
	Stage     *stage.Stage
	Variables []spread.Variable // every spread, in the order of stage.Fields
	Assumed   []stage.Assumed   // every default that was used
	Unused    []string          // pointers of numbers that this topology does not use
}

// Decode turns the stage that stands at the pointer root into calc's form. The
// error is an *InvalidError with every fault.
func (w *Stage) Decode(root string) (*Decoded, error) {
	var faults []Fault
	d := &Decoded{Stage: stage.Outline(rectifiers[w.Rectifier], len(w.OutputCapacitors), len(w.InputCapacitors), len(w.Phases),
		w.Modulator != nil, w.Compensator != nil, w.Feedback != nil, w.Inductor != nil && w.Inductor.Core != nil)}
	w.describe(d.Stage, root, &faults)
	fields := d.Stage.Fields()
	d.numbers(w, fields, root, &faults)
	assumed, err := d.Stage.Complete(fields)
	d.Assumed = assumed
	faults = append(faults, beside(faults, err, root)...)
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return d, nil
}

// numbers fills the stage's registered numbers and collects their spreads.
func (d *Decoded) numbers(w *Stage, fields []stage.Field, root string, faults *[]Fault) {
	given, spreads := make([]slot, len(fields)), 0
	places := stage.Lookup{Fields: fields}
	walk(reflect.ValueOf(w).Elem(), "", false, func(id string, s slot) {
		if !s.given() {
			return
		}
		i := places.Find(id)
		if i < 0 {
			d.Unused = append(d.Unused, root+"/"+id)
			return
		}
		given[i] = s
		if s.number != nil && (*s.number).Spread != nil {
			spreads++
		}
	})
	d.Variables = slices.Grow(d.Variables, spreads)
	members := groups{}
	for i := range fields {
		f, s := &fields[i], given[i]
		switch {
		case s.plain != nil:
			*f.Value = **s.plain
		case s.whole != nil:
			*f.Value = float64(**s.whole)
		case s.number != nil && (*s.number).Spread == nil:
			*f.Value = (*s.number).Value
		case s.number != nil:
			d.spread(f, *s.number, root+"/"+f.ID, members, faults)
		default:
			*f.Value = parts.Unknown
		}
	}
}

// spread takes the typical value of a spread and collects it as a variable.
func (d *Decoded) spread(f *stage.Field, n *Number, at string, members groups, faults *[]Fault) {
	*f.Value = n.typical()
	if wrong := n.faults(at); wrong != nil {
		*faults = append(*faults, wrong...)
		return
	}
	*faults = append(*faults, members.join(at, n)...)
	v, wide := n.variable(at, f.ID)
	if !wide {
		return
	}
	d.Variables = append(d.Variables, v)
	if v.Min < f.Least && *f.Value >= f.Least {
		*faults = append(*faults, endFault(at, "min", v.Min, f.Least, n))
	}
	if v.Max > f.Greatest && *f.Value <= f.Greatest {
		*faults = append(*faults, endFault(at, "max", v.Max, f.Greatest, n))
	}
}

// endFault reports an end of a spread that lies outside the physical range.
func endFault(at, end string, received, limit float64, n *Number) Fault {
	token := "/" + end
	if n.Spread.Tol != nil {
		token = "/tol"
	}
	return Fault{
		Pointer: at + token, Keyword: "physics", Limit: "up to " + figure(limit), Received: figure(received), Unit: UnitOf(at),
		Detail: "the spread's " + end + " lies outside the physical range",
	}
}

// beside returns the faults of the stage's own check that were not known before.
func beside(known []Fault, err error, root string) []Fault {
	if err == nil {
		return nil
	}
	said := make(map[string]bool, len(known))
	for i := range known {
		said[known[i].Pointer] = true
	}
	var faults []Fault
	for _, f := range faultsOf(Located(err, root)) {
		if !said[f.Pointer] {
			faults = append(faults, f)
		}
	}
	return faults
}

// describe fills in everything that is not a registered number: names, kinds,
// counts and tables.
func (w *Stage) describe(s *stage.Stage, root string, faults *[]Fault) {
	s.Name = w.Name
	if w.PhaseCount != nil {
		s.PhaseCount = int(*w.PhaseCount)
	}
	if w.HighSide != nil {
		w.HighSide.describe(&s.HighSide, root+"/high_side", faults)
	}
	if w.LowSide != nil {
		w.LowSide.describe(&s.LowSide, root+"/low_side", faults)
	}
	if w.Diode != nil {
		w.Diode.describe(&s.Diode, root+"/diode", faults)
	}
	if w.Inductor != nil {
		w.Inductor.describe(&s.Inductor, root+"/inductor", faults)
	}
	for i, c := range w.OutputCapacitors {
		c.describe(&s.OutputCapacitors[i], fmt.Sprintf("%s/output_capacitors/%d", root, i), faults)
	}
	for i, c := range w.InputCapacitors {
		c.describe(&s.InputCapacitors[i], fmt.Sprintf("%s/input_capacitors/%d", root, i), faults)
	}
	if w.Controller != nil {
		s.Controller.PartNumber, s.Controller.DriveSupply = w.Controller.PartNumber, driveSupplies[w.Controller.DriveSupply]
	}
	if m := w.Modulator; m != nil {
		s.Modulator.Mode, s.Modulator.FeedForward = modulatorModes[m.Mode], isTrue(m.FeedForward)
	}
	if w.Compensator != nil {
		s.Compensator.Type = compensatorTypes[w.Compensator.Type]
	}
	for _, c := range w.ThermalCouplings {
		s.ThermalCouplings = append(s.ThermalCouplings, stage.ThermalCoupling{A: c.A, B: c.B, Resistance: c.Resistance})
	}
}

func (w *MOSFET) describe(m *parts.MOSFET, at string, faults *[]Fault) {
	m.PartNumber, m.Assumed = w.PartNumber, isTrue(w.Assumed)
	m.OnResistanceTemp = table(w.OnResistanceTemp, at+"/on_resistance_temp", "junction_degc", faults)
	m.OnResistanceDrive = table(w.OnResistanceDrive, at+"/on_resistance_drive", "drive_v", faults)
	m.OutputChargeTable = table(w.OutputChargeTable, at+"/output_charge_table", "voltage_v", faults)
}

func (w *Diode) describe(d *parts.Diode, at string, faults *[]Fault) {
	d.PartNumber, d.Assumed = w.PartNumber, isTrue(w.Assumed)
	d.Leakage = table(w.Leakage, at+"/leakage", "junction_degc", faults)
}

func (w *Inductor) describe(l *parts.Inductor, at string, faults *[]Fault) {
	l.PartNumber, l.Assumed = w.PartNumber, isTrue(w.Assumed)
	l.InductanceAtCurrent = table(w.InductanceAtCurrent, at+"/inductance_at_current", "current_a", faults)
	if w.Core != nil {
		l.Core.Temp = table(w.Core.Temp, at+"/core/temp", "core_degc", faults)
	}
}

func (w *Capacitor) describe(c *parts.Capacitor, at string, faults *[]Fault) {
	c.PartNumber, c.Assumed, c.Kind, c.Count = w.PartNumber, isTrue(w.Assumed), capacitorKinds[w.Kind], 1
	if w.Count != nil {
		c.Count = int(*w.Count)
	}
	c.CapacitanceAtBias = table(w.CapacitanceAtBias, at+"/capacitance_at_bias", "bias_v", faults)
	c.CapacitanceTemp = table(w.CapacitanceTemp, at+"/capacitance_temp", "temperature_degc", faults)
	c.ESRTemp = table(w.ESRTemp, at+"/esr_temp", "temperature_degc", faults)
	c.CapacitanceAgeing = table(w.Ageing, at+"/ageing", "age_ratio", faults)
	if n := len(w.Ageing); n > 0 {
		esr := make([]float64, n)
		for i, r := range w.Ageing {
			esr[i] = r.ESR
		}
		c.ESRAgeing = numeric.Table{X: c.CapacitanceAgeing.X, Y: esr}
	}
}

func isTrue(b *bool) bool { return b != nil && *b }
