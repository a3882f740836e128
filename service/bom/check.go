package bom

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"railproof/calc/quantity"
	"railproof/calc/rules"
	"railproof/service/notation"
)

// Aspects in which a line can disagree with a proof.
const (
	AspectPresent    = "present"
	AspectCount      = "count"
	AspectValue      = "value"
	AspectTolerance  = "tolerance"
	AspectRating     = "rating"
	AspectKind       = "kind"
	AspectPartNumber = "part_number"
	AspectAlternate  = "alternate"
)

// Finding is one aspect of one line, or of a role where no line stands for it.
type Finding struct {
	Rail        string
	Role        string
	Row         int // 0 if the role as a whole is meant
	Designators []string
	Aspect      string
	Verdict     rules.Verdict
	Proven      string // for people, with its unit
	Found       string
	ProvenValue float64 // in Unit; only where Unit is given
	FoundValue  float64
	Unit        string // UCUM code
	Detail      string
}

// equal is the relative difference below which two nominal values are the same:
// well below the finest step of any preferred series, well above rounding.
const equal = 1e-4

// rounding is the relative excess that comes from decimal notation only.
const rounding = 1e-9

// judge compares one line with what was proven for its role.
func judge(rail string, e *Expectation, l *Line, bound []string) []Finding {
	c := comparison{base: Finding{Rail: rail, Role: e.Role, Row: l.Row, Designators: bound}}
	c.count(l)
	c.partNumber(e, l)
	if e.HasValue {
		c.values(e, l)
	}
	return c.found
}

type comparison struct {
	base   Finding
	found  []Finding
	proven bool // the line names the proven part: what it leaves unsaid is that part's
}

func (c *comparison) add(aspect string, v rules.Verdict, proven, found, detail string) {
	f := c.base
	f.Aspect, f.Verdict, f.Proven, f.Found, f.Detail = aspect, v, proven, found, detail
	c.found = append(c.found, f)
}

// figures adds numbers to the last finding.
func (c *comparison) figures(proven, found float64, unit string) {
	f := &c.found[len(c.found)-1]
	f.ProvenValue, f.FoundValue, f.Unit = proven, found, unit
}

// count compares the pieces that a line states with its designators.
func (c *comparison) count(l *Line) {
	if math.IsNaN(l.Count) {
		return
	}
	v, detail := rules.Pass, "as many pieces as designators"
	if l.Count != float64(len(l.Designators)) {
		v, detail = rules.Fail, "the line states another number of pieces than it has designators"
	}
	c.add(AspectCount, v, fmt.Sprint(len(l.Designators)), fmt.Sprint(l.Count), detail)
	c.figures(float64(len(l.Designators)), l.Count, "1")
}

func (c *comparison) partNumber(e *Expectation, l *Line) {
	switch {
	case e.PartNumber == "" && e.HasValue:
	case e.PartNumber == "":
		c.add(AspectPartNumber, rules.NotEvaluated, "", l.PartNumber, "the proof names no part number, and there is no value to compare")
	case l.PartNumber == e.PartNumber:
		c.add(AspectPartNumber, rules.Pass, e.PartNumber, l.PartNumber, "the part that was proven")
	case l.PartNumber == "":
		c.add(AspectPartNumber, rules.NotEvaluated, e.PartNumber, "", "the line names no part number")
	default:
		c.add(AspectPartNumber, rules.Fail, e.PartNumber, l.PartNumber, "not the part that was proven")
	}
}

func (c *comparison) values(e *Expectation, l *Line) {
	c.proven = e.PartNumber != "" && l.PartNumber == e.PartNumber
	if c.proven && l.Value == "" {
		return
	}
	text := strings.TrimSpace(l.Value + " " + l.Tolerance + " " + ratingText(e.Kind, l.Rating))
	r, err := notation.Read(e.Kind, text)
	if err != nil {
		detail := err.Error()
		var p *notation.Problem
		if errors.As(err, &p) {
			detail = fmt.Sprintf("%.60q: %s", p.Text, p.Detail)
		}
		c.add(AspectValue, rules.NotEvaluated, quantity.Written(e.Value, e.Kind.UCUM()), text, detail)
		return
	}
	c.value(e, &r)
	c.tolerance(e, &r, text)
	if e.Kind == notation.Inductor {
		c.current(e, &r, text)
	}
	if e.Kind == notation.Capacitor && !strings.HasPrefix(e.Role, "compensator/") {
		c.voltage(e, &r, text)
		c.dielectric(e, &r)
	}
}

// ratingText gives a bare number in the rating column of a capacitor its unit.
func ratingText(kind notation.Kind, cell string) string {
	if kind == notation.Capacitor && cell != "" && strings.Trim(cell, "0123456789.,") == "" {
		return cell + " V"
	}
	return cell
}

func (c *comparison) value(e *Expectation, r *notation.Reading) {
	unit := e.Kind.UCUM()
	proven, found := quantity.Written(e.Value, unit), quantity.Written(r.Value, unit)
	if math.Abs(r.Value-e.Value) <= equal*math.Abs(e.Value) {
		c.add(AspectValue, rules.Pass, proven, found, "the value that was proven")
		c.figures(e.Value, r.Value, e.Kind.UCUM())
		return
	}
	if !math.IsNaN(r.ToleranceLow) && inside(e, r) {
		c.add(AspectValue, rules.Pass, proven, found, "another value, but with its tolerance inside the range that was proven")
		c.figures(e.Value, r.Value, e.Kind.UCUM())
		return
	}
	c.add(AspectValue, rules.Fail, proven, found, "not the value that was proven")
	c.figures(e.Value, r.Value, e.Kind.UCUM())
}

// inside reports whether the reading's whole range lies in the proven one.
func inside(e *Expectation, r *notation.Reading) bool {
	low, high := r.Value*(1-r.ToleranceLow), r.Value*(1+r.ToleranceHigh)
	return low >= e.Min*(1-rounding) && high <= e.Max*(1+rounding)
}

func (c *comparison) tolerance(e *Expectation, r *notation.Reading, text string) {
	proven := between(e.Min/e.Value-1, e.Max/e.Value-1)
	switch {
	case math.IsNaN(r.ToleranceLow) && c.proven:
	case math.IsNaN(r.ToleranceLow):
		detail := "the line tells no tolerance"
		for i := range r.Doubts {
			detail += "; " + r.Doubts[i].Detail
		}
		c.add(AspectTolerance, rules.NotEvaluated, proven, text, detail)
	case inside(e, r):
		c.add(AspectTolerance, rules.Pass, proven, between(-r.ToleranceLow, r.ToleranceHigh), "inside the range that was proven")
	default:
		c.add(AspectTolerance, rules.Fail, proven, between(-r.ToleranceLow, r.ToleranceHigh), "the part may lie outside the range that was proven")
	}
}

// between prints a tolerance.
func between(low, high float64) string {
	if math.Abs(low+high) < rounding {
		return fmt.Sprintf("±%.4g %%", 100*high)
	}
	return fmt.Sprintf("%+.4g %% %+.4g %%", 100*low, 100*high)
}

func (c *comparison) voltage(e *Expectation, r *notation.Reading, text string) {
	proven := "unknown"
	if !math.IsNaN(e.Voltage) {
		proven = quantity.Written(e.Voltage, "V")
	}
	switch {
	case math.IsNaN(r.Voltage) && c.proven:
	case math.IsNaN(e.Voltage):
		c.add(AspectRating, rules.NotEvaluated, proven, text, "the proof has no voltage rating for this part")
	case math.IsNaN(r.Voltage):
		c.add(AspectRating, rules.NotEvaluated, proven, text, "the line tells no voltage rating")
	case r.Voltage >= e.Voltage*(1-rounding):
		c.add(AspectRating, rules.Pass, proven, quantity.Written(r.Voltage, "V"), "at least the rating that was proven")
		c.figures(e.Voltage, r.Voltage, "V")
	default:
		c.add(AspectRating, rules.Fail, proven, quantity.Written(r.Voltage, "V"), "less than the rating that was proven")
		c.figures(e.Voltage, r.Voltage, "V")
	}
}

// current compares the rated current of an inductor's line with the two that were
// proven, of which the line does not say which it means.
func (c *comparison) current(e *Expectation, r *notation.Reading, text string) {
	least, most := math.Min(e.Saturation, e.Heating), math.Max(e.Saturation, e.Heating)
	proven := quantity.Written(e.Saturation, "A") + " saturation, " + quantity.Written(e.Heating, "A") + " heating"
	switch {
	case math.IsNaN(r.Current) && c.proven:
		return
	case math.IsNaN(least):
		c.add(AspectRating, rules.NotEvaluated, "unknown", text, "the proof lacks a current rating of this part")
		return
	case math.IsNaN(r.Current):
		c.add(AspectRating, rules.NotEvaluated, proven, text, "the line tells no current rating")
		return
	case r.Current >= most*(1-rounding):
		c.add(AspectRating, rules.Pass, proven, quantity.Written(r.Current, "A"), "at least both ratings that were proven")
	case r.Current < least*(1-rounding):
		c.add(AspectRating, rules.Fail, proven, quantity.Written(r.Current, "A"), "less than either rating that was proven")
	default:
		c.add(AspectRating, rules.NotEvaluated, proven, quantity.Written(r.Current, "A"), "between the two ratings that were proven, and the line does not tell which it states")
	}
	c.figures(least, r.Current, "A")
}

// dielectric compares the kind of a capacitor; a text tells it of ceramic only.
func (c *comparison) dielectric(e *Expectation, r *notation.Reading) {
	switch {
	case e.Class == "", r.Dielectric == "" && c.proven:
		return
	case r.Dielectric == "":
		c.add(AspectKind, rules.NotEvaluated, e.Class, "", "the line tells no dielectric, and no part number agrees")
		return
	}
	class := "class-1"
	if strings.ContainsAny(r.Dielectric[:1], "XYZ") {
		class = "class-2"
	}
	if class == e.Class {
		c.add(AspectKind, rules.Pass, e.Class, r.Dielectric, "the class that was proven")
		return
	}
	c.add(AspectKind, rules.Fail, e.Class, r.Dielectric, "another kind than was proven")
}
