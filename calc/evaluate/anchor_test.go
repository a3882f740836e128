package evaluate_test

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// From the anchor of the typical stage every built unit comes to the figures that it
// has from cold: temperatures within the thousandth of a kelvin, all else within a
// millionth of the value or, for currents, of a thousandth of the peak.
func TestEvalNearAgreesWithEval(t *testing.T) {
	for name, alter := range map[string]func(*stage.Stage, *stage.Point){
		"ccm":         func(*stage.Stage, *stage.Point) {},
		"dcm":         func(s *stage.Stage, p *stage.Point) { s.Rectifier, p.Load.Current = stage.SynchronousEmulated, 0.3 },
		"three banks": func(s *stage.Stage, _ *stage.Point) { banks(s) },
		"held":        func(_ *stage.Stage, p *stage.Point) { p.PartTemperatureDegC = 60 },
		"light load":  func(_ *stage.Stage, p *stage.Point) { p.Load.Current = 0 },
		"fixed duty":  func(_ *stage.Stage, p *stage.Point) { p.Control = stage.Control{Kind: stage.FixedDuty, Duty: 0.21} },
	} {
		t.Run(name, func(t *testing.T) {
			s, p := example(t, "buoy-5v0")
			alter(s, &p)
			e := evaluate.Prepare(s)
			var near, cold evaluate.Result
			anchor, ok := e.AnchorAt(&p, &near)
			require.Equal(t, name != "held", ok)
			for k, u := range drawUnits(e.Stage()) {
				u.build()
				e.EvalNear(&anchor, &p, &near)
				e.Eval(&p, &cold)
				require.Equal(t, cold.Status, near.Status, "unit %d", k)
				require.Equal(t, cold.Mode, near.Mode, "unit %d", k)
				for part := range cold.PartDegC {
					if v := cold.PartDegC[part]; v == v {
						require.InDelta(t, v, near.PartDegC[part], 1e-3, "unit %d, part %d", k, part)
					}
				}
				peak := cold.Quantities[quantity.InductorPeak]
				for id, v := range cold.Quantities {
					got, id := near.Quantities[id], quantity.ID(id)
					require.Equal(t, v == v, got == got, "unit %d, %s", k, id.Key())
					if v != v || id == quantity.EnergyBalance {
						continue
					}
					scale := math.Abs(v)
					info, _ := quantity.Of(id)
					switch info.Unit {
					case "A":
						scale = math.Max(scale, 1e-3*peak)
					case "Cel":
						scale = 1e3
					case "W", "W/m3":
						scale *= 6 // half a thousandth of a kelvin moves the loss of this core by 3e-6, and either may be off by one
					case "1":
						scale = math.Max(scale, 1e-3)
					}
					require.InDelta(t, v, got, 1e-6*scale, "unit %d, %s", k, id.Key())
				}
			}
		})
	}
}

// A stage that runs away is told so from an anchor as from cold.
func TestEvalNearFindsRunaway(t *testing.T) {
	s, p := example(t, "buoy-5v0")
	e := evaluate.Prepare(s)
	var r evaluate.Result
	anchor, ok := e.AnchorAt(&p, &r)
	require.True(t, ok)
	e.Stage().HighSide.Thermal.JunctionToAmbient *= 100
	e.EvalNear(&anchor, &p, &r)
	require.Equal(t, evaluate.Runaway, r.Status)
	_, ok = e.AnchorAt(&p, &r)
	require.False(t, ok)
}
