package corners

import (
	"fmt"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Extension computes further quantities of an evaluated point into the result, such
// as those of the control loop. It belongs to one worker.
type Extension func(e *evaluate.Evaluator, p *stage.Point, r *evaluate.Result)

// Design binds a stage with its spreads and conditions to a Problem. Coordinates
// stand in this order: the spreads' own, age, scales, and the conditions that have a
// width: input voltage, load current, load conductance, ambient.
type Design struct {
	stage      *stage.Stage
	set        *spread.Set
	scales     []Scale
	conditions stage.Conditions
	quantities []quantity.ID
	extend     func() Extension
	ranges     []condition
	firstScale int // coordinate of the first scale
	problem    Problem
}

// condition is a range of the operating point with a coordinate of its own.
type condition struct {
	pointer    string
	at         spread.Variable
	set        func(p *stage.Point, v float64)
	get        func(p *stage.Point) float64
	coordinate int
}

// DesignOptions is what a Design may take beside stage, spreads and conditions.
type DesignOptions struct {
	Scales     []Scale
	Quantities []quantity.ID    // results of the Model, in order
	Extend     func() Extension // makes a worker's extension; nil: none
	Seed       uint64
}

// NewDesign binds a checked stage. The error is a *spread.InvalidError, or names a
// field that the stage does not have.
func NewDesign(s *stage.Stage, variables []spread.Variable, c *stage.Conditions, o DesignOptions) (*Design, error) {
	set, err := spread.New(variables)
	if err != nil {
		return nil, err
	}
	d := &Design{stage: s.Clone(), set: set, scales: o.Scales, conditions: *c, quantities: o.Quantities, extend: o.Extend}
	fields := stage.Lookup{Fields: d.stage.Fields()}
	for i := range variables {
		if fields.Find(variables[i].Field) < 0 {
			return nil, fmt.Errorf("corners: %s: the stage has no number %q", variables[i].Pointer, variables[i].Field)
		}
	}
	for i := range o.Scales {
		for _, field := range o.Scales[i].Fields {
			if fields.Find(field) < 0 {
				return nil, fmt.Errorf("corners: %s: the stage has no number %q", o.Scales[i].Pointer, field)
			}
		}
	}
	d.problem = Problem{Quantities: len(o.Quantities), Seed: o.Seed}
	d.addRandom()
	d.addBiases()
	d.addConditions()
	return d, nil
}

func (d *Design) add(c Coordinate) int {
	d.problem.Coordinates = append(d.problem.Coordinates, c)
	return len(d.problem.Coordinates) - 1
}

// addRandom takes over the spreads' coordinates; a side on which none of a
// coordinate's spreads has width is no side.
func (d *Design) addRandom() {
	variables := map[string]*spread.Variable{}
	for i := range d.set.Variables() {
		v := &d.set.Variables()[i]
		variables[v.Pointer] = v
	}
	for i, from := range d.set.Coordinates() {
		c := Coordinate{Moments: d.set.Moments(i)}
		for _, p := range from.Pointers {
			v := variables[p]
			if from.Residual || v.Min < v.Typ {
				c.Low = -1
			}
			if from.Residual || v.Max > v.Typ {
				c.High = 1
			}
		}
		d.add(c)
	}
}

func (d *Design) addBiases() {
	d.addRange("/conditions/age_ratio", Bias, d.conditions.AgeRatio, nil,
		func(p *stage.Point, v float64) { p.AgeRatio = v }, func(p *stage.Point) float64 { return p.AgeRatio })
	d.firstScale = len(d.problem.Coordinates)
	for i := range d.scales {
		c := Coordinate{Kind: Bias}
		if d.scales[i].Low < 1 {
			c.Low = -1
		}
		if d.scales[i].High > 1 {
			c.High = 1
		}
		d.add(c)
	}
}

func (d *Design) addConditions() {
	c := &d.conditions
	d.addRange("/conditions/input_v", Condition, c.Input, d.stationaryInputs(),
		func(p *stage.Point, v float64) { p.Input = v }, func(p *stage.Point) float64 { return p.Input })
	d.addRange("/conditions/load/current_a", Condition, c.LoadCurrent, nil,
		func(p *stage.Point, v float64) { p.Load.Current = v }, func(p *stage.Point) float64 { return p.Load.Current })
	d.addRange("/conditions/load/resistance_ohm", Condition, c.LoadConductance, nil,
		func(p *stage.Point, v float64) { p.Load.Conductance = v }, func(p *stage.Point) float64 { return p.Load.Conductance })
	d.addRange("/conditions/ambient_degc", Condition, c.AmbientDegC, nil,
		func(p *stage.Point, v float64) { p.AmbientDegC = v }, func(p *stage.Point) float64 { return p.AmbientDegC })
}

// addRange gives a condition with a width its coordinate.
func (d *Design) addRange(pointer string, kind Kind, r stage.Range, levels []float64, set func(*stage.Point, float64), get func(*stage.Point) float64) {
	if !(r.Max > r.Min) {
		return
	}
	v := spread.Variable{Pointer: pointer, Min: r.Min, Typ: r.Typ, Max: r.Max}
	c := Coordinate{Kind: kind}
	if r.Min < r.Typ {
		c.Low = -1
	}
	if r.Max > r.Typ {
		c.High = 1
	}
	for _, l := range levels {
		c.Levels = append(c.Levels, coordinateOf(&v, l))
	}
	d.ranges = append(d.ranges, condition{pointer, v, set, get, d.add(c)})
}

// coordinateOf inverts spread.Variable.At; beyond the range it leaves [-1, 1].
func coordinateOf(v *spread.Variable, x float64) float64 {
	switch {
	case x == v.Typ:
		return 0
	case x > v.Typ:
		return (x - v.Typ) / (v.Max - v.Typ)
	}
	return (x - v.Typ) / (v.Typ - v.Min)
}

// stationaryInputs returns the input voltages inside the range at which ripple
// currents of N phases have their nulls and humps: duty ratios k/2N.
func (d *Design) stationaryInputs() (levels []float64) {
	vout := d.conditions.Control.Voltage
	switch d.conditions.Control.Kind {
	case stage.ByFeedback:
		vout = d.stage.Feedback.OutputVoltage()
	case stage.FixedDuty:
		return nil
	}
	n := 2 * d.stage.PhaseCount
	for k := 1; k < n; k++ {
		if v := vout * float64(n) / float64(k); v > d.conditions.Input.Min && v < d.conditions.Input.Max {
			levels = append(levels, v)
		}
	}
	return levels
}

// Problem returns the box. The caller sets its Targets.
func (d *Design) Problem() *Problem { return &d.problem }

// Scales returns the factors beside the spreads, in order.
func (d *Design) Scales() []Scale { return d.scales }

// Spreads returns the compiled spreads, the Placer of the Random coordinates.
func (d *Design) Spreads() *spread.Set { return d.set }

// Pointers names what a coordinate moves.
func (d *Design) Pointers(coordinate int) []string {
	if coordinate < d.set.Len() {
		return d.set.Coordinates()[coordinate].Pointers
	}
	if k := coordinate - d.firstScale; k >= 0 && k < len(d.scales) {
		return []string{d.scales[k].Pointer}
	}
	for i := range d.ranges {
		if d.ranges[i].coordinate == coordinate {
			return []string{d.ranges[i].pointer}
		}
	}
	panic("corners: no such coordinate")
}

// Corner returns the coordinates of a point's conditions, tolerances and scales
// typical.
func (d *Design) Corner(p *stage.Point) []float64 {
	z := make([]float64, len(d.problem.Coordinates))
	for i := range d.ranges {
		r := &d.ranges[i]
		z[r.coordinate] = coordinateOf(&r.at, r.get(p))
	}
	return z
}

// Value is one number of the stage at some coordinates.
type Value struct {
	Pointer string  // of the spread; of a scale, the factor itself
	Value   float64 // [any]
}

// At returns the design at coordinates: the stage with every number put in, the
// operating point, and the values of the spreads and scales. Evaluating that stage
// at that point gives the figures of Model.Eval.
func (d *Design) At(z []float64) (*stage.Stage, stage.Point, []Value) {
	p := d.newPlacement(d.stage.Clone())
	p.place(z)
	values := make([]Value, 0, len(p.values)+len(d.scales))
	for i, v := range d.set.Variables() {
		values = append(values, Value{v.Pointer, *p.targets[i]})
	}
	for k := range d.scales {
		values = append(values, Value{d.scales[k].Pointer, d.scales[k].at(z[d.firstScale+k])})
	}
	return p.stage, p.point, values
}
