package wire

import (
	"math"
	"math/cmplx"

	"railproof/calc/loop"
	"railproof/service"
)

// LoopCurves are the responses over frequency, columnar.
type LoopCurves struct {
	Frequency          []float64 `json:"frequency_hz"`
	LoopGain           []float64 `json:"loop_gain_db"`
	LoopPhase          []float64 `json:"loop_phase_deg"`
	AveragedLoopGain   []float64 `json:"averaged_loop_gain_db,omitzero"`
	AveragedLoopPhase  []float64 `json:"averaged_loop_phase_deg,omitzero"`
	ControlGain        []float64 `json:"control_to_output_db,omitzero"`
	ControlPhase       []float64 `json:"control_to_output_deg,omitzero"`
	LineGain           []float64 `json:"line_to_output_db,omitzero"`
	LinePhase          []float64 `json:"line_to_output_deg,omitzero"`
	CompensatorGain    []float64 `json:"compensator_db,omitzero"`
	CompensatorPhase   []float64 `json:"compensator_deg,omitzero"`
	Impedance          []float64 `json:"output_impedance_ohm,omitzero"`
	ImpedancePhase     []float64 `json:"output_impedance_deg,omitzero"`
	ClosedImpedance    []float64 `json:"closed_loop_output_impedance_ohm,omitzero"`
	ClosedPhase        []float64 `json:"closed_loop_output_impedance_deg,omitzero"`
	Susceptibility     []float64 `json:"audio_susceptibility_db,omitzero"`
	SusceptibilityTurn []float64 `json:"audio_susceptibility_deg,omitzero"`
	SourceImpedance    []float64 `json:"filter_output_impedance_ohm,omitzero"`
	InputImpedance     []float64 `json:"input_impedance_ohm,omitzero"`
}

// encodeCurves shows the responses with six significant digits; the exact model's
// where nothing else is said. Closed-loop responses are left out where the loop is
// unstable, input impedances where there is no source.
func encodeCurves(r *service.LoopRequest, x *service.LoopItem) *LoopCurves {
	gains := make([]complex128, len(x.Bode))
	of := func(pick func(b *loop.Bode) complex128) []complex128 {
		for i := range x.Bode {
			gains[i] = pick(&x.Bode[i])
		}
		return gains
	}
	w := &LoopCurves{Frequency: rounded(r.Frequencies)}
	w.LoopGain, w.LoopPhase = response(of(func(b *loop.Bode) complex128 { return b.Sampled.Loop }), decibels)
	w.AveragedLoopGain, w.AveragedLoopPhase = response(of(func(b *loop.Bode) complex128 { return b.Averaged.Loop }), decibels)
	w.ControlGain, w.ControlPhase = transfer(of(func(b *loop.Bode) complex128 { return b.Sampled.Control }), decibels)
	w.LineGain, w.LinePhase = transfer(of(func(b *loop.Bode) complex128 { return b.Sampled.Line }), decibels)
	w.CompensatorGain, w.CompensatorPhase = response(x.Network, decibels)
	w.Impedance, w.ImpedancePhase = transfer(of(func(b *loop.Bode) complex128 { return b.Sampled.Impedance }), plainSize)
	if x.Margins.Stability == loop.Stable {
		w.ClosedImpedance, w.ClosedPhase = transfer(of(func(b *loop.Bode) complex128 { return b.Sampled.ClosedImpedance }), plainSize)
		w.Susceptibility, w.SusceptibilityTurn = transfer(of(func(b *loop.Bode) complex128 { return b.Sampled.ClosedLine }), decibels)
	}
	if s := x.Source; s != nil {
		for i := range s.Curve {
			gains[i] = s.Curve[i].Source
		}
		w.SourceImpedance, _ = transfer(gains, plainSize)
		for i := range s.Curve {
			gains[i] = s.Curve[i].Closed
		}
		w.InputImpedance, _ = transfer(gains, plainSize)
	}
	return w
}

func decibels(size float64) float64 { return 20 * math.Log10(size) }

func plainSize(size float64) float64 { return size }

// boundless is the magnitude from which an impedance is none: that of a stage which
// draws no current, where rounding leaves something.
const boundless = 1e12

// response returns magnitudes on a scale and unwrapped phases [deg]; nothing for a
// response that vanishes or has no bound somewhere, where it has neither.
func response(gains []complex128, scale func(float64) float64) (size, phase []float64) {
	size, phase = unwrapped(gains, scale)
	if size == nil {
		return nil, nil
	}
	return rounded(size), rounded(phase)
}

// transfer is response for what has no integrator: its phase begins in
// (-180°, 180°].
func transfer(gains []complex128, scale func(float64) float64) (size, phase []float64) {
	size, phase = unwrapped(gains, scale)
	if size == nil {
		return nil, nil
	}
	if phase[0] <= -180 {
		for i := range phase {
			phase[i] += 360
		}
	}
	return rounded(size), rounded(phase)
}

func unwrapped(gains []complex128, scale func(float64) float64) (size, phase []float64) {
	size, phase = make([]float64, len(gains)), make([]float64, len(gains))
	for i, g := range gains {
		size[i] = scale(cmplx.Abs(g))
		if !(math.Abs(size[i]) <= boundless) {
			return nil, nil
		}
	}
	loop.UnwrappedDeg(phase, gains)
	return size, phase
}
