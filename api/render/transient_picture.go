package render

import (
	"math"
	"strings"

	"railproof/api/wire"
)

// response holds what happens around an event at time 0.
type response struct {
	title, subtitle, said string
	time                  []float64   // [s]
	output                []float64   // [V]
	inductor              [][]float64 // [A] of each phase
	load                  []float64   // [A]
	input                 []float64   // [V] empty: not drawn
	duty, control         []float64   // [1], [V]
	marks                 []mark      // in the panel of the output
}

// picture draws output, currents and what the controller does.
func (r *response) picture() *Picture {
	if len(r.time) == 0 {
		return nil
	}
	x := ranged("time after the event", "s", r.time).opened()
	event := mark{x: 0, y: math.NaN()}
	one := func(name, unit string, tall float64, curves []curve, marks ...mark) *panel {
		p := &panel{x: x, tall: px(tall), bareX: true, curves: curves, marks: append([]mark{event}, marks...)}
		var lists [][]float64
		for _, c := range curves {
			lists = append(lists, c.y)
		}
		p.y = ranged(name, unit, lists...).padded(0.08)
		return p
	}
	list := []*panel{
		one("output", "V", 180, []curve{{x: r.time, y: r.output, style: trace(0)}}, r.marks...),
		one("currents", "A", 150, append(phases("inductor", r.time, r.inductor, 0), curve{name: "load", x: r.time, y: r.load, style: trace(len(r.inductor))})),
	}
	if ranged("", "", r.input).greatest > ranged("", "", r.input).least && len(r.input) > 0 {
		list = append(list, one("input", "V", 80, []curve{{x: r.time, y: r.input, style: trace(0)}}))
	}
	list = append(list, one("duty ratio", "", 90, []curve{{x: r.time, y: r.duty, style: trace(0)}}))
	if len(r.control) > 0 {
		list = append(list, one("control voltage", "V", 90, []curve{{x: r.time, y: r.control, style: trace(0)}}))
	}
	list[len(list)-1].bareX = false
	return &Picture{title: r.title, subtitle: r.subtitle, description: r.said, blocks: alignPanels(list...)}
}

// TransientPicture draws what follows an event; nil without waveforms.
func TransientPicture(a *wire.TransientsAnswer) *Picture {
	w := a.Waveforms
	if w == nil || len(w.Time) == 0 {
		return nil
	}
	r := &response{
		title: railName(a.Stage) + ": " + eventTitle(a.Event), subtitle: pointWords(a.Point) + unlessOK(a.Status),
		time: w.Time, output: w.Output, inductor: w.Inductor, load: w.Load, input: w.Input, duty: w.Duty, control: w.Control,
	}
	var said []string
	for _, d := range []struct {
		by, at *float64
		sign   float64
		name   string
	}{{a.Down, a.DownAt, -1, "falls by "}, {a.Up, a.UpAt, 1, "rises by "}} {
		if d.by == nil || d.at == nil || a.After == nil || *d.by <= 0 {
			continue
		}
		text := d.name + Figure3(*d.by, "V")
		said = append(said, text)
		r.marks = append(r.marks, mark{x: *d.at, y: *a.After + d.sign**d.by, label: text})
	}
	switch {
	case a.Recovery == nil:
	case *a.Recovery == 0:
		said = append(said, "its mean never leaves the band")
	default:
		said = append(said, "back within its band after "+Figure3(*a.Recovery, "s"))
		r.marks = append(r.marks, mark{x: *a.Recovery, y: math.NaN(), label: "recovered, " + Figure3(*a.Recovery, "s")})
	}
	if len(said) > 0 {
		r.said = "The output " + strings.Join(said, ", ")
		r.subtitle += "; output " + strings.Join(said, ", ")
	}
	return r.picture()
}

// eventTitle says what happened.
func eventTitle(e *wire.TransientEvent) string {
	switch {
	case e == nil:
		return "response"
	case e.LoadStep != nil:
		return "load step to " + trimmed(Figure3(e.LoadStep.To, "A"))
	case e.InputStep != nil:
		return "input step to " + trimmed(Figure3(e.InputStep.To, "V"))
	case e.ReferenceStep != nil:
		return "reference step to " + trimmed(percent(e.ReferenceStep.To))
	case e.StartUp != nil:
		return "start-up in " + trimmed(Figure3(e.StartUp.SoftStart, "s"))
	}
	return "response"
}
