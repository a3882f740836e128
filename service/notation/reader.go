package notation

import (
	"math"
	"regexp"
	"strconv"
	"strings"
)

type reader struct {
	Reading
	kind  Kind
	text  string // as given
	plain string // flattened, bytes at the same offsets; what has been read is blanked
}

// word is a piece of the text without separators.
type word struct {
	at   int
	text string
}

const decimal = `\d+(?:[.,]\d+)?|[.,]\d+`

var (
	unequal  = regexp.MustCompile(`([+-]) {0,3}(` + decimal + `) ?%? {0,3}/? {0,3}([+-]) {0,3}(` + decimal + `) ?%`)
	percent  = regexp.MustCompile(`(±|\+ ?/ {0,3}-|\+-)? ?(` + decimal + `) ?%`)
	absolute = regexp.MustCompile(`(±|\+ ?/ {0,3}-|\+-) ?(` + decimal + `) ?([A-Za-zµΩ]+)`)
	drift    = regexp.MustCompile(`(±|\+ ?/ {0,3}-|\+-)? ?(` + decimal + `) ?ppm(?: ?/ ?(?:K|°C|C)\b)?`)
	fraction = regexp.MustCompile(`(\d+) ?/ ?(\d+) ?W\b`)
	comma    = regexp.MustCompile(`\d+,\d+`)
	groups   = regexp.MustCompile(`^[1-9]\d{0,2},\d{3}$`)
	spaced   = regexp.MustCompile(`(?:^|[ ,;/|(])([1-9]\d{0,2} {1,3}\d{3})(?:[^\d.,]|$)`)
	bare     = regexp.MustCompile(`^[+-]?(?:\d+\.?\d*|\.\d+)$`)
	class    = regexp.MustCompile(`^(?:[XYZ][2-9][A-Z]|[CUPRSTM][0-9][GHJK]|NP0|NPO|COG)$`)
)

var packages = map[string]bool{
	"01005": true, "0201": true, "0402": true, "0603": true, "0805": true, "1206": true, "1210": true,
	"1808": true, "1812": true, "2010": true, "2220": true, "2225": true, "2512": true,
}

func (r *reader) read() *Problem {
	var absoluteTolerance *word
	if p := r.tolerances(&absoluteTolerance); p != nil {
		return p
	}
	if p := r.commas(); p != nil {
		return p
	}
	if at := spaced.FindStringSubmatchIndex(r.plain); at != nil {
		return r.problem(word{at[2], r.plain[at[2]:at[3]]}, "does the space separate thousands, or two numbers?")
	}
	var first *Problem // a bare number that may have been meant as the value
	valueAt := -1
	for _, w := range r.words() {
		if r.rating(w) {
			continue
		}
		value, letter, p := r.value(w)
		switch {
		case p != nil:
			return p
		case !math.IsNaN(value) && valueAt >= 0:
			return r.problem(w, "a second value; which one holds?")
		case !math.IsNaN(value):
			r.Value, valueAt = value, w.at
			if letter != 0 {
				if p := r.letter(w, letter); p != nil {
					return p
				}
			}
		case valueAt >= 0 && len(w.text) == 1 && toleranceLetter(w.text[0]):
			if p := r.letter(w, w.text[0]); p != nil {
				return p
			}
		case class.MatchString(strings.ToUpper(w.text)):
			r.Dielectric = dielectric(strings.ToUpper(w.text))
		case packages[w.text]:
			r.Package = w.text
		default:
			if bare.MatchString(w.text) && first == nil {
				first = r.problem(w, "a bare number: neither a unit nor a multiplier letter says what it is")
			}
			r.Rest = append(r.Rest, w.text)
		}
	}
	if valueAt < 0 {
		if first != nil {
			return first
		}
		return &Problem{0, r.text, "no " + r.kind.String() + " value in it"}
	}
	if absoluteTolerance != nil {
		return r.absolute(*absoluteTolerance)
	}
	return nil
}

func dielectric(code string) string {
	switch code {
	case "NP0", "NPO", "COG":
		return "C0G"
	}
	return code
}

func (r *reader) problem(w word, detail string) *Problem {
	return &Problem{w.at, r.text[w.at : w.at+len(w.text)], detail}
}

// words splits what is left at spaces and separators, and joins a number with
// the unit that follows it.
func (r *reader) words() []word {
	var list []word
	start := -1
	flush := func(end int) {
		if start >= 0 {
			list = append(list, word{start, r.plain[start:end]})
			start = -1
		}
	}
	for i, c := range r.plain {
		if strings.ContainsRune(" ,;/|()[]", c) {
			flush(i)
		} else if start < 0 {
			start = i
		}
	}
	flush(len(r.plain))
	var joined []word
	for i := 0; i < len(list); i++ {
		w := list[i]
		if i+1 < len(list) && bare.MatchString(w.text) && isUnit(list[i+1].text) && (!packages[w.text] || len(list[i+1].text) > 1) && strings.TrimSpace(r.plain[w.at+len(w.text):list[i+1].at]) == "" {
			next := list[i+1]
			w.text = r.plain[w.at : next.at+len(next.text)]
			i++
		}
		joined = append(joined, w)
	}
	return joined
}

// isUnit reports whether a word is a unit, with or without a prefix.
func isUnit(s string) bool {
	switch strings.ToLower(s) {
	case "r", "k", "m", "g", "ω", "kω", "mω", "gω", "ohm", "ohms", "kohm", "kohms", "mohm", "mohms", "gohm",
		"p", "n", "u", "µ", "f", "pf", "nf", "uf", "µf", "mf", "mfd", "h", "nh", "uh", "µh", "mh", "ph",
		"v", "kv", "mv", "vdc", "vac", "a", "ma", "adc", "w", "mw":
		return true
	}
	return false
}

// commas turns decimal commas into points and points at those that may separate
// thousands.
func (r *reader) commas() *Problem {
	for _, at := range comma.FindAllStringIndex(r.plain, -1) {
		text := r.plain[at[0]:at[1]]
		if at[0] > 0 && isLetter(r.plain[at[0]-1]) { // 4u7,16V: it separates
			continue
		}
		if groups.MatchString(text) {
			return r.problem(word{at[0], text}, "is the comma a decimal comma or does it separate thousands?")
		}
		if at[0] > 0 && r.plain[at[0]-1] == '.' {
			return r.problem(word{at[0], text}, "a point and a comma in one number")
		}
		r.plain = r.plain[:at[0]] + strings.Replace(text, ",", ".", 1) + r.plain[at[1]:]
	}
	return nil
}

// rating reads a rated voltage, current or power.
func (r *reader) rating(w word) bool {
	t := strings.ReplaceAll(w.text, " ", "")
	number, unit := split(t)
	switch unit {
	case "":
		return false
	case "VAC", "Vac", "V~":
		r.Doubts = append(r.Doubts, *r.problem(w, "a rating for alternating voltage; the direct rating is not told"))
		return true
	case "V", "VDC", "Vdc", "v":
		return set(&r.Voltage, number, "")
	case "kV", "KV", "kVDC":
		return set(&r.Voltage, number, "e3")
	case "A", "ADC", "a":
		return set(&r.Current, number, "")
	case "mA":
		return set(&r.Current, number, "e-3")
	case "W":
		return set(&r.Power, number, "")
	case "mW":
		return set(&r.Power, number, "e-3")
	}
	if before, after, ok := strings.Cut(t, "V"); ok && digits(before) && digits(after) { // 6V3
		return set(&r.Voltage, before+"."+after, "")
	}
	return false
}

func set(to *float64, number, exponent string) bool {
	v, err := strconv.ParseFloat(number+exponent, 64)
	if err != nil || math.IsInf(v, 0) {
		return false
	}
	*to = v
	return true
}

// split parts a text into the number it begins with and what follows.
func split(t string) (number, rest string) {
	i := 0
	for i < len(t) && (t[i] >= '0' && t[i] <= '9' || t[i] == '.') {
		i++
	}
	return t[:i], t[i:]
}

func isLetter(c byte) bool { return c >= 'A' && c <= 'Z' || c >= 'a' && c <= 'z' || c >= 0x80 }

func digits(s string) bool {
	for i := range len(s) {
		if s[i] < '0' || s[i] > '9' {
			return false
		}
	}
	return s != ""
}
