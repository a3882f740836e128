package api

import (
	"context"
	"encoding/json"
	"slices"

	"railproof/api/docs"
	"railproof/api/exchange"
)

// problems tells the pages of every kind of problem.
func (a *API) problems() []docs.Problem {
	kinds := exchange.Kinds()
	all := make([]docs.Problem, 0, len(kinds))
	for _, k := range kinds {
		body := a.sample(k.Kind)
		body.Instance = "req_0123456789abcdef01234567"
		text, err := json.MarshalIndent(body, "", "  ")
		if err != nil {
			panic("api: a problem cannot be encoded")
		}
		p := docs.Problem{Kind: string(k.Kind), Title: k.Title, Meaning: k.Meaning, Status: k.Status, Example: string(text)}
		for _, op := range a.contract.Operations() {
			if slices.Contains(op.Statuses, k.Status) {
				p.From = append(p.From, op.Method+" "+op.Path)
			}
		}
		all = append(all, p)
	}
	return all
}

// faulty are requests for losses that are refused, by the kind of the refusal.
var faulty = map[exchange.Kind]string{
	exchange.Malformed:    `{"stage": {"name": "buoy-5v0", "name": "buoy-3v3"}}`,
	exchange.SchemaFault:  requestWith(`5e5`, `"6.8u"`),
	exchange.PhysicsFault: requestWith(`{"min": 6e5, "typ": 5e5, "max": 7e5}`, `6.8e-6`),
}

// requestWith is a small request with these values of switching_frequency_hz and
// inductance_h.
func requestWith(frequency, inductance string) string {
	return `{"stage": {"name": "buoy-5v0", "rectifier": "synchronous", "switching_frequency_hz": ` + frequency + `,
		"high_side": {"on_resistance_ohm": 0.009}, "low_side": {"on_resistance_ohm": 0.0045},
		"inductor": {"inductance_h": ` + inductance + `, "dc_resistance_ohm": 0.007}, "output_capacitors": [{"capacitance_f": 2.2e-5, "esr_ohm": 0.003}]},
		"point": {"input_v": 24, "load": {"current_a": 3}, "ambient_degc": 25, "control": {"regulate_to_v": 5}}}`
}

// sample is a problem of the kind: a real refusal where a request alone brings it
// about.
func (a *API) sample(k exchange.Kind) *exchange.Problem {
	if request, found := faulty[k]; found {
		_, problem := a.exchange.Do(context.Background(), "losses", []byte(request))
		if problem == nil || problem.Kind != k {
			panic("api: the sample of " + string(k) + " is something else")
		}
		return problem
	}
	return exchange.NewProblem(k, "What went wrong with this request, in a sentence.")
}
