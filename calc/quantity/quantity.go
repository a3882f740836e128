// Package quantity is the one table of named results. Evaluation fills an array
// indexed by ID; corners, rules, pictures, the contract and the documentation
// read names, units and meanings from here.
package quantity

import (
	"strconv"
	"strings"
)

// ID is the index of a quantity in a Vector.
type ID uint16

// Banks is the number of places a per-bank quantity has.
const Banks = 6 // [1] as stage.MaxBanks

// Vector holds the value of every quantity; NaN where it does not apply.
type Vector [Count]float64

// Family tells how many values a quantity has.
type Family uint8

const (
	Single Family = iota
	PerOutputBank
	PerInputBank
)

// Info describes one quantity.
type Info struct {
	ID      ID
	Key     string // name on the wire
	Unit    string // UCUM code of the value on the wire
	Symbol  string
	Meaning string
	Source  string // where its formula or definition stands
	Family  Family
	Group   Group
}

// Group tells which computation yields a quantity.
type Group uint8

const (
	SteadyState Group = iota
	Losses
	Loop
	Transient
)

// ByKey returns the quantity with a wire name such as "output_ripple_pp_v" or,
// for one bank, "output_capacitor_rms_a/0".
func ByKey(key string) (ID, bool) {
	name, bank := key, 0
	if i := strings.LastIndexByte(key, '/'); i >= 0 {
		n, err := strconv.Atoi(key[i+1:])
		if err != nil || n < 0 || n >= Banks || strconv.Itoa(n) != key[i+1:] {
			return 0, false
		}
		name, bank = key[:i], n
	}
	for i := range table {
		if table[i].Key == name {
			if (table[i].Family == Single) != (name == key) {
				return 0, false
			}
			return table[i].ID + ID(bank), true
		}
	}
	return 0, false
}

// Of returns the description of the quantity and, for a per-bank one, its bank.
func Of(id ID) (Info, int) {
	for i := range table {
		t := &table[i]
		width := ID(1)
		if t.Family != Single {
			width = Banks
		}
		if id >= t.ID && id < t.ID+width {
			return *t, int(id - t.ID)
		}
	}
	panic("quantity: unknown id")
}

// Key returns the wire name of the quantity, with the bank's index where it has one.
func (id ID) Key() string {
	info, bank := Of(id)
	if info.Family == Single {
		return info.Key
	}
	return info.Key + "/" + strconv.Itoa(bank)
}

// All returns the table in the order of the identifiers.
func All() []Info { return table }
