package wire

import (
	"fmt"
	"math"
	"reflect"
	"slices"
	"strconv"
	"strings"

	"railproof/calc/corners"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/sampling"
	"railproof/calc/stage"
	"railproof/service"
)

var samplingMethods = map[string]sampling.Method{
	"": sampling.Independent, "independent": sampling.Independent, "sobol": sampling.Sobol, "latin-hypercube": sampling.LatinHypercube,
}

const (
	defaultSamples     = 10000
	defaultSeed        = 1
	defaultConfidence  = 0.95
	defaultCoverage    = 0.95
	defaultBins        = 40
	defaultWorst       = 3
	defaultAttribution = 4096
)

// defaultProof are the quantities that are reported where a request names none.
var defaultProof = []string{
	"output_ripple_pp_v", "output_error_ratio", "inductor_peak_a", "input_capacitor_rms_a", "efficiency_ratio", "loss_total_w",
	"high_side_junction_degc", "low_side_junction_degc", "diode_junction_degc", "inductor_winding_degc",
}

// Decode turns the request into a plan. The error is an *InvalidError.
func (w *CornersRequest) Decode() (*service.CornersPlan, error) {
	d, err := w.Stage.design()
	if err != nil {
		return nil, err
	}
	c, err := w.Conditions.Decode("/conditions", d.Stage)
	if err != nil {
		return nil, err
	}
	r := &service.CornersRequest{
		Design: *d, Conditions: c, Methods: w.methods(),
		Sampling:   sampling.Design{Method: samplingMethods[w.Sampling], Seed: uint64(whole64(w.Seed, defaultSeed)), Samples: whole64(w.Samples, defaultSamples)},
		First:      whole64(w.First, 0),
		Confidence: or(w.Confidence, defaultConfidence), Coverage: or(w.Coverage, defaultCoverage), Quantiles: w.Quantiles,
		Worst: whole64(w.Worst, defaultWorst), Base: whole64(w.Attribution, defaultAttribution), ModelBands: isTrue(w.ModelBands),
	}
	faults := append(w.widthless(), w.limits(r)...)
	faults = append(faults, w.further(r)...)
	faults = append(faults, w.corners(r)...)
	faults = append(faults, w.drifts(r)...)
	if r.First > 0 && r.Sampling.Method != sampling.Independent {
		faults = append(faults, Fault{Pointer: "/first_sample", Keyword: "sampling", Detail: "only independent samples can be asked for one by one: the other methods draw whole sets", Limit: "0", Received: strconv.Itoa(r.First)})
	}
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	p, refused := r.Plan()
	for _, f := range refused {
		faults = append(faults, Fault{Pointer: f.Pointer, Keyword: f.Keyword, Detail: f.Detail, Limit: f.Limit, Received: f.Received})
	}
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return p, nil
}

func whole64(n *Integer, otherwise int) int {
	if n == nil {
		return otherwise
	}
	return int(*n)
}

func (w *CornersRequest) methods() (m service.CornersMethods) {
	if len(w.Methods) == 0 {
		return service.CornersMethods{ExtremeValue: true, RootSumSquare: true, MonteCarlo: true}
	}
	asked := func(name string) bool { return slices.Contains(w.Methods, name) }
	return service.CornersMethods{ExtremeValue: asked("extreme-value"), RootSumSquare: asked("root-sum-square"), MonteCarlo: asked("monte-carlo"), Attribution: asked("attribution")}
}

// widthless points at spreads that say nothing: both ends at the typical value.
func (w *CornersRequest) widthless() (faults []Fault) {
	walk(reflect.ValueOf(w.Stage).Elem(), "", false, func(id string, s slot) {
		if s.number == nil || *s.number == nil {
			return
		}
		n := *s.number
		if least, greatest := n.bounds(); n.Spread != nil && n.Spread.MatchTol == nil && least == greatest {
			faults = append(faults, Fault{Pointer: "/stage/" + id, Keyword: "spread", Detail: "the spread has no width: give it one, or write the number alone", Received: figure(least), Unit: UnitOf("/stage/" + id)})
		}
	})
	return faults
}

// limits decodes the limits; one on a per-bank quantity without a bank is one on
// every bank.
func (w *CornersRequest) limits(r *service.CornersRequest) (faults []Fault) {
	for i := range w.Limits {
		l, at := &w.Limits[i], "/limits/"+strconv.Itoa(i)
		if wrong := l.faults(at); wrong != nil {
			faults = append(faults, wrong...)
			continue
		}
		if ofTransients(l.Quantity) {
			r.Elsewhere = append(r.Elsewhere, at)
			continue
		}
		ids, fault := proofIDs(l.Quantity, r)
		if fault != "" {
			faults = append(faults, unknownQuantity(at+"/quantity", l.Quantity, fault))
			continue
		}
		for _, id := range ids {
			one := service.CornersLimit{Quantity: id, Min: or(l.Min, math.NaN()), Max: or(l.Max, math.NaN()), Where: l.where(), At: at}
			if why := one.Impossible(&r.Conditions); why != "" {
				faults = append(faults, impossible(at, l, id, why))
				break
			}
			faults = append(faults, contradicts(r.Limits, &one)...)
			r.Limits = append(r.Limits, one)
		}
	}
	return faults
}

// ofTransients reports whether a quantity is one of a run in time: a limit on it goes
// with a stage, and other operations hold it.
func ofTransients(key string) bool {
	id, found := quantity.ByKey(key)
	if !found {
		return false
	}
	info, _ := quantity.Of(id)
	return info.Group == quantity.Transient
}

func impossible(at string, l *Limit, id quantity.ID, why string) Fault {
	info, _ := quantity.Of(id)
	f := Fault{Pointer: at, Keyword: "limit", Detail: "the limit can never be met: " + why, Unit: info.Unit}
	switch {
	case l.Min != nil && l.Max != nil:
		f.Pointer, f.Received, f.Limit = at+"/min", figure(*l.Min), "up to "+figure(*l.Max)
	case l.Min != nil:
		f.Pointer, f.Received = at+"/min", figure(*l.Min)
	default:
		f.Pointer, f.Received = at+"/max", figure(*l.Max)
	}
	return f
}

// contradicts reports an earlier limit on the same quantity that leaves nothing
// between.
func contradicts(earlier []service.CornersLimit, l *service.CornersLimit) []Fault {
	for i := range earlier {
		e := &earlier[i]
		if e.Quantity == l.Quantity && e.Where == l.Where && (e.Min > l.Max || l.Min > e.Max) {
			return []Fault{{Pointer: l.At, Keyword: "limit", Detail: "no value meets this limit and the one at " + e.At}}
		}
	}
	return nil
}

func unknownQuantity(at, key, why string) Fault {
	return Fault{Pointer: at, Keyword: "quantity", Detail: why, Limit: "a key of GET /v1/quantities", Received: key}
}

// proofIDs returns the identifiers behind a key: that of a bank it names, else one
// per bank of the stage.
func proofIDs(key string, r *service.CornersRequest) (ids []quantity.ID, fault string) {
	if id, found := quantity.ByKey(key); found {
		return []quantity.ID{id}, service.Inapplicable(r.Design.Stage, &r.Conditions.Control, id)
	}
	for _, info := range quantity.All() {
		if info.Key != key {
			continue
		}
		n := banksOf(r.Design.Stage).of(info.Family)
		if n == 0 {
			return nil, "the stage has no such capacitor bank"
		}
		for bank := range n {
			id := info.ID + quantity.ID(bank)
			if fault = service.Inapplicable(r.Design.Stage, &r.Conditions.Control, id); fault != "" {
				return nil, fault
			}
			ids = append(ids, id)
		}
		return ids, ""
	}
	return nil, "no such quantity"
}

// further decodes the quantities to report; where the request names none at all,
// those of the default that the stage has.
func (w *CornersRequest) further(r *service.CornersRequest) (faults []Fault) {
	for i, key := range w.Quantities {
		ids, fault := proofIDs(key, r)
		if fault != "" {
			faults = append(faults, unknownQuantity("/quantities/"+strconv.Itoa(i), key, fault))
		}
		r.Further = append(r.Further, ids...)
	}
	if len(w.Quantities) > 0 || len(r.Limits) > 0 {
		return faults
	}
	for _, key := range defaultProof {
		if ids, fault := proofIDs(key, r); fault == "" {
			r.Further = append(r.Further, ids...)
		}
	}
	return faults
}

// corners decodes the condition corners, which must lie within the conditions.
func (w *CornersRequest) corners(r *service.CornersRequest) (faults []Fault) {
	for i := range w.Corners {
		k := &w.Corners[i]
		at := "/condition_corners/" + strconv.Itoa(i)
		p := r.Conditions.Typical()
		set := func(name string, v *float64, to *float64, within stage.Range) {
			if v == nil {
				return
			}
			*to = *v
			if !(*v >= within.Min && *v <= within.Max) {
				faults = append(faults, Fault{Pointer: at + "/" + name, Keyword: "range", Detail: "the condition corner lies outside the conditions", Limit: fmt.Sprintf("%g to %g", within.Min, within.Max), Received: figure(*v), Unit: UnitOf(name)})
			}
		}
		set("input_v", &k.Input, &p.Input, r.Conditions.Input)
		set("load_current_a", k.Load, &p.Load.Current, r.Conditions.LoadCurrent)
		set("ambient_degc", &k.Ambient, &p.AmbientDegC, r.Conditions.AmbientDegC)
		set("age_ratio", k.Age, &p.AgeRatio, r.Conditions.AgeRatio)
		if k.Resistance != nil {
			p.Load.Conductance = 1 / *k.Resistance
			if c := r.Conditions.LoadConductance; !(p.Load.Conductance >= c.Min && p.Load.Conductance <= c.Max) {
				faults = append(faults, Fault{Pointer: at + "/load_resistance_ohm", Keyword: "range", Detail: "the condition corner lies outside the conditions", Limit: fmt.Sprintf("%g to %g", 1/c.Max, 1/c.Min), Received: figure(*k.Resistance), Unit: "Ohm"})
			}
		}
		r.At = append(r.At, p)
	}
	return faults
}

// drifts decodes the biases.
func (w *CornersRequest) drifts(r *service.CornersRequest) (faults []Fault) {
	places := map[string]stage.Field{}
	if len(w.Biases) > 0 {
		for _, f := range r.Design.Stage.Fields() {
			places[f.ID] = f
		}
	}
	seen := map[string]int{}
	for i := range w.Biases {
		b, at := &w.Biases[i], "/biases/"+strconv.Itoa(i)
		id, below := strings.CutPrefix(b.Pointer, "/stage/")
		place, found := places[id]
		switch before, twice := seen[id]; {
		case !below || !found || !place.Spread:
			faults = append(faults, Fault{Pointer: at + "/pointer", Keyword: "bias", Detail: "the stage has no number there that may drift", Received: b.Pointer})
		case !parts.Known(*place.Value) || *place.Value == 0 || math.IsInf(*place.Value, 0):
			faults = append(faults, Fault{Pointer: at + "/pointer", Keyword: "bias", Detail: "the number is not given, or zero: a relative drift of it says nothing", Received: b.Pointer})
		case twice:
			faults = append(faults, Fault{Pointer: at + "/pointer", Keyword: "bias", Detail: "the number drifts already by /biases/" + strconv.Itoa(before), Received: b.Pointer})
		case b.Drift == 0:
			faults = append(faults, Fault{Pointer: at + "/drift_ratio", Keyword: "bias", Detail: "a drift of zero is none", Received: "0", Unit: "1"})
		case !inside(*place.Value*(1+b.Drift), &place):
			faults = append(faults, Fault{Pointer: at + "/drift_ratio", Keyword: "bias", Detail: "the number would drift out of its physical range", Limit: fmt.Sprintf("a value from %g to %g", place.Least, place.Greatest), Received: figure(b.Drift), Unit: "1"})
		default:
			seen[id] = i
			r.Drifts = append(r.Drifts, corners.Drift(at, id, b.Drift))
		}
	}
	return faults
}

func inside(v float64, f *stage.Field) bool { return v >= f.Least && v <= f.Greatest }
