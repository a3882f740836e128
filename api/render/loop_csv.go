package render

import (
	"reflect"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// LoopCSV writes a line per point and frequency; without curves, a line of margins
// per point.
func LoopCSV(a *wire.LoopGainAnswer) []byte {
	for i := range a.Items {
		if a.Items[i].Curves != nil {
			return loopCurves(a)
		}
	}
	s := newSheet("point", headed("input_v"), headed("load_current_a"), headed("ambient_degc"), "status", "stability", "crossing", headed("crossover_hz"), headed("phase_margin_deg"),
		headed("gain_margin_db"), headed("gain_reduction_db"), "modulus_margin_ratio", headed("modulus_margin_at_hz"), headed("bandwidth_hz"), "conditionally_stable", headed("output_impedance_peak_ohm"), headed("output_impedance_peak_at_hz"))
	for i := range a.Items {
		x := &a.Items[i]
		s.row(append(pointCells(i, x.Point), x.Status, x.Stability, x.Crossing, numberOf(x.Crossover), numberOf(x.PhaseMargin), numberOf(x.GainMargin), numberOf(x.GainReduction), numberOf(x.ModulusMargin),
			numberOf(x.ModulusMarginAt), numberOf(x.Bandwidth), truth(x.Conditional), numberOf(x.ImpedancePeak), numberOf(x.ImpedancePeakAt))...)
	}
	return s.bytes()
}

func pointCells(i int, p *wire.Point) []string {
	var load *float64
	if p.Load != nil {
		load = p.Load.Current
	}
	return []string{strconv.Itoa(i), number(p.Input), numberOf(load), number(p.Ambient)}
}

func truth(b *bool) string {
	if b == nil {
		return ""
	}
	return strconv.FormatBool(*b)
}

// loopCurves writes every column of the curves under its name in the contract.
func loopCurves(a *wire.LoopGainAnswer) []byte {
	header := []string{"point", headed("input_v"), headed("load_current_a"), headed("ambient_degc")}
	t := reflect.TypeFor[wire.LoopCurves]()
	for i := range t.NumField() {
		name, _, _ := strings.Cut(t.Field(i).Tag.Get("json"), ",")
		header = append(header, headed(name))
	}
	s := newSheet(header...)
	for i := range a.Items {
		c := a.Items[i].Curves
		if c == nil {
			continue
		}
		columns := reflect.ValueOf(c).Elem()
		for k := range c.Frequency {
			cells := pointCells(i, a.Items[i].Point)
			for f := range columns.NumField() {
				cell := ""
				if list := columns.Field(f).Interface().([]float64); k < len(list) {
					cell = number(list[k])
				}
				cells = append(cells, cell)
			}
			s.row(cells...)
		}
	}
	return s.bytes()
}
