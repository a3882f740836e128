package wire

import (
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/sizing"
	"railproof/service"
)

// SizingAnswer is what sizing says about a requirement.
type SizingAnswer struct {
	Head
	Status       string           `json:"status"`
	Requirement  *Requirement     `json:"requirement"`
	Conflicts    []SizingConflict `json:"conflicts"`
	Frequency    *float64         `json:"switching_frequency_hz,omitzero"`
	Windows      []Window         `json:"windows"`
	Ratings      []RequiredRating `json:"ratings"`
	Divider      *Divider         `json:"divider,omitzero"`
	Checks       []SizingCheck    `json:"checks,omitzero"`
	ChecksStatus string           `json:"checks_status,omitzero"`
	Sweep        []SweepRow       `json:"sweep,omitzero"`
	Stage        *Stage           `json:"stage,omitzero"`
	Point        *Point           `json:"point,omitzero"`
	Conditions   *Conditions      `json:"conditions,omitzero"`
	Limits       []Limit          `json:"limits,omitzero"`
	Basis
	Explanation []Equation `json:"explanation,omitzero"`
}

// Verdict is the status of the answer, or that a check of the draft fails or was
// not evaluated.
func (a *SizingAnswer) Verdict() string {
	verdict := a.Status
	for i := range a.Checks {
		switch {
		case a.Checks[i].Worst == nil:
			return "not-evaluated"
		case !a.Checks[i].Met:
			verdict = "limit-fails"
		}
	}
	return verdict
}

// SizingConflict says why no stage can meet the requirement.
type SizingConflict struct {
	Fields     []string `json:"fields"`
	Constraint string   `json:"constraint"`
	Needed     float64  `json:"needed"`
	Available  float64  `json:"available"`
	Unit       string   `json:"unit"`
	Detail     string   `json:"detail"`
}

// Window holds the values that satisfy every constraint.
type Window struct {
	Name          string   `json:"name"`
	Unit          string   `json:"unit"`
	Least         *float64 `json:"least,omitzero"`
	Greatest      *float64 `json:"greatest,omitzero"`
	SetByLeast    string   `json:"set_by_least,omitzero"`
	SetByGreatest string   `json:"set_by_greatest,omitzero"`
	Chosen        *float64 `json:"chosen,omitzero"`
	Preferred     *float64 `json:"preferred,omitzero"`
	Count         *Integer `json:"count,omitzero"`
	Series        string   `json:"series,omitzero"`
	Bounds        []Bound  `json:"bounds"`
}

// Bound is one constraint on a value.
type Bound struct {
	Side       string         `json:"side"`
	Constraint string         `json:"constraint"`
	Value      float64        `json:"value"`
	Part       *float64       `json:"part_value,omitzero"`
	Left       *float64       `json:"left_ratio,omitzero"`
	Ideal      *float64       `json:"ideal_value,omitzero"`
	Unit       string         `json:"unit"`
	Corner     Corner         `json:"corner"`
	Pointer    string         `json:"pointer,omitzero"`
	Formula    string         `json:"formula,omitzero"`
	Inputs     []FormulaInput `json:"inputs,omitzero"`
	Source     string         `json:"source,omitzero"`
	Binding    bool           `json:"binding"`
}

// FormulaInput is one symbol of a formula.
type FormulaInput struct {
	Symbol string  `json:"symbol"`
	Value  float64 `json:"value"`
	Unit   string  `json:"unit"`
}

// Corner is a condition that decides; only what matters is given.
type Corner struct {
	Input      *float64 `json:"input_v,omitzero"`
	Output     *float64 `json:"output_v,omitzero"`
	Load       *float64 `json:"load_current_a,omitzero"`
	Resistance *float64 `json:"load_resistance_ohm,omitzero"`
	Ambient    *float64 `json:"ambient_degc,omitzero"`
	Age        *float64 `json:"age_ratio,omitzero"`
	Frequency  *float64 `json:"switching_frequency_hz,omitzero"`
	Duty       *float64 `json:"duty_ratio,omitzero"`
	Hot        *bool    `json:"hot,omitzero"`
}

// RequiredRating is a stress that a part must carry.
type RequiredRating struct {
	Part     string         `json:"part"`
	Stress   string         `json:"stress"`
	Rating   string         `json:"rating,omitzero"`
	Applied  float64        `json:"applied"`
	Required float64        `json:"required"`
	Unit     string         `json:"unit"`
	Corner   Corner         `json:"corner"`
	Formula  string         `json:"formula,omitzero"`
	Inputs   []FormulaInput `json:"inputs,omitzero"`
	Source   string         `json:"source,omitzero"`
}

// Divider is the feedback divider.
type Divider struct {
	Reference  float64  `json:"reference_v"`
	Upper      float64  `json:"upper_ohm"`
	Lower      float64  `json:"lower_ohm"`
	Output     float64  `json:"output_v"`
	Error      float64  `json:"error_ratio"`
	WorstError *float64 `json:"worst_error_ratio,omitzero"`
	Series     string   `json:"series"`
}

// SizingCheck is a limit of the draft stage, checked on the exact engine.
type SizingCheck struct {
	Quantity string   `json:"quantity"`
	Unit     string   `json:"unit"`
	Min      *float64 `json:"min,omitzero"`
	Max      *float64 `json:"max,omitzero"`
	Worst    *float64 `json:"worst,omitzero"`
	Corner   *Point   `json:"corner,omitzero"`
	FullLoad *bool    `json:"full_load,omitzero"`
	Pointer  string   `json:"pointer,omitzero"`
	Met      bool     `json:"met"`
}

// SweepRow is one frequency of a sweep.
type SweepRow struct {
	Frequency         float64  `json:"switching_frequency_hz"`
	Status            string   `json:"status"`
	Inductance        *float64 `json:"inductance_h,omitzero"`
	OutputCapacitance *float64 `json:"output_capacitance_f,omitzero"`
	InputCapacitance  *float64 `json:"input_capacitance_f,omitzero"`
	InductorRipple    *float64 `json:"inductor_ripple_pp_a,omitzero"`
	OutputRipple      *float64 `json:"output_ripple_pp_v,omitzero"`
	OnTime            *float64 `json:"on_time_s,omitzero"`
	OnTimeMargin      *float64 `json:"on_time_margin_ratio,omitzero"`
	Loss              *float64 `json:"loss_total_w,omitzero"`
	Efficiency        *float64 `json:"efficiency_ratio,omitzero"`
	Chosen            bool     `json:"chosen"`
}

// EncodeSizing shows the answer.
func EncodeSizing(w *SizingRequest, r *service.SizingRequest, a *service.SizingAnswer, head Head) *SizingAnswer {
	out := &SizingAnswer{Head: head, Status: a.Status.String(), Requirement: w.Requirement, Conflicts: []SizingConflict{}, Windows: []Window{}, Ratings: []RequiredRating{}, Frequency: bounded(&a.Frequency), Basis: encodeBasis(&a.Basis)}
	for i := range a.Conflicts {
		out.Conflicts = append(out.Conflicts, encodeConflict(&a.Conflicts[i], r.At))
	}
	for i := range a.Windows {
		out.Windows = append(out.Windows, encodeWindow(&a.Windows[i], r.At))
	}
	for i := range a.Ratings {
		out.Ratings = append(out.Ratings, encodeRating(&a.Ratings[i]))
	}
	if len(a.Sweep) > 1 {
		for i := range a.Sweep {
			out.Sweep = append(out.Sweep, encodeRow(&a.Sweep[i]))
		}
	}
	if a.Stage != nil {
		out.draft(a, r.At)
	}
	return out
}

// draft adds what can be posted on to the other operations.
func (a *SizingAnswer) draft(from *service.SizingAnswer, at string) {
	a.Stage = EncodeStage(from.Stage, from.Spreads)
	a.Point, a.Conditions = EncodePoint(&from.Point), EncodeConditions(&from.Conditions)
	d := &from.Divider
	a.Divider = &Divider{Reference: d.Reference, Upper: d.Upper, Lower: d.Lower, Output: d.Output, Error: d.Error, WorstError: bounded(&d.WorstError), Series: d.Series.String()}
	for i := range from.Limits {
		l := &from.Limits[i]
		a.Limits = append(a.Limits, Limit{Quantity: l.Quantity.Key(), Min: bounded(&l.Least), Max: bounded(&l.Most), FullLoad: mark(l.FullLoad)})
	}
	for i := range from.Checks {
		a.Checks = append(a.Checks, encodeCheck(&from.Checks[i], at))
	}
	if from.Worst != evaluate.NotRun {
		a.ChecksStatus = from.Worst.String()
	}
}

func encodeConflict(c *sizing.Conflict, at string) SizingConflict {
	w := SizingConflict{Constraint: c.Constraint, Needed: within(c.Needed), Available: within(c.Available), Unit: c.Unit, Detail: c.Detail}
	for _, f := range c.Fields {
		w.Fields = append(w.Fields, at+"/"+f)
	}
	return w
}

var sides = map[sizing.Side]string{sizing.AtLeast: "least", sizing.AtMost: "greatest"}

func encodeWindow(s *sizing.Window, at string) Window {
	w := Window{Name: s.Name, Unit: s.Unit, Chosen: bounded(&s.Chosen), Preferred: bounded(&s.Preferred), Bounds: []Bound{}}
	if s.Count > 0 {
		w.Count = whole(s.Count)
	}
	if s.Series != 0 {
		w.Series = s.Series.String()
	}
	least, most := s.Least(), s.Most()
	if least != nil {
		w.Least, w.SetByLeast = bounded(&least.Value), least.Constraint
	}
	if most != nil {
		w.Greatest, w.SetByGreatest = bounded(&most.Value), most.Constraint
	}
	for i := range s.Bounds {
		b := &s.Bounds[i]
		shown := Bound{
			Side: sides[b.Side], Constraint: b.Constraint, Value: within(b.Value), Part: bounded(&b.Part), Left: bounded(&b.Factor), Ideal: bounded(&b.Ideal), Unit: s.Unit,
			Corner: encodeCorner(&b.Corner), Formula: b.Formula, Inputs: encodeInputs(b.Inputs), Source: b.Source, Binding: b == least || b == most,
		}
		if b.Field != "" {
			shown.Pointer = at + "/" + b.Field
		}
		w.Bounds = append(w.Bounds, shown)
	}
	return w
}

func encodeInputs(list []sizing.Input) []FormulaInput {
	w := make([]FormulaInput, len(list))
	for i := range list {
		w[i] = FormulaInput{list[i].Symbol, within(list[i].Value), list[i].Unit}
	}
	return w
}

func encodeCorner(c *sizing.Corner) Corner {
	return Corner{Input: bounded(&c.Input), Output: bounded(&c.Output), Load: bounded(&c.Load), Frequency: bounded(&c.Frequency), Duty: bounded(&c.Duty), Hot: mark(c.Hot)}
}

func encodeRating(r *sizing.Rating) RequiredRating {
	return RequiredRating{
		Part: r.Part, Stress: r.Name, Rating: r.Field, Applied: within(r.Applied), Required: within(r.Required), Unit: r.Unit,
		Corner: encodeCorner(&r.Corner), Formula: r.Formula, Inputs: encodeInputs(r.Inputs), Source: r.Source,
	}
}

func encodeCheck(c *sizing.Check, at string) SizingCheck {
	info, _ := quantity.Of(c.Quantity)
	w := SizingCheck{Quantity: c.Quantity.Key(), Unit: info.Unit, Min: bounded(&c.Least), Max: bounded(&c.Most), Worst: bounded(&c.Worst), FullLoad: mark(c.FullLoad), Met: c.Met}
	if c.Corner.Input > 0 {
		w.Corner = EncodePoint(&c.Corner)
	}
	if c.Target != "" {
		w.Pointer = at + "/" + c.Target
	}
	return w
}

func encodeRow(r *sizing.Row) SweepRow {
	return SweepRow{
		Frequency: r.Frequency, Status: r.Status.String(), Inductance: bounded(&r.Inductance), OutputCapacitance: bounded(&r.OutputCapacitance), InputCapacitance: bounded(&r.InputCapacitance),
		InductorRipple: bounded(&r.InductorRipple), OutputRipple: bounded(&r.OutputRipple), OnTime: bounded(&r.OnTime), OnTimeMargin: bounded(&r.OnTimeMargin),
		Loss: bounded(&r.Loss), Efficiency: bounded(&r.Efficiency), Chosen: r.Chosen,
	}
}

// unbounded is the magnitude from which a number stands for no bound at all: JSON
// has no infinity, and no value of a design comes near it.
const unbounded = 1e30

// bounded returns the number's place, or nil for one that is unknown or no bound.
func bounded(v *float64) *float64 {
	if !(math.Abs(*v) < unbounded) {
		return nil
	}
	return v
}

// within returns the number, cut to what the contract can say.
func within(v float64) float64 { return min(max(v, -unbounded), unbounded) }
