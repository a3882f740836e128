package caution

import (
	"strconv"

	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// touchDegC is the temperature of bare metal touched for less than a second,
// class TS1 of IEC 62368-1; seen in a secondary source.
const touchDegC = 70.0 // [degC]

func (c *collector) heat() {
	for p := losses.Part(0); p < losses.PartCount; p++ {
		t := c.seen.PartDegC[p]
		if p == losses.Board || !(t > touchDegC) {
			continue
		}
		detail := "Inside temperature, an upper bound of the surface's, above the TS1 limit of IEC 62368-1 for a brief touch of metal: burn hazard."
		if p == losses.HighSide || p == losses.LowSide || p == losses.Diode {
			detail += " A heat sink on it may be at switch-node potential."
		}
		c.add(HotSurface, c.at+"/"+p.String(), t, touchDegC, "Cel", detail)
	}
}

func (c *collector) runaway() {
	rho := c.seen.Greatest[quantity.ThermalFeedback]
	switch {
	case c.seen.Runaway:
		c.add(ThermalRunaway, c.seen.RunawayPointer, rho, 1, "1", "At this point losses grow faster than heat leaves: no stable temperature exists, and a part fails.")
	case rho >= 1:
		c.add(ThermalRunaway, c.at, rho, 1, "1", "Losses grow at least as fast as heat leaves: the equilibrium found is not stable.")
	}
}

// over warns if a known rating is exceeded by a known stress.
func (c *collector) over(tail string, stress, rating float64, unit, what string) {
	if stress > rating {
		c.add(BeyondAbsoluteMaximum, c.at+"/"+tail, stress, rating, unit, what+" is beyond the part's rating: it may fail at once or age fast.")
	}
}

func (c *collector) ratings() {
	s, most := c.stage, &c.seen.Greatest
	if s == nil {
		return
	}
	bridge := greatest(c.seen.Input, most[quantity.BridgeVoltage])
	c.mosfet("high_side", &s.HighSide, bridge, most[quantity.HighSideRMS], c.seen.PartDegC[losses.HighSide])
	if s.Rectifier == stage.DiodeRectified {
		c.over("diode/rating/reverse_v", bridge, s.Diode.Rating.Reverse, "V", "Reverse voltage")
		c.over("diode/rating/forward_a", most[quantity.RectifierMean], s.Diode.Rating.Forward, "A", "Mean forward current")
		c.over("diode/rating/junction_degc", c.seen.PartDegC[losses.Diode], s.Diode.Rating.JunctionDegC, "Cel", "Junction temperature")
	} else {
		c.mosfet("low_side", &s.LowSide, bridge, most[quantity.RectifierRMS], c.seen.PartDegC[losses.LowSide])
	}
	c.over("inductor/rating/winding_degc", c.seen.PartDegC[losses.Inductor], s.Inductor.Rating.WindingDegC, "Cel", "Winding temperature")
	c.over("controller/rating/input_v", c.seen.Input, s.Controller.Rating.Input, "V", "Input voltage")
	c.over("controller/rating/junction_degc", c.seen.PartDegC[losses.Controller], s.Controller.Rating.JunctionDegC, "Cel", "Junction temperature")
	c.eachBank(func(tail string, p *parts.Capacitor, u use) {
		c.over(tail+"/rating/voltage_v", u.voltage, p.Rating.Voltage, "V", "Voltage")
		c.over(tail+"/rating/ripple_current_a", u.ripple, p.Rating.RippleCurrent, "A", "Ripple current")
		c.over(tail+"/rating/temperature_degc", u.degC, p.Rating.TemperatureDegC, "Cel", "Temperature")
	})
}

func (c *collector) mosfet(tail string, m *parts.MOSFET, voltage, current, degC float64) {
	c.over(tail+"/rating/drain_source_v", voltage, m.Rating.DrainSource, "V", "Drain-source voltage")
	c.over(tail+"/rating/gate_source_v", c.stage.Controller.Drive, m.Rating.GateSource, "V", "Gate drive voltage")
	c.over(tail+"/rating/drain_current_a", current, m.Rating.DrainCurrent, "A", "RMS drain current")
	c.over(tail+"/rating/junction_degc", degC, m.Rating.JunctionDegC, "Cel", "Junction temperature")
}

// use is the worst that one piece of a bank meets.
type use struct {
	voltage float64 // [V] direct voltage and half the ripple
	ripple  float64 // [A] RMS
	degC    float64 // [degC]
}

// eachBank calls f for every capacitor bank of both sides.
func (c *collector) eachBank(f func(tail string, p *parts.Capacitor, u use)) {
	most := &c.seen.Greatest
	side := func(name string, list []parts.Capacitor, direct float64, ripple quantity.ID, rms quantity.ID, part losses.Part) {
		peak := direct
		if half := most[ripple] / 2; parts.Known(half) {
			peak += half
		}
		for i := range list {
			n := list[i].Count
			if n < 1 {
				n = 1
			}
			f(name+"/"+strconv.Itoa(i), &list[i], use{peak, most[rms+quantity.ID(i)] / float64(n), c.seen.PartDegC[part+losses.Part(i)]})
		}
	}
	side("output_capacitors", c.stage.OutputCapacitors, c.seen.Output, quantity.OutputRipplePP, quantity.OutputCapacitorRMS, losses.OutputCapacitor)
	side("input_capacitors", c.stage.InputCapacitors, c.seen.Input, quantity.InputRipplePP, quantity.InputCapacitorBankRMS, losses.InputCapacitor)
}
