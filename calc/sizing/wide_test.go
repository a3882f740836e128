package sizing_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/sizing"
	"railproof/calc/stage"
)

// anything returns a requirement from the whole range that the contract lets pass.
func anything(r *rand.Rand) (*stage.Requirement, sizing.Choices) {
	ratio := func(a, b float64) float64 { return a * math.Pow(b/a, r.Float64()) }
	maybe := func(p, x float64) float64 {
		if r.Float64() < p {
			return x
		}
		return parts.Unknown
	}
	low := ratio(1, 1e4)
	high := math.Min(1e4, low*ratio(1, 8))
	io := ratio(1e-3, 1e4)
	vo := math.Min(1e4, math.Max(0.1, low*ratio(1e-2, 1.1)))
	req := &stage.Requirement{
		Input: stage.Range{Min: low, Typ: (low + high) / 2, Max: high}, SourceResistance: float64(r.IntN(4)/3) * ratio(1e-6, 1e3),
		Output: vo, OutputTolerance: float64(r.IntN(2)) * ratio(1e-3, 0.5), LoadCurrent: stage.Range{Min: io * r.Float64() * float64(r.IntN(2)), Max: io},
		AmbientDegC: stage.Range{Min: -100 + 150*r.Float64(), Max: 60 + 60*r.Float64()}, Rectifier: stage.Rectifier(r.IntN(3)), PhaseCount: 1 + r.IntN(6),
	}
	req.LoadCurrent.Typ = (req.LoadCurrent.Min + io) / 2
	req.AmbientDegC.Typ = (req.AmbientDegC.Min + req.AmbientDegC.Max) / 2
	fs := ratio(1e3, 3e7)
	req.SwitchingFrequency = stage.Range{Min: fs, Typ: fs, Max: fs}
	t := &req.Targets
	t.InductorRippleRatio, t.OutputRipple, t.InputRipple = maybe(0.5, ratio(0.01, 2)), maybe(0.5, ratio(1e-6, 1e3)), maybe(0.5, ratio(1e-6, 1e3))
	t.ContinuousDownTo = maybe(0.5, ratio(1e-5, 1e5))
	t.LoadStep = stage.LoadStep{Step: maybe(0.5, ratio(1e-5, 1e5)), Slew: maybe(0.5, ratio(1, 1e12)), Deviation: maybe(0.7, ratio(1e-6, 1e3)), Recovery: maybe(0.7, ratio(1e-9, 10))}
	t.HoldUp = stage.HoldUp{Time: maybe(0.3, ratio(1e-6, 100)), To: ratio(1e-3, 1) * vo}
	t.Efficiency, t.JunctionDegC, t.Life = maybe(0.5, r.Float64()), maybe(0.5, 90+200*r.Float64()), maybe(0.3, ratio(1, 1e9))
	c := sizing.NewChoices()
	if r.IntN(2) == 0 {
		c.OutputKind, c.InputKind = parts.CapacitorKind(1+r.IntN(7)), parts.CapacitorKind(1+r.IntN(7))
		c.MinOnTime, c.MinOffTime, c.MaxDutyRatio = maybe(0.5, ratio(1e-12, 1e-3)), maybe(0.5, 0), maybe(0.5, 0.01+0.99*r.Float64())
		c.Reference, c.LowerOhm = maybe(0.5, ratio(0.01, 100)), maybe(0.5, ratio(1, 1e8))
	}
	return req, c
}

// Whatever the contract lets pass gets an answer: a stage that passes its own checks,
// or conflicts with finite figures. Nothing panics, nothing is NaN or infinite.
func TestEveryRequirementHasAnAnswer(t *testing.T) {
	t.Parallel()
	r := rand.New(rand.NewPCG(11, 12))
	count := map[string]int{}
	for k := range 60 + 2*generated() {
		req, choices := anything(r)
		require.NoError(t, req.Check())
		a := sizing.Size(req, choices)
		require.NotEqual(t, sizing.NotRun, a.Status)
		finite := func(what string, x float64) {
			t.Helper()
			require.False(t, math.IsNaN(x) || math.IsInf(x, 0), "%d: %s is %g: %+v", k, what, x, req)
		}
		for _, w := range a.Windows {
			for _, b := range w.Bounds {
				finite(w.Name+" by "+b.Constraint, b.Value)
				finite(w.Name+" part by "+b.Constraint, b.Part)
				finite(w.Name+" ideal by "+b.Constraint, b.Ideal)
			}
		}
		for _, x := range a.Ratings {
			finite(x.Part+" "+x.Name, x.Applied)
			finite(x.Part+" "+x.Name, x.Required)
		}
		if a.Status.OK() {
			count["ok"]++
			require.NoError(t, a.Stage.Check(), "%d: %+v", k, req)
			require.Empty(t, a.Stage.Clone().ApplyDefaults(), k)
			for _, s := range a.Spreads {
				require.True(t, s.Min <= s.Typ && s.Typ <= s.Max && s.Min > 0, "%+v", s)
			}
			continue
		}
		require.NotEmpty(t, a.Conflicts, "%d: %+v", k, req)
		for _, c := range a.Conflicts {
			count[c.Constraint]++
			finite(c.Constraint+" needed", c.Needed)
			finite(c.Constraint+" available", c.Available)
			assert.NotEmpty(t, c.Unit)
			assert.NotEmpty(t, c.Fields)
		}
	}
	t.Log(count)
}
