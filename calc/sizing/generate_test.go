package sizing_test

import (
	"math"
	"math/rand/v2"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// generate returns requirement k of a fixed series over the region
//
//	input      4.5 to 36 V least, 1 to 2.5 times that greatest, 0 to 20 mohm of source
//	output     0.8 V to 85 % of the least input
//	load       0.5 to 20 A greatest, 0 to 30 % of that least, 1 to 3 phases
//	ambient    -40 to 85 degC
//	frequency  150 kHz to 1.2 MHz
//	targets    ripple 20 to 50 %, output ripple 0.5 to 2 %, input ripple 1 to 4 %,
//	           and, each asked for in part of the series: continuous conduction,
//	           load step with deviation and recovery, hold-up, efficiency, tolerance
//
// in which a part of the requirements cannot be met.
func generate(k int) *stage.Requirement {
	r := rand.New(rand.NewPCG(20260517, uint64(k)))
	between := func(a, b float64) float64 { return a + (b-a)*r.Float64() }
	ratio := func(a, b float64) float64 { return a * math.Pow(b/a, r.Float64()) }
	chance := func(p float64) bool { return r.Float64() < p }
	round := func(x float64) float64 { // three digits, as people write requirements
		e := math.Pow(10, math.Floor(math.Log10(x))-2)
		return math.Round(x/e) * e
	}
	low := round(ratio(4.5, 36))
	high := round(low * between(1, 2.5))
	vo := round(ratio(0.8, 0.85*low))
	io := round(ratio(0.5, 20))
	req := &stage.Requirement{
		Input: stage.Range{Min: low, Typ: (low + high) / 2, Max: high}, SourceResistance: between(0, 0.02),
		Output: vo, LoadCurrent: stage.Range{Min: io * between(0, 0.3), Max: io},
		AmbientDegC: stage.Range{Min: -40, Typ: 25, Max: round(between(40, 85))}, PhaseCount: 1,
		Targets: stage.Targets{
			InductorRippleRatio: round(between(0.2, 0.5)), OutputRipple: round(vo * between(0.005, 0.02)), InputRipple: round(low * between(0.01, 0.04)),
			ContinuousDownTo: parts.Unknown, Efficiency: parts.Unknown, JunctionDegC: 125, Life: parts.Unknown,
			LoadStep: stage.LoadStep{Step: parts.Unknown, Slew: 1e6, Deviation: parts.Unknown, Recovery: parts.Unknown},
			HoldUp:   stage.HoldUp{Time: parts.Unknown, To: parts.Unknown},
		},
	}
	req.LoadCurrent.Typ = (req.LoadCurrent.Min + io) / 2
	fs := round(ratio(150e3, 1.2e6))
	req.SwitchingFrequency = stage.Range{Min: fs, Typ: fs, Max: fs}
	switch {
	case chance(0.2) && vo > 3 && io < 6:
		req.Rectifier = stage.DiodeRectified
	case chance(0.2):
		req.Rectifier = stage.SynchronousEmulated
	}
	if chance(0.3) {
		req.PhaseCount = 1 + r.IntN(3)
	}
	if chance(0.4) {
		req.OutputTolerance = round(between(0.015, 0.05))
	}
	t := &req.Targets
	if chance(0.3) {
		t.ContinuousDownTo = round(io * between(0.1, 0.3))
	}
	if chance(0.5) {
		t.LoadStep = stage.LoadStep{Step: round(io * between(0.2, 0.6)), Slew: 1e6, Deviation: round(vo * between(0.02, 0.06)), Recovery: round(ratio(1e-5, 2e-4))}
	}
	if chance(0.1) {
		t.HoldUp = stage.HoldUp{Time: round(ratio(1e-5, 1e-3)), To: round(vo * between(0.8, 1))}
	}
	if chance(0.5) {
		t.Efficiency = round(between(0.7, 0.95))
	}
	return req
}
