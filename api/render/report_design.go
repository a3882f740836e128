package render

import (
	"cmp"
	"slices"

	"railproof/api/wire"
)

// sizing shows what the requirement asks of the values, and why.
func (r *Report) sizing() []part {
	a := r.Sizing
	if a == nil {
		return nil
	}
	blocks := []part{{Text: "Sized from the requirement alone, apart from the stage above: what any stage must keep to. Status: " + a.Status + "."}}
	for _, c := range a.Conflicts {
		blocks = append(blocks, part{Text: "Conflict: " + c.Detail + " Needed " + Figure3(c.Needed, c.Unit) + ", available " + Figure3(c.Available, c.Unit) + ".", Class: "fail"})
	}
	blocks = append(blocks, drawing(WindowsPicture(a), "Windows of values that keep every bound")...)
	blocks = append(blocks, drawing(SweepPicture(a), "")...)
	if t := boundsTable(a.Windows); len(t.Rows) > 0 {
		blocks = append(blocks, part{Head: "Bounds, and the condition that decides each"}, part{Table: t})
	}
	if len(a.Ratings) > 0 {
		t := &grille{Head: row("ttnntt", "part", "rating", "applied", "required", "at", "formula and source")}
		for i := range a.Ratings {
			q := &a.Ratings[i]
			t.Rows = append(t.Rows, row("ttnntt", spoken(q.Part), cmp.Or(q.Rating, q.Stress), Figure3(q.Applied, q.Unit), Figure3(q.Required, q.Unit), cornerWords(&q.Corner), sourced(q.Formula, q.Source)))
		}
		blocks = append(blocks, part{Head: "Ratings that parts must carry"}, part{Table: t})
	}
	return blocks
}

func boundsTable(windows []wire.Window) *grille {
	t := &grille{Head: row("tttnntt", "value", "side", "constraint", "bound", "textbook", "at", "formula and source")}
	for i := range windows {
		w := &windows[i]
		for k := range w.Bounds {
			b := &w.Bounds[k]
			cells := row("tttnntt", quantityName(w.Name), b.Side, b.Constraint, Figure3(b.Value, b.Unit), figure(b.Ideal, b.Unit), cornerWords(&b.Corner), sourced(b.Formula, b.Source))
			if b.Binding {
				cells[2] = entry{Text: b.Constraint + " (decides)"}
			}
			t.Rows = append(t.Rows, cells)
		}
	}
	return t
}

func sourced(formula, source string) string {
	switch {
	case formula == "":
		return source
	case source == "":
		return formula
	}
	return formula + " — " + source
}

// figures shows the steady state at the typical point.
func (r *Report) figures() []part {
	a := r.Steady
	if a == nil {
		return nil
	}
	blocks := []part{{Text: "At " + pointWords(a.Point) + ", " + r.Control + ": " + statusWords(a.Status, a.Detail)}}
	blocks = append(blocks, drawing(SteadyStatePicture(a), "")...)
	if a.Quantities == nil {
		return blocks
	}
	t := &grille{Head: row("ttn", "quantity", "key", "value")}
	for _, f := range a.Quantities.List() {
		key := f.ID.Key()
		name, unit, factor := quantityForPeople(key)
		t.Rows = append(t.Rows, row("ttn", name, key, Figure3(factor*f.Value, unit)))
	}
	return append(blocks, part{Table: t})
}

func statusWords(status, detail string) string {
	if detail == "" {
		return status + "."
	}
	return status + ". " + detail
}

// losses shows where power is lost and how warm parts become.
func (r *Report) losses() []part {
	a := r.Losses
	if a == nil {
		return nil
	}
	var blocks []part
	t := &grille{Head: row("tttnnt", "input", "load", "ambient", "efficiency", "loss", "status")}
	for i := range a.Items {
		it := &a.Items[i]
		load := ""
		if it.Point.Load != nil {
			load = figure(it.Point.Load.Current, "A")
		}
		efficiency, loss := "-", "-"
		if it.Quantities != nil {
			efficiency, loss = optional(it.Quantities.Efficiency, percent), figure(it.Quantities.LossTotal, "W")
		}
		cells := row("tttnnt", Figure3(it.Point.Input, "V"), load, Figure3(it.Point.Ambient, "Cel"), efficiency, loss, "")
		cells[5] = judged(it.Status)
		t.Rows = append(t.Rows, cells)
	}
	blocks = append(blocks, part{Table: t})
	worst := hottestItem(a)
	blocks = append(blocks, drawing(LossBreakdown(a, worst), "At the point with the greatest loss of those above")...)
	if r.Grid != nil {
		blocks = append(blocks, drawing(EfficiencyCurves(r.Grid), "")...)
	}
	return append(blocks, part{Head: "Temperatures at that point"}, part{Table: temperatureTable(a.Items[worst].PartTemperatures)})
}

// hottestItem returns the item with the greatest loss.
func hottestItem(a *wire.LossesAnswer) int {
	worst, most := 0, -1.0
	for i := range a.Items {
		if q := a.Items[i].Quantities; q != nil && q.LossTotal != nil && *q.LossTotal > most {
			worst, most = i, *q.LossTotal
		}
	}
	return worst
}

func temperatureTable(list []wire.PartTemperature) *grille {
	columns := 4
	if slices.ContainsFunc(list, func(p wire.PartTemperature) bool { return p.Life != nil }) {
		columns = 5
	}
	t := &grille{Head: row("tnnnn", "part", "temperature", "rating", "margin", "life")[:columns]}
	for i := range list {
		p := &list[i]
		cells := row("tnnnn", spoken(p.Part), Figure3(p.Temperature, "Cel"), figure(p.Rating, "Cel"), figure(p.Margin, "K"), figure(p.Life, "s"))[:columns]
		if p.Margin != nil && *p.Margin < 0 {
			cells[3].Class = "fail"
		}
		t.Rows = append(t.Rows, cells)
	}
	return t
}
