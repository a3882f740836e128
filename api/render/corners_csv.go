package render

import (
	"strconv"

	"railproof/api/wire"
)

// CornersCSV writes a line per quantity and side.
func CornersCSV(a *wire.CornersAnswer) []byte {
	s := newSheet("quantity", "unit", "side", "limit", "limit_at", "verdict", "margin_ratio", "model_band", "nominal",
		"worst", "status", "found_by", "beyond_vertices", "proven", headed("input_v"), headed("load_current_a"), headed("ambient_degc"), "age_ratio",
		"root_sum_square", "root_sum_square_trusted", "samples", "mean", "standard_deviation", "quantile_0.00135", "quantile_0.5", "quantile_0.99865", "cpk",
		"contributor_1", "contributor_1_ratio", "contributor_2", "contributor_2_ratio")
	sides := cornerSides(a)
	for i := range sides {
		s.row(sides[i].cells()...)
	}
	return s.bytes()
}

func (s *cornerSide) cells() []string {
	at := ""
	if s.q.Limit != nil {
		at = limitPlace(s.q.Limit)
	}
	cells := []string{s.q.Quantity, s.q.Unit, s.name, numberOf(s.limit), at, s.q.Verdict, numberOf(s.q.Margin), numberOf(s.q.ModelBand), numberOf(s.q.Nominal)}
	cells = append(cells, s.worstCells()...)
	trusted := ""
	if s.linear != nil {
		trusted = strconv.FormatBool(s.linear.Trusted)
	}
	cells = append(cells, numberOf(s.linearValue()), trusted)
	cells = append(cells, s.sampleCells()...)
	for k := range largest {
		if s.worst == nil || k >= len(s.worst.Contributions) {
			cells = append(cells, "", "")
			continue
		}
		c := &s.worst.Contributions[k]
		cells = append(cells, c.Pointer, numberOf(c.Width))
	}
	return cells
}

func (s *cornerSide) worstCells() []string {
	w := s.worst
	if w == nil {
		return make([]string, 9)
	}
	var load *float64
	if w.Point.Load != nil {
		load = w.Point.Load.Current
	}
	return []string{numberOf(w.Value), w.Status, w.FoundBy, strconv.FormatBool(w.Beyond), strconv.FormatBool(w.Proven), number(w.Point.Input), numberOf(load), number(w.Point.Ambient), numberOf(w.Point.Age)}
}

func (s *cornerSide) sampleCells() []string {
	cells := make([]string, 7)
	if s.at == nil {
		return cells
	}
	cells[0], cells[1], cells[2], cells[6] = strconv.Itoa(s.at.Samples), numberOf(s.at.Mean), numberOf(s.at.Deviation), numberOf(s.at.Cpk)
	for _, q := range s.at.Quantiles {
		for k, p := range []float64{0.00135, 0.5, 0.99865} {
			if q.Probability == p {
				cells[3+k] = number(q.Value)
			}
		}
	}
	return cells
}

// numberOf writes a number, nothing for one that is not there.
func numberOf(v *float64) string {
	if v == nil {
		return ""
	}
	return number(*v)
}
