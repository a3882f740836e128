package render

import "railproof/api/wire"

// loop shows stability and margins at the points that were looked at.
func (r *Report) loop() []part {
	a := r.Loop
	if a == nil {
		return nil
	}
	t := &grille{Head: row("ttnnnnt", "point", "status", "crossover", "phase margin", "gain margin", "least distance to −1", "stability")}
	var remarks []string
	for i := range a.Items {
		it := &a.Items[i]
		cells := row("ttnnnnt", pointWords(it.Point), "", figure(it.Crossover, "Hz"), figure(it.PhaseMargin, "deg"), figure(it.GainMargin, "dB"), figure(it.ModulusMargin, "1"), "")
		cells[1], cells[6] = judged(it.Status), stability(it.Stability)
		t.Rows = append(t.Rows, cells)
		if it.Detail != "" {
			remarks = append(remarks, pointWords(it.Point)+": "+it.Detail)
		}
	}
	blocks := []part{{Table: t}}
	if remarks != nil {
		blocks = append(blocks, part{Items: remarks})
	}
	worst := leastMargin(a)
	blocks = append(blocks, drawing(BodePicture(a, worst), "At the point with the least phase margin of those above")...)
	return append(blocks, drawing(OutputImpedancePicture(a, worst), "")...)
}

func stability(s string) entry {
	switch s {
	case "stable":
		return entry{Text: s, Class: "pass"}
	case "":
		return entry{Text: "-"}
	}
	return entry{Text: s, Class: "fail"}
}

// leastMargin returns the item with the least phase margin.
func leastMargin(a *wire.LoopGainAnswer) int {
	worst := 0
	for i := range a.Items {
		m, least := a.Items[i].PhaseMargin, a.Items[worst].PhaseMargin
		if m != nil && (least == nil || *m < *least) {
			worst = i
		}
	}
	return worst
}

// transient shows the answers to the load step of the requirement.
func (r *Report) transient() []part {
	var blocks []part
	t := &grille{Head: row("ttnnnn", "event", "status", "falls by", "rises by", "recovered after", "inductor peak")}
	for _, a := range r.Transients {
		cells := row("ttnnnn", eventTitle(a.Event)+" from "+pointWords(a.Point), "", figure(a.Down, "V"), figure(a.Up, "V"), figure(a.Recovery, "s"), figure(a.InductorPeak, "A"))
		cells[1] = judged(a.Status)
		t.Rows = append(t.Rows, cells)
		blocks = append(blocks, drawing(TransientPicture(a), "")...)
	}
	if len(t.Rows) == 0 {
		return nil
	}
	return append([]part{{Table: t}}, blocks...)
}
