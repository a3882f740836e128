package render

import (
	"strconv"
	"strings"

	"railproof/api/wire"
)

// SubstitutionsCSV writes a line per replacement and quantity, and one for a
// replacement in which none moves.
func SubstitutionsCSV(a *wire.SubstitutionsAnswer) []byte {
	s := newSheet("rank", "id", "role", "verdict", headed("score_ratio"), "reasons", "missing", "quantity", "unit", "nominal_before", "nominal_after", "least_before", "least_after", "greatest_before", "greatest_after", "min", "max")
	for i := range a.Items {
		item := &a.Items[i]
		codes := make([]string, len(item.Reasons))
		for k, r := range item.Reasons {
			codes[k] = strings.TrimSpace(r.Code + " " + r.Rule)
		}
		head := []string{strconv.Itoa(item.Rank), words(item.ID), item.Role, item.Verdict, cell(item.Score), words(strings.Join(codes, "; ")), words(strings.Join(item.Missing, " "))}
		if len(item.Quantities) == 0 {
			s.row(append(head, make([]string, 10)...)...)
		}
		for k := range item.Quantities {
			q := &item.Quantities[k]
			least, most := "", ""
			if q.Limit != nil {
				least, most = cell(q.Limit.Min), cell(q.Limit.Max)
			}
			s.row(append(head[:7:7], q.Quantity, q.Unit, cell(q.NominalBefore), cell(q.NominalAfter), cell(q.LeastBefore), cell(q.LeastAfter), cell(q.GreatestBefore), cell(q.GreatestAfter), least, most)...)
		}
	}
	return s.bytes()
}
