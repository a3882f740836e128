package wire

import (
	"strconv"
	"strings"

	"railproof/service"
)

// Equation is one figure, how it follows, and where the formula stands.
type Equation struct {
	Quantity string  `json:"quantity"`
	Formula  string  `json:"formula"`
	Inserted string  `json:"inserted"`
	Value    float64 `json:"value"`
	Unit     string  `json:"unit"`
	Source   string  `json:"source"`
	Pointer  string  `json:"pointer,omitzero"`
}

// An Explainer is an answer that can tell how its figures follow.
type Explainer interface{ Explain() }

// Explain adds how the figures of the first point follow.
func (a *LossesAnswer) Explain() {
	if a.explain == nil {
		return
	}
	for _, e := range a.explain() {
		inputs := make([]FormulaInput, len(e.Inputs))
		for i, x := range e.Inputs {
			inputs[i] = FormulaInput(x)
		}
		a.Explanation = append(a.Explanation, Equation{Quantity: e.Quantity, Formula: e.Formula, Inserted: inserted(inputs), Value: e.Value, Unit: e.Unit, Source: e.Source})
	}
}

// Explain adds how the bounds of every window, the ratings and the divider's figures
// follow.
func (a *SizingAnswer) Explain() {
	for i := range a.Windows {
		w := &a.Windows[i]
		for j := range w.Bounds {
			b := &w.Bounds[j]
			if b.Formula != "" {
				a.Explanation = append(a.Explanation, Equation{Quantity: w.Name + "/" + b.Side + "/" + b.Constraint, Formula: b.Formula, Inserted: inserted(b.Inputs), Value: b.Value, Unit: b.Unit, Source: b.Source, Pointer: b.Pointer})
			}
		}
	}
	for i := range a.Ratings {
		r := &a.Ratings[i]
		if r.Formula != "" {
			a.Explanation = append(a.Explanation, Equation{Quantity: r.Part + "/" + r.Stress, Formula: r.Formula, Inserted: inserted(r.Inputs), Value: r.Applied, Unit: r.Unit, Source: r.Source})
		}
	}
	a.explainDivider()
}

func (a *SizingAnswer) explainDivider() {
	d := a.Divider
	if d == nil {
		return
	}
	const source = "no current into the error amplifier"
	inputs := []FormulaInput{{"Vref", d.Reference, "V"}, {"Rupper", d.Upper, "Ohm"}, {"Rlower", d.Lower, "Ohm"}}
	a.Explanation = append(a.Explanation,
		Equation{Quantity: "divider/output_v", Formula: "Vo = Vref (1 + Rupper/Rlower)", Inserted: inserted(inputs), Value: d.Output, Unit: "V", Source: source},
		Equation{
			Quantity: "divider/error_ratio", Formula: "δ = Vo/Vset − 1", Value: d.Error, Unit: "1", Source: source,
			Inserted: inserted([]FormulaInput{{"Vo", d.Output, "V"}, {"Vset", a.Requirement.Output.Voltage, "V"}}),
		})
}

// inserted writes the symbols of a formula with their numbers.
func inserted(inputs []FormulaInput) string {
	words := make([]string, len(inputs))
	for i, x := range inputs {
		words[i] = strings.TrimSuffix(x.Symbol+" = "+strconv.FormatFloat(x.Value, 'g', -1, 64)+" "+x.Unit, " 1")
	}
	return strings.Join(words, ", ")
}

// explainFirst explains the first point that has figures.
func explainFirst(r *service.LossesRequest, a *service.LossesAnswer) func() []service.Equation {
	for i, o := range a.Outcomes {
		if o.Status.Figures() {
			return func() []service.Equation { return service.ExplainLosses(r.Design.Stage, &r.Places[i].Point, o) }
		}
	}
	return nil
}
