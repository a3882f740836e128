package wire

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestRippleOnAVoltageKeepsFourDigits(t *testing.T) {
	ripple := func(mean, size float64) []float64 {
		list := make([]float64, 50)
		for i := range list {
			list[i] = mean + size/2*math.Sin(float64(i)/4)
		}
		return list
	}
	for _, c := range []struct {
		name       string
		mean, size float64
		apart      float64 // greatest distance from the value itself
	}{
		{"millivolts on volts", 5, 4e-3, 1e-4 * 4e-3},
		{"a tenth of a millivolt on twelve volts", 12, 1e-4, 1e-4 * 1e-4},
		{"a current about zero", 0, 3, 1e-5},
		{"still but for rounding", 3.3, 1e-15, 1e-11},
		{"still", 3.3, 0, 1e-5},
	} {
		values := ripple(c.mean, c.size)
		for i, v := range waveform(values) {
			require.InDelta(t, values[i], v, c.apart, c.name)
		}
	}
	require.Equal(t, []float64{1.23457, -0.5}, waveform([]float64{1.23456789, -0.5}), "no more digits than are needed")
	require.Empty(t, waveform(nil))
}
