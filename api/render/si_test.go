package render

import (
	"math"
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/stretchr/testify/require"
)

func TestFigure3(t *testing.T) {
	cases := []struct {
		v    float64
		unit string
		want string
	}{
		{6.5789e-6, "H", "6.58 µH"},
		{4.266e-7, "s", "427 ns"},
		{0.93875, "1", "0.939"},
		{24, "V", "24.0 V"},
		{999.6, "V", "1.00 kV"},
		{999.4, "V", "999 V"},
		{0, "A", "0 A"},
		{-0.0123, "A", "-12.3 mA"},
		{20478.999, "W/m3", "20.5 kW/m³"},
		{74.305, "Cel", "74.3 °C"},
		{500e3, "Hz", "500 kHz"},
		{4.7e-16, "1", "4.70e-16"},
		{3.6e7, "s", "10000 h"},
		{1e-17, "F", "0.0100 fF"},
		{5e15, "W", "5000 TW"},
		{math.NaN(), "V", "-"},
		{120, "deg", "120°"},
		{2.1e-5, "m2", "21.0 mm²"},
		{0.0123, "m2", "123 cm²"},
		{8e-7, "m3", "800 mm³"},
		{1.5e-6, "m3", "1.50 cm³"},
		{0, "m2", "0 m²"},
	}
	for _, c := range cases {
		require.Equal(t, c.want, Figure3(c.v, c.unit))
	}
}

func TestPageKeepsItsWidth(t *testing.T) {
	p := new(page)
	p.wrapped(strings.Repeat("über die ", 60), "  ")
	p.table([]align{left, right}, []string{"a", "b"}, [][]string{{strings.Repeat("x", 150), "1"}, {"µ", "22"}})
	for line := range strings.Lines(p.b.String()) {
		require.LessOrEqual(t, utf8.RuneCountInString(strings.TrimRight(line, "\n")), width)
		require.Equal(t, strings.TrimRight(line, " \n"), strings.TrimRight(line, "\n"), "no trailing blanks")
	}
}

func TestSpreadsheetFormulasAreDisarmed(t *testing.T) {
	for given, want := range map[string]string{"=1+1": "'=1+1", "+x": "'+x", "-x": "'-x", "@x": "'@x", "\tx": "'\tx", "plain": "plain", "": "", "a=b": "a=b", " =1+1": "' =1+1", "\r\n@x": "'\r\n@x", "＝1": "'＝1", "  two": "  two", "\n": "'\n"} {
		require.Equal(t, want, words(given))
	}
}
