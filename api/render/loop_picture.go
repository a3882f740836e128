package render

import (
	"math"

	"gonum.org/v1/plot/vg/draw"
)

// bode holds a loop gain over frequency and its margins; NaN where one does not
// exist.
type bode struct {
	title, subtitle             string
	frequency, gain, phase      []float64
	averagedGain, averagedPhase []float64 // empty: not drawn
	crossover, phaseMargin      float64   // [Hz], [deg]
	phaseCrossing, gainMargin   float64   // [Hz], [dB]
	switching                   float64   // [Hz]
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
		phase.marks = append(phase.marks, mark{x: b.crossover, y: none}, mark{x: b.crossover, y: b.phaseMargin - 180, label: "phase margin " + Figure3(b.phaseMargin, "deg")})
		said = "Crossover " + at + ", phase margin " + Figure3(b.phaseMargin, "deg")
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
