package wire

import (
	"strconv"

	"railproof/calc/losses"
	"railproof/calc/quantity"
	"railproof/service"
)

// LossesRequest asks for losses at one point, at a list, or over a grid: exactly
// one of them is given.
type LossesRequest struct {
	Stage      *Stage       `json:"stage"`
	Point      *Point       `json:"point,omitzero"`
	Points     []*Point     `json:"points,omitzero"`
	Grid       *GridRequest `json:"grid,omitzero"`
	Quantities []string     `json:"quantities,omitzero"`
}

// LossesAnswer holds items for a point or a list, a grid for a grid.
type LossesAnswer struct {
	Head
	Status string       `json:"status"`
	Stage  *Stage       `json:"stage"`
	Items  []LossesItem `json:"items,omitzero"`
	Grid   *LossesGrid  `json:"grid,omitzero"`
	Basis
	Explanation []Equation `json:"explanation,omitzero"`

	explain func() []service.Equation // nil where there is nothing to explain
}

// LossesItem is the answer at one operating point.
type LossesItem struct {
	Status           string            `json:"status"`
	Point            *Point            `json:"point"`
	ConductionMode   string            `json:"conduction_mode,omitzero"`
	Quantities       *Quantities       `json:"quantities,omitzero"`
	PartTemperatures []PartTemperature `json:"part_temperatures"`
	NearestOperable  *NearestOperable  `json:"nearest_operable,omitzero"`
	Runaway          *Runaway          `json:"runaway,omitzero"`
	Detail           string            `json:"detail,omitzero"`
	Losses           []LossItem        `json:"losses"`
}

// LossItem is one mechanism's loss in one part.
type LossItem struct {
	Part      string  `json:"part"`
	Mechanism string  `json:"mechanism"`
	Power     float64 `json:"power_w"`
	Count     int     `json:"count"`
	Low       float64 `json:"low_w"`
	High      float64 `json:"high_w"`
}

// form checks that exactly one of point, points and grid is given.
func (w *LossesRequest) form() error {
	n := 0
	for _, given := range []bool{w.Point != nil, w.Points != nil, w.Grid != nil} {
		if given {
			n++
		}
	}
	if n == 1 && (w.Grid != nil || w.Quantities == nil) {
		return nil
	}
	if n == 1 {
		return &InvalidError{[]Fault{{Pointer: "/quantities", Keyword: "form", Detail: "quantities chooses the columns of a grid, and no grid is given"}}}
	}
	return &InvalidError{[]Fault{{Pointer: "", Keyword: "form", Detail: "exactly one of point, points and grid is given", Limit: "1", Received: strconv.Itoa(n)}}}
}

// Decode turns a request for a point or a list into the use case's; for a grid
// the first result is nil and the second is set.
func (w *LossesRequest) Decode() (*service.LossesRequest, *service.GridRequest, error) {
	if err := w.form(); err != nil {
		return nil, nil, err
	}
	d, err := w.Stage.design()
	if err != nil {
		return nil, nil, err
	}
	if w.Grid != nil {
		g, err := w.Grid.decode(d, w.Quantities)
		return nil, g, err
	}
	r := &service.LossesRequest{Design: *d}
	var faults []Fault
	for i, p := range w.list() {
		at := "/point"
		if w.Points != nil {
			at = "/points/" + strconv.Itoa(i)
		}
		point, err := p.Decode(at, d.Stage)
		faults = append(faults, faultsOf(err)...)
		r.Places = append(r.Places, service.Place{At: at, Point: point})
	}
	if len(faults) > 0 {
		return nil, nil, &InvalidError{faults}
	}
	return r, nil, nil
}

func (w *LossesRequest) list() []*Point {
	if w.Points != nil {
		return w.Points
	}
	return []*Point{w.Point}
}

// EncodeLosses shows the answer to a point or a list.
func EncodeLosses(w *LossesRequest, r *service.LossesRequest, a *service.LossesAnswer, head Head) *LossesAnswer {
	out := &LossesAnswer{Head: head, Status: a.Status.String(), Stage: w.Stage, Basis: encodeBasis(&a.Basis), explain: explainFirst(r, a)}
	banks := banksOf(r.Design.Stage)
	for i, p := range w.list() {
		o := a.Outcomes[i]
		out.Items = append(out.Items, LossesItem{
			Status: o.Status.String(), Point: p, ConductionMode: modeNames[o.Conduction()],
			Quantities:       encodeQuantities(&o.Quantities, banks, everything),
			PartTemperatures: encodeTemperatures(r.Design.Stage, o),
			NearestOperable:  encodeNearest(o.Nearest), Runaway: encodeOnset(o.Onset), Detail: o.Detail,
			Losses: encodeSheet(&o.Losses),
		})
	}
	return out
}

func everything(quantity.Info) bool { return true }

func encodeSheet(s *losses.Sheet) []LossItem {
	items := make([]LossItem, s.N)
	for i := range items {
		l := &s.Items[i]
		items[i] = LossItem{l.Part.String(), l.Mechanism.String(), l.Power, l.Count, l.Power * l.BandLow, l.Power * l.BandHigh}
	}
	return items
}
