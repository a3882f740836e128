package notation

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/quantity"
)

var nan = math.NaN()

func TestPublishedCodes(t *testing.T) {
	raw, err := os.ReadFile("../../tests/reference/power-stage.json")
	require.NoError(t, err)
	var cases []struct {
		ID       string          `json:"id"`
		Inputs   json.RawMessage `json:"inputs"`
		Expected []struct {
			Name  string          `json:"name"`
			Value json.RawMessage `json:"value"`
		} `json:"expected"`
	}
	require.NoError(t, json.Unmarshal(raw, &cases))
	found := 0
	for _, c := range cases {
		switch c.ID {
		case "ps-st-03":
			found++
			var in struct {
				Codes []string `json:"codes"`
			}
			var want []float64
			require.NoError(t, json.Unmarshal(c.Inputs, &in))
			require.NoError(t, json.Unmarshal(c.Expected[0].Value, &want))
			for i, code := range in.Codes {
				kind := Resistor
				if i >= len(in.Codes)-3 {
					kind = Capacitor
				}
				got, err := Read(kind, code)
				require.NoError(t, err, code)
				require.Equal(t, want[i], got.Value, code)
			}
		case "ps-st-04":
			found++
			var in struct {
				Symmetric  map[string]float64    `json:"symmetric_percent"`
				Picofarads map[string]float64    `json:"capacitor_below_10pf_absolute_pf"`
				Asymmetric map[string][2]float64 `json:"asymmetric_percent"`
			}
			require.NoError(t, json.Unmarshal(c.Inputs, &in))
			for letter, percent := range in.Symmetric {
				got, err := Read(Resistor, "4K7"+letter)
				require.NoError(t, err, letter)
				require.Equal(t, 4700.0, got.Value)
				require.InDelta(t, percent/100, got.ToleranceHigh, 1e-12, letter)
				require.InDelta(t, percent/100, got.ToleranceLow, 1e-12, letter)
			}
			for letter, pf := range in.Picofarads {
				got, err := Read(Capacitor, "4p7 "+letter)
				require.NoError(t, err, letter)
				require.InDelta(t, pf/4.7, got.ToleranceHigh, 1e-12, letter)
			}
			for letter, percent := range in.Asymmetric {
				got, err := Read(Capacitor, "4u7"+letter)
				require.NoError(t, err, letter)
				require.InDelta(t, -percent[0]/100, got.ToleranceLow, 1e-12, letter)
				require.InDelta(t, percent[1]/100, got.ToleranceHigh, 1e-12, letter)
			}
		}
	}
	require.Equal(t, 2, found)
}

func TestRead(t *testing.T) {
	type want struct{ value, low, high, volt, amp, watt float64 }
	cases := []struct {
		kind Kind
		text string
		want want
		more string // dielectric and package
	}{
		{Capacitor, "4u7", want{4.7e-6, nan, nan, nan, nan, nan}, ""},
		{Capacitor, "4.7 µF 20% 16 V", want{4.7e-6, 0.2, 0.2, 16, nan, nan}, ""},
		{Capacitor, "4.7 \u03bcF 20% 16 V", want{4.7e-6, 0.2, 0.2, 16, nan, nan}, ""},
		{Capacitor, "4.7\u00a0\u00b5F", want{4.7e-6, nan, nan, nan, nan, nan}, ""},
		{Capacitor, "4,7uF", want{4.7e-6, nan, nan, nan, nan, nan}, ""},
		{Capacitor, "4U7", want{4.7e-6, nan, nan, nan, nan, nan}, ""},
		{Capacitor, "4u7,16V,X5R", want{4.7e-6, nan, nan, 16, nan, nan}, "X5R"},
		{Capacitor, "CAP CER 22UF 6V3 X7R 1206 M", want{22e-6, 0.2, 0.2, 6.3, nan, nan}, "X7R 1206"},
		{Capacitor, "100nF/50V/X7R/0603", want{100e-9, nan, nan, 50, nan, nan}, "X7R 0603"},
		{Capacitor, "10pF", want{10e-12, nan, nan, nan, nan, nan}, ""},
		{Capacitor, "8.2pF ±0.25pF NP0", want{8.2e-12, 0.25 / 8.2, 0.25 / 8.2, nan, nan, nan}, "C0G"},
		{Capacitor, "470u -20/+80% 1kV", want{470e-6, 0.2, 0.8, 1000, nan, nan}, ""},
		{Capacitor, "10 µF +80 % −20 %", want{10e-6, 0.2, 0.8, nan, nan, nan}, ""},
		{Capacitor, "4.7e-6F", want{4.7e-6, nan, nan, nan, nan, nan}, ""},
		{Capacitor, "4n7J", want{4.7e-9, 0.05, 0.05, nan, nan, nan}, ""},
		{Capacitor, "2.2 F 2.7 V", want{2.2, nan, nan, 2.7, nan, nan}, ""},
		{Resistor, "2K2 1 %", want{2200, 0.01, 0.01, nan, nan, nan}, ""},
		{Resistor, "4K7K", want{4700, 0.1, 0.1, nan, nan, nan}, ""},
		{Resistor, "56.2k 1% 0402", want{56200, 0.01, 0.01, nan, nan, nan}, "0402"},
		{Resistor, "10 k\u2126 ± 0.1 %", want{10e3, 0.001, 0.001, nan, nan, nan}, ""},
		{Resistor, "10 k\u03a9", want{10e3, nan, nan, nan, nan, nan}, ""},
		{Resistor, "RES 0R010 1/4W 1%", want{0.01, 0.01, 0.01, nan, nan, 0.25}, ""},
		{Resistor, "5 mΩ 1 % 500mW", want{5e-3, 0.01, 0.01, nan, nan, 0.5}, ""},
		{Resistor, "2M2", want{2.2e6, nan, nan, nan, nan, nan}, ""},
		{Resistor, "R47 F", want{0.47, 0.01, 0.01, nan, nan, nan}, ""},
		{Resistor, "0R", want{0, nan, nan, nan, nan, nan}, ""},
		{Resistor, "4L7", want{4.7e-3, nan, nan, nan, nan, nan}, ""},
		{Resistor, "1K ±100ppm/K 0.5%", want{1000, 0.005, 0.005, nan, nan, nan}, ""},
		{Inductor, "6.8 µH 20% 12A", want{6.8e-6, 0.2, 0.2, nan, 12, nan}, ""},
		{Inductor, "4u7H", want{4.7e-6, nan, nan, nan, nan, nan}, ""},
		{Inductor, "IND PWR 680nH M 900mA", want{680e-9, 0.2, 0.2, nan, 0.9, nan}, ""},
		{Inductor, "1m0", want{1e-3, nan, nan, nan, nan, nan}, ""},
	}
	for _, c := range cases {
		t.Run(c.text, func(t *testing.T) {
			got, err := Read(c.kind, c.text)
			require.NoError(t, err)
			for i, pair := range [][2]float64{{got.Value, c.want.value}, {got.ToleranceLow, c.want.low}, {got.ToleranceHigh, c.want.high}, {got.Voltage, c.want.volt}, {got.Current, c.want.amp}, {got.Power, c.want.watt}} {
				require.True(t, math.IsNaN(pair[0]) && math.IsNaN(pair[1]) || math.Abs(pair[0]-pair[1]) <= 1e-12*math.Abs(pair[1]), "figure %d: got %g, want %g", i, pair[0], pair[1])
			}
			require.Equal(t, c.more, strings.TrimSpace(got.Dielectric+" "+got.Package))
			require.Empty(t, got.Doubts)
		})
	}
}

func TestAmbiguousTextIsPointedAt(t *testing.T) {
	cases := []struct {
		kind      Kind
		text, hit string
		offset    int
	}{
		{Resistor, "2m2 1%", "2m2", 0},
		{Resistor, "1% 10m", "10m", 3},
		{Resistor, "10 MOHM", "10 MOHM", 0},
		{Resistor, "470", "470", 0},
		{Resistor, "RES 4E7", "4E7", 4},
		{Resistor, "10,000 Ω", "10,000", 0},
		{Resistor, "10 200 Ω 1%", "10 200", 0},
		{Resistor, "RES 1\u00a0200 Ω", "1\u00a0200", 4},
		{Resistor, "4K7 10R", "10R", 4},
		{Resistor, "1K 5% 10%", " 10%", 5},
		{Capacitor, "2M2", "2M2", 0},
		{Capacitor, "CAP 475 16V", "475", 4},
		{Capacitor, "10MF 16V", "10MF", 0},
		{Capacitor, "10 mfd", "10 mfd", 0},
		{Capacitor, "4K7", "4K7", 0},
		{Capacitor, "10uF20%", "20%", 0},
		{Capacitor, "X7R 16V", "X7R 16V", 0},
		{Capacitor, "", "", 0},
		{Capacitor, "8.2pF ±0.25kg", "0.25kg", 8},
		{Inductor, "R47", "R47", 0},
		{Inductor, "10MH", "10MH", 0},
		{Inductor, "4.7 µF", "4.7 µF", 0},
	}
	for _, c := range cases {
		t.Run(c.kind.String()+"/"+c.text, func(t *testing.T) {
			got, err := Read(c.kind, c.text)
			require.Error(t, err, "read as %+v", got)
			var p *Problem
			require.ErrorAs(t, err, &p)
			require.NotEmpty(t, p.Detail)
			require.Contains(t, c.text, p.Text)
			require.Equal(t, p.Text, c.text[p.Offset:p.Offset+len(p.Text)])
			if c.hit != "20%" {
				require.Equal(t, c.hit, p.Text)
				require.Equal(t, c.offset, p.Offset)
			}
		})
	}
	got, err := Read(Capacitor, "4n7F")
	require.NoError(t, err)
	require.Equal(t, 4.7e-9, got.Value, "the value is clear")
	require.Len(t, got.Doubts, 1, "the last letter is not")
	require.True(t, math.IsNaN(got.ToleranceLow))
	got, err = Read(Capacitor, "100nF 250VAC")
	require.NoError(t, err)
	require.True(t, math.IsNaN(got.Voltage))
	require.Len(t, got.Doubts, 1)
}

// spell writes a value of three digits in one of the ways that people use.
func spell(r *rand.Rand, kind Kind, mantissa int, exponent int) (string, float64) {
	value, err := strconv.ParseFloat(fmt.Sprintf("%de%d", mantissa, exponent), 64)
	if err != nil {
		panic(err)
	}
	step := int(math.Floor((math.Log10(float64(mantissa)) + float64(exponent) + 1e-9) / 3))
	digits := strconv.Itoa(mantissa)
	point := len(digits) + exponent - 3*step // digits before the point
	for len(digits) < point {
		digits += "0"
	}
	whole, part := digits[:point], strings.TrimRight(digits[point:], "0")
	letters := map[Kind]map[int]string{
		Resistor:  {-1: "L", 0: "R", 1: "K", 2: "M", 3: "G"},
		Capacitor: {-4: "p", -3: "n", -2: "u", -1: "m"},
		Inductor:  {-3: "n", -2: "u", -1: "m"},
	}
	prefixes := map[int]string{-4: "p", -3: "n", -2: "µ", -1: "m", 0: "", 1: "k", 2: "M", 3: "G"}
	number := whole
	if part != "" {
		number += "." + part
	}
	way := r.IntN(5)
	if letters[kind][step] == "" { // no letter of the code says so much
		way = 1 + r.IntN(3)
	}
	switch way {
	case 0:
		return whole + letters[kind][step] + part, value
	case 1:
		return number + " " + prefixes[step] + kind.symbol(), value
	case 2:
		return strings.Replace(number, ".", ",", 1) + prefixes[step] + kind.symbol(), value
	case 3:
		return strings.Replace(number+prefixes[step]+kind.symbol(), "µ", "\u03bc", 1), value
	}
	return number + letters[kind][step], value
}

func TestRoundTripOfGeneratedNotations(t *testing.T) {
	r := rand.New(rand.NewPCG(60062, 2016))
	least := map[Kind]int{Resistor: -3, Capacitor: -12, Inductor: -9}
	decades := map[Kind]int{Resistor: 11, Capacitor: 11, Inductor: 8}
	percents := []string{"", " 1%", " 5 %", " ±10%", " +/-20 %", " -20/+80%", " J", " K"}
	low := []float64{nan, 0.01, 0.05, 0.1, 0.2, 0.2, 0.05, 0.1}
	high := []float64{nan, 0.01, 0.05, 0.1, 0.2, 0.8, 0.05, 0.1}
	for i := range 500 {
		kind := Kind(r.IntN(3))
		mantissa := 100 + r.IntN(900)
		text, value := spell(r, kind, mantissa, least[kind]+r.IntN(decades[kind])-2+2)
		if strings.Contains(text, ",") && len(text) > 5 && groups.MatchString(text[:min(len(text), 7)]) {
			continue
		}
		p := r.IntN(len(percents))
		text += percents[p]
		volt := nan
		if kind == Capacitor && r.IntN(2) == 0 {
			volt = float64(1 + r.IntN(99))
			text += fmt.Sprintf(" %g V", volt)
		}
		got, err := Read(kind, text)
		require.NoError(t, err, "%d: %s", i, text)
		require.InEpsilon(t, value, got.Value, 1e-12, "%d: %s", i, text)
		require.True(t, math.IsNaN(low[p]) == math.IsNaN(got.ToleranceLow), text)
		if !math.IsNaN(low[p]) {
			require.InDelta(t, low[p], got.ToleranceLow, 1e-12, text)
			require.InDelta(t, high[p], got.ToleranceHigh, 1e-12, text)
		}
		if !math.IsNaN(volt) {
			require.Equal(t, volt, got.Voltage, text)
		}
		// What is written for people can be read.
		written := quantity.Written(got.Value, kind.UCUM())
		again, err := Read(kind, written)
		require.NoError(t, err, written)
		require.InEpsilon(t, value, again.Value, 1e-12)
	}
}

// Whatever the text, the answer is either a usable value or a place in the text.
func FuzzRead(f *testing.F) {
	for _, s := range []string{"4u7", "4.7 µF 20% 16 V", "2K2 1 %", "-20/+80%", "±0.25pF 8p2", "1/4W 10R", "10,000", "\u2126\u03bc\u2212", "4E7", "R", "F", "٣ µF", "1e400F", "0.0000000pF ±1pF"} {
		for k := range 3 {
			f.Add(k, s)
		}
	}
	f.Fuzz(func(t *testing.T, kind int, text string) {
		got, err := Read(Kind(uint(kind)%3), text)
		if err != nil {
			var p *Problem
			if !errors.As(err, &p) || p.Detail == "" || p.Offset < 0 || p.Offset > len(text) {
				t.Fatalf("%q: problem without a place: %+v", text, p)
			}
			return
		}
		if math.IsNaN(got.Value) || math.IsInf(got.Value, 0) || got.Value < 0 {
			t.Fatalf("%q: value %g", text, got.Value)
		}
		for _, x := range []float64{got.ToleranceLow, got.ToleranceHigh, got.Voltage, got.Current, got.Power} {
			if math.IsInf(x, 0) || x < 0 {
				t.Fatalf("%q: %+v", text, got)
			}
		}
	})
}
