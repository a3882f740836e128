package parts

import (
	"math"

	"railproof/calc/numeric"
)

// Beyond is the set of a part's tables that were read beyond their ends. What
// rests on such a reading is an assumption.
type Beyond uint16

const (
	BeyondOnResistanceTemp Beyond = 1 << iota
	BeyondOnResistanceDrive
	BeyondOutputCharge
	BeyondLeakage
	BeyondSaturation
	BeyondCoreTemp
	BeyondBias
	BeyondCapacitanceTemp
	BeyondESRTemp
	BeyondCapacitanceAgeing
	BeyondESRAgeing
)

var beyondFields = [...]string{
	"on_resistance_temp", "on_resistance_drive", "output_charge_table", "leakage", "inductance_at_current", "core/temp",
	"capacitance_at_bias", "capacitance_temp", "esr_temp", "ageing", "ageing",
}

// Fields returns the names of the tables, relative to the part, each once.
func (b Beyond) Fields() []string {
	var names []string
	for i, name := range beyondFields {
		if b&(1<<i) != 0 && (len(names) == 0 || names[len(names)-1] != name) {
			names = append(names, name)
		}
	}
	return names
}

func (b *Beyond) read(t *numeric.Table, x float64, bit Beyond) {
	if !t.Covers(x) {
		*b |= bit
	}
}

// Beyond tells which tables were read beyond their ends at a junction
// temperature, drive voltage and blocking voltage.
func (m *MOSFET) Beyond(junctionDegC, drive, blocking float64) Beyond {
	var b Beyond
	b.read(&m.OnResistanceTemp, junctionDegC, BeyondOnResistanceTemp)
	b.read(&m.OnResistanceDrive, drive, BeyondOnResistanceDrive)
	if t := &m.OutputChargeTable; !t.Empty() && blocking > t.X[len(t.X)-1] {
		b |= BeyondOutputCharge
	}
	return b
}

// Beyond tells whether the leakage table was read beyond its ends.
func (d *Diode) Beyond(junctionDegC float64) Beyond {
	var b Beyond
	b.read(&d.Leakage, junctionDegC, BeyondLeakage)
	return b
}

// Beyond tells which tables were read beyond their ends with the current between
// valley and peak and the core at a temperature.
func (l *Inductor) Beyond(valley, peak, coreDegC float64) Beyond {
	var b Beyond
	if t := &l.InductanceAtCurrent; !t.Empty() && max(math.Abs(valley), math.Abs(peak)) > t.X[len(t.X)-1] {
		b |= BeyondSaturation
	}
	if l.Core.Present {
		b.read(&l.Core.Temp, coreDegC, BeyondCoreTemp)
	}
	return b
}

// Beyond tells which tables were read beyond their ends.
func (c *Capacitor) Beyond(bias, degC, age float64) Beyond {
	var b Beyond
	if t := &c.CapacitanceAtBias; !t.Empty() && math.Abs(bias) > t.X[len(t.X)-1] {
		b |= BeyondBias
	}
	b.read(&c.CapacitanceTemp, degC, BeyondCapacitanceTemp)
	b.read(&c.ESRTemp, degC, BeyondESRTemp)
	b.read(&c.CapacitanceAgeing, age, BeyondCapacitanceAgeing)
	b.read(&c.ESRAgeing, age, BeyondESRAgeing)
	return b
}
