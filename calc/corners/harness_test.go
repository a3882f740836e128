package corners

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sync"
	"sync/atomic"

	"railproof/calc/evaluate"
	"railproof/calc/spread"
	"railproof/calc/switched"
)

// function is a Model from a plain function that always succeeds.
type function func(z, out []float64)

func (f function) Eval(z, out []float64) (evaluate.Status, switched.Mode) {
	f(z, out)
	return evaluate.OK, 0
}

// staged is a Model that sets status and mode itself.
type staged func(z, out []float64) (evaluate.Status, switched.Mode)

func (f staged) Eval(z, out []float64) (evaluate.Status, switched.Mode) { return f(z, out) }

// uniform returns the moments of a uniform symmetric spread.
func uniformMoments() spread.Moments {
	s, err := spread.New([]spread.Variable{{Pointer: "/x", Min: -1, Max: 1}})
	if err != nil {
		panic(err)
	}
	return s.Moments(0)
}

// box returns a problem with symmetric coordinates and one target per quantity and
// direction.
func box(random, conditions, quantities int) *Problem {
	p := &Problem{Quantities: quantities, Seed: 1}
	for i := range random + conditions {
		c := Coordinate{Low: -1, High: 1, Moments: uniformMoments()}
		if i >= random {
			c.Kind = Condition
		}
		p.Coordinates = append(p.Coordinates, c)
	}
	for q := range quantities {
		p.Targets = append(p.Targets, Target{Quantity: q, Direction: Greatest}, Target{Quantity: q, Direction: Least})
	}
	return p
}

// runWorkers does a job on several goroutines that take tasks as they come.
func runWorkers(j Job, m Model, workers int) {
	for w := j.Next(); w != nil; w = j.Next() {
		var next atomic.Int64
		var group sync.WaitGroup
		for k := range workers {
			group.Go(func() {
				for {
					t := int(next.Add(1)) - 1
					if t >= w.Tasks() {
						return
					}
					w.Run(t, k, m)
				}
			})
		}
		group.Wait()
	}
}

// search runs the whole search and returns the extremes.
func search(p *Problem, m Model) ([]Extreme, *Search) {
	s := NewSearch(p)
	Run(s, m)
	return s.Extremes(), s
}

// bumpy is a smooth function with a planted worst point inside the box: a trend over
// all coordinates, products of pairs, and a hill that towers above both.
type bumpy struct {
	trend, width, peak []float64
	cross              [][3]float64
	height             float64
}

func newBumpy(r *rand.Rand, n int) *bumpy {
	f := &bumpy{}
	sum := 0.0
	for range n {
		t := r.NormFloat64() * 0.3
		f.trend = append(f.trend, t)
		f.peak = append(f.peak, 1.4*r.Float64()-0.7)
		f.width = append(f.width, 0.4+0.8*r.Float64())
		sum += math.Abs(t)
	}
	for range n / 2 {
		c := 0.2 * r.NormFloat64()
		f.cross = append(f.cross, [3]float64{float64(r.IntN(n)), float64(r.IntN(n)), c})
		sum += math.Abs(c)
	}
	f.height = 1 + 2*sum
	return f
}

func (f *bumpy) at(z []float64) float64 {
	y, e := 0.0, 0.0
	for i, x := range z {
		y += f.trend[i] * x
		d := (x - f.peak[i]) / f.width[i]
		e += d * d
	}
	for _, c := range f.cross {
		y += c[2] * z[int(c[0])] * z[int(c[1])]
	}
	return y + f.height*math.Exp(-e/2)
}

// top returns the planted maximum by a fine ascent from the peak.
func (f *bumpy) top() float64 {
	z := append([]float64(nil), f.peak...)
	best := f.at(z)
	for h := 0.1; h > 1e-7; h /= 2 {
		for moved := true; moved; {
			moved = false
			for i := range z {
				for _, d := range []float64{-h, h} {
					old := z[i]
					z[i] = max(-1, min(1, old+d))
					if v := f.at(z); v > best {
						best, moved = v, true
					} else {
						z[i] = old
					}
				}
			}
		}
	}
	return best
}

func describe(e *Extreme) string {
	return fmt.Sprintf("value %.9g vertex %.9g at %.4f origin %d", e.Value, e.Vertex, e.At, e.Origin)
}
