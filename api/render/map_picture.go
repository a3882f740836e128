package render

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"railproof/api/wire"
)

// QuantityMap draws a quantity of a grid over two of its axes: load and, where the
// grid has several, input voltage, else ambient temperature; nil where the grid
// does not have it. The third axis is held at its greatest value.
func QuantityMap(a *wire.LossesAnswer, key string) *Picture {
	v := newGridView(a, key)
	if v == nil {
		return nil
	}
	g := a.Grid
	m := &tiles{x: axisCells("load", "A", g.Load)}
	var held string
	var at func(x, y int) float64
	if len(g.Input) > 1 || len(g.Ambient) == 1 {
		k := hottest(g.Ambient)
		m.y = axisCells("input", "V", g.Input)
		at = func(x, y int) float64 { return v.at(y, x, k) }
		held = Figure3(g.Ambient[k], "Cel") + " ambient"
	} else {
		m.y = axisCells("ambient", "Cel", g.Ambient)
		at = func(x, y int) float64 { return v.at(0, x, y) }
		held = Figure3(g.Input[0], "V") + " in"
	}
	for _, y := range m.y.order {
		row := make([]float64, 0, len(g.Load))
		for _, x := range m.x.order {
			row = append(row, at(x, y))
		}
		m.cells = append(m.cells, row)
	}
	values := ranged(v.name, v.unit, m.cells...)
	m.bands = bandsOf(values)
	return &Picture{
		title:       railName(a.Stage) + ": " + v.name + " over " + m.x.name + " and " + m.y.name,
		subtitle:    held,
		description: fmt.Sprintf("Map of %d by %d cells. Least %s, greatest %s", len(m.x.at), len(m.y.at), v.say(values.least), v.say(values.greatest)),
		blocks:      []block{m},
		note:        v.failures(),
	}
}

func hottest(list []float64) int {
	order := rising(list)
	return order[len(order)-1]
}

// cellAxis places cells along an axis: each reaches half-way to its neighbours.
type cellAxis struct {
	scale
	order []int     // of the grid's indices
	at    []float64 // rising
}

func axisCells(name, unit string, list []float64) cellAxis {
	c := cellAxis{order: rising(list)}
	for _, i := range c.order {
		c.at = append(c.at, list[i])
	}
	c.scale = ranged(name, unit, c.at).logarithmic(30)
	edges := c.edges()
	c.least, c.greatest = edges[0], edges[len(edges)-1]
	c.scale = c.opened()
	return c
}

// edges returns one more value than there are cells.
func (c *cellAxis) edges() []float64 {
	n := len(c.at)
	if n == 1 {
		s := c.opened()
		return []float64{s.least, s.greatest}
	}
	to, from := func(v float64) float64 { return v }, func(v float64) float64 { return v }
	if c.log {
		to, from = math.Log, math.Exp
	}
	edges := make([]float64, n+1)
	for i := 1; i < n; i++ {
		edges[i] = from((to(c.at[i-1]) + to(c.at[i])) / 2)
	}
	edges[0] = from(to(c.at[0]) - (to(edges[1]) - to(c.at[0])))
	edges[n] = from(to(c.at[n-1]) + (to(c.at[n-1]) - to(edges[n-1])))
	return edges
}

// bands are the classes of values that a map tells apart.
type bands struct {
	edges []float64 // one more than there are classes
	name  string
	unit  string
}

const classesWanted = 9

// bandsOf divides a range into classes with round ends.
func bandsOf(s scale) bands {
	s = s.opened()
	step := nice((s.greatest - s.least) / classesWanted)
	b := bands{name: s.name, unit: s.unit}
	from, to := math.Floor(s.least/step+1e-9), math.Ceil(s.greatest/step-1e-9)
	for i := from; i <= to; i++ {
		b.edges = append(b.edges, i*step)
	}
	if len(b.edges) < 2 {
		b.edges = append(b.edges, (to+1)*step)
	}
	return b
}

func (b *bands) count() int { return len(b.edges) - 1 }

// of returns the class of a value.
func (b *bands) of(v float64) int {
	i, exact := slices.BinarySearch(b.edges, v)
	if !exact {
		i--
	}
	return min(max(i, 0), b.count()-1)
}

// tiles draws a map: a field of cells and the key of their classes.
type tiles struct {
	x, y  cellAxis
	cells [][]float64 // by y, then x; NaN: no figure
	bands bands
}

const mapTall = 320 // [px]

var (
	keyWidth = px(118)
	mapHead  = legendStep + px(7)
)

func (m *tiles) height(vg.Length) vg.Length {
	return px(mapTall) + mapHead + tickLength + 2*lineStep(smallInk)
}

func (m *tiles) draw(c draw.Canvas) {
	frame := panel{x: m.x.scale, y: m.y.scale, tall: px(mapTall)}
	frame.gutter = frame.gutterWidth()
	write(c, headInk, c.Min.X, c.Max.Y-legendStep/2, draw.XLeft, m.y.titled())
	field := vg.Rectangle{
		Min: vg.Point{X: c.Min.X + frame.gutter, Y: c.Max.Y - mapHead - frame.tall},
		Max: vg.Point{X: c.Max.X - keyWidth, Y: c.Max.Y - mapHead},
	}
	f := draw.Canvas{Canvas: c.Canvas, Rectangle: field}
	x, y := m.x.along(field.Min.X, field.Max.X), m.y.along(field.Min.Y, field.Max.Y)
	frame.grid(f, x, y)
	m.paint(f, x, y)
	m.key(draw.Canvas{Canvas: c.Canvas, Rectangle: vg.Rectangle{Min: vg.Point{X: field.Max.X + px(14), Y: field.Min.Y}, Max: vg.Point{X: c.Max.X, Y: c.Max.Y}}})
}

// paint fills neighbouring cells of one class as one.
func (m *tiles) paint(f draw.Canvas, x, y func(float64) vg.Length) {
	xs, ys := m.x.edges(), m.y.edges()
	for j, row := range m.cells {
		for i := 0; i < len(row); {
			k := i + 1
			if math.IsNaN(row[i]) {
				for k < len(row) && math.IsNaN(row[k]) {
					k++
				}
				hatch(f, vg.Rectangle{Min: vg.Point{X: x(xs[i]), Y: y(ys[j])}, Max: vg.Point{X: x(xs[k]), Y: y(ys[j+1])}})
			} else {
				class := m.bands.of(row[i])
				for k < len(row) && !math.IsNaN(row[k]) && m.bands.of(row[k]) == class {
					k++
				}
				fill(f, rampTone(class, m.bands.count()), vg.Rectangle{Min: vg.Point{X: x(xs[i]), Y: y(ys[j])}, Max: vg.Point{X: x(xs[k]), Y: y(ys[j+1])}})
			}
			i = k
		}
	}
	if len(m.x.at)*len(m.y.at) <= 120 {
		m.figures(f, x, y)
	}
}

// figures writes the value into each cell that has room.
func (m *tiles) figures(f draw.Canvas, x, y func(float64) vg.Length) {
	xs, ys := m.x.edges(), m.y.edges()
	for j, row := range m.cells {
		for i, v := range row {
			if math.IsNaN(v) {
				continue
			}
			text, _, _ := strings.Cut(Figure3(v, m.bands.unit), " ")
			if x(xs[i+1])-x(xs[i]) < smallInk.Width(text)+px(6) || y(ys[j+1])-y(ys[j]) < lineStep(smallInk) {
				continue
			}
			ink := smallInk
			ink.Color = paper
			if light(rampTone(m.bands.of(v), m.bands.count())) {
				ink.Color = inkColor
			}
			write(f, ink, (x(xs[i])+x(xs[i+1]))/2, (y(ys[j])+y(ys[j+1]))/2, draw.XCenter, text)
		}
	}
}

// key shows the classes with their ends.
func (m *tiles) key(c draw.Canvas) {
	n := m.bands.count()
	s := scale{name: m.bands.name, unit: m.bands.unit, least: m.bands.edges[0], greatest: m.bands.edges[n]}
	lines := wrap(smallInk, s.titled(), c.Max.X-c.Min.X, 3)
	y := writeLines(c, smallInk, lines, c.Max.Y) - px(10)
	step := min((y-c.Min.Y-px(8))/vg.Length(n), px(26))
	for i := range n {
		top := y - vg.Length(n-1-i)*step
		fill(c, rampTone(i, n), vg.Rectangle{Min: vg.Point{X: c.Min.X, Y: top - step}, Max: vg.Point{X: c.Min.X + px(20), Y: top}})
	}
	decimals := max(0, -int(math.Floor(math.Log10(m.bands.edges[1]-m.bands.edges[0])+1e-9)))
	factor, _ := s.prefix()
	for i, v := range m.bands.edges {
		at := y - vg.Length(n-i)*step
		if step < lineStep(smallInk) && i%2 == 1 {
			continue
		}
		write(c, smallInk, c.Min.X+px(26), at, draw.XLeft, strconv.FormatFloat(v*factor, 'f', decimals, 64))
	}
}
