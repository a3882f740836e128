package render

import (
	"strconv"
	"strings"

	"railproof/api/wire"
)

// LoopText writes an answer of the loop for reading.
func LoopText(a *wire.LoopGainAnswer) string {
	p := new(page)
	p.line(railName(a.Stage), ": control loop, ", a.Status)
	if s := a.Synthesis; s != nil {
		p.synthesis(s)
	}
	p.title("points")
	p.b.WriteByte('\n')
	var rows [][]string
	for i := range a.Items {
		x := &a.Items[i]
		rows = append(rows, []string{
			strconv.Itoa(i), pointShort(x.Point), x.Status, figure(x.Crossover, "Hz"), figure(x.PhaseMargin, "deg"), figure(x.GainMargin, "dB"), figure(x.ModulusMargin, "1"), figure(x.ImpedancePeak, "Ohm"),
		})
	}
	p.table([]align{right, left, left, right, right, right, right, right},
		[]string{"point", "in, load, ambient", "status", "crossover", "phase", "gain", "modulus", "peak Zout"}, rows)
	for i := range a.Items {
		p.loopItem(&a.Items[i], i)
	}
	p.basis(&a.Basis)
	return p.b.String()
}

// pointShort says an operating point in a cell.
func pointShort(w *wire.Point) string {
	return strings.ReplaceAll(strings.TrimSuffix(pointWords(w), " ambient"), " in,", ",")
}

func (p *page) synthesis(s *wire.SynthesisAnswer) {
	p.title("compensator " + s.Preferred.Type + ", preferred values (before rounding)")
	p.b.WriteByte('\n')
	var rows [][]string
	row := func(name, unit string, preferred, ideal *wire.Number) {
		if preferred != nil && ideal != nil {
			rows = append(rows, []string{name, Figure3(preferred.Value, unit), "(" + Figure3(ideal.Value, unit) + ")"})
		}
	}
	row("feedback resistor", "Ohm", s.Preferred.FeedbackOhm, s.Ideal.FeedbackOhm)
	row("feedback capacitor", "F", s.Preferred.FeedbackF, s.Ideal.FeedbackF)
	row("shunt capacitor", "F", s.Preferred.ShuntF, s.Ideal.ShuntF)
	row("lead resistor", "Ohm", s.Preferred.LeadOhm, s.Ideal.LeadOhm)
	row("lead capacitor", "F", s.Preferred.LeadF, s.Ideal.LeadF)
	rows = append(rows,
		[]string{"crossover", figure(s.Crossover, "Hz"), "(" + figure(s.IdealCrossover, "Hz") + ")"},
		[]string{"phase margin", figure(s.PhaseMargin, "deg"), "(" + figure(s.IdealPhaseMargin, "deg") + ")"})
	p.table([]align{left, right, right}, []string{"part", "preferred", "before"}, rows)
	p.wrapped("the stage has "+figure(s.PlantGain, "dB")+" and "+figure(s.PlantPhase, "deg")+" at the wanted crossover; the network lifts the phase by "+figure(s.PhaseBoost, "deg"), "  ")
}

func (p *page) loopItem(x *wire.LoopItem, i int) {
	p.title("point " + strconv.Itoa(i) + ", " + pointWords(x.Point) + ": " + x.Status)
	p.trouble(x.Detail, x.NearestOperable, nil)
	if x.Stability == "" {
		return
	}
	said := x.Stability + ", greatest eigenvalue " + figure(x.SpectralRadius, "1")
	if x.DominantAt != nil && *x.DominantAt > 0 {
		said += " at " + figure(x.DominantAt, "Hz")
	}
	if x.Conditional != nil && *x.Conditional {
		said += ", conditionally: not with " + figure(x.GainReduction, "dB") + " less gain"
	}
	p.line(said)
	p.wrapped("crossovers: "+crossoverWords(x), "  ")
	p.wrapped("negative real: "+crossingWords(x), "  ")
	p.line("nearest to -1: ", figure(x.ModulusMargin, "1"), " at ", figure(x.ModulusMarginAt, "Hz"), ", bandwidth ", optional(x.Bandwidth, func(f float64) string { return Figure3(f, "Hz") }))
	if x.ImpedancePeak != nil {
		p.line("output impedance, loop closed: at most ", figure(x.ImpedancePeak, "Ohm"), " at ", figure(x.ImpedancePeakAt, "Hz"))
	}
	if c := x.CurrentLoop; c != nil {
		p.wrapped("current loop: "+Figure3(c.Eigenvalue, "1")+" of a disturbance is left after a period, slope compensation "+figure(c.Slope, "V/s")+" of at least "+Figure3(c.SlopeNeeded, "V/s"), "  ")
	}
	if s := x.Source; s != nil {
		p.wrapped("source: "+s.Stability+", phase margin "+figure(s.PhaseMargin, "deg")+", separation "+figure(s.Input, "dB")+" at "+figure(s.InputAt, "Hz")+"; "+s.Detail, "  ")
	}
	if x.AveragedGoodTo != nil {
		p.line("the averaged model stays within 10 % up to ", figure(x.AveragedGoodTo, "Hz"))
	}
	for _, r := range x.Remarks {
		p.wrapped("- "+r.Detail+place(r.Pointer), "  ")
	}
}

func crossoverWords(x *wire.LoopItem) string {
	if len(x.Crossovers) == 0 {
		return "none, the loop gain is " + strings.ReplaceAll(x.Crossing, "-", " ") + " 1"
	}
	words := make([]string, len(x.Crossovers))
	for i, c := range x.Crossovers {
		words[i] = Figure3(c.Frequency, "Hz") + " (" + Figure3(c.PhaseMargin, "deg") + map[bool]string{true: ")", false: ", rising)"}[c.Falling]
	}
	return strings.Join(words, ", ")
}

func crossingWords(x *wire.LoopItem) string {
	if len(x.PhaseCrossings) == 0 {
		return "nowhere up to half the decision rate, so there is no gain margin"
	}
	words := make([]string, len(x.PhaseCrossings))
	for i, c := range x.PhaseCrossings {
		words[i] = Figure3(c.Frequency, "Hz") + " (" + Figure3(c.GainMargin, "dB") + ")"
	}
	return strings.Join(words, ", ")
}
