package render

import (
	"math"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// WindowsPicture draws the window of each value that satisfies the requirement,
// and what was chosen; nil without windows.
func WindowsPicture(a *wire.SizingAnswer) *Picture {
	list := &strips{windows: true}
	var said []string
	for i := range a.Windows {
		w := &a.Windows[i]
		s := strip{least: math.NaN(), greatest: math.NaN(), linearLow: math.NaN(), linearHigh: math.NaN(), limitLow: orNaN(w.Least), limitHigh: orNaN(w.Greatest), nominal: orNaN(w.Chosen)}
		values := []float64{s.limitLow, s.limitHigh, s.nominal}
		if !anyFinite(values) {
			continue
		}
		s.scale = ranged(quantityName(w.Name), w.Unit, values).logarithmic(20)
		if !s.scale.log {
			s.scale.least = min(s.scale.least, 0)
		}
		s.scale = s.scale.padded(0.15)
		s.verdict = windowWords(w)
		list.rows = append(list.rows, s)
		said = append(said, s.scale.name+": "+s.verdict)
	}
	if len(list.rows) == 0 {
		return nil
	}
	return &Picture{
		title:       nameOr(a.Requirement.Name, "requirement") + ": windows of values",
		subtitle:    figure(a.Frequency, "Hz") + ", " + a.Status,
		description: "A strip per value. " + strings.Join(said, "; "),
		blocks:      []block{list},
	}
}

// windowWords says a window, what sets its ends, and the piece that was chosen.
func windowWords(w *wire.Window) string {
	var parts []string
	if w.Least != nil {
		parts = append(parts, "from "+Figure3(*w.Least, w.Unit)+" ("+spoken(strings.ReplaceAll(w.SetByLeast, "-", " "))+")")
	}
	if w.Greatest != nil {
		parts = append(parts, "to "+Figure3(*w.Greatest, w.Unit)+" ("+spoken(strings.ReplaceAll(w.SetByGreatest, "-", " "))+")")
	}
	s := strings.Join(parts, " ")
	if w.Preferred != nil {
		s += "; chosen "
		if w.Count != nil && *w.Count > 1 {
			s += strconv.Itoa(int(*w.Count)) + " × "
		}
		s += Figure3(*w.Preferred, w.Unit)
	}
	return s
}
