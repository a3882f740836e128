package render

import (
	"strconv"
	"strings"

	"railproof/api/wire"
)

// TransientsText writes an answer of transients for reading.
func TransientsText(a *wire.TransientsAnswer) string {
	p := new(page)
	p.line(railName(a.Stage), ": ", eventName(a), ", ", a.Status)
	p.title(pointWords(a.Point))
	p.trouble(a.Detail, a.NearestOperable, nil)
	if a.Recovered != nil {
		p.b.WriteByte('\n')
		p.table([]align{left, right, left}, []string{"figure", "value", "note"}, responseRows(a))
		p.line(responseWords(a))
	}
	p.basis(&a.Basis)
	return p.b.String()
}

func eventName(a *wire.TransientsAnswer) string {
	switch e := a.Event; {
	case e.LoadStep != nil:
		return "load step to " + Figure3(e.LoadStep.To, "A")
	case e.InputStep != nil:
		return "input step to " + Figure3(e.InputStep.To, "V")
	case e.ReferenceStep != nil:
		return "reference step to " + percent(e.ReferenceStep.To)
	}
	return "start in " + Figure3(a.Event.StartUp.SoftStart, "s")
}

func responseRows(a *wire.TransientsAnswer) [][]string {
	var rows [][]string
	row := func(name string, v *float64, unit, note string) {
		if v != nil {
			rows = append(rows, []string{name, Figure3(*v, unit), note})
		}
	}
	at := func(t *float64) string {
		if t == nil {
			return ""
		}
		return "at " + Figure3(*t, "s")
	}
	mean := func(name string, v *float64, note string) {
		if v != nil {
			rows = append(rows, []string{name, six(v), note})
		}
	}
	mean("mean output before", a.Before, "")
	mean("mean output at the end", a.After, "steady state that follows: "+six(a.Expected))
	row("deviation down", a.Down, "V", at(a.DownAt))
	row("deviation up", a.Up, "V", at(a.UpAt))
	if a.Overshoot != nil {
		rows = append(rows, []string{"overshoot", percent(*a.Overshoot), "of the change"})
	}
	if *a.Recovered {
		row("recovery", a.Recovery, "s", "into ±"+figure(a.Band, "V"))
	} else {
		rows = append(rows, []string{"recovery", "none", "not for good within " + figure(a.Duration, "s") + " into ±" + figure(a.Band, "V")})
	}
	note := "no saturation current given"
	if a.Saturated != nil {
		note = map[bool]string{true: "PASSES the saturation current of ", false: "saturation at "}[*a.Saturated] + figure(a.Saturation, "A")
	}
	row("inductor peak", a.InductorPeak, "A", note)
	row("inductor valley", a.InductorValley, "A", "")
	return rows
}

// six writes a voltage with six significant digits.
func six(v *float64) string {
	return optional(v, func(x float64) string { return strconv.FormatFloat(x, 'g', 6, 64) + " V" })
}

func responseWords(a *wire.TransientsAnswer) string {
	words := []string{strconv.Itoa(int(a.Cycles)) + " periods followed"}
	if a.Settled != nil {
		words = append(words, map[bool]string{true: "settled", false: "not settled to 1e-7"}[*a.Settled])
	}
	if len(a.Modes) > 0 {
		words = append(words, strings.Join(a.Modes, " and ")+" conduction")
	}
	count := func(n *wire.Integer, what string) {
		if n != nil && *n > 0 {
			words = append(words, strconv.Itoa(int(*n))+" "+what)
		}
	}
	count(a.Limited, "pulses ended by the current limit")
	count(a.GreatestDuty, "at the greatest duty ratio")
	count(a.Skipped, "left out")
	return strings.Join(words, ", ")
}
