package caution

import "railproof/calc/parts"

// Limits near which a capacitor that can vent or ignite is pointed at: the
// benign-environment figures of the Reliability Analysis Center's derating
// guidelines (voltage 0.80, temperature 20 K below the maximum) and, for solid
// tantalum, EEE-INST-002 at 70 degC (voltage 0.50). The share of the ripple
// rating is this package's own.
const (
	nearVoltage         = 0.80 // [1]
	nearVoltageTantalum = 0.50 // [1]
	nearTemperature     = 20.0 // [K] below the rated maximum
	nearRipple          = 0.90 // [1]
)

func (c *collector) electrolytics() {
	if c.stage == nil {
		return
	}
	c.eachBank(func(tail string, p *parts.Capacitor, u use) {
		share, failure := nearVoltage, "it can vent"
		switch p.Kind {
		case parts.AluminiumElectrolytic, parts.AluminiumPolymer:
		case parts.TantalumPolymer:
			failure = "it can fail short"
		case parts.TantalumSolid:
			share, failure = nearVoltageTantalum, "it can ignite on a surge"
		default:
			return
		}
		at := c.at + "/" + tail + "/rating"
		if !parts.Known(p.Rating.Voltage) {
			c.add(CapacitorLimitUnknown, at+"/voltage_v", u.voltage, parts.Unknown, "V", "No voltage rating given for a capacitor that can fail violently; polarity and surge are not checked.")
		}
		near := func(field string, value, limit, rating float64, unit, what string) {
			if value > limit && value <= rating {
				c.add(CapacitorNearLimit, at+field, value, limit, unit, what+" is near the capacitor's limit, where "+failure+"; check polarity and surge current too.")
			}
		}
		near("/voltage_v", u.voltage, share*p.Rating.Voltage, p.Rating.Voltage, "V", "Voltage")
		near("/ripple_current_a", u.ripple, nearRipple*p.Rating.RippleCurrent, p.Rating.RippleCurrent, "A", "Ripple current")
		near("/temperature_degc", u.degC, p.Rating.TemperatureDegC-nearTemperature, p.Rating.TemperatureDegC, "Cel", "Temperature")
	})
}
