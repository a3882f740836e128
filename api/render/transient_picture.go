package render

import "math"

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
