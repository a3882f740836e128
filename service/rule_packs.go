package service

import (
	"errors"
	"strconv"

	"railproof/calc/rules"
	"railproof/service/packs"
)

// DefaultPack is checked where a request names none.
const DefaultPack = "general-practice"

// PackChoice is a pack of the service by its identifier, or a document.
type PackChoice struct {
	ID       string
	Document *packs.Document // nil: by ID
}

// RulePacks returns the packs that the service has.
func RulePacks() []packs.Entry { return packs.Builtin().All() }

// ChoosePacks loads the chosen packs; at is the pointer of their list. A document may
// extend a pack of the service or one that stands before it.
func ChoosePacks(at string, choices []PackChoice) ([]packs.Entry, []Refusal) {
	library := packs.Builtin()
	if len(choices) == 0 {
		e, _ := library.Pack(DefaultPack)
		return []packs.Entry{e}, nil
	}
	var chosen []packs.Entry
	var refused []Refusal
	seen := map[string]bool{}
	for i, c := range choices {
		here := at + "/" + strconv.Itoa(i)
		id := c.ID
		if c.Document != nil {
			id = c.Document.ID
			with, err := library.With(&packs.Parsed{Document: *c.Document})
			if err != nil {
				refused = append(refused, packRefusals(here+"/pack", err)...)
				continue
			}
			library = with
		}
		e, known := library.Pack(id)
		switch {
		case !known:
			refused = append(refused, Refusal{Pointer: here + "/id", Keyword: "unknown-pack", Detail: "the service has no rule pack of this name", Limit: knownPacks(), Received: id})
		case seen[id]:
			refused = append(refused, Refusal{Pointer: here, Keyword: "duplicate", Detail: "the pack is chosen twice", Received: id})
		default:
			seen[id] = true
			chosen = append(chosen, e)
		}
	}
	return chosen, refused
}

func knownPacks() string {
	list := ""
	for i, e := range RulePacks() {
		if i > 0 {
			list += ", "
		}
		list += e.Pack.ID
	}
	return list
}

// packRefusals points at what is wrong with a pack document.
func packRefusals(at string, err error) []Refusal {
	var invalid *packs.InvalidError
	if !errors.As(err, &invalid) {
		return []Refusal{{Pointer: at, Keyword: "rule-pack", Detail: err.Error()}}
	}
	list := make([]Refusal, len(invalid.Faults))
	for i, f := range invalid.Faults {
		list[i] = Refusal{Pointer: at + f.Pointer, Keyword: "rule-pack", Detail: f.Detail}
	}
	return list
}

// compiled returns the rules of packs.
func compiled(list []packs.Entry) []*rules.Pack {
	out := make([]*rules.Pack, len(list))
	for i := range list {
		out[i] = list[i].Pack
	}
	return out
}
