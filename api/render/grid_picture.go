package render

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"railproof/api/wire"
)

// EfficiencyCurves draws efficiency against load, a curve for each input voltage,
// at the hottest ambient of the grid; nil without efficiencies.
func EfficiencyCurves(a *wire.LossesAnswer) *Picture {
	return QuantityCurves(a, "efficiency_ratio")
}

// QuantityCurves is the same for any quantity of the grid.
func QuantityCurves(a *wire.LossesAnswer, key string) *Picture {
	v := newGridView(a, key)
	if v == nil {
		return nil
	}
	ambient := len(a.Grid.Ambient) - 1
	var curves []curve
	all := make([][]float64, 0, len(a.Grid.Input))
	order := rising(a.Grid.Load)
	loads := make([]float64, len(order))
	for k, j := range order {
		loads[k] = a.Grid.Load[j]
	}
	inputs := chosenInputs(a.Grid.Input)
	for n, i := range inputs {
		ys := make([]float64, len(order))
		for k, j := range order {
			ys[k] = v.at(i, j, ambient)
		}
		all = append(all, ys)
		curves = append(curves, curve{name: Figure3(a.Grid.Input[i], "V") + " in", x: loads, y: ys, style: trace(n), dots: len(loads) <= 12})
	}
	values := ranged(v.name, v.unit, all...)
	p := &panel{x: ranged("load", "A", loads).logarithmic(30), y: values.padded(0.06), tall: px(300), curves: curves}
	if p.x.log {
		p.x = p.x.opened()
	} else {
		p.x = p.x.padded(0.02)
	}
	if v.unit == "%" {
		p.y.greatest = min(p.y.greatest, 100)
	}
	return &Picture{
		title:       railName(a.Stage) + ": " + v.name + " against load",
		subtitle:    Figure3(a.Grid.Ambient[ambient], "Cel") + " ambient",
		description: fmt.Sprintf("Curves for %d input voltages. Least %s, greatest %s", len(curves), v.say(values.least), v.say(values.greatest)),
		blocks:      alignPanels(p),
		note:        v.failures(),
	}
}

// mostCurves is how many curves one field holds before they cannot be told apart.
const mostCurves = 6

// chosenInputs returns the indices of the axis, or of so many that are spread over
// it, ends included.
func chosenInputs(axis []float64) []int {
	order := rising(axis)
	if len(order) <= mostCurves {
		return order
	}
	chosen := make([]int, mostCurves)
	for k := range chosen {
		chosen[k] = order[k*(len(order)-1)/(mostCurves-1)]
	}
	return chosen
}

// rising returns the indices of a list in rising order of its values.
func rising(list []float64) []int {
	order := make([]int, len(list))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch {
		case list[i] < list[j]:
			return -1
		case list[i] > list[j]:
			return 1
		}
		return 0
	})
	return order
}

// gridView is one quantity of a grid by its three axes; NaN where a cell has no
// figures.
type gridView struct {
	grid       *wire.LossesGrid
	name, unit string
	factor     float64
	cells      []float64
}

func newGridView(a *wire.LossesAnswer, key string) *gridView {
	g := a.Grid
	if g == nil {
		return nil
	}
	columns := g.Rows.Quantities.List()
	i := slices.IndexFunc(columns, func(c wire.Column) bool { return c.Key == key })
	if i < 0 {
		return nil
	}
	name, unit, factor := quantityForPeople(key)
	v := &gridView{grid: g, name: name, unit: unit, factor: factor, cells: make([]float64, len(g.Input)*len(g.Load)*len(g.Ambient))}
	for k := range v.cells {
		v.cells[k] = math.NaN()
	}
	for row, cell := range g.Rows.Cell {
		v.cells[cell] = factor * columns[i].Values[row]
	}
	return v
}

func (v *gridView) at(input, load, ambient int) float64 {
	return v.cells[(input*len(v.grid.Load)+load)*len(v.grid.Ambient)+ambient]
}

func (v *gridView) say(x float64) string { return Figure3(x, v.unit) }

func (v *gridView) failures() string {
	if n := len(v.grid.Failures); n > 0 {
		return strconv.Itoa(n) + " of " + strconv.Itoa(len(v.cells)) + " cells have no figures: the stage does not work there."
	}
	return ""
}
