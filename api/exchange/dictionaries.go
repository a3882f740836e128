package exchange

import "railproof/api/wire"

// dictionaries are the operations that take no body and never change while the
// program runs.
var dictionaries = map[string]func(wire.Engine) any{
	"listQuantities":      func(e wire.Engine) any { return wire.EncodeQuantities(e) },
	"listPreferredValues": func(e wire.Engine) any { return wire.EncodePreferredValues(e) },
}

// Dictionaries answers every operation of that kind.
func (x *Exchange) Dictionaries() map[string]*Answer {
	answers := map[string]*Answer{}
	for operation, value := range dictionaries {
		a, problem := x.finish(operation, value(wire.EncodeEngine(x.service.Engine())), new(stopwatch))
		if problem != nil {
			panic(problem.Cause)
		}
		answers[operation] = a
	}
	return answers
}
