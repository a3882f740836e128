package substitution

import (
	"math"
	"slices"

	"railproof/calc/quantity"
	"railproof/calc/rules"
)

// Weights say how much each term counts; zero leaves it out.
type Weights struct {
	Loss        float64
	Temperature float64
	Cost        float64
	Area        float64
}

// Terms are what the score is made of; lower is better, NaN if not known.
type Terms struct {
	Loss        float64 // nominal loss over that of the proven stage
	Temperature float64 // share of the permitted temperature rise that is used, at the part with the least left
	Cost        float64 // cost over the least cost of all candidates
	Area        float64 // area over the least area of all candidates
}

func unknownTerms() Terms { return Terms{math.NaN(), math.NaN(), math.NaN(), math.NaN()} }

// Rank judges the candidates, in the order given, and ranks them: accepted before
// needs-review before rejected, within these by score, and last those without a
// score for want of a figure that has a weight. Equals keep their order.
//
//	score = Σ weight · term / Σ weight
func Rank(before *Assessment, candidates []Candidate, limits []rules.Limit, w Weights) []Outcome {
	outcomes := make([]Outcome, len(candidates))
	leastCost, leastArea := math.Inf(1), math.Inf(1)
	for i := range candidates {
		c := &candidates[i]
		outcomes[i] = Judge(before, c, limits)
		if c.Cost > 0 {
			leastCost = math.Min(leastCost, c.Cost)
		}
		if c.Area > 0 {
			leastArea = math.Min(leastArea, c.Area)
		}
	}
	for i := range candidates {
		c, o := &candidates[i], &outcomes[i]
		o.Terms.Cost, o.Terms.Area = c.Cost/leastCost, c.Area/leastArea
		if c.After != nil {
			o.Terms.Loss = c.After.Nominal[quantity.LossTotal] / before.Nominal[quantity.LossTotal]
			o.Terms.Temperature = temperature(c.After.Report.Findings)
		}
		o.Score = score(o.Terms, w)
	}
	order := make([]int, len(outcomes))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int { return compare(&outcomes[i], &outcomes[j]) })
	for place, i := range order {
		outcomes[i].Rank = place + 1
	}
	return outcomes
}

// compare is negative where a ranks before b.
func compare(a, b *Outcome) int {
	places := [...]int{Accepted: 0, NeedsReview: 1, Rejected: 2}
	if d := places[a.Verdict] - places[b.Verdict]; d != 0 {
		return d
	}
	switch {
	case a.Score < b.Score || !math.IsNaN(a.Score) && math.IsNaN(b.Score):
		return -1
	case a.Score > b.Score || math.IsNaN(a.Score) && !math.IsNaN(b.Score):
		return 1
	}
	return 0
}

// temperature returns the greatest used share of a permitted temperature rise.
func temperature(findings []rules.Finding) float64 {
	used := math.NaN()
	for i := range findings {
		f := &findings[i]
		if f.Unit == "Cel" && !math.IsNaN(f.Margin) && !(used >= 1-f.Margin) {
			used = 1 - f.Margin
		}
	}
	return used
}

func score(t Terms, w Weights) float64 {
	sum, total := 0.0, 0.0
	for _, part := range [][2]float64{{w.Loss, t.Loss}, {w.Temperature, t.Temperature}, {w.Cost, t.Cost}, {w.Area, t.Area}} {
		if part[0] > 0 {
			sum += float64(part[0] * part[1])
			total += part[0]
		}
	}
	return sum / total
}
