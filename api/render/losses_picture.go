package render

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// LossBreakdown draws the losses of an item by part and mechanism; nil if there is
// no such item or it has none.
func LossBreakdown(a *wire.LossesAnswer, item int) *Picture {
	if item >= len(a.Items) {
		return nil
	}
	it := &a.Items[item]
	if it.Quantities == nil || len(it.Losses) == 0 {
		return nil
	}
	groups, total := byPart(it.Losses)
	list := &bars{scale: ranged("loss", "W", []float64{0})}
	banded := false
	for i, g := range groups {
		list.rows = append(list.rows, bar{name: spoken(g.part), figures: Figure3(g.total, "W"), heading: true})
		for _, l := range g.items {
			n := float64(l.Count)
			b := bar{
				name: spoken(l.Mechanism), figures: Figure3(n*l.Power, "W") + ", " + share(n*l.Power, total),
				spans: []span{{0, n * l.Power, seriesTones[i%(len(seriesTones)-1)]}}, low: math.NaN(), high: math.NaN(),
			}
			if l.Low < l.High {
				b.low, b.high, banded = n*l.Low, n*l.High, true
			}
			list.rows = append(list.rows, b)
			list.scale.least = min(list.scale.least, n*l.Power)
			list.scale.greatest = max(list.scale.greatest, n*l.Power, n*l.High)
		}
	}
	list.scale = list.scale.padded(0.02)
	note := ""
	if banded {
		note = "Whiskers: band of the model of that mechanism."
	}
	q := it.Quantities
	p := &Picture{
		title:       railName(a.Stage) + ": losses by part and mechanism",
		subtitle:    pointWords(it.Point) + "; loss " + figure(q.LossTotal, "W") + ", efficiency " + optional(q.Efficiency, percent) + unlessOK(it.Status),
		description: "Horizontal bars. Parts by loss: " + partsInWords(groups),
		blocks:      []block{list}, note: note,
	}
	return p
}

// lossGroup is a part with its losses, the greatest first.
type lossGroup struct {
	part  string
	total float64
	items []wire.LossItem
}

// byPart groups losses; all pieces of a part counted.
func byPart(list []wire.LossItem) (groups []lossGroup, total float64) {
	for _, l := range list {
		i := slices.IndexFunc(groups, func(g lossGroup) bool { return g.part == l.Part })
		if i < 0 {
			groups, i = append(groups, lossGroup{part: l.Part}), len(groups)
		}
		groups[i].items = append(groups[i].items, l)
		groups[i].total += l.Power * float64(l.Count)
		total += l.Power * float64(l.Count)
	}
	for _, g := range groups {
		slices.SortStableFunc(g.items, func(a, b wire.LossItem) int {
			return cmp.Compare(b.Power*float64(b.Count), a.Power*float64(a.Count))
		})
	}
	slices.SortStableFunc(groups, func(a, b lossGroup) int { return cmp.Compare(b.total, a.total) })
	return groups, total
}

func partsInWords(groups []lossGroup) string {
	list := make([]string, len(groups))
	for i, g := range groups {
		list[i] = spoken(g.part) + " " + Figure3(g.total, "W")
	}
	return strings.Join(list, ", ")
}

func share(part, whole float64) string {
	if !(whole > 0) {
		return "-"
	}
	if r := part / whole; r >= 0.0995 {
		return strconv.FormatFloat(100*r, 'f', 0, 64) + " %"
	}
	return strconv.FormatFloat(100*part/whole, 'f', 1, 64) + " %"
}

func unlessOK(status string) string {
	if status == "ok" {
		return ""
	}
	return "; " + status
}
