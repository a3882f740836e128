package corners

import (
	"railproof/calc/losses"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Scale is a factor on numbers of the stage that is no tolerance: a drift over life
// of known sign, or the band of a loss model.
type Scale struct {
	Pointer   string   // RFC 6901, by which it is named
	Fields    []string // stage field ids that it multiplies
	Low, High float64  // [1] least and greatest factor, around 1
}

// Drift returns the scale of a number that drifts by a ratio towards the end of life.
func Drift(pointer, field string, ratio float64) Scale {
	return Scale{pointer, []string{field}, min(1, 1+ratio), max(1, 1+ratio)}
}

// at returns the factor at coordinate z.
func (s *Scale) at(z float64) float64 {
	v := spread.Variable{Min: s.Low, Typ: 1, Max: s.High}
	return v.At(z)
}

// ModelBands returns the bands of the loss models as scales on the numbers that
// their losses are proportional to. Leakage has no such number and keeps its model.
func ModelBands(s *stage.Stage) []Scale {
	band := func(m losses.Mechanism, fields ...string) Scale {
		b := losses.ModelBand(m)
		return Scale{"/model_bands/" + m.String(), fields, b.Low, b.High}
	}
	list := []Scale{band(losses.Overlap, "high_side/gate_switch_charge_c"), band(losses.WindingAC, "inductor/ac_resistance_ratio")}
	if s.Rectifier == stage.DiodeRectified {
		list = append(list,
			band(losses.OutputCharge, "high_side/output_charge_c"),
			band(losses.JunctionCharge, "diode/junction_charge_c"),
			band(losses.Recovery, "diode/recovery_charge_c"),
			band(losses.DeadTime, "high_side/body_diode_v"))
	} else {
		list = append(list,
			band(losses.OutputCharge, "high_side/output_charge_c", "low_side/output_charge_c"),
			band(losses.Recovery, "low_side/recovery_charge_c"),
			band(losses.DeadTime, "high_side/body_diode_v", "low_side/body_diode_v"))
	}
	if core := &s.Inductor.Core; core.Present {
		list = append(list, Scale{"/model_bands/" + losses.CoreHysteresis.String(), []string{"inductor/core/steinmetz/k"}, core.BandLow, core.BandHigh})
	}
	return list
}
