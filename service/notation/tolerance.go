package notation

import (
	"math"
	"strconv"
	"strings"
)

// symmetric holds the tolerance letters of IEC 60062, in per cent.
var symmetric = map[byte]float64{
	'E': 0.005, 'L': 0.01, 'P': 0.02, 'W': 0.05, 'B': 0.1, 'C': 0.25, 'D': 0.5, 'F': 1, 'G': 2, 'J': 5, 'K': 10, 'M': 20, 'N': 30,
}

// picofarads holds what the same letters mean for capacitors below 10 pF.
var picofarads = map[byte]float64{'B': 0.1, 'C': 0.25, 'D': 0.5, 'F': 1, 'G': 2}

// asymmetric holds the letters with two different sides, in per cent below and
// above.
var asymmetric = map[byte][2]float64{'Q': {10, 30}, 'T': {10, 50}, 'S': {20, 50}, 'Z': {20, 80}}

func toleranceLetter(c byte) bool {
	_, two := asymmetric[c]
	_, one := symmetric[c]
	return one || two
}

// letter sets the tolerance that a letter stands for.
func (r *reader) letter(w word, c byte) *Problem {
	if pf, ok := picofarads[c]; ok && r.kind == Capacitor && r.Value < 10e-12 {
		if !(r.Value > 0) {
			return nil
		}
		return r.tolerance(w, pf*1e-12/r.Value, pf*1e-12/r.Value)
	}
	if two, ok := asymmetric[c]; ok {
		return r.tolerance(w, two[0]/100, two[1]/100)
	}
	return r.tolerance(w, symmetric[c]/100, symmetric[c]/100)
}

// tolerance sets the tolerance; a second one that says something else is pointed
// at.
func (r *reader) tolerance(w word, low, high float64) *Problem {
	const same = 1e-9
	if !math.IsNaN(r.ToleranceLow) && (math.Abs(r.ToleranceLow-low) > same || math.Abs(r.ToleranceHigh-high) > same) {
		return r.problem(w, "a second tolerance that differs from the first")
	}
	r.ToleranceLow, r.ToleranceHigh = low, high
	return nil
}

// tolerances reads and blanks everything written as a tolerance with a sign or in
// per cent. An absolute one waits for the value.
func (r *reader) tolerances(absoluteAt **word) *Problem {
	for {
		at := unequal.FindStringSubmatchIndex(r.plain)
		if at == nil {
			break
		}
		w := word{at[0], r.plain[at[0]:at[1]]}
		signs := r.plain[at[2]:at[3]] + r.plain[at[6]:at[7]]
		a, b := ratio(r.plain[at[4]:at[5]]), ratio(r.plain[at[8]:at[9]])
		switch signs {
		case "+-":
			a, b = b, a
		case "-+":
		default:
			return r.problem(w, "a tolerance with two equal signs")
		}
		if p := r.tolerance(w, a, b); p != nil {
			return p
		}
		r.blank(at[0], at[1])
	}
	for {
		at := percent.FindStringSubmatchIndex(r.plain)
		if at == nil {
			break
		}
		w := word{at[0], r.plain[at[0]:at[1]]}
		if at[0] > 0 && !strings.ContainsRune(" ,;/|()", rune(r.plain[at[0]-1])) && at[2] < 0 && r.plain[at[0]] != ' ' {
			return r.problem(w, "a percentage that is not set off from what stands before it")
		}
		v := ratio(r.plain[at[4]:at[5]])
		if p := r.tolerance(w, v, v); p != nil {
			return p
		}
		r.blank(at[0], at[1])
	}
	if at := drift.FindStringIndex(r.plain); at != nil { // a temperature coefficient
		r.Rest = append(r.Rest, strings.TrimSpace(r.plain[at[0]:at[1]]))
		r.blank(at[0], at[1])
	}
	if at := fraction.FindStringSubmatchIndex(r.plain); at != nil {
		n, _ := strconv.ParseFloat(r.plain[at[2]:at[3]], 64)
		d, _ := strconv.ParseFloat(r.plain[at[4]:at[5]], 64)
		if n/d > 0 && !math.IsInf(n/d, 0) {
			r.Power = n / d
			r.blank(at[0], at[1])
		}
	}
	if at := absolute.FindStringSubmatchIndex(r.plain); at != nil {
		w := word{at[4], r.plain[at[4]:at[1]]}
		*absoluteAt = &w
		r.blank(at[0], at[1])
	}
	return nil
}

// absolute reads ±0.25pF.
func (r *reader) absolute(w word) *Problem {
	t := strings.ReplaceAll(strings.ReplaceAll(w.text, " ", ""), ",", ".")
	number, unit := split(t)
	exponent, ok, p := r.symbol(w, unit)
	if p != nil {
		return p
	}
	if !ok {
		return r.problem(w, "a tolerance in a unit that is not the value's")
	}
	v, _, p := r.number(w, number, exponent)
	if p != nil {
		return p
	}
	if !(r.Value > 0) {
		return r.problem(w, "a tolerance of a value that is zero")
	}
	return r.tolerance(w, v/r.Value, v/r.Value)
}

// ratio reads a percentage.
func ratio(text string) float64 {
	v, err := strconv.ParseFloat(strings.Replace(text, ",", ".", 1), 64)
	if err != nil {
		return math.NaN()
	}
	return v / 100
}

func (r *reader) blank(from, to int) {
	r.plain = r.plain[:from] + strings.Repeat(" ", to-from) + r.plain[to:]
}
