package render

import (
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/plot/vg"
)

// scale maps the values of one quantity to a stretch of the picture.
type scale struct {
	name, unit string // unit: UCUM code
	log        bool
	least      float64
	greatest   float64
}

// ranged returns a scale over all finite values, with room at both ends. A scale
// without width is widened about its value.
func ranged(name, unit string, values ...[]float64) scale {
	s := scale{name: name, unit: unit, least: math.Inf(1), greatest: math.Inf(-1)}
	for _, list := range values {
		for _, v := range list {
			if !math.IsNaN(v) && !math.IsInf(v, 0) {
				s.least, s.greatest = min(s.least, v), max(s.greatest, v)
			}
		}
	}
	if s.least > s.greatest {
		s.least, s.greatest = 0, 1
	}
	return s
}

// flattest is the least width of a scale, relative to its values: below it there
// is nothing but rounding.
const flattest = 1e-6

func (s scale) opened() scale {
	size := max(math.Abs(s.least), math.Abs(s.greatest))
	if size == 0 {
		size = 1
	}
	if s.greatest-s.least < flattest*size {
		middle := (s.least + s.greatest) / 2
		s.least, s.greatest = middle-0.05*size, middle+0.05*size
	}
	return s
}

// padded leaves room beyond the values, but none beyond zero where they keep to
// one side of it and reach near.
func (s scale) padded(share float64) scale {
	s = s.opened()
	if s.log {
		f := math.Pow(s.greatest/s.least, share)
		s.least, s.greatest = s.least/f, s.greatest*f
		return s
	}
	low, high := s.least, s.greatest
	room := share * (high - low)
	s.least, s.greatest = low-room, high+room
	if low >= 0 && s.least < 0 {
		s.least = 0
	}
	if high <= 0 && s.greatest > 0 {
		s.greatest = 0
	}
	return s
}

// logarithmic makes the scale logarithmic if its values are positive and span
// more than the ratio.
func (s scale) logarithmic(ratio float64) scale {
	s.log = s.least > 0 && s.greatest/s.least > ratio
	return s
}

// norm returns the place of a value between 0 and 1.
func (s *scale) norm(v float64) float64 {
	if s.log {
		if !(v > 0) {
			return math.Inf(-1)
		}
		return math.Log(v/s.least) / math.Log(s.greatest/s.least)
	}
	return (v - s.least) / (s.greatest - s.least)
}

// tick is a place on a scale; without a label it is a minor one.
type tick struct {
	at    float64
	label string
}

// ticks returns about as many labelled places as fit, and the power of ten that
// the labels are to be multiplied with.
func (s *scale) ticks(fit int) []tick {
	if s.log {
		if list := s.decades(fit); list != nil {
			return list
		}
	}
	factor, _ := s.prefix()
	step := s.step((s.greatest - s.least) / float64(max(fit, 1)))
	decimals := max(0, -int(math.Floor(math.Log10(step*factor)+1e-9)))
	var list []tick
	for i := math.Ceil(s.least/step - 1e-9); i*step <= s.greatest+1e-9*step; i++ {
		v := i * step
		if i == 0 {
			v = 0
		}
		label := strconv.FormatFloat(v*factor, 'f', min(decimals, 9), 64)
		if s.log {
			label = trimmed(Figure3(v, s.unit))
		}
		list = append(list, tick{v, strings.Replace(label, "-", "−", 1)})
	}
	return list
}

// decades returns the powers of ten with their unit, and the places between; nil
// where the scale spans less than about one.
func (s *scale) decades(fit int) []tick {
	from, to := int(math.Ceil(math.Log10(s.least)-1e-9)), int(math.Floor(math.Log10(s.greatest)+1e-9))
	if s.greatest < 8*s.least {
		return nil
	}
	every := 1 + max(to-from, 0)/max(fit, 1)
	var list []tick
	for d := from - 1; d <= to; d++ {
		for m := 1; m < 10; m++ {
			v := float64(m) * math.Pow10(d)
			if v < s.least*(1-1e-9) || v > s.greatest*(1+1e-9) {
				continue
			}
			label := ""
			if m == 1 && (d-from)%every == 0 || every == 1 && (to-from+1)*3 <= fit+1 && (m == 2 || m == 5) {
				label = trimmed(Figure3(v, s.unit))
			}
			list = append(list, tick{v, label})
		}
	}
	return list
}

// trimmed writes 1.00 kHz as 1 kHz.
func trimmed(s string) string {
	number, unit, found := strings.Cut(s, " ")
	if strings.Contains(number, ".") && !strings.ContainsAny(number, "e") {
		number = strings.TrimRight(strings.TrimRight(number, "0"), ".")
	}
	if !found {
		return number
	}
	return number + " " + unit
}

// step rounds a distance of labels up to one that reads well.
func (s *scale) step(least float64) float64 {
	if s.unit == "deg" && least > 5 {
		for _, degrees := range []float64{15, 30, 45, 90, 180, 360} {
			if least <= degrees {
				return degrees
			}
		}
	}
	return nice(least)
}

// nice rounds a step up to 1, 2 or 5 times a power of ten.
func nice(step float64) float64 {
	p := math.Pow10(int(math.Floor(math.Log10(step))))
	for _, m := range []float64{1, 2, 5} {
		if step <= m*p*(1+1e-9) {
			return m * p
		}
	}
	return 10 * p
}

// prefix returns what values are multiplied with for the labels, and the unit
// that the labels then have.
func (s *scale) prefix() (factor float64, symbol string) {
	u, known := peopleUnits[s.unit]
	if !known {
		u.symbol = s.unit
	}
	size := max(math.Abs(s.least), math.Abs(s.greatest))
	if s.unit == "h" && size >= 1e6 {
		return 1e-6, "million h"
	}
	if s.unit == "1" || s.unit == "" || !u.prefixed || size == 0 {
		return 1, u.symbol
	}
	i := min(max(int(math.Floor(math.Log10(size)/3+1e-9))+basePrefix, 0), len(prefixes)-1)
	return math.Pow10(-3 * (i - basePrefix)), prefixes[i] + u.symbol
}

// titled is the name with the unit of the labels.
func (s *scale) titled() string {
	if s.log {
		return s.name
	}
	if _, symbol := s.prefix(); symbol != "" {
		return s.name + " (" + symbol + ")"
	}
	return s.name
}

// along places values on a stretch.
func (s *scale) along(from, to vg.Length) func(float64) vg.Length {
	return func(v float64) vg.Length { return from + vg.Length(s.norm(v))*(to-from) }
}
