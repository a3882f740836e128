package render

import (
	"strconv"

	"railproof/api/wire"
)

// LossesCSV writes the rows of a grid, or the loss items of every point.
func LossesCSV(a *wire.LossesAnswer) []byte {
	if a.Grid != nil {
		return gridCSV(a.Grid)
	}
	s := newSheet("point", "id", headed("input_v"), headed("load_current_a"), headed("ambient_degc"), "status", "part", "mechanism", headed("power_w"), "count", headed("low_w"), headed("high_w"))
	for i := range a.Items {
		item := &a.Items[i]
		p := item.Point
		load := ""
		if p.Load != nil && p.Load.Current != nil {
			load = number(*p.Load.Current)
		}
		at := []string{strconv.Itoa(i), words(p.ID), number(p.Input), load, number(p.Ambient), item.Status}
		if len(item.Losses) == 0 {
			s.row(append(at, "", "", "", "", "", "")...)
		}
		for _, l := range item.Losses {
			s.row(append(at[:6:6], l.Part, l.Mechanism, number(l.Power), strconv.Itoa(l.Count), number(l.Low), number(l.High))...)
		}
	}
	return s.bytes()
}

// gridCSV writes a line per cell; cells without figures have empty columns.
func gridCSV(g *wire.LossesGrid) []byte {
	columns := g.Rows.Quantities.List()
	header := []string{"cell", headed("input_v"), headed("load_current_a"), headed("ambient_degc"), "status", "conduction_mode"}
	for _, c := range columns {
		header = append(header, withUnit(c.Key, unitOfKey(c.Key)))
	}
	s := newSheet(header...)
	row, failed := 0, 0
	for row < len(g.Rows.Cell) || failed < len(g.Failures) {
		if failed < len(g.Failures) && (row == len(g.Rows.Cell) || g.Failures[failed].Cell < g.Rows.Cell[row]) {
			f := g.Failures[failed]
			cells := []string{strconv.Itoa(f.Cell), number(f.Input), number(f.Load), number(f.Ambient), f.Status, ""}
			s.row(append(cells, make([]string, len(columns))...)...)
			failed++
			continue
		}
		cells := []string{strconv.Itoa(g.Rows.Cell[row]), number(g.Rows.Input[row]), number(g.Rows.Load[row]), number(g.Rows.Ambient[row]), g.Rows.Status[row], g.Rows.Mode[row]}
		for _, c := range columns {
			cells = append(cells, number(c.Values[row]))
		}
		s.row(cells...)
		row++
	}
	return s.bytes()
}
