package sizing

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// newDraft starts the draft stage.
func (z *sizer) newDraft() {
	r := z.req
	z.draft = &stage.Stage{Name: r.Name, Rectifier: r.Rectifier, PhaseCount: r.PhaseCount, SwitchingFrequency: z.fs}
	z.draft.LowSide.BodyDiode = 0.85
	if r.Rectifier == stage.DiodeRectified {
		z.draft.LowSide = parts.MOSFET{}
	}
}

// spreads lists the tolerances of the draft's values: those that the windows were
// computed with.
func (z *sizer) spreads() {
	d := z.draft
	values := numbers(d)
	add := func(field string, low, high float64) {
		v := values[field]
		if v == nil || *v == 0 || !parts.Known(*v) {
			return
		}
		z.ans.Spreads = append(z.ans.Spreads, spread.Variable{Pointer: "/stage/" + field, Field: field, Min: *v * low, Typ: *v, Max: *v * high})
	}
	both := func(field string, tol float64) { add(field, 1-tol, 1+tol) }
	both("switching_frequency_hz", frequencyTol)
	charges := func(part string) {
		both(part+"/gate_charge_c", chargeTol)
		both(part+"/gate_switch_charge_c", chargeTol)
		both(part+"/output_charge_c", chargeTol)
		both(part+"/recovery_charge_c", chargeTol)
	}
	add("high_side/on_resistance_ohm", 1, 1+onResistanceTol)
	charges("high_side")
	if d.Rectifier == stage.DiodeRectified {
		both("diode/threshold_v", thresholdTol)
	} else {
		add("low_side/on_resistance_ohm", 1, 1+onResistanceTol)
		charges("low_side")
		both("controller/dead_time_s", deadTimeTol)
	}
	both("inductor/inductance_h", inductanceTol)
	both("inductor/dc_resistance_ohm", windingTol)
	for k := range d.OutputCapacitors {
		both(bankField("output", k)+"/capacitance_f", capacitanceTol)
		both(bankField("output", k)+"/esr_ohm", seriesTol)
	}
	for k := range d.InputCapacitors {
		both(bankField("input", k)+"/capacitance_f", capacitanceTol)
		both(bankField("input", k)+"/esr_ohm", seriesTol)
	}
	both("feedback/reference_v", z.grade.reference)
	both("feedback/upper_ohm", z.grade.resistor)
	both("feedback/lower_ohm", z.grade.resistor)
}

// numbers returns the stage's numbers by field id.
func numbers(s *stage.Stage) map[string]*float64 {
	m := map[string]*float64{}
	for _, f := range s.Fields() {
		m[f.ID] = f.Value
	}
	return m
}

func bankField(side string, k int) string {
	return side + "_capacitors/" + string(rune('0'+k))
}

// conditions hands on the ranges of the requirement. Where the rectifier blocks, a
// stage at fixed frequency cannot deliver less than its least on-time does, so the
// load range begins there.
func (z *sizer) conditions() {
	r := z.req
	load := r.LoadCurrent
	if r.Rectifier != stage.Synchronous {
		if regular := z.leastRegularLoad(); load.Min < regular {
			z.note("pulses-skipped", "load/min_a", "below "+quantity.Written(neat(regular), "A")+" the controller's least on-time delivers more than the load takes: it skips pulses there, and the conditions of the draft begin at that load")
			load.Min = regular
			load.Typ = math.Max(load.Typ, regular)
		}
	}
	z.ans.Conditions = stage.Conditions{
		Input: r.Input, SourceResistance: r.SourceResistance, LoadCurrent: load, AmbientDegC: r.AmbientDegC,
		AgeRatio: stage.Range{Min: 0, Typ: 0, Max: 1}, Control: stage.Control{Kind: stage.ByFeedback},
	}
	z.ans.Point = z.ans.Conditions.Typical()
}

// leastRegularLoad returns the load below which the on-time in discontinuous
// conduction falls under the controller's least [A]: the inverse of
// DiscontinuousOnTime at the greatest input, the least inductance and the greatest
// frequency.
//
//	Io = N ton² fs (Vin − Vo)(Vin + Vth)/(2 L (Vo + Vth))
func (z *sizer) leastRegularLoad() float64 {
	ton, vin, vo, vth := z.choice.MinOnTime, z.req.Input.Max, z.voLow, z.leastDrops.Threshold
	atOneAmpere := DiscontinuousOnTime(vin, vo, 1, z.leastL.Inductance, z.fsHigh, vth)
	root := ton / atOneAmpere // the on-time grows with the root of the current
	return roundUp(regularMargin * z.phases * root * root)
}

// regularMargin covers what DiscontinuousOnTime leaves out.
const regularMargin = 1.1 // [1]

// limits lists the limits on quantities that follow from the targets.
func (z *sizer) limits() {
	r, w := z.req, &z.want
	add := func(id quantity.ID, least, most float64, target string) {
		z.ans.Limits = append(z.ans.Limits, Limit{Quantity: id, Least: least, Most: most, Target: target})
	}
	none := math.NaN()
	add(quantity.OutputRipplePP, none, w.OutputRipple, "targets/output_ripple_pp_v")
	add(quantity.OutputRippleWithESLPP, none, w.OutputRipple, "targets/output_ripple_pp_v")
	add(quantity.InputRipplePP, none, w.InputRipple, "targets/input_ripple_pp_v")
	add(quantity.InductorRipplePP, none, z.rippleMost, "targets/inductor_ripple_ratio")
	add(quantity.InductorPeak, none, z.saturationAt, "load/max_a")
	if known(w.ContinuousDownTo) {
		add(quantity.BoundaryLoad, none, w.ContinuousDownTo, "targets/continuous_down_to_a")
	}
	if known(r.OutputTolerance) {
		add(quantity.LoadVoltage, r.Output*(1-r.OutputTolerance), r.Output*(1+r.OutputTolerance), "output/tolerance_ratio")
	}
	add(quantity.HighSideJunction, none, w.JunctionDegC, "targets/junction_degc")
	if r.Rectifier == stage.DiodeRectified {
		add(quantity.DiodeJunction, none, w.JunctionDegC, "targets/junction_degc")
	} else {
		add(quantity.LowSideJunction, none, w.JunctionDegC, "targets/junction_degc")
	}
	if e := r.Targets.Efficiency; known(e) {
		z.ans.Limits = append(z.ans.Limits, Limit{Quantity: quantity.Efficiency, Least: e, Most: none, Target: "targets/efficiency_ratio", FullLoad: true})
	}
	if s := r.Targets.LoadStep; known(s.Step) {
		if known(s.Deviation) {
			add(quantity.LoadStepDeviation, none, s.Deviation, "targets/load_step/deviation_v")
		}
		if known(s.Recovery) {
			add(quantity.LoadStepRecovery, none, s.Recovery, "targets/load_step/recovery_s")
		}
		add(quantity.LoadStepPeak, none, z.saturationAt, "targets/load_step/step_a")
	}
	if known(w.Life) {
		for k := range z.draft.OutputCapacitors {
			if z.draft.OutputCapacitors[k].HasLife() {
				add(quantity.OutputCapacitorLife+quantity.ID(k), w.Life, none, "targets/life_s")
			}
		}
	}
}
