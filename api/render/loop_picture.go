package render

import (
	"math"

	"gonum.org/v1/plot/vg/draw"

	"railproof/api/wire"
)

// bode holds a loop gain over frequency and its margins; NaN where one does not
// exist.
type bode struct {
	title, subtitle             string
	frequency, gain, phase      []float64
	averagedGain, averagedPhase []float64 // empty: not drawn
	crossover, phaseMargin      float64   // [Hz], [deg]
	phaseCrossing, gainMargin   float64   // [Hz], [dB]
}

// picture draws gain above phase, with both margins where they are read.
func (b *bode) picture() *Picture {
	x := ranged("frequency", "Hz", b.frequency).logarithmic(4).opened()
	gain := &panel{x: x, tall: px(200), bareX: true, y: ranged("loop gain", "dB", b.gain, b.averagedGain, []float64{0}).padded(0.06)}
	phase := &panel{x: x, tall: px(200), y: ranged("loop phase", "deg", b.phase, b.averagedPhase, []float64{-180}).padded(0.06)}
	gain.curves = []curve{{name: "sampled-data model", x: b.frequency, y: b.gain, style: trace(0)}}
	phase.curves = []curve{{x: b.frequency, y: b.phase, style: trace(0)}}
	if len(b.averagedGain) == len(b.frequency) && len(b.frequency) > 0 {
		gain.curves = append(gain.curves, curve{name: "averaged model", x: b.frequency, y: b.averagedGain, style: trace(1)})
		phase.curves = append(phase.curves, curve{x: b.frequency, y: b.averagedPhase, style: trace(1)})
	} else {
		gain.curves[0].name = ""
	}
	none := math.NaN()
	gain.marks = []mark{{x: none, y: 0}}
	phase.marks = []mark{{x: none, y: -180}}
	said := "No crossover"
	if !math.IsNaN(b.crossover) {
		at := Figure3(b.crossover, "Hz")
		gain.marks = append(gain.marks, mark{x: b.crossover, y: none}, mark{x: b.crossover, y: 0, label: "crossover " + at})
		phase.marks = append(phase.marks, mark{x: b.crossover, y: none}, mark{x: b.crossover, y: b.phaseMargin - 180, label: "phase margin " + three(b.phaseMargin) + "°"})
		said = "Crossover " + at + ", phase margin " + three(b.phaseMargin) + "°"
	}
	if !math.IsNaN(b.phaseCrossing) {
		gain.marks = append(gain.marks, mark{x: b.phaseCrossing, y: none}, mark{x: b.phaseCrossing, y: -b.gainMargin, label: "gain margin " + Figure3(b.gainMargin, "dB")})
		phase.marks = append(phase.marks, mark{x: b.phaseCrossing, y: none}, mark{x: b.phaseCrossing, y: -180, label: Figure3(b.phaseCrossing, "Hz")})
		said += ", gain margin " + Figure3(b.gainMargin, "dB") + " at " + Figure3(b.phaseCrossing, "Hz")
	}
	return &Picture{title: b.title, subtitle: b.subtitle, description: "Loop gain and phase over frequency. " + said, blocks: alignPanels(gain, phase)}
}

// impedanceCurve is a magnitude over frequency.
type impedanceCurve struct {
	name   string
	values []float64 // [ohm]
	style  draw.LineStyle
}

// impedances draws magnitudes over frequency on two logarithmic scales.
func impedances(title, subtitle, name string, frequency []float64, list []impedanceCurve, marks ...mark) *Picture {
	p := &panel{x: ranged("frequency", "Hz", frequency).logarithmic(4).opened(), tall: px(300), marks: marks}
	var all [][]float64
	for _, c := range list {
		if len(c.values) == len(frequency) && len(frequency) > 0 {
			all = append(all, c.values)
			p.curves = append(p.curves, curve{name: c.name, x: frequency, y: c.values, style: c.style})
		}
	}
	if len(all) == 0 {
		return nil
	}
	values := ranged(name, "Ohm", all...)
	p.y = values.logarithmic(10).padded(0.06)
	return &Picture{
		title: title, subtitle: subtitle, blocks: alignPanels(p),
		description: name + " over frequency, from " + Figure3(values.least, "Ohm") + " to " + Figure3(values.greatest, "Ohm"),
	}
}

// BodePicture draws the loop gain of an item; nil without curves.
func BodePicture(a *wire.LoopGainAnswer, item int) *Picture {
	it := loopItem(a, item)
	if it == nil {
		return nil
	}
	c := it.Curves
	b := &bode{
		title: railName(a.Stage) + ": loop gain", subtitle: pointWords(it.Point) + "; " + nameOr(it.Stability, it.Status),
		frequency: c.Frequency, gain: c.LoopGain, phase: c.LoopPhase, averagedGain: c.AveragedLoopGain, averagedPhase: c.AveragedLoopPhase,
		crossover: math.NaN(), phaseMargin: math.NaN(), phaseCrossing: math.NaN(), gainMargin: math.NaN(),
	}
	for _, x := range it.Crossovers {
		if it.PhaseMargin != nil && x.PhaseMargin == *it.PhaseMargin {
			b.crossover, b.phaseMargin = x.Frequency, x.PhaseMargin
		}
	}
	for _, x := range it.PhaseCrossings {
		if it.GainMargin != nil && x.GainMargin == *it.GainMargin {
			b.phaseCrossing, b.gainMargin = x.Frequency, x.GainMargin
		}
	}
	return b.picture()
}

func loopItem(a *wire.LoopGainAnswer, item int) *wire.LoopItem {
	if item >= len(a.Items) || a.Items[item].Curves == nil || len(a.Items[item].Curves.Frequency) == 0 {
		return nil
	}
	return &a.Items[item]
}

// OutputImpedancePicture draws what the load sees, with the loop open and closed.
func OutputImpedancePicture(a *wire.LoopGainAnswer, item int) *Picture {
	it := loopItem(a, item)
	if it == nil {
		return nil
	}
	var marks []mark
	if it.ImpedancePeak != nil && it.ImpedancePeakAt != nil {
		marks = []mark{{x: *it.ImpedancePeakAt, y: *it.ImpedancePeak, label: "peak " + Figure3(*it.ImpedancePeak, "Ohm") + " at " + Figure3(*it.ImpedancePeakAt, "Hz")}}
	}
	return impedances(railName(a.Stage)+": output impedance", pointWords(it.Point), "output impedance", it.Curves.Frequency,
		[]impedanceCurve{{"closed loop", it.Curves.ClosedImpedance, trace(0)}, {"open loop", it.Curves.Impedance, trace(1)}}, marks...)
}

// SourceImpedancePicture draws the source against the stage's input; nil where
// either is not known.
func SourceImpedancePicture(a *wire.LoopGainAnswer, item int) *Picture {
	it := loopItem(a, item)
	if it == nil || len(it.Curves.SourceImpedance) == 0 {
		return nil
	}
	return impedances(railName(a.Stage)+": source against input", pointWords(it.Point), "impedance", it.Curves.Frequency,
		[]impedanceCurve{{"input of the stage, closed loop", it.Curves.InputImpedance, trace(0)}, {"source with its filter", it.Curves.SourceImpedance, trace(1)}})
}
