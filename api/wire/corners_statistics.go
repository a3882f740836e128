package wire

import (
	"math"
	"slices"

	"railproof/calc/corners"
	"railproof/service"
)

// usualQuantiles are given always: the ends of ±3 sigma, one per cent and the
// median.
var usualQuantiles = []float64{0.00135, 0.01, 0.5, 0.99, 0.99865}

// statistics shows a line's units at one condition corner.
func (e *cornersEncoder) statistics(i *service.CornersItem, corner int, unit string) Statistics {
	s := e.a.Run.Statistics(corner, i.Index)
	w := Statistics{Corner: corner, Samples: s.Units, Unit: unit, Quantiles: []QuantileValue{}}
	if s.Units > 0 {
		w.Mean, w.Least, w.Greatest = ordinary(s.Mean), ordinary(s.Least), ordinary(s.Greatest)
		w.Deviation, w.MeanError = ordinary(s.Deviation), ordinary(s.MeanError(e.a.Confidence))
		w.Quantiles, w.Histogram = e.quantiles(s), e.histogram(s)
	}
	if s.Far > 0 {
		w.Far = whole(s.Far)
	}
	if l := i.Limit; l != nil && i.YieldLimit >= 0 {
		w.Fails = whole(e.a.Run.Beyond(corner, i.YieldLimit))
		c, p := s.Capability(l.Min, l.Max), s.PercentileCapability(l.Min, l.Max)
		w.Cp, w.Cpk, w.PercentileCpk = capability(c.Cp), capability(c.Cpk), capability(p.Cpk)
		e.wilks(&w, s, l)
	}
	return w
}

// wilks adds the bound on the limited side; a limit on both has its bound above.
func (e *cornersEncoder) wilks(w *Statistics, s *corners.Statistics, l *service.CornersLimit) {
	side := corners.Least
	if !math.IsNaN(l.Max) {
		side = corners.Greatest
	}
	if bound, order := s.WilksBound(side, e.a.Coverage, e.a.Confidence); order > 0 {
		w.WilksBound, w.WilksOrder = ordinary(bound), whole(order)
	}
}

func (e *cornersEncoder) quantiles(s *corners.Statistics) []QuantileValue {
	asked := append(slices.Clone(usualQuantiles), e.a.Quantiles...)
	slices.Sort(asked)
	asked = slices.Compact(asked)
	list := make([]QuantileValue, len(asked))
	for i, p := range asked {
		q := s.Quantile(p, e.a.Confidence)
		list[i] = QuantileValue{p, q.Value, q.Error, ordinary(q.Low), ordinary(q.High)}
	}
	return list
}

func (e *cornersEncoder) histogram(s *corners.Statistics) *Histogram {
	bins := whole64(e.w.Bins, defaultBins)
	if bins == 0 {
		return nil
	}
	h := &Histogram{}
	h.Edges, h.Counts, h.Below, h.Above = s.Histogram(bins)
	if h.Counts == nil {
		h.Counts = []int{}
	}
	return h
}

// capability returns an index or a margin that the contract can hold, nil for one
// that does not exist: without a width every limit is infinitely far.
func capability(v float64) *float64 {
	if math.Abs(v) > greatestRatio {
		return nil
	}
	return ordinary(v)
}
