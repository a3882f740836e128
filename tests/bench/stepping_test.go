package bench

import (
	"encoding/json"
	"math"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/api/wire"
	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/switched"
)

// stepper integrates a synchronous stage with one output bank in time: fourth-order
// Runge-Kutta, a fixed number of steps per period.
type stepper struct {
	c        *switched.Circuit
	i, v     float64 // [A], [V] inductor current and capacitor voltage
	mean     float64 // [V] of the last period's output
	ripple   float64 // [V]
	stepped  int
	duty     float64
	extremes [2]float64
}

const (
	stepsPerPeriod = 200
	settledTo      = 1e-6 // relative change of the state over a period
	mostPeriods    = 100000
	mostDuties     = 50
	thermalPasses  = 3 // circuit solutions that the thermal loop takes at least
)

// output returns the output voltage: the bank with its series resistance beside
// the load.
func (s *stepper) output(i, v float64) float64 {
	b := &s.c.Bank[0]
	return (v + b.ESR*(i-s.c.Current)) / (1 + b.ESR*s.c.Conductance)
}

func (s *stepper) rates(i, v, source, resistance float64) (di, dv float64) {
	o := s.output(i, v)
	return (source - i*resistance - o) / s.c.Leg.L, (i - s.c.Current - s.c.Conductance*o) / s.c.Bank[0].C
}

// interval steps through one switching interval.
func (s *stepper) interval(length, source, resistance float64, steps int) (area float64) {
	h := length / float64(steps)
	for range steps {
		o0 := s.output(s.i, s.v)
		a1, b1 := s.rates(s.i, s.v, source, resistance)
		a2, b2 := s.rates(s.i+h/2*a1, s.v+h/2*b1, source, resistance)
		a3, b3 := s.rates(s.i+h/2*a2, s.v+h/2*b2, source, resistance)
		a4, b4 := s.rates(s.i+h*a3, s.v+h*b3, source, resistance)
		s.i += h / 6 * (a1 + 2*a2 + 2*a3 + a4)
		s.v += h / 6 * (b1 + 2*b2 + 2*b3 + b4)
		o1 := s.output(s.i, s.v)
		area += h * (o0 + o1) / 2
		s.extremes[0], s.extremes[1] = min(s.extremes[0], o1), max(s.extremes[1], o1)
	}
	s.stepped += steps
	return area
}

// settle steps until a period changes the state no more.
func (s *stepper) settle(t testing.TB) {
	leg := &s.c.Leg
	on := max(1, int(math.Round(stepsPerPeriod*s.duty)))
	for range mostPeriods {
		i, v := s.i, s.v
		s.extremes = [2]float64{math.Inf(1), math.Inf(-1)}
		area := s.interval(s.duty*s.c.Period, s.c.Vin, leg.HighSide+leg.Winding, on)
		area += s.interval((1-s.duty)*s.c.Period, -leg.Rectifier.Threshold, leg.Rectifier.Slope+leg.Winding, stepsPerPeriod-on)
		s.mean, s.ripple = area/s.c.Period, s.extremes[1]-s.extremes[0]
		if math.Abs(s.i-i) <= settledTo*math.Abs(s.i) && math.Abs(s.v-v) <= settledTo*math.Abs(s.v) {
			return
		}
	}
	require.Fail(t, "does not settle")
}

// regulate finds the duty ratio of the output voltage; a change of it moves the
// output by about the input voltage.
func (s *stepper) regulate(t testing.TB, output float64) {
	for range mostDuties {
		s.settle(t)
		lack := output - s.mean
		if math.Abs(lack) <= settledTo*output {
			return
		}
		s.duty += lack / s.c.Vin
	}
	require.Fail(t, "does not regulate")
}

// The engine against stepping the same circuit in time, in one run. The thermal
// loop is granted to the stepping: each pass begins from the state of the one
// before and has the resistances of the equilibrium at once, and there are as few
// passes as the engine takes at its best. So the ratio is the least it could be.
func TestEvaluationAgainstSteppingInTime(t *testing.T) {
	var tree any
	require.NoError(t, json.Unmarshal(example(t, "buoy-5v0/losses.json"), &tree))
	var request wire.LossesRequest
	require.NoError(t, wire.FromTree(tree, &request))
	asked, _, err := request.Decode()
	require.NoError(t, err)
	e := evaluate.Prepare(asked.Design.Stage)
	point := asked.Places[0].Point
	var r evaluate.Result
	const evaluations = 20000
	e.Eval(&point, &r)
	start := time.Now()
	for range evaluations {
		e.Eval(&point, &r)
	}
	exact := time.Since(start).Seconds() / evaluations
	require.Equal(t, evaluate.OK, r.Status)

	circuit := *e.Circuit()
	require.Equal(t, 1, circuit.Banks)
	output := r.Quantities[quantity.OutputMean]
	start = time.Now()
	s := stepper{c: &circuit, i: circuit.Current, v: output, duty: output / circuit.Vin}
	for range thermalPasses {
		s.regulate(t, output)
	}
	stepping := time.Since(start).Seconds()
	require.InEpsilon(t, r.Quantities[quantity.DutyRatio], s.duty, 1e-4, "the same circuit")
	require.InEpsilon(t, r.Quantities[quantity.OutputRipplePP], s.ripple, 1e-2)
	t.Logf("evaluation %.2f us; stepping %.1f ms, %d steps: %.0f times slower", exact*1e6, stepping*1e3, s.stepped, stepping/exact)
	require.Greater(t, stepping/exact, 1000.0)
}
