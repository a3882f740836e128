package wire

import (
	"math"
	"strconv"

	"railproof/calc/switched"
)

// Waveforms hold one period, columnar. Where a curve jumps, the same instant
// stands twice.
type Waveforms struct {
	Time            []float64   `json:"time_s"`
	Inductor        [][]float64 `json:"inductor_a"`
	SwitchNode      [][]float64 `json:"switch_node_v"`
	Output          []float64   `json:"output_v"`
	Input           []float64   `json:"input_a"`
	InputVoltage    []float64   `json:"input_v,omitzero"`
	OutputCapacitor [][]float64 `json:"output_capacitor_a"`
	InputCapacitor  [][]float64 `json:"input_capacitor_a"`
}

// encodeWaveform shows a waveform with few significant digits. bridge is the mean
// voltage at the input capacitors [V].
func encodeWaveform(w *switched.Waveform, bridge float64) *Waveforms {
	if w == nil {
		return nil
	}
	out := &Waveforms{
		Time: rounded(w.Time), Inductor: waveforms(w.Inductor), SwitchNode: waveforms(w.SwitchNode), Output: waveform(w.Output),
		Input: waveform(w.Input), OutputCapacitor: waveforms(w.BankCurrent), InputCapacitor: waveforms(w.InputCurrent),
	}
	if w.InputNode != nil {
		out.InputVoltage = waveform(raised(w.Time, w.InputNode, bridge))
	}
	return out
}

// raised shifts a sampled curve so that its mean over time is the given one.
func raised(time, curve []float64, mean float64) []float64 {
	area := 0.0
	for k := 1; k < len(curve); k++ {
		area += (time[k] - time[k-1]) * (curve[k] + curve[k-1]) / 2
	}
	shift := mean - area/(time[len(time)-1]-time[0])
	up := make([]float64, len(curve))
	for k, v := range curve {
		up[k] = v + shift
	}
	return up
}

func waveforms(curves [][]float64) [][]float64 {
	out := make([][]float64, len(curves))
	for i, c := range curves {
		out[i] = waveform(c)
	}
	return out
}

// Digits of a curve: what a picture or a comparison needs, at two thirds of the
// bytes of full precision.
const (
	curveDigits = 6  // [1] of the values
	swingDigits = 4  // [1] of the difference between the least and the greatest
	mostDigits  = 12 // [1] beyond them there is rounding only
)

// rounded returns the numbers nearest to the values that have six significant
// digits.
func rounded(values []float64) []float64 { return roundedTo(values, curveDigits) }

// waveform returns the values of a waveform with six significant digits, or as many
// more as its swing needs: ripple of millivolts on volts is a curve, not a
// staircase.
func waveform(values []float64) []float64 {
	size, least, most := 0.0, math.Inf(1), math.Inf(-1)
	for _, v := range values {
		size, least, most = max(size, math.Abs(v)), min(least, v), max(most, v)
	}
	digits := curveDigits
	if most > least {
		digits = min(mostDigits, max(digits, swingDigits+int(math.Ceil(math.Log10(size/(most-least))))))
	}
	return roundedTo(values, digits)
}

// roundedTo returns the numbers nearest to the values that have so many significant
// digits.
func roundedTo(values []float64, digits int) []float64 {
	out := make([]float64, len(values))
	var text [32]byte
	for i, v := range values {
		short, err := strconv.ParseFloat(string(strconv.AppendFloat(text[:0], v, 'e', digits-1, 64)), 64)
		if err != nil {
			panic("wire: a number that cannot be read back")
		}
		out[i] = short
	}
	return out
}
