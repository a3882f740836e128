package sizing

import (
	"math"

	"railproof/calc/stage"
)

// Frequencies returns the switching frequencies [Hz] that a requirement asks to be
// sized at: the fixed one, or a sweep in equal ratios, to three digits, from end to end.
func Frequencies(req *stage.Requirement, choice Choices) []float64 {
	r := req.SwitchingFrequency
	if !(r.Max > r.Min) {
		return []float64{r.Min}
	}
	n := choice.withDefaults(req.Output).SweepCount
	fs := make([]float64, n)
	for k := range fs {
		fs[k] = neat(r.Min * math.Pow(r.Max/r.Min, float64(k)/float64(n-1)))
	}
	fs[0], fs[n-1] = r.Min, r.Max
	return fs
}

// Select returns the answer of a sweep: with an efficiency target the highest
// frequency at which everything is met, which needs the smallest parts; without one
// the frequency of the least loss. Its Sweep holds a row for each frequency. Where
// none is feasible it is the last answer with the fewest conflicts.
//
// answers are those of SizeAt in ascending order of frequency, at least one.
func Select(req *stage.Requirement, answers []Answer) Answer {
	best := -1
	rows := make([]Row, len(answers))
	for k := range answers {
		a := &answers[k]
		rows[k] = Row{
			Frequency: a.Frequency, Status: a.Status, Inductance: math.NaN(), OutputCapacitance: math.NaN(), InputCapacitance: math.NaN(),
			InductorRipple: math.NaN(), OutputRipple: math.NaN(), OnTime: math.NaN(), OnTimeMargin: math.NaN(), Loss: math.NaN(), Efficiency: math.NaN(),
		}
		if len(a.Sweep) == 1 {
			rows[k] = a.Sweep[0]
			rows[k].Status = a.Status
		}
		switch {
		case best < 0:
			best = k
		case a.Status.OK() != answers[best].Status.OK():
			if a.Status.OK() {
				best = k
			}
		case !a.Status.OK():
			if len(a.Conflicts) <= len(answers[best].Conflicts) {
				best = k
			}
		case known(req.Targets.Efficiency) || rows[k].Loss < rows[best].Loss:
			best = k
		}
	}
	a := answers[best]
	rows[best].Chosen = a.Status.OK()
	a.Sweep = rows
	return a
}
