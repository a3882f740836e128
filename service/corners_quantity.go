package service

import (
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
)

// Inapplicable tells why a stage under a control has no such quantity, "" if it
// has.
func Inapplicable(s *stage.Stage, c *stage.Control, id quantity.ID) string {
	info, bank := quantity.Of(id)
	switch {
	case info.Group == quantity.Transient:
		return "the quantity belongs to transients, not to corners"
	case info.Group == quantity.Loop && !loop.Present(s):
		return "the quantity needs a modulator, a compensator and a feedback divider, and the stage does not have them all"
	case info.Family == quantity.PerOutputBank && bank >= len(s.OutputCapacitors), info.Family == quantity.PerInputBank && bank >= len(s.InputCapacitors):
		return "the stage has no such capacitor bank"
	}
	switch info.ID {
	case quantity.InputRipplePP:
		if len(s.InputCapacitors) == 0 {
			return "the stage has no input capacitors"
		}
	case quantity.LowSideLoss, quantity.LowSideJunction:
		if s.Rectifier == stage.DiodeRectified {
			return "a diode-rectified stage has no low-side switch"
		}
	case quantity.DiodeLoss, quantity.DiodeJunction:
		if s.Rectifier != stage.DiodeRectified {
			return "a synchronous stage has no rectifier diode"
		}
	case quantity.CoreLoss, quantity.CorePowerDensity, quantity.FluxSwing:
		if !s.Inductor.Core.Present {
			return "the inductor's core is not described"
		}
	case quantity.OutputError:
		if c.Kind == stage.FixedDuty {
			return "at a fixed duty ratio no output voltage is asked for"
		}
	case quantity.OutputCapacitorLife:
		return lifeless(s.OutputCapacitors, bank)
	case quantity.InputCapacitorLife:
		return lifeless(s.InputCapacitors, bank)
	}
	return ""
}

func lifeless(banks []parts.Capacitor, k int) string {
	if !banks[k].HasLife() {
		return "the capacitor's rated life is not given"
	}
	return ""
}

// Impossible tells why a limit can never be met, "" if it can. Only what follows
// from the meaning of the quantity counts.
func (l *CornersLimit) Impossible(c *stage.Conditions) string {
	info, _ := quantity.Of(l.Quantity)
	switch {
	case l.Min > l.Max:
		return "min is above max: no value lies between"
	case l.Quantity == quantity.Efficiency && l.Min >= 1:
		return "a stage has losses: its efficiency stays below 1"
	case l.Quantity == quantity.DutyRatio && l.Min > 1:
		return "a duty ratio is at most 1"
	case l.Max <= 0 && positive[info.ID]:
		return "the quantity is always above zero"
	}
	hottest := c.AmbientDegC.Max
	if l.Where == rules.AtNominal {
		hottest = c.AmbientDegC.Typ
	}
	if info.Unit == "Cel" && l.Max < hottest {
		return "the limit lies below the ambient temperature of " + short(hottest) + " degC, and a part is never cooler than that"
	}
	return ""
}

// positive are quantities that are above zero in every stage that switches.
var positive = map[quantity.ID]bool{
	quantity.OutputRipplePP: true, quantity.OutputRippleWithESLPP: true, quantity.InputRipplePP: true, quantity.InductorRipplePP: true,
	quantity.InductorRMS: true, quantity.HighSideRMS: true, quantity.RectifierRMS: true, quantity.OutputCapacitorRMS: true,
	quantity.InputCapacitorRMS: true, quantity.InputCapacitorBankRMS: true, quantity.DutyRatio: true, quantity.OnTime: true,
	quantity.InductanceEffective: true, quantity.OutputCapacitanceEffective: true, quantity.InputCapacitanceEffective: true,
	quantity.LossTotal: true, quantity.OutputCapacitorLife: true, quantity.InputCapacitorLife: true, quantity.BoundaryLoad: true,
	quantity.Crossover: true,
}
