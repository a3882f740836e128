package caution

import (
	"fmt"
	"math"
	"strconv"

	"railproof/calc/parts"
	"railproof/calc/quantity"
)

const (
	energyHazard = 20.0  // [J] customary limit of IEC 60950-1, remembered
	powerPS1     = 15.0  // [W] IEC 62368-1 class PS1, after 3 s
	powerPS2     = 100.0 // [W] class PS2, after 5 s
	overshoot    = 2.0   // [1] greatest step response of an undamped lead and capacitor
)

func (c *collector) notices() {
	none := parts.Unknown
	c.add(EstimatesOnly, "", none, none, "", "Estimates for engineering judgement: they replace no bench measurement, no local code and no licensed practice.")
	c.add(InputReachesLoad, c.seen.InputPointer, c.seen.Input, c.seen.Output, "V",
		"Not isolated: a high-side switch that fails short puts the input voltage on the load. If the load does not stand it, add a fuse with a crowbar, or an over-voltage cut-off.")
	precharged := "start into a pre-charged output, "
	if c.seen.Precharged {
		precharged = ""
	}
	c.add(NotAnalysed, "", none, none, "",
		"Not analysed: output short, "+precharged+"energy returned to the input, ringing and other layout effects.")
}

func (c *collector) voltages() {
	type node struct {
		name, pointer string
		direct        float64
		ripple        quantity.ID
	}
	nodes := []node{
		{"input", c.seen.InputPointer, c.seen.Input, quantity.InputRipplePP},
		{"output", c.at + "/output_capacitors", c.seen.Output, quantity.OutputRipplePP},
	}
	for _, n := range nodes {
		half := c.seen.Greatest[n.ripple] / 2
		if !parts.Known(half) {
			half = 0
		}
		f := 0.0
		if c.stage != nil {
			f = c.stage.SwitchingFrequency
		}
		used := ES1Ratio(n.direct, half, f)
		switch {
		case n.direct > es2DC:
			c.add(AboveES2Voltage, n.pointer, n.direct, es2DC, "V",
				"The "+n.name+" exceeds 120 V DC, class ES3 of IEC 62368-1: dangerous to touch; reinforced insulation and no access are needed, in single-fault conditions too.")
		case used > 1:
			c.add(AboveES1Voltage, n.pointer, n.direct, es1DC, "V",
				fmt.Sprintf("The %s with its ripple uses %.4g of the ES1 limit of IEC 62368-1 (60 V DC): insulation and access limits apply. Transients of the source are not included.", n.name, used))
		}
	}
}

func (c *collector) charges() {
	if c.stage == nil {
		return
	}
	s := c.stage
	bank := func(at string, list []parts.Capacitor) float64 {
		sum := 0.0
		for i := range list {
			n := list[i].Count
			if n < 1 {
				n = 1
			}
			sum += float64(n) * c.upper(at+"/"+strconv.Itoa(i)+"/capacitance_f", list[i].Capacitance)
		}
		return sum
	}
	divider := math.Inf(1)
	if s.Feedback.Present {
		divider = s.Feedback.Upper + s.Feedback.Lower
	}
	c.charge("/input_capacitors", "input", bank("input_capacitors", s.InputCapacitors), c.seen.Input, math.Inf(1))
	c.charge("/output_capacitors", "output", bank("output_capacitors", s.OutputCapacitors), c.seen.Output, divider)
	c.hotPlug()
}

// charge warns of one side's capacitors; bleed [ohm] is what discharges them
// when everything is off.
func (c *collector) charge(tail, name string, capacitance, voltage, bleed float64) {
	if !(capacitance > 0) {
		return
	}
	if limit := ES1ChargedCapacitor(capacitance); voltage > limit {
		after := "nothing in the stage discharges them"
		if !math.IsInf(bleed, 1) {
			after = fmt.Sprintf("the feedback divider alone takes %.4g s to bring them to it", BleedTime(bleed, capacitance, voltage, limit))
		}
		c.add(ChargedCapacitor, c.at+tail, voltage, limit, "V",
			"After switch-off the "+name+" capacitors hold a voltage above the ES1 limit for a charged capacitor; "+after+".")
	}
	if e := Energy(capacitance, voltage); e >= energyHazard {
		c.add(StoredEnergy, c.at+tail, e, energyHazard, "J",
			"The "+name+" capacitors store enough energy to burn through rings and tools; discharge them before work.")
	}
}

// hotPlug warns where the input capacitors are all ceramic and twice the input
// voltage is beyond what stands at the input.
func (c *collector) hotPlug() {
	s := c.stage
	if len(s.InputCapacitors) == 0 {
		return
	}
	least, at := math.Inf(1), ""
	consider := func(rating float64, pointer string) {
		if rating < least {
			least, at = rating, pointer
		}
	}
	consider(s.HighSide.Rating.DrainSource, "/high_side/rating/drain_source_v")
	consider(s.Controller.Rating.Input, "/controller/rating/input_v")
	for i := range s.InputCapacitors {
		k := s.InputCapacitors[i].Kind
		if k != parts.CeramicClass1 && k != parts.CeramicClass2 {
			return
		}
		consider(s.InputCapacitors[i].Rating.Voltage, "/input_capacitors/"+strconv.Itoa(i)+"/rating/voltage_v")
	}
	if peak := overshoot * c.seen.Input; peak > least {
		c.add(HotPlugOvershoot, c.at+at, peak, least, "V",
			"The input has ceramic capacitors only: plugging a live source through long leads can ring up to twice the input voltage, above this rating. Damp it, clamp it, or limit the inrush.")
	}
}

// stiffSource is the resistance [ohm] below which a source is no limit at all: less
// than any joint has.
const stiffSource = 1e-6

func (c *collector) source() {
	resistance := c.seen.SourceResistance
	if !parts.Known(resistance) {
		resistance = 0
	}
	if power := c.seen.Input * c.seen.Input / (4 * resistance); power > powerPS1 {
		current, unit, detail := parts.Unknown, "", "The source is taken as stiff, so nothing limits a short circuit"
		if resistance > stiffSource {
			current, unit, detail = c.seen.Input/resistance, "A", "The source alone limits a short circuit, to this current"
		}
		c.add(FaultCurrent, c.seen.InputPointer, current, parts.Unknown, unit,
			detail+"; a cracked ceramic capacitor or a failed switch is one. Name a fuse or a current limit; a fuse's time-current curve is not checked here.")
	}
	c.powerClass("output", c.at+"/output_capacitors", c.deliverable())
}

// deliverable returns the greatest power [W] that the output may deliver: at the
// current limit where one is given, else what the load takes.
func (c *collector) deliverable() float64 {
	drawn := c.seen.Greatest[quantity.OutputPower]
	if c.stage == nil || !c.stage.Modulator.Present {
		return drawn
	}
	return greatest(drawn, c.stage.Modulator.CurrentLimit*float64(c.stage.PhaseCount)*c.seen.Output)
}

func (c *collector) powerClass(name, pointer string, power float64) {
	switch {
	case power > powerPS2:
		c.add(PowerSourcePS3, pointer, power, powerPS2, "W", "The "+name+" can deliver more than 100 W, class PS3 of IEC 62368-1: a fire enclosure or proof of limits is needed.")
	case power > powerPS1:
		c.add(PowerSourcePS2, pointer, power, powerPS1, "W", "The "+name+" can deliver more than 15 W, class PS2 of IEC 62368-1: faults downstream can ignite; limit or fuse it.")
	}
}
