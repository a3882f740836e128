package exchange

import "railproof/api/wire"

// RulePacks answers the list of rule packs.
func (x *Exchange) RulePacks() (*Answer, *Problem) {
	return x.finish("listRulePacks", wire.EncodeRulePacks(wire.EncodeEngine(x.service.Engine())), new(stopwatch))
}

// RulePackDocuments answers every rule pack, by its id.
func (x *Exchange) RulePackDocuments() (map[string]*Answer, *Problem) {
	answers := map[string]*Answer{}
	for id, pack := range wire.EncodeRulePackDocuments(wire.EncodeEngine(x.service.Engine())) {
		a, problem := x.finish("getRulePack", pack, new(stopwatch))
		if problem != nil {
			return nil, problem
		}
		answers[id] = a
	}
	return answers, nil
}
