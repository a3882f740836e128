package render

import (
	"cmp"
	"strconv"

	"railproof/api/wire"
)

// SizingText writes an answer of sizing for reading.
func SizingText(a *wire.SizingAnswer) string {
	p := new(page)
	name := a.Requirement.Name
	if name == "" {
		name = "requirement"
	}
	p.line(name, ": sizing, ", a.Status)
	for _, c := range a.Conflicts {
		p.title("conflict: " + c.Constraint + ", needed " + Figure3(c.Needed, c.Unit) + ", available " + Figure3(c.Available, c.Unit))
		p.wrapped(c.Detail, "  ")
		for _, f := range c.Fields {
			p.line("  ", f)
		}
	}
	p.windows(a.Windows)
	p.ratings(a.Ratings)
	if d := a.Divider; d != nil {
		p.title("divider")
		p.line(Figure3(d.Upper, "Ohm"), " over ", Figure3(d.Lower, "Ohm"), " (", d.Series, ") sets ", Figure3(d.Output, "V"), ", ", percent(d.Error), " off; at the ends of its tolerances ", optional(d.WorstError, percent))
	}
	p.checks(a.Checks)
	p.sweep(a.Sweep)
	p.explanation(a.Explanation)
	p.basis(&a.Basis)
	return p.b.String()
}

func (p *page) windows(list []wire.Window) {
	if len(list) == 0 {
		return
	}
	p.title("windows")
	var rows [][]string
	for _, w := range list {
		chosen := figure(w.Preferred, w.Unit)
		if w.Count != nil && *w.Count > 1 {
			chosen = strconv.Itoa(int(*w.Count)) + " x " + chosen
		}
		rows = append(rows, []string{w.Name, figure(w.Least, w.Unit), w.SetByLeast, figure(w.Greatest, w.Unit), w.SetByGreatest, chosen})
	}
	p.table([]align{left, right, left, right, left, right}, []string{"value", "least", "set by", "greatest", "set by", "chosen"}, rows)
}

func (p *page) ratings(list []wire.RequiredRating) {
	if len(list) == 0 {
		return
	}
	p.title("ratings that parts must carry")
	var rows [][]string
	for _, r := range list {
		rows = append(rows, []string{r.Part, cmp.Or(r.Rating, r.Stress), Figure3(r.Applied, r.Unit), Figure3(r.Required, r.Unit), cornerWords(&r.Corner)})
	}
	p.table([]align{left, left, right, right, left}, []string{"part", "rating", "applied", "required", "at"}, rows)
}

func (p *page) checks(list []wire.SizingCheck) {
	if len(list) == 0 {
		return
	}
	p.title("draft stage on the exact engine, every tolerance at its worse end")
	var rows [][]string
	for _, c := range list {
		verdict, at := "met", ""
		if c.Corner != nil {
			at = pointWords(c.Corner)
		}
		if !c.Met {
			verdict = "NOT MET"
		}
		rows = append(rows, []string{c.Quantity, figure(c.Min, c.Unit), figure(c.Max, c.Unit), figure(c.Worst, c.Unit), verdict, at})
	}
	p.table([]align{left, right, right, right, left, left}, []string{"quantity", "least", "greatest", "worst", "verdict", "at"}, rows)
}

func (p *page) sweep(list []wire.SweepRow) {
	if len(list) == 0 {
		return
	}
	p.title("frequencies")
	var rows [][]string
	for _, r := range list {
		chosen := ""
		if r.Chosen {
			chosen = "chosen"
		}
		rows = append(rows, []string{Figure3(r.Frequency, "Hz"), r.Status, figure(r.Inductance, "H"), figure(r.OutputCapacitance, "F"), figure(r.InductorRipple, "A"), figure(r.OnTime, "s"), figure(r.Loss, "W"), chosen})
	}
	p.table([]align{right, left, right, right, right, right, right, left}, []string{"frequency", "status", "inductance", "output C", "ripple", "on-time", "loss", ""}, rows)
}

// cornerWords says a corner in few words.
func cornerWords(c *wire.Corner) string {
	s := ""
	for _, part := range []struct {
		v    *float64
		unit string
	}{{c.Input, "V"}, {c.Load, "A"}, {c.Ambient, "Cel"}} {
		if part.v != nil {
			if s != "" {
				s += ", "
			}
			s += Figure3(*part.v, part.unit)
		}
	}
	return s
}
