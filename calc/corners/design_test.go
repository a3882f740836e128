package corners_test

import (
	"fmt"
	"math"
	"os"
	"slices"
	"sync"
	"sync/atomic"
	"testing"

	"github.com/go-json-experiment/json"
	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/api/wire"
	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/sampling"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// rail is an example's stage with its spreads, conditions and limits.
type rail struct {
	stage      *stage.Stage
	variables  []spread.Variable
	conditions stage.Conditions
	quantities []quantity.ID
	limits     []corners.Limit
	targets    []corners.Target
}

func example(t testing.TB, name string) *rail {
	t.Helper()
	raw, err := os.ReadFile("../../openapi/examples/" + name + "/corners.json")
	require.NoError(t, err)
	var request wire.CornersRequest
	var tree any
	require.NoError(t, json.Unmarshal(raw, &tree))
	require.NoError(t, wire.FromTree(tree, &request))
	decoded, err := request.Stage.Decode("/stage")
	require.NoError(t, err)
	r := &rail{stage: decoded.Stage, variables: decoded.Variables}
	r.conditions, err = request.Conditions.Decode("/conditions", decoded.Stage)
	require.NoError(t, err)
	for _, l := range request.Limits {
		if l.At == "nominal" {
			continue
		}
		i := len(r.quantities)
		id, ok := quantity.ByKey(l.Quantity)
		require.True(t, ok, l.Quantity)
		r.quantities = append(r.quantities, id)
		limit := corners.Limit{Quantity: i, Min: math.NaN(), Max: math.NaN()}
		if l.Max != nil {
			limit.Max = *l.Max
			r.targets = append(r.targets, corners.Target{Quantity: i, Direction: corners.Greatest})
		}
		if l.Min != nil {
			limit.Min = *l.Min
			r.targets = append(r.targets, corners.Target{Quantity: i, Direction: corners.Least})
		}
		r.limits = append(r.limits, limit)
	}
	return r
}

func (r *rail) design(t testing.TB, o corners.DesignOptions) *corners.Design {
	t.Helper()
	if o.Quantities == nil {
		o.Quantities = r.quantities
	}
	o.Seed = 1
	d, err := corners.NewDesign(r.stage, r.variables, &r.conditions, o)
	require.NoError(t, err)
	d.Problem().Targets = r.targets
	return d
}

// run does a job with one model per worker.
func run(j corners.Job, d *corners.Design, workers int) {
	models := make([]corners.Model, workers)
	for k := range models {
		models[k] = d.Model()
	}
	runWith(j, models)
}

func runWith(j corners.Job, models []corners.Model) {
	for w := j.Next(); w != nil; w = j.Next() {
		var next atomic.Int64
		var group sync.WaitGroup
		for k, m := range models {
			group.Go(func() {
				for t := int(next.Add(1)) - 1; t < w.Tasks(); t = int(next.Add(1)) - 1 {
					w.Run(t, k, m)
				}
			})
		}
		group.Wait()
	}
}

var rails = []string{"buoy-5v0", "buoy-3v3", "mast-12v0"}

// The stage and point of a place, evaluated from scratch, give the figures that the
// model gave: bit for bit, wherever the model has been before. The error of the
// output is told against the typical set-point and so belongs to the design.
func TestPostedPointGivesTheSameFigures(t *testing.T) {
	for _, name := range rails {
		r := example(t, name)
		var all []quantity.ID
		for id := range quantity.Count {
			if id != quantity.OutputError {
				all = append(all, id)
			}
		}
		for _, scales := range [][]corners.Scale{nil, append(corners.ModelBands(r.stage), corners.Drift("/stage/switching_frequency_hz", "switching_frequency_hz", -0.02))} {
			d := r.design(t, corners.DesignOptions{Quantities: all, Scales: scales})
			m := d.Model()
			p := d.Problem()
			out, again := make([]float64, len(all)), evaluate.Result{}
			z := make([]float64, len(p.Coordinates))
			for k := range 60 {
				key := sampling.Key(7, uint64(k))
				for i := range z {
					c := &p.Coordinates[i]
					z[i] = c.Low + sampling.Uniform(key, uint64(i))*(c.High-c.Low)
					if k%3 == 0 {
						z[i] = []float64{c.Low, 0, c.High}[sampling.Bits(key, uint64(i))%3]
					}
				}
				status, mode := m.Eval(z, out)
				s, point, values := d.At(z)
				require.Len(t, values, len(r.variables)+len(scales))
				evaluate.Prepare(s).Eval(&point, &again)
				require.Equal(t, again.Status, status, "%s point %d", name, k)
				require.Equal(t, again.Mode, mode)
				for i, id := range all {
					require.Equal(t, math.Float64bits(again.Quantities[id]), math.Float64bits(out[i]), "%s point %d %s: %g against %g", name, k, id.Key(), again.Quantities[id], out[i])
				}
			}
		}
	}
}

func TestCoordinatesAreNamedByPointers(t *testing.T) {
	r := example(t, "buoy-5v0")
	d := r.design(t, corners.DesignOptions{Scales: []corners.Scale{corners.Drift("/stage/feedback/reference_v", "feedback/reference_v", 0.002)}})
	p := d.Problem()
	names := map[string]corners.Coordinate{}
	for i := range p.Coordinates {
		for _, pointer := range d.Pointers(i) {
			if _, twice := names[pointer]; !twice || i < len(r.variables) {
				names[pointer] = p.Coordinates[i]
			}
		}
	}
	for _, v := range r.variables {
		assert.Contains(t, names, v.Pointer)
	}
	assert.GreaterOrEqual(t, len(r.variables), 15)
	assert.Equal(t, corners.Bias, names["/conditions/age_ratio"].Kind)
	assert.Zero(t, names["/conditions/age_ratio"].Low, "typically new: no younger side")
	assert.Equal(t, corners.Condition, names["/conditions/input_v"].Kind)
	drift := p.Coordinates[len(r.variables)+1]
	assert.Equal(t, corners.Coordinate{Kind: corners.Bias, Low: 0, High: 1}, drift)
	z := d.Corner(&stage.Point{Input: 32, Load: stage.Load{Current: 0.1}, AmbientDegC: 42.5, AgeRatio: 1})
	_, point, _ := d.At(z)
	assert.Equal(t, 32.0, point.Input)
	assert.Equal(t, 0.1, point.Load.Current)
	assert.InDelta(t, 42.5, point.AmbientDegC, 1e-12)
	assert.Equal(t, 1.0, point.AgeRatio)
	assert.Equal(t, 0.05, point.SourceResistance)
}

func TestUnknownFieldIsNamed(t *testing.T) {
	r := example(t, "buoy-5v0")
	_, err := corners.NewDesign(r.stage, r.variables, &r.conditions, corners.DesignOptions{Scales: []corners.Scale{corners.Drift("/stage/diode/threshold_v", "diode/threshold_v", 0.1)}})
	assert.ErrorContains(t, err, "/stage/diode/threshold_v")
	bad := append(slices.Clone(r.variables), spread.Variable{Pointer: "/stage/x", Field: "x", Min: 1, Typ: 2, Max: 3})
	_, err = corners.NewDesign(r.stage, bad, &r.conditions, corners.DesignOptions{})
	assert.ErrorContains(t, err, "/stage/x")
}

func TestDesignWithoutSpreadsOrRanges(t *testing.T) {
	r := example(t, "buoy-5v0")
	r.variables = nil
	c := &r.conditions
	for _, x := range []*stage.Range{&c.Input, &c.LoadCurrent, &c.AmbientDegC, &c.AgeRatio} {
		x.Min, x.Max = x.Typ, x.Typ
	}
	d := r.design(t, corners.DesignOptions{})
	require.Empty(t, d.Problem().Coordinates)
	s := corners.NewSearch(d.Problem())
	run(s, d, 2)
	nominal, status := s.Nominal()
	require.Equal(t, evaluate.OK, status)
	for i, e := range s.Extremes() {
		assert.Equal(t, nominal[e.Quantity], e.Value, i)
		assert.False(t, e.BeyondVertices)
	}
}

// The whole analysis of each example: the worst point is never better than anything
// that the other methods saw.
func TestExamplesFromEndToEnd(t *testing.T) {
	for _, name := range rails {
		r := example(t, name)
		d := r.design(t, corners.DesignOptions{})
		p := d.Problem()
		s := corners.NewSearch(p)
		run(s, d, 2)
		extremes := s.Extremes()
		assert.LessOrEqual(t, s.Evaluations(), corners.Budget(p).Search, name)
		at, of := corners.ConditionCorners(p, extremes)
		base := make([][]float64, len(extremes))
		for i := range extremes {
			require.NotNil(t, extremes[i].At, "%s %s", name, r.quantities[extremes[i].Quantity].Key())
			base[i] = at[of[i]]
		}
		linear := corners.NewLinear(p, base)
		run(linear, d, 2)
		mc, err := corners.NewMonteCarlo(p, d.Spreads(), corners.Plan{
			Sampling: sampling.Design{Seed: 1, Samples: 200}, Corners: at, Limits: r.limits, Worst: 3, Workers: 2, Span: s.Span,
		})
		require.NoError(t, err)
		run(mc, d, 2)
		before := s.Evaluations()
		points, samples := mc.WorstPoints()
		s.Resume(points, samples)
		run(s, d, 2)
		assert.LessOrEqual(t, s.Evaluations()-before, corners.Budget(p).Resume, name)
		for i, e := range s.Extremes() {
			w := mc.Worst(i)[0]
			sign := 1.0
			if e.Direction == corners.Least {
				sign = -1
			}
			assert.GreaterOrEqual(t, sign*e.Value, sign*w.Value, "%s target %d", name, i)
			assert.GreaterOrEqual(t, sign*e.Value, sign*e.Vertex, "%s target %d", name, i)
			l := linear.Results()[i]
			st := mc.Statistics(of[i], e.Quantity)
			if l.Curvature < 0.03 {
				assert.InDelta(t, l.Deviation, st.Deviation, 0.1*st.Deviation, "%s %s: straight and drawn deviation", name, r.quantities[e.Quantity].Key())
			}
		}
	}
}

// With the input range around twice the output the input capacitor's current is
// worst inside it, where no vertex is.
func TestInputCapacitorOfTheStageIsWorstInsideTheInputRange(t *testing.T) {
	r := example(t, "buoy-5v0")
	r.conditions.Input = stage.Range{Min: 8, Typ: 12, Max: 20}
	r.targets = []corners.Target{{Quantity: 0, Direction: corners.Greatest}}
	d := r.design(t, corners.DesignOptions{Quantities: []quantity.ID{quantity.InputCapacitorRMS}})
	s := corners.NewSearch(d.Problem())
	run(s, d, 2)
	e := s.Extremes()[0]
	_, point, _ := d.At(e.At)
	assert.True(t, e.BeyondVertices)
	assert.Greater(t, e.Value, e.Vertex*1.005)
	assert.InDelta(t, 10.3, point.Input, 0.5, "near twice the output")
	// a fine scan along the input finds no more
	m, out := d.Model(), make([]float64, 1)
	z := append([]float64(nil), e.At...)
	input := -1
	for i := range z {
		if d.Pointers(i)[0] == "/conditions/input_v" {
			input = i
		}
	}
	for k := range 2001 {
		z[input] = -1 + float64(k)/1000
		m.Eval(z, out)
		require.LessOrEqual(t, out[0], e.Value*(1+1e-9))
	}
}

func TestAnalysisIsTheSameOnAnyNumberOfWorkers(t *testing.T) {
	r := example(t, "buoy-5v0")
	d := r.design(t, corners.DesignOptions{})
	var want string
	for _, workers := range []int{1, 2, 7} {
		s := corners.NewSearch(d.Problem())
		run(s, d, workers)
		e := s.Extremes()
		mc, err := corners.NewMonteCarlo(d.Problem(), d.Spreads(), corners.Plan{
			Sampling: sampling.Design{Method: sampling.Sobol, Seed: 1, Samples: 1000}, Corners: [][]float64{e[0].At, e[1].At}, Limits: r.limits, Worst: 3, Workers: workers, Span: s.Span,
		})
		require.NoError(t, err)
		run(mc, d, workers)
		got := fmt.Sprintf("%v %v", e, mc.Yield(0.95))
		for q := range r.quantities {
			st := mc.Statistics(1, q)
			got += fmt.Sprint(st.Mean, st.Deviation, st.Quantile(0.01, 0.95), mc.Worst(q))
		}
		if want == "" {
			want = got
		}
		require.Equal(t, want, got, "%d workers", workers)
	}
}

func TestModelDoesNotAllocate(t *testing.T) {
	r := example(t, "buoy-5v0")
	d := r.design(t, corners.DesignOptions{Scales: corners.ModelBands(r.stage)})
	m := d.Model()
	z, out := make([]float64, len(d.Problem().Coordinates)), make([]float64, len(r.quantities))
	assert.Zero(t, testing.AllocsPerRun(100, func() { m.Eval(z, out) }))
}

func TestModelBandsMoveTheirLosses(t *testing.T) {
	r := example(t, "buoy-5v0")
	bands := corners.ModelBands(r.stage)
	d := r.design(t, corners.DesignOptions{Scales: bands, Quantities: []quantity.ID{quantity.CoreLoss, quantity.LossTotal}})
	m, out := d.Model(), make([]float64, 2)
	z := make([]float64, len(d.Problem().Coordinates))
	m.Eval(z, out)
	typical := append([]float64(nil), out...)
	for i := range z {
		name := d.Pointers(i)[0]
		z[i] = d.Problem().Coordinates[i].High
		m.Eval(z, out)
		switch name {
		case "/model_bands/core":
			assert.InEpsilon(t, 1.3*typical[0], out[0], 0.01, "a little less where the hotter core loses less")
			assert.Greater(t, out[1], typical[1])
		case "/model_bands/overlap", "/model_bands/dead_time", "/model_bands/output_charge", "/model_bands/recovery", "/model_bands/winding_ac":
			assert.Greater(t, out[1], typical[1], name)
		}
		z[i] = 0
	}
}

func BenchmarkExtremes(b *testing.B) {
	r := example(b, "buoy-5v0")
	d := r.design(b, corners.DesignOptions{})
	models := []corners.Model{d.Model(), d.Model()}
	n := 0
	for b.Loop() {
		s := corners.NewSearch(d.Problem())
		runWith(s, models)
		n = s.Evaluations()
	}
	b.ReportMetric(float64(n), "evaluations")
	b.ReportMetric(float64(len(d.Problem().Coordinates)), "coordinates")
}

func BenchmarkSamples(b *testing.B) {
	r := example(b, "buoy-5v0")
	var all []quantity.ID
	d := r.design(b, corners.DesignOptions{})
	p := d.Problem()
	probe := evaluate.Result{}
	s, point, _ := d.At(make([]float64, len(p.Coordinates)))
	evaluate.Prepare(s).Eval(&point, &probe)
	for id := range quantity.Count {
		if v := probe.Quantities[id]; v == v {
			all = append(all, id)
		}
	}
	for name, quantities := range map[string][]quantity.ID{"limited": r.quantities, "all": all} {
		b.Run(fmt.Sprintf("%s/%d quantities", name, len(quantities)), func(b *testing.B) {
			d := r.design(b, corners.DesignOptions{Quantities: quantities})
			if name == "all" {
				d.Problem().Targets = nil
			}
			models := []corners.Model{d.Model(), d.Model()}
			const n = 100000
			for b.Loop() {
				mc, err := corners.NewMonteCarlo(d.Problem(), d.Spreads(), corners.Plan{
					Sampling: sampling.Design{Seed: 1, Samples: n}, Corners: [][]float64{make([]float64, len(d.Problem().Coordinates))}, Worst: 3, Workers: 2,
				})
				require.NoError(b, err)
				runWith(mc, models)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n*1e6/1e9, "s/million")
		})
	}
}
