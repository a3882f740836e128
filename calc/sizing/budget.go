package sizing

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// dropEffort is the effort below which a die larger than the best one is taken, for
// the sake of its drop where the input is scarce.
const dropEffort = 0.1 // [1]

// Shares of the allowed loss that the draft gives to conduction, at the greatest
// load and with every part hot and at its upper tolerance.
const (
	switchLossShare  = 0.2  // [1] each switch's channel, or the diode's slope
	windingLossShare = 0.2  // [1]
	pathShare        = 0.01 // [1] each copper path, to the input capacitors and to the load
	mostPathOhm      = 5e-3 // [ohm] a path of a few squares of board copper
)

// budget chooses the switches and the resistances from the allowed loss:
// on-resistances whose conduction loss takes its share, but not below the one at
// which conduction and switching loss are equal, beyond which a larger die loses
// more than it saves.
//
//	Ron = s P/(D I² h),  Ron ≥ sqrt(A/(D I² h)),  A = Ron · switching loss
//
//	P [W] loss allowed, s [1] its share, h [1] hot and tolerance over typical
func (z *sizer) budget() {
	r := z.req
	vin, io := r.Input.Typ, r.LoadCurrent.Max
	i := io / z.phases
	allowed := r.Output * i * z.lossShare
	duty := math.Min(0.9, math.Max(0.1, IdealDuty(vin, r.Output)))
	d := z.draft
	d.Board.InputPath = neat(math.Min(mostPathOhm, pathShare*z.try.effort*z.lossShare*r.Input.Min*r.Input.Min/(r.Output*io)))
	d.Board.OutputPath = neat(math.Min(mostPathOhm, pathShare*z.try.effort*z.lossShare*r.Output/io))
	z.source = r.SourceResistance + d.Board.InputPath

	if !(z.junction > r.AmbientDegC.Max) {
		z.conflict("junction-temperature", r.AmbientDegC.Max, z.junction, "Cel", "the ambient alone is as warm as a junction may get", "targets/junction_degc", "ambient/max_degc")
		return
	}
	rating := ratingAtLeast(switchRatings[:], voltageMargin*r.Input.Max)
	if math.IsNaN(rating) {
		z.conflict("voltage-rating", voltageMargin*r.Input.Max, switchRatings[len(switchRatings)-1], "V", "no switch is sold for the greatest input voltage with its margin", "input/max_v")
		return
	}
	hot := z.hotSwitch()
	on := z.onResistance(allowed, duty*i*i*hot, z.switching(rating, vin, i))
	d.HighSide = switchPlaceholder(rating, on, i, z.junction)
	temp := table(onResistanceTemp[:], 1)
	cold := temp.At(r.AmbientDegC.Min)
	z.drops, z.leastDrops = Drops{HighSide: on * hot}, Drops{HighSide: on * cold}
	if r.Rectifier == stage.DiodeRectified {
		z.diode(i)
	} else {
		on = z.onResistance(allowed, (1-duty)*i*i*hot, z.fs*(outputProduct*silicon(rating)*vin/2+(recoveryProduct*vin+gateProduct*driveFor(rating))*silicon(rating)))
		d.LowSide = switchPlaceholder(rating, on, i, z.junction)
		z.drops.Rectifier, z.leastDrops.Rectifier = on*hot, on*cold
	}
	copper, _ := parts.CopperMultiplier(z.junction)
	z.drops.Winding = z.try.effort * windingLossShare * allowed / (i * i)
	z.windingBudget = z.drops.Winding / ((1 + windingTol) * copper)
}

// hotSwitch returns the greatest on-resistance over the typical one at 25 degC.
func (z *sizer) hotSwitch() float64 {
	t := table(onResistanceTemp[:], 1)
	return (1 + onResistanceTol) * t.At(z.junction)
}

// switching returns the high side's switching loss times its on-resistance
// [W ohm]: overlap, output charge and gate drive.
func (z *sizer) switching(rating, vin, i float64) float64 {
	drive, plateau := driveFor(rating), plateauFor(rating)
	gate := gateOnOhm + 1.2
	times := switchShare * gateProduct * math.Sqrt(2*vin/rating) * gate * (1/(drive-plateau) + 1/plateau)
	return z.fs * silicon(rating) * (vin*i*times/2 + outputProduct*vin/2 + gateProduct*drive)
}

// onResistance returns the typical on-resistance at 25 degC from the allowed loss
// [W], the conduction loss per ohm [A2] and the switching loss times ohm [W ohm].
func (z *sizer) onResistance(allowed, conduction, switching float64) float64 {
	r := math.Max(leastOnOhm, z.try.effort*switchLossShare*allowed/conduction)
	if z.try.effort >= dropEffort {
		r = math.Max(r, math.Sqrt(switching/conduction))
	}
	return neat(r)
}

// diode chooses the rectifier diode: its rated current from the greatest mean
// current, larger for less slope.
func (z *sizer) diode(i float64) {
	r := z.req
	rating := ratingAtLeast(diodeRatings[:], voltageMargin*r.Input.Max)
	mean := i * (1 - IdealDuty(r.Input.Max, r.Output))
	d := &z.draft.Diode
	*d = diodePlaceholder(rating, roundUp(math.Max(0.5, 2*mean/math.Sqrt(z.try.effort))), z.junction)
	z.drops.Rectifier = d.Slope
	cold := math.Max(0, parts.ReferenceDegC-r.AmbientDegC.Min)
	z.drops.Threshold = d.Threshold*(1+thresholdTol) - d.ThresholdTemp*cold
	v, _ := d.ThresholdAt(z.junction)
	z.leastDrops.Rectifier = d.Slope
	z.leastDrops.Threshold = math.Max(0, v-thresholdTol*d.Threshold)
}
