package sizing

import (
	"fmt"
	"math"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// life gives electrolytic placeholders the endurance that the life target needs,
// from those that are sold.
//
//	L0 = L / 2^((T0 − Ta)/10 K), at rated ripple
func (z *sizer) life() {
	if !known(z.want.Life) {
		return
	}
	endurances := [...]float64{2000 * 3600, 5000 * 3600, 8000 * 3600, 10000 * 3600} // [s]
	for _, banks := range [2][]parts.Capacitor{z.draft.OutputCapacitors, z.draft.InputCapacitors} {
		for k := range banks {
			c := &banks[k]
			if !c.HasLife() {
				continue
			}
			available := 0.0
			for _, rated := range endurances {
				c.Life.Rated = rated
				available = c.LifeAt(z.req.AmbientDegC.Max+selfHeating/2, c.Life.RatedRise)
				if available >= z.want.Life {
					break
				}
			}
			if available < z.want.Life {
				z.conflict("capacitor-life", z.want.Life, available, "s", "the longest endurance sold does not last at the greatest ambient", "targets/life_s", "ambient/max_degc")
				return
			}
		}
	}
}

// placeholders tells which parts of the draft are assumptions and what they rest on.
func (z *sizer) placeholders() {
	d := z.draft
	part := func(field string, value, low, high float64, why string) {
		z.assume("stage/"+field, value, low, high, why)
	}
	tolerance := func(field string, tol float64, why string) {
		v := *d.Field(field)
		part(field, v, v*(1-tol), v*(1+tol), why)
	}
	upward := func(field string, tol float64, why string) {
		v := *d.Field(field)
		part(field, v, v, v*(1+tol), why)
	}
	upward("high_side/on_resistance_ohm", onResistanceTol, "placeholder switch: on-resistance from the loss budget, charges from a middling product of resistance and charge at its voltage rating")
	if d.Rectifier == stage.DiodeRectified {
		tolerance("diode/threshold_v", thresholdTol, "placeholder diode: drop of its voltage rating, slope of its rated current")
	} else {
		upward("low_side/on_resistance_ohm", onResistanceTol, "placeholder switch: as the high side")
	}
	tolerance("inductor/inductance_h", inductanceTol, fmt.Sprintf("placeholder inductor: a powder core that keeps 80 %% of its inductance at %s", quantity.Written(neat(z.saturationAt), "A")))
	tolerance("inductor/dc_resistance_ohm", windingTol, "placeholder inductor: winding from stored energy and the loss budget")
	for k := range d.OutputCapacitors {
		tolerance(bankField("output", k)+"/capacitance_f", capacitanceTol, "placeholder capacitor: middling values of its kind over bias, temperature and age")
		tolerance(bankField("output", k)+"/esr_ohm", seriesTol, "placeholder capacitor: series resistance at the switching frequency")
	}
	for k := range d.InputCapacitors {
		tolerance(bankField("input", k)+"/capacitance_f", capacitanceTol, "placeholder capacitor: middling values of its kind over bias, temperature and age")
		tolerance(bankField("input", k)+"/esr_ohm", seriesTol, "placeholder capacitor: series resistance at the switching frequency")
	}
	tolerance("switching_frequency_hz", frequencyTol, "tolerance of the oscillator")
	tolerance("feedback/reference_v", z.grade.reference, "reference and divider of the cheapest grade that keeps the output tolerance")
	if z.choice.MinOnTime > 0 {
		part("controller/min_on_time_s", z.choice.MinOnTime, 3e-8, 2e-7, "least on-time of the controller")
	}
	part("controller/max_duty_ratio", math.Min(z.dutyMost, z.choice.MaxDutyRatio), 0.85, 1, "greatest duty ratio of the controller, its least off-time included")
	part("modulator/sense_ohm", d.Modulator.Sense, d.Modulator.Sense/2, d.Modulator.Sense*2, fmt.Sprintf("peak current mode; the loop is designed for a crossover of %s with a phase margin of %s", quantity.Written(neat(z.crossover), "Hz"), quantity.Written(neat(z.phaseMargin), "deg")))
}
