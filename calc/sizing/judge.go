package sizing

import (
	"fmt"
	"math"
	"strings"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// judgement is what the exact engine says about losses and temperatures of a draft
// at the greatest load, every loss at the upper end of its tolerances.
type judgement struct {
	efficiency        float64 // [1] least
	hottest           float64 // [degC] greatest junction
	part              string  // which
	typicalLoss       float64 // [W] at typical input and the greatest load
	typicalEfficiency float64 // [1]
	works             bool
}

// coolings are the thermal resistances to ambient that a placeholder may have: a
// small package, larger ones on more copper, and heat sinks.
var coolings = [...]float64{55, 38, 25, 15, 8, 4} // [K/W]

// coolMargin is kept below the greatest junction temperature when cooling is chosen.
const coolMargin = 3.0 // [K]

// judge chooses the cooling of the switches and the controller and evaluates the
// draft with it.
func (z *sizer) judge() judgement {
	d := z.draft
	places := [...]struct {
		part losses.Part
		rth  *float64
	}{{losses.HighSide, &d.HighSide.Thermal.JunctionToAmbient}, {losses.LowSide, &d.LowSide.Thermal.JunctionToAmbient}, {losses.Diode, &d.Diode.Thermal.JunctionToAmbient}, {losses.Controller, &d.Controller.Thermal.JunctionToAmbient}}
	step := [len(places)]int{}
	var j judgement
	for {
		for k, p := range places {
			*p.rth = coolings[step[k]]
		}
		var degC [losses.PartCount]float64
		j = z.lossyCorners(&degC)
		better := false
		for k, p := range places {
			if t := degC[p.part]; (t > z.junction-coolMargin || !j.works && !math.IsNaN(t)) && step[k] < len(coolings)-1 {
				step[k]++
				better = true
			}
		}
		if !better {
			return j
		}
	}
}

// coolingNeeded returns the thermal resistance that would hold the hottest switch at
// the junction limit [K/W]: the rise allowed over its loss there, negative where the
// ambient is already above.
func (z *sizer) coolingNeeded() float64 {
	e := evaluate.Prepare(z.draft)
	p := stage.Point{
		Input: z.req.Input.Max, SourceResistance: z.req.SourceResistance, Load: stage.Load{Current: z.req.LoadCurrent.Max},
		AmbientDegC: z.req.AmbientDegC.Max, AgeRatio: 1, PartTemperatureDegC: z.junction, Control: stage.Control{Kind: stage.ByFeedback},
	}
	var res evaluate.Result
	least := math.MaxFloat32
	for _, p.Input = range [2]float64{z.req.Input.Min, z.req.Input.Max} {
		if e.Eval(&p, &res); !res.Status.Figures() {
			continue
		}
		for _, part := range [...]losses.Part{losses.HighSide, losses.LowSide, losses.Diode, losses.Controller} {
			if w := res.Losses.Of(part); w > 0 {
				least = math.Min(least, (z.junction-p.AmbientDegC)/w)
			}
		}
	}
	return least
}

// lossyCorners evaluates the draft at the greatest load over input range, ambient
// and both ends of the frequency, and takes the worst; degC receives the greatest
// temperature of each part, NaN for parts the stage has not.
func (z *sizer) lossyCorners(degC *[losses.PartCount]float64) judgement {
	d, r := z.draft, z.req
	e := evaluate.Prepare(d)
	values := numbers(e.Stage())
	for _, v := range z.ans.Spreads {
		*values[v.Field] = lossyEnd(v.Field, v.Min, v.Typ, v.Max)
	}
	j := judgement{efficiency: math.Inf(1), hottest: math.Inf(-1), works: true}
	for p := range degC {
		degC[p] = math.NaN()
	}
	var res evaluate.Result
	p := stage.Point{SourceResistance: r.SourceResistance, Load: stage.Load{Current: r.LoadCurrent.Max}, AgeRatio: 1, PartTemperatureDegC: parts.Unknown, Control: stage.Control{Kind: stage.ByFeedback}}
	for _, fs := range [2]float64{z.fsHigh, z.fsLow} {
		e.Stage().SwitchingFrequency = fs
		for _, p.Input = range [3]float64{r.Input.Min, r.Input.Typ, r.Input.Max} {
			for _, p.AmbientDegC = range [2]float64{r.AmbientDegC.Max, r.AmbientDegC.Min} {
				e.Eval(&p, &res)
				j.add(&res, degC)
			}
		}
	}
	typical := evaluate.Prepare(d)
	p.Input, p.AmbientDegC, p.AgeRatio = r.Input.Typ, r.AmbientDegC.Typ, 0
	typical.Eval(&p, &res)
	j.typicalLoss, j.typicalEfficiency = res.Quantities[quantity.LossTotal], res.Quantities[quantity.Efficiency]
	return j
}

// add takes one evaluation into the judgement.
func (j *judgement) add(res *evaluate.Result, degC *[losses.PartCount]float64) {
	if !res.Status.Figures() {
		j.works = false
		for p, t := range degC {
			if math.IsNaN(t) && (p == int(losses.HighSide) || p == int(losses.Controller)) {
				degC[p] = math.Inf(1)
			}
		}
		return
	}
	j.efficiency = math.Min(j.efficiency, res.Quantities[quantity.Efficiency])
	for p, t := range res.PartDegC {
		if math.IsNaN(t) {
			continue
		}
		if !(degC[p] > t) {
			degC[p] = t
		}
		switch losses.Part(p) {
		case losses.HighSide, losses.LowSide, losses.Diode, losses.Controller:
			if t > j.hottest {
				j.hottest, j.part = t, losses.Part(p).String()
			}
		}
	}
}

// lossyEnd returns the end of a tolerance that loses more.
func lossyEnd(field string, least, typ, most float64) float64 {
	switch {
	case strings.HasSuffix(field, "_c"), strings.HasSuffix(field, "resistance_ohm"), strings.HasSuffix(field, "esr_ohm"), strings.HasSuffix(field, "threshold_v"), strings.HasSuffix(field, "dead_time_s"), field == "feedback/lower_ohm":
		return most
	case strings.HasSuffix(field, "inductance_h"), strings.HasSuffix(field, "capacitance_f"), field == "feedback/reference_v", field == "feedback/upper_ohm":
		return least
	}
	return typ
}

// meets reports whether the draft keeps the efficiency it was budgeted for and the
// junction limit.
func (j judgement) meets(z *sizer) bool {
	return j.cool(z) && j.efficiency >= 1/(1+z.lossShare)
}

// cool reports whether the draft works within the junction limit.
func (j judgement) cool(z *sizer) bool { return j.works && j.hottest <= z.junction }

// better reports whether j is the better draft where neither meets its targets.
func (j judgement) better(than judgement) bool {
	if j.works != than.works {
		return j.works
	}
	return j.efficiency > than.efficiency
}

// conflicts records the targets that no effort reached.
func (j judgement) conflicts(z *sizer) {
	if !j.works {
		needed := z.coolingNeeded()
		z.conflict("thermal-runaway", needed, coolings[len(coolings)-1], "K/W", "with the best cooling considered there is no thermal equilibrium at the greatest load", "ambient/max_degc", "load/max_a")
		return
	}
	if e := z.req.Targets.Efficiency; known(e) && j.efficiency < e {
		z.conflict("efficiency", e, j.efficiency, "1", "the best placeholder parts considered lose more, at the worst input and temperature and the upper ends of tolerance", "targets/efficiency_ratio", "switching_frequency_hz", "output/voltage_v")
	}
	if j.hottest > z.junction {
		z.conflict("junction-temperature", j.hottest, z.junction, "Cel", fmt.Sprintf("%s gets hotter with the best cooling considered, %g K/W", j.part, coolings[len(coolings)-1]), "targets/junction_degc", "ambient/max_degc", "load/max_a")
	}
}
