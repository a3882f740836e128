package notation

import (
	"math"
	"strconv"
	"strings"
)

// value reads a word as the component's value with the tolerance letter behind
// it, 0 for none; NaN if the word is no value.
func (r *reader) value(w word) (value float64, letter byte, _ *Problem) {
	t := strings.ReplaceAll(w.text, " ", "")
	number, rest := split(t)
	if rest == "" || strings.Count(number, ".") > 1 {
		return math.NaN(), 0, nil
	}
	if v, ok, p := r.exponent(w, number, rest); ok || p != nil {
		return v, 0, p
	}
	if exponent, ok, p := r.symbol(w, rest); p != nil && number != "" {
		return 0, 0, p
	} else if ok && number != "" {
		return r.number(w, number, exponent)
	}
	return r.code(w, number, rest)
}

func (r *reader) number(w word, mantissa string, exponent string) (float64, byte, *Problem) {
	v, err := strconv.ParseFloat(mantissa+exponent, 64)
	if err != nil || math.IsInf(v, 0) {
		return 0, 0, r.problem(w, "not a number that can be used")
	}
	return v, 0, nil
}

// exponent reads 4.7e-6F; the unit must stand, or 4E7 could mean two things.
func (r *reader) exponent(w word, number, rest string) (float64, bool, *Problem) {
	if number == "" || rest[0] != 'e' && rest[0] != 'E' {
		return 0, false, nil
	}
	tail := strings.TrimLeft(rest[1:], "+-")
	power, unit := split(tail)
	sign := rest[1 : len(rest)-len(tail)]
	if len(sign) > 1 || !digits(power) || len(power) > 3 {
		return 0, false, nil
	}
	if !strings.EqualFold(unit, r.kind.symbol()) && (r.kind != Resistor || !strings.EqualFold(unit, "ohm")) {
		return 0, false, r.problem(w, "an exponent, or a letter in the place of the decimal point? Write the unit behind it")
	}
	v, _, p := r.number(w, number, "e"+sign+power)
	return v, true, p
}

// symbol reads what stands behind a number as SI prefix and unit. ok is false if
// it is neither.
func (r *reader) symbol(w word, s string) (exponent string, ok bool, _ *Problem) {
	unsure := func(detail string) (string, bool, *Problem) { return "", false, r.problem(w, detail) }
	switch r.kind {
	case Resistor:
		switch s {
		case "R", "r", "Ω", "Ohm", "ohm", "OHM", "Ohms", "ohms", "OHMS":
			return "", true, nil
		case "k", "K", "kΩ", "KΩ", "kOhm", "kohm", "KOhm", "Kohm", "KOHM", "kOhms", "kohms":
			return "e3", true, nil
		case "M", "MΩ", "MOhm", "Mohm", "MOhms":
			return "e6", true, nil
		case "mΩ", "mOhm", "mohm", "mOhms", "mohms", "L":
			return "e-3", true, nil
		case "µΩ", "uΩ", "uOhm", "uohm":
			return "e-6", true, nil
		case "G", "GΩ", "GOhm", "Gohm":
			return "e9", true, nil
		case "m":
			return unsure("m is milli and M is mega, a factor of 1e9: write mΩ or MΩ")
		case "MOHM", "MOHMS":
			return unsure("in capitals this may be milliohm or megohm")
		}
	case Capacitor:
		switch s {
		case "p", "P", "pF", "PF", "pf":
			return "e-12", true, nil
		case "n", "N", "nF", "NF", "nf":
			return "e-9", true, nil
		case "u", "U", "µ", "uF", "UF", "uf", "µF", "µf":
			return "e-6", true, nil
		case "m", "mF":
			return "e-3", true, nil
		case "F":
			return "", true, nil
		case "M", "MF", "mf", "MFD", "mfd":
			return unsure("M may stand for micro or mega, mf for micro or milli: write µF or mF")
		case "K", "k", "KPF", "kpF":
			return unsure("a kilo of what? Write nF")
		}
	case Inductor:
		switch s {
		case "pH":
			return "e-12", true, nil
		case "n", "N", "nH", "NH", "nh":
			return "e-9", true, nil
		case "u", "U", "µ", "uH", "UH", "uh", "µH", "µh":
			return "e-6", true, nil
		case "m", "mH":
			return "e-3", true, nil
		case "H":
			return "", true, nil
		case "M", "MH", "mh":
			return unsure("M is no prefix of an inductance; write mH or µH")
		case "R", "K":
			return unsure("makers' codes use this letter for different units; write µH or nH")
		}
	}
	return "", false, nil
}

// code reads a letter-and-digit code of IEC 60062: the letter stands where the
// decimal point would be, and a letter at the end is the tolerance.
func (r *reader) code(w word, before, rest string) (float64, byte, *Problem) {
	none := math.NaN()
	if strings.Contains(before, ".") {
		return none, 0, nil
	}
	size := 1
	if strings.HasPrefix(rest, "µ") {
		size = len("µ")
	}
	mark, tail := rest[:size], rest[size:]
	after, end := split(tail)
	if strings.Contains(after, ".") || len(end) > 1 || before == "" && after == "" {
		return none, 0, nil
	}
	if before == "" && end == "" && mark != "R" && mark != "r" && mark != "p" && mark != "n" && mark != "u" && mark != "µ" && mark != "L" {
		return none, 0, nil // M6, C12: a screw or a reference designator
	}
	var letter byte
	if end != "" {
		letter = end[0]
		unit := strings.EqualFold(end, r.kind.symbol())
		switch {
		case unit && toleranceLetter(letter):
			r.Doubts = append(r.Doubts, *r.problem(w, "F at the end is the tolerance letter of 1 % or the unit farad"))
			letter = 0
		case unit:
			letter = 0
		case !toleranceLetter(letter):
			return none, 0, nil
		}
	}
	exponent, ok, p := r.symbol(w, mark)
	if p != nil {
		return 0, 0, p
	}
	if !ok || mark == "Ω" {
		return none, 0, nil
	}
	if before == "" {
		before = "0"
	}
	v, _, p := r.number(w, before+"."+after+"0", exponent)
	return v, letter, p
}
