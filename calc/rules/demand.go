package rules

import (
	"slices"
	"strings"

	"railproof/calc/quantity"
)

// Demand is what the rules of some packs want to know about a case, so that a
// corner analysis computes that and no more. The lists are sorted.
type Demand struct {
	Nominal          []quantity.ID
	Least            []quantity.ID
	Greatest         []quantity.ID
	FullLoadLeast    []quantity.ID
	FullLoadGreatest []quantity.ID
}

// Needs returns what the packs want to know about a case that has no quantities
// yet. Rules that do not apply to the stage or the requirement want nothing; where
// that cannot be told without a quantity, they are taken to apply.
func Needs(c *Case, packs []*Pack) Demand {
	bare := *c
	bare.Nominal, bare.Extremes, bare.FullLoad = nil, nil, nil
	p := prepare(&bare)
	var d Demand
	for _, pack := range packs {
		for i := range pack.Rules {
			for j := range pack.Rules[i].Bodies {
				d.addBody(p, pack, &pack.Rules[i], &pack.Rules[i].Bodies[j])
			}
		}
	}
	for _, list := range []*[]quantity.ID{&d.Nominal, &d.Least, &d.Greatest, &d.FullLoadLeast, &d.FullLoadGreatest} {
		slices.Sort(*list)
		*list = slices.Compact(*list)
	}
	return d
}

// addBody adds what a rule wants to know at the places where it may apply.
func (d *Demand) addBody(p *prepared, pack *Pack, rule *Rule, body *Body) {
	for place := range body.Scope.places(p.c.Stage) {
		if body.When != nil {
			look := &Look{facts: p.at(body.Scope, place, pack.Parameters)}
			if applies := body.When(look); !applies && len(look.missing) == 0 && look.problem == "" {
				continue
			}
		}
		for _, name := range slices.Concat(body.Reads, rule.Needs) {
			d.add(name, place)
		}
	}
}

func (d *Demand) add(name string, place int) {
	root, key, _ := strings.Cut(name, ".")
	list := map[string]*[]quantity.ID{
		rootNominal: &d.Nominal, rootLeast: &d.Least, rootGreatest: &d.Greatest, rootFullLoadLeast: &d.FullLoadLeast, rootFullLoadGreatest: &d.FullLoadGreatest,
	}[root+"."]
	if list == nil {
		return
	}
	if id, ok := quantity.ByKey(key); ok { // a limit names the bank itself
		*list = append(*list, id)
		return
	}
	for _, q := range quantity.All() {
		if q.Key == key {
			*list = append(*list, q.ID+quantity.ID(place))
		}
	}
}
