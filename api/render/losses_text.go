package render

import (
	"strconv"

	"railproof/api/wire"
	"railproof/calc/quantity"
)

// LossesText writes an answer of losses for reading.
func LossesText(a *wire.LossesAnswer) string {
	p := new(page)
	p.line(railName(a.Stage), ": losses and temperatures, ", a.Status)
	for i := range a.Items {
		p.lossesItem(&a.Items[i], len(a.Items) > 1, i)
	}
	if a.Grid != nil {
		p.lossesGrid(a.Grid)
	}
	p.explanation(a.Explanation)
	p.basis(&a.Basis)
	return p.b.String()
}

func railName(s *wire.Stage) string {
	if s.Name == "" {
		return "stage"
	}
	return s.Name
}

func (p *page) lossesItem(item *wire.LossesItem, numbered bool, i int) {
	head := pointWords(item.Point) + ": " + item.Status
	if numbered {
		head = "point " + strconv.Itoa(i) + ", " + head
	}
	p.title(head)
	p.trouble(item.Detail, item.NearestOperable, item.Runaway)
	if item.Quantities == nil || len(item.Losses) == 0 {
		return
	}
	q := item.Quantities
	p.line("efficiency ", optional(q.Efficiency, percent), ", loss ", figure(q.LossTotal, "W"), ", input ", figure(q.InputPower, "W"), ", duty ratio ", figure(q.DutyRatio, "1"), ", ", item.ConductionMode)
	p.b.WriteByte('\n')
	var rows [][]string
	for _, l := range item.Losses {
		all := l.Power * float64(l.Count)
		share := ""
		if q.LossTotal != nil && *q.LossTotal > 0 {
			share = percent(all / *q.LossTotal)
		}
		band := ""
		if l.Low != l.High {
			band = Figure3(l.Low, "W") + " to " + Figure3(l.High, "W")
		}
		rows = append(rows, []string{l.Part, l.Mechanism, Figure3(l.Power, "W"), strconv.Itoa(l.Count), share, band})
	}
	p.table([]align{left, left, right, right, right, left}, []string{"part", "mechanism", "power", "count", "share", "model band"}, rows)
	p.b.WriteByte('\n')
	p.temperatures(item.PartTemperatures)
}

func (p *page) temperatures(list []wire.PartTemperature) {
	var rows [][]string
	for _, t := range list {
		rows = append(rows, []string{t.Part, Figure3(t.Temperature, "Cel"), figure(t.Rating, "Cel"), figure(t.Margin, "K"), figure(t.Life, "s")})
	}
	p.table([]align{left, right, right, right, right}, []string{"part", "temperature", "rating", "margin", "life"}, rows)
}

// trouble writes why a stage does not work and where it would.
func (p *page) trouble(detail string, n *wire.NearestOperable, r *wire.Runaway) {
	if detail != "" {
		p.wrapped(detail, "  ")
	}
	if r != nil {
		p.wrapped("runaway of "+r.Part+": begins at ambient "+figure(r.Ambient, "Cel")+", or at load "+figure(r.Load, "A"), "  ")
	}
	if n != nil {
		p.wrapped("would work at input "+figure(n.Input, "V")+", or at load "+figure(n.Load, "A")+", or at ambient "+figure(n.Ambient, "Cel"), "  ")
	}
}

// gridRows bounds the lines of a grid for reading; CSV and JSON have them all.
const gridRows = 60

func (p *page) lossesGrid(g *wire.LossesGrid) {
	p.title(strconv.Itoa(len(g.Rows.Cell)) + " cells with figures, " + strconv.Itoa(len(g.Failures)) + " without")
	p.b.WriteByte('\n')
	header := []string{"input", "load", "ambient", "status"}
	aligns := []align{right, right, right, left}
	columns := g.Rows.Quantities.List()
	columns = columns[:min(len(columns), 4)]
	for _, c := range columns {
		header, aligns = append(header, c.Key), append(aligns, right)
	}
	var rows [][]string
	for i := range g.Rows.Cell[:min(len(g.Rows.Cell), gridRows)] {
		row := []string{Figure3(g.Rows.Input[i], "V"), Figure3(g.Rows.Load[i], "A"), Figure3(g.Rows.Ambient[i], "Cel"), g.Rows.Status[i]}
		for _, c := range columns {
			row = append(row, Figure3(c.Values[i], unitOfKey(c.Key)))
		}
		rows = append(rows, row)
	}
	p.table(aligns, header, rows)
	if left := len(g.Rows.Cell) - len(rows); left > 0 {
		p.line(strconv.Itoa(left), " more cells in JSON and CSV")
	}
}

func unitOfKey(key string) string {
	id, found := quantity.ByKey(key)
	if !found {
		return ""
	}
	info, _ := quantity.Of(id)
	return info.Unit
}

// pointWords says an operating point in a line.
func pointWords(p *wire.Point) string {
	s := Figure3(p.Input, "V") + " in, "
	switch l := p.Load; {
	case l == nil || l.Current == nil && l.Resistance == nil:
		s += "no load"
	case l.Current != nil && l.Resistance != nil:
		s += Figure3(*l.Current, "A") + " and " + Figure3(*l.Resistance, "Ohm")
	case l.Current != nil:
		s += Figure3(*l.Current, "A")
	default:
		s += Figure3(*l.Resistance, "Ohm")
	}
	return s + ", " + Figure3(p.Ambient, "Cel") + " ambient"
}

func figure(v *float64, unit string) string {
	return optional(v, func(x float64) string { return Figure3(x, unit) })
}

func optional(v *float64, write func(float64) string) string {
	if v == nil {
		return "-"
	}
	return write(*v)
}
