package service

import (
	"fmt"
	"strings"

	"railproof/calc/evaluate"
	"railproof/calc/magnetics"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Warning is something about a request that its sender should look at; the answer
// is computed all the same.
type Warning struct {
	Code    string
	Pointer string
	Detail  string
}

const (
	greatestDropShare    = 0.25 // [1] of the input voltage across one resistance: more is a slip of a decimal
	leastRippleShare     = 5e-3 // [1] inductor ripple over its mean
	greatestPeakShare    = 3.0  // [1] inductor peak over its saturation current
	greatestDeadShare    = 0.2  // [1] of the period spent in dead time
	greatestWarningCount = 64   // [1] in one answer
)

// warnings collects each warning once.
type warnings struct{ list []Warning }

func (w *warnings) add(code, pointer, format string, numbers ...float64) {
	words := make([]any, len(numbers))
	for i, n := range numbers {
		words[i] = short(n)
	}
	w.keep(Warning{code, pointer, fmt.Sprintf(format, words...)})
}

// keep adds a warning unless the same code is there for the same place.
func (w *warnings) keep(one Warning) {
	for i := range w.list {
		if w.list[i].Code == one.Code && w.list[i].Pointer == one.Pointer {
			return
		}
	}
	if len(w.list) < greatestWarningCount {
		w.list = append(w.list, one)
	}
}

// unused warns of numbers that the stage's topology does not use.
func (w *warnings) unused(d *Design) {
	for _, pointer := range d.Unused {
		w.add("unused-value", pointer, "this stage does not use the number; it has no influence on the answer")
	}
}

// scale warns of values that are possible but absurd at the point.
func (w *warnings) scale(d *Design, p *stage.Point, r *evaluate.Result) {
	s := d.Stage
	phase := p.Load.Current / float64(s.PhaseCount)
	resistance := func(field string, ohm float64) {
		if drop := ohm * phase; drop > greatestDropShare*p.Input {
			w.add("implausible-scale", d.At+"/"+field, "%s ohm at %s A per phase drops %s V of %s V input: is the value in ohm?", ohm, phase, drop, p.Input)
		}
	}
	resistance("high_side/on_resistance_ohm", s.HighSide.OnResistance)
	if s.Rectifier == stage.DiodeRectified {
		resistance("diode/slope_ohm", s.Diode.Slope)
	} else {
		resistance("low_side/on_resistance_ohm", s.LowSide.OnResistance)
	}
	resistance("inductor/dc_resistance_ohm", s.Inductor.DCResistance)
	if share := 2 * s.Controller.DeadTime * s.SwitchingFrequency; share > greatestDeadShare {
		w.add("implausible-scale", d.At+"/controller/dead_time_s", "dead time takes %s of the period: is the value in seconds?", share)
	}
	q := &r.Quantities
	if ripple, mean := q[quantity.InductorRipplePP], q[quantity.InductorMean]; ripple < leastRippleShare*mean {
		w.add("implausible-scale", d.At+"/inductor/inductance_h", "the inductor ripple of %s A is only %s of its mean current: is the value in henry?", ripple, ripple/mean)
	}
	if peak, rated := q[quantity.InductorPeak], s.Inductor.Rating.Saturation; peak > greatestPeakShare*rated {
		w.add("implausible-scale", d.At+"/inductor/inductance_h", "the inductor's peak current of %s A is far above its saturation current of %s A: is the value in henry?", peak, rated)
	}
	if density := q[quantity.CorePowerDensity]; parts.Known(density) && density > magnetics.AbsurdDensity {
		w.add("core-power-density", d.At+"/inductor/core/steinmetz/k", "the core loss of %s W/m3 is more than any core stands; coefficients are for a sine, amplitude of B, in Hz, T and W/m3", density)
	}
}

// typicalControl warns where the mean output voltage is held exactly although the
// stage has a divider whose tolerance is then hidden.
func (w *warnings) typicalControl(d *Design, at string, c *stage.Control) {
	if c.Kind == stage.RegulateTo && d.Stage.Feedback.Present {
		if set := d.Stage.Feedback.OutputVoltage(); !(set > 0.9*c.Voltage && set < 1.1*c.Voltage) {
			w.add("feedback-disagrees", at+"/control/regulate_to_v", "the divider sets %s V, the point asks for %s V", set, c.Voltage)
		}
	}
}

// heldParts warns that temperatures are not those of an equilibrium.
func (w *warnings) heldParts(at string, p *stage.Point) {
	if parts.Known(p.PartTemperatureDegC) && !strings.HasPrefix(at, "/grid") {
		w.add("held-temperature", at+"/part_temperature_degc", "every part is held at %s degC: no equilibrium was computed", p.PartTemperatureDegC)
	}
}
