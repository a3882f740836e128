package rules

import (
	"strconv"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/quantity"
)

// Limit bounds one quantity.
type Limit struct {
	Quantity quantity.ID
	Min      float64 // [any] in the quantity's unit; NaN: none
	Max      float64 // [any] in the quantity's unit; NaN: none
	At       string  // pointer of the finding; "": by the place in the list
	Where    Where
}

// Where tells where a limit must hold.
type Where uint8

// A limit holds at the worst corner, or where it says.
const (
	AtWorst    Where = iota
	AtNominal        // at typical values and conditions
	AtFullLoad       // at the worst corner with the load at its greatest
)

// LimitPack is the identifier of the pack that LimitRules makes.
const LimitPack = "limits"

// LimitRules makes rules of the limits that a request states itself. at is the
// pointer of their list ("/limits").
func LimitRules(at string, limits []Limit) *Pack {
	pack := &Pack{ID: LimitPack, Title: "Limits of the request", Edition: "as given", Provenance: "stated in the request"}
	for i, l := range limits {
		info, _ := quantity.Of(l.Quantity)
		pointer := l.At
		if pointer == "" {
			pointer = at + "/" + strconv.Itoa(i)
		}
		key := l.Quantity.Key()
		one := func(r Relation, roots [AtFullLoad + 1]string, side string, bound float64) {
			if !parts.Known(bound) {
				return
			}
			name := roots[l.Where] + key
			pack.Rules = append(pack.Rules, Rule{
				ID: LimitPack + "/" + strings.ReplaceAll(key, "/", ".") + "." + side, Title: "Limit: " + info.Meaning,
				Relation: r, Unit: info.Unit, Basis: "stated in the request", Message: limitMessage, Pointer: pointer,
				Bodies: []Body{{
					Value: func(l *Look) float64 { return l.Number(name) },
					Limit: func(*Look) float64 { return bound },
					Reads: []string{name},
				}},
			})
		}
		one(AtLeast, [...]string{rootLeast, rootNominal, rootFullLoadLeast}, "min", l.Min)
		one(AtMost, [...]string{rootGreatest, rootNominal, rootFullLoadGreatest}, "max", l.Max)
	}
	return pack
}

var limitMessage = Message{[]piece{{"It is ", "value"}, {" ", "unit"}, {"; the limit is ", "limit"}, {" ", "unit"}, {".", ""}}}
