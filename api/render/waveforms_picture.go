package render

import (
	"fmt"
	"math"
	"strconv"

	"railproof/api/wire"
)

// SteadyStatePicture draws one period: switch node, currents, and the output with
// its ripple magnified; nil without waveforms.
func SteadyStatePicture(a *wire.SteadyStateAnswer) *Picture {
	w := a.Waveforms
	if w == nil || len(w.Time) == 0 {
		return nil
	}
	time := ranged("time", "s", w.Time)
	node := &panel{x: time, tall: px(96), bareX: true, curves: phases("", w.Time, w.SwitchNode, 0)}
	node.y = ranged("switch node", "V", append(w.SwitchNode, []float64{0})...).padded(0.08)
	currents := &panel{x: time, tall: px(190), bareX: true, curves: phases("inductor", w.Time, w.Inductor, 0)}
	lists := append([][]float64{w.Input, {0}}, w.Inductor...)
	n := len(w.Inductor)
	currents.curves = append(currents.curves, curve{name: "from the input", x: w.Time, y: w.Input, style: trace(n)})
	if len(w.OutputCapacitor) > 0 {
		sum := added(w.OutputCapacitor)
		lists = append(lists, sum)
		currents.curves = append(currents.curves, curve{name: "output capacitors", x: w.Time, y: sum, style: trace(n + 1)})
	}
	currents.y = ranged("currents", "A", lists...).padded(0.06)
	out := outputPanel(w, time)
	q := a.Quantities
	p := &Picture{
		title:    railName(a.Stage) + ": steady state over one period",
		subtitle: pointWords(a.Point) + "; " + a.ConductionMode + " conduction",
		blocks:   alignPanels(node, currents, out),
	}
	if q != nil {
		p.subtitle += ", duty ratio " + figure(q.DutyRatio, "1")
		p.description = fmt.Sprintf("Switch node, currents and output voltage. Inductor current from %s to %s, mean %s. Output %s mean, ripple %s peak to peak",
			figure(q.InductorValley, "A"), figure(q.InductorPeak, "A"), figure(q.InductorMean, "A"), figure(q.OutputMean, "V"), figure(q.OutputRipplePP, "V"))
	}
	p.subtitle += unlessOK(a.Status)
	return p
}

// phases makes a curve of each list; several are numbered.
func phases(name string, x []float64, lists [][]float64, style int) []curve {
	var curves []curve
	for i, y := range lists {
		c := curve{name: name, x: x, y: y, style: trace(style + i)}
		if len(lists) > 1 {
			c.name = "phase " + strconv.Itoa(i+1)
		}
		curves = append(curves, c)
	}
	return curves
}

func added(lists [][]float64) []float64 {
	sum := make([]float64, len(lists[0]))
	for _, l := range lists {
		for i, v := range l {
			sum[i] += v
		}
	}
	return sum
}

// outputPanel draws the output from zero, and its ripple about the mean in an
// inset below the line.
func outputPanel(w *wire.Waveforms, time scale) *panel {
	p := &panel{x: time, tall: px(208), curves: []curve{{x: w.Time, y: w.Output, style: trace(0)}}}
	p.y = ranged("output", "V", w.Output, []float64{0}).padded(0.1)
	mean := meanOver(w.Time, w.Output)
	ripple := make([]float64, len(w.Output))
	for i, v := range w.Output {
		ripple[i] = v - mean
	}
	p.inset = &panel{x: time, tall: px(88), bareX: true, curves: []curve{{x: w.Time, y: ripple, style: trace(0)}}}
	p.inset.y = ranged("ripple about "+trimmed(Figure3(mean, "V")), "V", ripple).padded(0.1)
	if p.inset.y.greatest-p.inset.y.least < 1e-9*math.Abs(mean) {
		p.inset.y.least, p.inset.y.greatest = -1e-6*math.Abs(mean), 1e-6*math.Abs(mean)
	}
	return p
}

// meanOver returns the mean of a sampled curve over its time.
func meanOver(time, curve []float64) float64 {
	area := 0.0
	for k := 1; k < len(curve); k++ {
		area += (time[k] - time[k-1]) * (curve[k] + curve[k-1]) / 2
	}
	if span := time[len(time)-1] - time[0]; span > 0 {
		return area / span
	}
	return curve[0]
}
