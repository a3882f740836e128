package wire

import (
	"reflect"
	"slices"
	"strconv"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/service"
)

// Replacement is a part for a role.
type Replacement struct {
	ID         string      `json:"id,omitzero"`
	Role       string      `json:"role"`
	MOSFET     *MOSFET     `json:"mosfet,omitzero"`
	Diode      *Diode      `json:"diode,omitzero"`
	Inductor   *Inductor   `json:"inductor,omitzero"`
	Capacitor  *Capacitor  `json:"capacitor,omitzero"`
	Controller *Controller `json:"controller,omitzero"`
	Cost       *float64    `json:"cost,omitzero"`
	Area       *float64    `json:"area_m2,omitzero"`
}

// partNames are the members of which a replacement has one, by the kind of role.
var partNames = map[string]string{
	"high_side": "mosfet", "low_side": "mosfet", "diode": "diode", "inductor": "inductor", "controller": "controller",
	"output_capacitors": "capacitor", "input_capacitors": "capacitor",
}

// given lists the parts that a replacement has, by their names.
func (w *Replacement) given() map[string]reflect.Value {
	m := map[string]reflect.Value{}
	for name, v := range map[string]any{"mosfet": w.MOSFET, "diode": w.Diode, "inductor": w.Inductor, "capacitor": w.Capacitor, "controller": w.Controller} {
		if r := reflect.ValueOf(v); !r.IsNil() {
			m[name] = r
		}
	}
	return m
}

// decode puts the part into the stage that stands at the pointer stageAt. at is the
// pointer of the replacement.
func (w *Replacement) decode(at string, s *Stage, stageAt string) (*service.Replacement, []Fault) {
	kind, _, _ := strings.Cut(w.Role, "/")
	name := partNames[kind]
	given := w.given()
	part, has := given[name]
	if !has || len(given) != 1 {
		return nil, []Fault{{Pointer: at, Keyword: "replacement", Detail: "the role " + w.Role + " takes exactly one part", Limit: name}}
	}
	built := *s
	place := built.place(w.Role)
	if !place.IsValid() {
		return nil, []Fault{{Pointer: at + "/role", Keyword: "role", Detail: "the stage has no part in this role", Received: w.Role}}
	}
	merged := reflect.New(part.Type().Elem())
	merged.Elem().Set(part.Elem())
	var stoodIn []string
	if !place.IsNil() {
		stoodIn = standIn(merged.Elem(), place.Elem(), "")
	}
	place.Set(merged)
	built.forgetPhases(w.Role)
	role := stageAt + "/" + w.Role
	d, err := built.Decode(stageAt)
	if err != nil {
		faults := faultsOf(err)
		for i := range faults {
			faults[i].Pointer = moved(faults[i].Pointer, role, at+"/"+name)
		}
		return nil, faults
	}
	r := &service.Replacement{
		ID: w.ID, Role: role, At: at + "/" + name, Cost: or(w.Cost, parts.Unknown), Area: or(w.Area, parts.Unknown),
		Design: service.Design{At: stageAt, Stage: d.Stage, Variables: d.Variables, Assumed: d.Assumed},
	}
	for _, tail := range stoodIn {
		r.StandIns = append(r.StandIns, role+"/"+tail)
		r.Design.Assumed = append(r.Design.Assumed, presumed(d.Stage, w.Role+"/"+tail)...)
	}
	return r, nil
}

// presumed lists the numbers of a stage at or below a field: to a rule they are
// missing.
func presumed(s *stage.Stage, at string) (list []stage.Assumed) {
	for _, f := range s.Fields() {
		if f.ID == at || strings.HasPrefix(f.ID, at+"/") {
			list = append(list, stage.Assumed{Field: f.ID, Value: *f.Value, Low: *f.Value, High: *f.Value, Why: "not given for the replacement: the present part's stands in"})
		}
	}
	return list
}

// moved carries a pointer from below one place to below another.
func moved(pointer, from, to string) string {
	if pointer == from || strings.HasPrefix(pointer, from+"/") {
		return to + pointer[len(from):]
	}
	return pointer
}

// place returns the pointer of the stage that holds the part of a role, in lists that
// are its own; the zero value where the stage has no such part.
func (w *Stage) place(role string) reflect.Value {
	switch role {
	case "high_side":
		return reflect.ValueOf(&w.HighSide).Elem()
	case "low_side":
		if w.LowSide != nil {
			return reflect.ValueOf(&w.LowSide).Elem()
		}
	case "diode":
		if w.Diode != nil {
			return reflect.ValueOf(&w.Diode).Elem()
		}
	case "inductor":
		return reflect.ValueOf(&w.Inductor).Elem()
	case "controller":
		return reflect.ValueOf(&w.Controller).Elem()
	}
	list, index, _ := strings.Cut(role, "/")
	banks := &w.OutputCapacitors
	if list == "input_capacitors" {
		banks = &w.InputCapacitors
	}
	i, err := strconv.Atoi(index)
	if err != nil || i >= len(*banks) {
		return reflect.Value{}
	}
	*banks = slices.Clone(*banks)
	return reflect.ValueOf(&(*banks)[i]).Elem()
}

// forgetPhases drops what single phases have of their own of a part that is
// replaced.
func (w *Stage) forgetPhases(role string) {
	w.Phases = slices.Clone(w.Phases)
	for i, p := range w.Phases {
		own := *p
		switch role {
		case "inductor":
			own.Inductance, own.DCResistance = nil, nil
		case "high_side":
			own.HighSideOn = nil
		case "low_side":
			own.LowSideOn = nil
		}
		w.Phases[i] = &own
	}
}

// neverTaken are the members that say what a part is, not how it behaves.
var neverTaken = map[string]bool{"part_number": true, "assumed": true, "rating": true, "life": true, "kind": true}

// standIn fills in what a part's data leave out with that of the present part, and
// lists it by its tails: figures, tables, and tolerances of figures that have one in
// the present part. The number of pieces is the board's and no gap.
func standIn(part, present reflect.Value, at string) (list []string) {
	for i := range part.NumField() {
		name, _, _ := strings.Cut(part.Type().Field(i).Tag.Get("json"), ",")
		mine, theirs := part.Field(i), present.Field(i)
		switch {
		case neverTaken[name] || theirs.IsZero():
		case mine.IsZero():
			mine.Set(theirs)
			if name != "count" {
				list = append(list, at+name)
			}
		case mine.Type() == numberType:
			if n := toleranceOf(mine.Interface().(*Number), theirs.Interface().(*Number)); n != nil {
				mine.Set(reflect.ValueOf(n))
				list = append(list, at+name+"/tol")
			}
		case mine.Kind() == reflect.Pointer && mine.Type().Elem().Kind() == reflect.Struct:
			own := reflect.New(mine.Type().Elem())
			own.Elem().Set(mine.Elem())
			list = append(list, standIn(own.Elem(), theirs.Elem(), at+name+"/")...)
			mine.Set(own)
		}
	}
	return list
}

// toleranceOf returns a number without a width with that of the present part's, in
// proportion; nil where there is nothing to take over.
func toleranceOf(mine, theirs *Number) *Number {
	v, typ := mine.typical(), theirs.typical()
	least, greatest := theirs.bounds()
	if own, most := mine.bounds(); own < most || !(least < greatest) || !(typ > 0) || !(v > 0) {
		return nil
	}
	least, greatest = v*(least/typ), v*(greatest/typ)
	return &Number{Spread: &Spread{Min: &least, Typ: &v, Max: &greatest, Distribution: theirs.Spread.Distribution}}
}
