package wire

import (
	"math"
	"reflect"
	"strings"

	"railproof/calc/quantity"
)

// places maps a quantity's first identifier to its field; both structs have the
// same order of fields.
var places = func() map[quantity.ID]int {
	byKey := map[string]int{}
	t := reflect.TypeFor[Quantities]()
	for i := range t.NumField() {
		key, _, _ := strings.Cut(t.Field(i).Tag.Get("json"), ",")
		byKey[key] = i
	}
	m := map[quantity.ID]int{}
	for _, info := range quantity.All() {
		m[info.ID] = byKey[info.Key]
	}
	return m
}()

// encodeQuantities shows the quantities of a vector that keep asks for. The
// result points into the vector.
func encodeQuantities(v *quantity.Vector, banks bankCount, keep func(quantity.Info) bool) *Quantities {
	q := new(Quantities)
	to := reflect.ValueOf(q).Elem()
	for _, info := range quantity.All() {
		if !keep(info) {
			continue
		}
		if info.Family == quantity.Single {
			if !math.IsNaN(v[info.ID]) {
				to.Field(places[info.ID]).Set(reflect.ValueOf(&v[info.ID]))
			}
			continue
		}
		values := v[info.ID : info.ID+quantity.ID(banks.of(info.Family))]
		if len(values) > 0 && allKnown(values) {
			to.Field(places[info.ID]).Set(reflect.ValueOf(values))
		}
	}
	return q
}

func allKnown(values []float64) bool {
	for _, x := range values {
		if math.IsNaN(x) {
			return false
		}
	}
	return true
}

// bankCount tells how many capacitor banks a stage has on each side.
type bankCount struct{ output, input int }

func (b bankCount) of(f quantity.Family) int {
	switch f {
	case quantity.PerOutputBank:
		return b.output
	case quantity.PerInputBank:
		return b.input
	}
	return 1
}

// Column is one array of a table of quantities.
type Column struct {
	Key    string // with the bank's index for a per-bank quantity
	Values []float64
}

// List returns the columns that are there, in the order of the dictionary.
func (c *Columns) List() []Column {
	var list []Column
	from := reflect.ValueOf(c).Elem()
	for _, info := range quantity.All() {
		switch f := from.Field(places[info.ID]).Interface().(type) {
		case []float64:
			if f != nil {
				list = append(list, Column{info.Key, f})
			}
		case [][]float64:
			for bank, values := range f {
				if len(values) > 0 {
					list = append(list, Column{(info.ID + quantity.ID(bank)).Key(), values})
				}
			}
		}
	}
	return list
}

// Figure is one number of a set of quantities.
type Figure struct {
	ID    quantity.ID
	Value float64 // [any] in the quantity's unit
}

// List returns the quantities that are there, in the order of the dictionary.
func (q *Quantities) List() []Figure {
	var list []Figure
	from := reflect.ValueOf(q).Elem()
	for _, info := range quantity.All() {
		switch f := from.Field(places[info.ID]).Interface().(type) {
		case *float64:
			if f != nil {
				list = append(list, Figure{info.ID, *f})
			}
		case []float64:
			for bank, value := range f {
				list = append(list, Figure{info.ID + quantity.ID(bank), value})
			}
		}
	}
	return list
}
