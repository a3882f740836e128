package wire

import (
	"fmt"
	"strconv"

	"railproof/calc/numeric"
)

// The rows of tables. Each is a closed object of two named columns.
type (
	// JunctionFactor multiplies a value at a junction temperature.
	JunctionFactor struct {
		Junction   float64 `json:"junction_degc"`
		Multiplier float64 `json:"multiplier_ratio"`
	}
	// DriveFactor multiplies a value at a gate drive voltage.
	DriveFactor struct {
		Drive      float64 `json:"drive_v"`
		Multiplier float64 `json:"multiplier_ratio"`
	}
	// VoltageCharge is a charge at a drain-source voltage.
	VoltageCharge struct {
		Voltage float64 `json:"voltage_v"`
		Charge  float64 `json:"charge_c"`
	}
	// JunctionCurrent is a current at a junction temperature.
	JunctionCurrent struct {
		Junction float64 `json:"junction_degc"`
		Current  float64 `json:"current_a"`
	}
	// CurrentFactor multiplies a value at a direct current.
	CurrentFactor struct {
		Current    float64 `json:"current_a"`
		Multiplier float64 `json:"multiplier_ratio"`
	}
	// CoreFactor multiplies a value at a core temperature.
	CoreFactor struct {
		Core       float64 `json:"core_degc"`
		Multiplier float64 `json:"multiplier_ratio"`
	}
	// BiasFactor multiplies a value at a direct voltage.
	BiasFactor struct {
		Bias       float64 `json:"bias_v"`
		Multiplier float64 `json:"multiplier_ratio"`
	}
	// CapacitorFactor multiplies a value at a capacitor temperature.
	CapacitorFactor struct {
		Capacitor  float64 `json:"temperature_degc"`
		Multiplier float64 `json:"multiplier_ratio"`
	}
	// AgeFactor multiplies capacitance and series resistance at an age.
	AgeFactor struct {
		Age         float64 `json:"age_ratio"`
		Capacitance float64 `json:"capacitance_ratio"`
		ESR         float64 `json:"esr_ratio"`
	}
)

func (r JunctionFactor) pair() (x, y float64)  { return r.Junction, r.Multiplier }
func (r DriveFactor) pair() (x, y float64)     { return r.Drive, r.Multiplier }
func (r VoltageCharge) pair() (x, y float64)   { return r.Voltage, r.Charge }
func (r JunctionCurrent) pair() (x, y float64) { return r.Junction, r.Current }
func (r CurrentFactor) pair() (x, y float64)   { return r.Current, r.Multiplier }
func (r CoreFactor) pair() (x, y float64)      { return r.Core, r.Multiplier }
func (r BiasFactor) pair() (x, y float64)      { return r.Bias, r.Multiplier }
func (r CapacitorFactor) pair() (x, y float64) { return r.Capacitor, r.Multiplier }
func (r AgeFactor) pair() (x, y float64)       { return r.Age, r.Capacitance }

// table converts rows and adds a fault where the first column does not rise.
func table[R interface{ pair() (x, y float64) }](rows []R, at, column string, faults *[]Fault) numeric.Table {
	var t numeric.Table
	for i, r := range rows {
		x, y := r.pair()
		if i > 0 && !(x > t.X[i-1]) {
			p := at + "/" + strconv.Itoa(i) + "/" + column
			*faults = append(*faults, Fault{
				Pointer: p, Keyword: "table", Limit: "above " + figure(t.X[i-1]), Received: figure(x), Unit: UnitOf(p),
				Detail: fmt.Sprintf("a table rises strictly in its first column; the row before has %g", t.X[i-1]),
			})
		}
		t.X, t.Y = append(t.X, x), append(t.Y, y)
	}
	return t
}

// rows converts a table back; nil for an empty one.
func rows[R any](t numeric.Table, row func(x, y float64) R) []R {
	var r []R
	for i := range t.X {
		r = append(r, row(t.X[i], t.Y[i]))
	}
	return r
}
