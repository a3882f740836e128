package wire

import (
	"cmp"
	"math"
	"slices"

	"railproof/calc/corners"
	"railproof/calc/quantity"
	"railproof/service"
)

// item shows one line of the answer.
func (e *cornersEncoder) item(i *service.CornersItem) QuantityCorners {
	info, _ := quantity.Of(i.Quantity)
	q := QuantityCorners{
		Quantity: i.Quantity.Key(), Unit: info.Unit, Limit: limitOf(i), Verdict: i.Verdict.String(),
		Margin: capability(i.Margin), ModelBand: ordinary(i.Band), Nominal: ordinary(e.a.Nominal[i.Index]),
	}
	if q.ModelBand != nil {
		within := i.WithinBand(e.a.Worst(i))
		q.WithinBand = &within
	}
	if e.a.Run != nil {
		if i.YieldLimit >= 0 {
			q.FailingUnits = whole(e.a.Run.Broken(i.YieldLimit))
		}
		for k := range e.a.Corners {
			q.Statistics = append(q.Statistics, e.statistics(i, k, info.Unit))
		}
	}
	if e.a.Methods.ExtremeValue {
		q.Least, q.Greatest = e.worst(i.Least, info.Unit), e.worst(i.Greatest, info.Unit)
		q.OneAtATime = e.tornado(i.Index)
	}
	for _, t := range i.Targets() {
		if e.a.Linear != nil {
			q.Linear = append(q.Linear, e.linear(t, info.Unit)...)
		}
		q.Variance = append(q.Variance, e.variance(i.Index, e.a.Corner(t), q.Variance)...)
	}
	return q
}

// limitOf writes a line's limit as it holds for that line.
func limitOf(i *service.CornersItem) *Limit {
	if i.Limit == nil {
		return nil
	}
	l := &Limit{Quantity: i.Quantity.Key(), Min: given(&i.Limit.Min), Max: given(&i.Limit.Max)}
	l.holds(i.Limit.Where)
	return l
}

// worst shows the worst point of a target, nil where it has none.
func (e *cornersEncoder) worst(target int, unit string) *WorstPoint {
	if target < 0 || e.a.Extremes[target].At == nil {
		return nil
	}
	x := &e.a.Extremes[target]
	w := &WorstPoint{
		Value: ordinary(x.Value), Unit: unit, Status: x.Status.String(), FoundBy: origins[x.Origin], BestVertex: ordinary(x.Vertex),
		Beyond: x.BeyondVertices, Proven: x.Proven, Mode: modeNames[x.Mode],
	}
	if x.Origin == corners.FromSample {
		w.Sample = whole(x.Sample)
	}
	w.Point, w.Variables, w.Stage = e.at(x.At)
	for _, s := range e.a.Width.Shares(target) {
		w.Contributions = append(w.Contributions, Contribution{e.named(s.Coordinate), ordinary(s.Change), ordinary(s.Share)})
	}
	return w
}

// tornado shows a quantity with each variable alone at its ends.
func (e *cornersEncoder) tornado(q int) []TornadoBar {
	list := make([]TornadoBar, len(e.a.Bound.Problem().Coordinates))
	for c := range list {
		low, high := e.a.Search.OneAtATime(c, q)
		n := e.named(c)
		if n.Pointer == conductancePointer {
			low, high = high, low
		}
		list[c] = TornadoBar{n, ordinary(low), ordinary(high)}
	}
	size := func(b *TornadoBar) float64 {
		if b.AtMin == nil || b.AtMax == nil {
			return math.Inf(1)
		}
		nominal := e.a.Nominal[q]
		return max(*b.AtMin, *b.AtMax, nominal) - min(*b.AtMin, *b.AtMax, nominal)
	}
	slices.SortStableFunc(list, func(a, b TornadoBar) int { return cmp.Compare(size(&b), size(&a)) })
	return list
}

func (e *cornersEncoder) linear(target int, unit string) []RootSumSquare {
	r := &e.a.Linear[target]
	if math.IsNaN(r.Least) || math.IsNaN(r.Greatest) {
		return nil
	}
	return []RootSumSquare{{
		Side: targetSides[e.a.Bound.Problem().Targets[target].Direction], Corner: e.corner(r.Corner), Unit: unit,
		Typical: r.Typical, RandomAbove: r.RandomAbove, RandomBelow: r.RandomBelow, BiasAbove: r.BiasAbove, BiasBelow: r.BiasBelow,
		Least: r.Least, Greatest: r.Greatest, Deviation: ordinary(r.Deviation), Curvature: min(r.Curvature, greatestRatio), Trusted: r.Trusted(),
	}}
}

// greatestRatio is the largest ratio that the contract knows.
const greatestRatio = 1e9 // [1]

// variance shows the shares at a corner unless the list has it already.
func (e *cornersEncoder) variance(q, corner int, known []Variance) []Variance {
	if e.a.Shares == nil || slices.ContainsFunc(known, func(v Variance) bool { return v.Corner == corner }) {
		return nil
	}
	s := e.a.Shares[corner].Shares(q, e.a.Confidence)
	v := Variance{Corner: corner, Rows: s.Rows, Defined: s.Defined, Confidence: e.a.Confidence, Shares: []VarianceShare{}}
	for _, x := range s.Shares {
		v.Shares = append(v.Shares, VarianceShare{e.named(x.Coordinate), x.First, x.FirstLow, x.FirstHigh, x.Total, x.TotalLow, x.TotalHigh})
	}
	return []Variance{v}
}
