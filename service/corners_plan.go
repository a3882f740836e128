package service

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"railproof/calc/corners"
	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/calc/stage"
)

// Budgets of one analysis. They are looked at before it starts.
const (
	MostEvaluations = 100_000_000     // [1] of all methods together
	MostDraws       = 100_000_000_000 // [1] samples × variables × quantities
	MostVariables   = 250             // [1] spreads, drifts and model bands
	MostCorners     = 64              // [1] condition corners
	MostLines       = 128             // [1] limits and quantities, a line per capacitor bank
	MostWorst       = 6400            // [1] worst samples told in all
)

// CornersPlan is an analysis that can be run.
type CornersPlan struct {
	*CornersRequest
	Bound *corners.Design
	Items []CornersItem

	limits    []corners.Limit // those at the worst, for the yield
	given     [][]float64     // condition corners of the request
	fullLoad  *CornersPlan    // of the limits that hold at full load; nil: there are none
	search    bool
	expected  corners.Cost
	perCorner int // evaluations of the attribution
}

// CornersItem is one line of the answer: a quantity with or without a limit.
type CornersItem struct {
	Quantity        quantity.ID
	Limit           *CornersLimit // nil: none
	Index           int           // in the model's results
	Least, Greatest int           // targets; -1: that side is not sought
	YieldLimit      int           // in the run's limits; -1: none

	Verdict CornersVerdict
	Margin  float64 // [1] NaN: none
	Band    float64 // [any] how far the model bands could move the worst value for the worse; NaN: not computed
}

// Targets returns the sides that are sought.
func (i *CornersItem) Targets() []int {
	var t []int
	for _, k := range []int{i.Least, i.Greatest} {
		if k >= 0 {
			t = append(t, k)
		}
	}
	return t
}

// Plan binds the request and checks what it would cost.
func (r *CornersRequest) Plan() (*CornersPlan, []Refusal) {
	rest, full := r.split()
	p, refused := rest.plan()
	if full != nil && refused == nil {
		p.fullLoad, refused = full.plan()
	}
	return p, refused
}

// split takes the limits that hold at full load into an analysis of their own,
// with the load held at its greatest and by extreme value: the units that are
// drawn meet the conditions of the others. Where the load has no width, full load
// is everywhere.
func (r *CornersRequest) split() (rest, full *CornersRequest) {
	current, conductance := r.Conditions.LoadCurrent, r.Conditions.LoadConductance
	atFullLoad := func(l CornersLimit) bool { return l.Where == rules.AtFullLoad }
	if current.Max == current.Min && conductance.Max == conductance.Min || !slices.ContainsFunc(r.Limits, atFullLoad) {
		return r, nil
	}
	rest, full = new(*r), new(*r)
	rest.Limits = slices.DeleteFunc(slices.Clone(r.Limits), atFullLoad)
	full.Limits = slices.DeleteFunc(slices.Clone(r.Limits), func(l CornersLimit) bool { return !atFullLoad(l) })
	full.Conditions.LoadCurrent, full.Conditions.LoadConductance = held(current.Max), held(conductance.Max)
	full.Methods = CornersMethods{ExtremeValue: true, RootSumSquare: r.Methods.RootSumSquare}
	full.Further, full.At = nil, nil
	return rest, full
}

func (r *CornersRequest) plan() (*CornersPlan, []Refusal) {
	p := &CornersPlan{CornersRequest: r}
	options := corners.DesignOptions{Scales: r.scales(), Seed: r.Sampling.Seed}
	targets := p.layOut(&options)
	if n := len(r.Design.Variables) + len(options.Scales); n > MostVariables {
		return nil, []Refusal{tooMuch("/stage", "spreads, drifts and model bands are too many", MostVariables, n)}
	}
	if n := len(p.Items); n > MostLines {
		return nil, []Refusal{tooMuch("/limits", "limits and quantities are too many, each per-bank one counted once for every bank", MostLines, n)}
	}
	if n := p.worstTold(); n > MostWorst {
		return nil, []Refusal{tooMuch("/worst_samples", "the worst samples of all limited sides are too many to tell", MostWorst, n)}
	}
	options.Extend = loopExtension(options.Quantities)
	bound, err := corners.NewDesign(r.Design.Stage, r.Design.Variables, &r.Conditions, options)
	if err != nil {
		panic("service: spreads that were checked are refused: " + err.Error())
	}
	p.Bound = bound
	bound.Problem().Targets = targets
	for i := range r.At {
		p.given = append(p.given, bound.Corner(&r.At[i]))
	}
	p.search = r.Methods.ExtremeValue || len(p.given) == 0
	return p, p.budget()
}

// scales are the coordinates that are no tolerance of the document.
func (r *CornersRequest) scales() []corners.Scale {
	list := append([]corners.Scale(nil), r.Drifts...)
	if r.ModelBands {
		list = append(list, bandsOf(r.Design.Stage)...)
	}
	return list
}

// layOut lists the lines of the answer, the model's results and the targets: for a
// limit the sides that it bounds, without one both.
func (p *CornersPlan) layOut(o *corners.DesignOptions) []corners.Target {
	index := map[quantity.ID]int{}
	var targets []corners.Target
	sides := map[[2]int]int{}
	for i := range p.Limits {
		p.addItem(p.Limits[i].Quantity, &p.Limits[i])
	}
	for _, id := range p.Further {
		if !p.lists(id) {
			p.addItem(id, nil)
		}
	}
	for i := range p.Items {
		item := &p.Items[i]
		at, known := index[item.Quantity]
		if !known {
			at = len(o.Quantities)
			index[item.Quantity] = at
			o.Quantities = append(o.Quantities, item.Quantity)
		}
		item.Index = at
		seek := func(d corners.Direction) int {
			key := [2]int{at, int(d)}
			k, known := sides[key]
			if !known {
				k = len(targets)
				sides[key] = k
				targets = append(targets, corners.Target{Quantity: at, Direction: d})
			}
			return k
		}
		l := item.Limit
		if l == nil || !math.IsNaN(l.Min) {
			item.Least = seek(corners.Least)
		}
		if l == nil || !math.IsNaN(l.Max) {
			item.Greatest = seek(corners.Greatest)
		}
		if l != nil && l.Where != rules.AtNominal {
			item.YieldLimit = len(p.limits)
			p.limits = append(p.limits, corners.Limit{Quantity: at, Min: l.Min, Max: l.Max})
		}
	}
	return targets
}

// worstTold returns how many worst samples an answer tells at most.
func (p *CornersPlan) worstTold() int {
	n := 0
	for i := range p.Items {
		n += len(p.Items[i].Targets()) * p.Worst
	}
	return n
}

func (p *CornersPlan) addItem(id quantity.ID, l *CornersLimit) {
	p.Items = append(p.Items, CornersItem{Quantity: id, Limit: l, Least: -1, Greatest: -1, YieldLimit: -1, Margin: math.NaN(), Band: math.NaN()})
}

func (p *CornersPlan) lists(id quantity.ID) bool {
	for i := range p.Items {
		if p.Items[i].Quantity == id {
			return true
		}
	}
	return false
}

// budget returns what of the plan is too much. Condition corners are not known
// before the search; there are at most as many as targets.
func (p *CornersPlan) budget() []Refusal {
	problem := p.Bound.Problem()
	p.expected = corners.Budget(problem)
	at := len(p.given)
	if at == 0 {
		at = min(max(1, len(problem.Targets)), MostCorners)
	}
	var refused []Refusal
	evaluations := 0
	if p.search {
		evaluations += p.expected.Search
	}
	if p.Methods.MonteCarlo {
		samples := float64(p.Sampling.Samples)
		if draws := samples * float64(max(1, len(p.Design.Variables))) * float64(problem.Quantities); draws > MostDraws {
			refused = append(refused, tooMuch("/samples", "samples times variables times quantities are too many", MostDraws, draws))
		}
		run, err := p.monteCarlo(zeros(at, len(problem.Coordinates)), 1, nil)
		if err != nil {
			return append(refused, Refusal{Pointer: "/samples", Keyword: "budget", Detail: sentence(err), Limit: "what the sentence says", Received: strconv.Itoa(p.Sampling.Samples)})
		}
		evaluations += run.Evaluations()
	}
	if p.Methods.Attribution {
		a, err := p.attribution(make([]float64, len(problem.Coordinates)), 1)
		if err != nil {
			return append(refused, Refusal{Pointer: "/attribution_samples", Keyword: "budget", Detail: sentence(err), Limit: "a power of two from 64", Received: strconv.Itoa(p.Base)})
		}
		p.perCorner = a.Evaluations()
		evaluations += at * p.perCorner
	}
	if evaluations > MostEvaluations {
		refused = append(refused, tooMuch("/samples", "the analysis needs too many evaluations: ask for fewer samples, condition corners or methods", MostEvaluations, evaluations))
	}
	return refused
}

func zeros(n, length int) [][]float64 {
	list := make([][]float64, n)
	for i := range list {
		list[i] = make([]float64, length)
	}
	return list
}

// sentence drops the package's name from a message that is meant for people.
func sentence(err error) string {
	return strings.TrimPrefix(strings.ReplaceAll(err.Error(), "sampling: ", ""), "corners: ")
}

func tooMuch[N int | float64](pointer, detail string, most, found N) Refusal {
	write := func(n N) string { return strconv.FormatFloat(float64(n), 'f', -1, 64) }
	return Refusal{Pointer: pointer, Keyword: "budget", Detail: detail, Limit: "at most " + write(most), Received: write(found)}
}

// monteCarlo lays out the run at the given condition corners.
func (p *CornersPlan) monteCarlo(at [][]float64, workers int, span func(q int) (least, greatest float64)) (*corners.MonteCarlo, error) {
	return corners.NewMonteCarlo(p.Bound.Problem(), p.Bound.Spreads(), corners.Plan{
		Sampling: p.Sampling, First: p.First, Corners: at, Limits: p.limits, Worst: max(1, p.Worst), Workers: workers, Span: span,
	})
}

// attribution prepares the variance shares at one condition corner.
func (p *CornersPlan) attribution(at []float64, workers int) (*corners.Attribution, error) {
	return corners.NewAttribution(p.Bound.Problem(), p.Bound.Spreads(), corners.AttributionPlan{Base: p.Base, Seed: p.Sampling.Seed, Corner: at, Workers: workers})
}

// Asked returns a point of the plan with the output voltage that its error refers
// to, which a feedback at a corner no longer tells.
func (p *CornersPlan) Asked(point stage.Point) stage.Point {
	if point.Control.Kind == stage.ByFeedback {
		point.Asked = p.Design.Stage.Feedback.OutputVoltage()
	}
	return point
}
