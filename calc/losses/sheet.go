// Package losses computes the power lost in each part by each mechanism. One
// file holds one mechanism; Sheet is the table in which each item stands once.
package losses

import "strconv"

// Part names a place where power is lost. Capacitor banks follow one another.
type Part uint8

const (
	HighSide Part = iota
	LowSide
	Diode
	Inductor
	Controller
	Board
	OutputCapacitor // the first bank; bank k is OutputCapacitor + k
	InputCapacitor  = OutputCapacitor + 6
	PartCount       = InputCapacitor + 6
)

// String returns the part's role as it stands in pointers.
func (p Part) String() string {
	switch {
	case p >= InputCapacitor:
		return "input_capacitors/" + strconv.Itoa(int(p-InputCapacitor))
	case p >= OutputCapacitor:
		return "output_capacitors/" + strconv.Itoa(int(p-OutputCapacitor))
	}
	return [...]string{"high_side", "low_side", "diode", "inductor", "controller", "board"}[p]
}

// Mechanism names a way in which power is lost.
type Mechanism uint8

const (
	Conduction Mechanism = iota
	Overlap
	OutputCharge
	Recovery
	DeadTime
	GateDrive
	Leakage
	JunctionCharge
	WindingDC
	WindingAC
	CoreHysteresis
	SeriesResistance
	Quiescent
	Auxiliary
	InputPath
	OutputPath
	SwitchNodePath
	SourcePath
	MechanismCount
)

// String returns the mechanism's name on the wire.
func (m Mechanism) String() string {
	return [...]string{
		"conduction", "overlap", "output_charge", "recovery", "dead_time", "gate_drive", "leakage", "junction_charge",
		"winding_dc", "winding_ac", "core", "series_resistance", "quiescent", "auxiliary", "input_path", "output_path", "switch_node_path", "source",
	}[m]
}

// Item is one mechanism's loss in one part of one phase.
type Item struct {
	Part      Part
	Mechanism Mechanism
	Power     float64 // [W] in one phase's part
	Count     int     // phases that have it
	BandLow   float64 // [1] least factor on Power, of the model
	BandHigh  float64 // [1] greatest factor
}

// MaxItems bounds a sheet.
const MaxItems = 40

// Sheet is the table of loss items of one operating point.
type Sheet struct {
	N     int
	Items [MaxItems]Item
}

// Add appends an item.
func (s *Sheet) Add(i Item) {
	s.Items[s.N] = i
	s.N++
}

// Total returns the sum over all items and phases [W].
func (s *Sheet) Total() float64 {
	sum := 0.0
	for i := range s.Items[:s.N] {
		sum += s.Items[i].Power * float64(s.Items[i].Count)
	}
	return sum
}

// Of returns the power lost in one phase's part [W].
func (s *Sheet) Of(p Part) float64 {
	var all [PartCount]float64
	s.ByPart(&all)
	return all[p]
}

// ByPart sums up the power lost in each part of one phase [W].
func (s *Sheet) ByPart(dst *[PartCount]float64) {
	*dst = [PartCount]float64{}
	for i := range s.Items[:s.N] {
		item := &s.Items[i]
		dst[item.Part] += item.Power
	}
}

// PartByName returns the part with a role's name, as String writes it.
func PartByName(name string) (Part, bool) {
	for p := range PartCount {
		if p.String() == name {
			return p, true
		}
	}
	return 0, false
}
