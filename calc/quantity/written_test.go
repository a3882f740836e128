package quantity_test

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/quantity"
)

func TestFiguresInSentences(t *testing.T) {
	for _, c := range []struct {
		value      float64
		unit, want string
	}{
		{2.825e-7, "s", "282.5 ns"},
		{999.97e-9, "s", "1 µs"},
		{77930, "Hz", "77.93 kHz"},
		{0.03, "V", "30 mV"},
		{-0.02783, "1", "-0.02783"},
		{121.46, "Cel", "121.5 °C"},
		{45, "deg", "45°"},
		{6.247, "dB", "6.247 dB"},
		{0.0045, "Ohm", "4.5 mΩ"},
		{3.1536e8, "s", "87600 h"},
		{120, "s", "120 s"},
		{0, "A", "0 A"},
		{4.7e-6, "F", "4.7 µF"},
		{999e-9, "F", "999 nF"},
		{1e-3, "F", "1 mF"},
		{1e-18, "F", "0.001 fF"},
		{3e15, "W", "3000 TW"},
		{math.Inf(1), "V", "+Inf V"},
		{2.1e-5, "m2", "2.1e-05 m²"},
	} {
		require.Equal(t, c.want, quantity.Written(c.value, c.unit))
	}
}
