package render

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"railproof/api/wire"
)

// requirement lists what the rail must do, as it was given.
func (r *Report) requirement() []part {
	blocks := []part{{Table: listing("field", r.Request["requirement"], "/requirement")}}
	if r.Request["conditions"] != nil {
		blocks = append(blocks, part{Head: "Conditions"}, part{Table: listing("field", r.Request["conditions"], "/conditions")})
	}
	if limits, given := r.Request["limits"].([]any); given && len(limits) > 0 {
		t := &grille{Head: row("tnnt", "quantity", "least", "greatest", "holds at")}
		for _, l := range limits {
			m, _ := l.(map[string]any)
			key, _ := m["quantity"].(string)
			end := func(name string) string {
				v, given := m[name].(float64)
				if !given {
					return ""
				}
				return Figure3(v, unitOfKey(key))
			}
			var holds wire.Limit
			holds.At, _ = m["at"].(string)
			full, _ := m["full_load"].(bool)
			holds.FullLoad = &full
			t.Rows = append(t.Rows, row("tnnt", key, end("min"), end("max"), limitPlace(&holds)))
		}
		blocks = append(blocks, part{Head: "Limits"}, part{Table: t})
	}
	return blocks
}

// stage lists the stage, a table for each part.
func (r *Report) stage() []part {
	s, _ := r.Request["stage"].(map[string]any)
	plainFields := map[string]any{}
	blocks := []part{{}}
	for _, name := range sortedKeys(s) {
		at := "/stage/" + name
		switch v := s[name].(type) {
		case map[string]any:
			if isSpread(v) {
				plainFields[name] = v
				continue
			}
			blocks = append(blocks, part{Table: listing(spoken(name), v, at)})
		case []any:
			if name == "thermal_couplings" {
				blocks = append(blocks, part{Table: couplings(v, at)})
				continue
			}
			for i, one := range v {
				head := spoken(name)
				if len(v) > 1 {
					head += " " + strconv.Itoa(i)
				}
				blocks = append(blocks, part{Table: listing(head, one, at+"/"+strconv.Itoa(i))})
			}
		default:
			plainFields[name] = v
		}
	}
	blocks[0] = part{Table: listing("stage", plainFields, "/stage")}
	return blocks
}

// couplings lists the pairs of parts that warm each other.
func couplings(rows []any, at string) *grille {
	t := &grille{Head: row("tt", "thermal couplings", "value")}
	for i, one := range rows {
		if m, is := one.(map[string]any); is {
			at := at + "/" + strconv.Itoa(i) + "/coupling_k_per_w"
			t.Rows = append(t.Rows, row("wt", said(m["a"], "")+" and "+said(m["b"], ""), said(m["coupling_k_per_w"], wire.UnitOf(at))))
		}
	}
	return t
}

// listing is a table of all values below a node of the request. Its name heads it, on
// every page that it reaches.
func listing(name string, node any, at string) *grille {
	t := &grille{Head: row("ttt", name, "value", "range")}
	list(t, node, at, "")
	ranges := slices.ContainsFunc(t.Rows, func(r []entry) bool { return r[2].Text != "" })
	if !ranges {
		t.Head = t.Head[:2]
	}
	for i, r := range t.Rows {
		if r[2].Text == "" {
			t.Rows[i] = r[:2]
			if ranges {
				r[1].Span = 2
			}
		}
	}
	return t
}

func list(t *grille, node any, at, name string) {
	m, is := node.(map[string]any)
	if !is {
		value := said(node, wire.UnitOf(at))
		if node == 0.0 && strings.HasPrefix(at, "/requirement/targets/") {
			value = "not asked" // the contract's meaning of 0 there
		}
		t.Rows = append(t.Rows, row("wtt", strings.TrimPrefix(name, "/"), value, ""))
		return
	}
	if isSpread(m) {
		value, span := saidSpread(m, wire.UnitOf(at))
		t.Rows = append(t.Rows, row("wtt", strings.TrimPrefix(name, "/"), value, span))
		return
	}
	m = foldRanges(t, m, at, name)
	for _, key := range sortedKeys(m) {
		if rows, is := m[key].([]any); is {
			t.Rows = append(t.Rows, row("wtt", strings.TrimPrefix(name+"/"+key, "/"), saidTable(rows, at+"/"+key), ""))
			continue
		}
		list(t, m[key], at+"/"+key, name+"/"+key)
	}
}

// foldRanges writes members such as min_v, typ_v and max_v in one row, and returns
// the other members.
func foldRanges(t *grille, m map[string]any, at, name string) map[string]any {
	rest := map[string]any{}
	for key, v := range m {
		rest[key] = v
	}
	for _, key := range sortedKeys(m) {
		unit, is := strings.CutPrefix(key, "max_")
		if !is || m["min_"+unit] == nil {
			continue
		}
		value, span := saidSpread(map[string]any{"min": m["min_"+unit], "typ": m["typ_"+unit], "max": m[key]}, wire.UnitOf(at+"/"+key))
		t.Rows = append(t.Rows, row("wtt", strings.TrimPrefix(name, "/"), value, span))
		for _, end := range []string{"min_", "typ_", "max_"} {
			delete(rest, end+unit)
		}
	}
	return rest
}

// isSpread tells a value with its tolerance from a group of fields.
func isSpread(m map[string]any) bool {
	if len(m) == 0 {
		return false
	}
	for key := range m {
		if !slices.Contains([]string{"typ", "min", "max", "tol", "match_tol", "group", "distribution"}, key) {
			return false
		}
	}
	return true
}

func saidSpread(m map[string]any, unit string) (value, span string) {
	number := func(name string) (float64, bool) { v, is := m[name].(float64); return v, is }
	typ, hasTyp := number("typ")
	if hasTyp {
		value = Figure3(typ, unit)
	}
	lo, hasLo := number("min")
	hi, hasHi := number("max")
	switch tol, hasTol := number("tol"); {
	case hasTol:
		span = strings.ReplaceAll("± "+trimmed(percent(tol)), " ", "\u00a0")
	case hasLo && hasHi:
		span = Figure3(lo, unit) + " to " + Figure3(hi, unit)
	case hasLo:
		span = "from " + Figure3(lo, unit)
	case hasHi:
		span = "up to " + Figure3(hi, unit)
	}
	if d, is := m["distribution"].(string); is {
		span += ", " + d
	}
	if g, is := m["group"].(string); is {
		span += ", group " + g
	}
	if match, is := number("match_tol"); is {
		span += ", matched to " + trimmed(percent(match))
	}
	if !hasTyp {
		return span, ""
	}
	return value, span
}

// saidTable writes the rows of a table of the request in one cell.
func saidTable(rows []any, at string) string {
	parts := make([]string, len(rows))
	for i, one := range rows {
		m, is := one.(map[string]any)
		if !is {
			parts[i] = said(one, wire.UnitOf(at))
			continue
		}
		keys := tableKeys(m)
		var values []string
		for k, key := range keys {
			v := said(m[key], wire.UnitOf(at+"/"+strconv.Itoa(i)+"/"+key))
			if k > 0 && len(keys) > 2 { // several values there: each by its name
				v = spoken(key) + " " + v
			}
			values = append(values, v)
		}
		parts[i] = values[0] + " → " + strings.Join(values[1:], ", ")
	}
	return strings.Join(parts, "; ")
}

// abscissas are the columns of a table that the others depend on.
var abscissas = []string{"a", "junction_degc", "core_degc", "temperature_degc", "bias_v", "drive_v", "age_ratio", "voltage_v", "current_a"}

// tableKeys returns the columns of a row, the one that the others depend on first.
func tableKeys(m map[string]any) []string {
	keys := sortedKeys(m)
	for _, first := range abscissas {
		if i := slices.Index(keys, first); i >= 0 {
			return append([]string{first}, slices.Delete(keys, i, i+1)...)
		}
	}
	return keys
}

func said(v any, unit string) string {
	switch v := v.(type) {
	case float64:
		return trimmed(Figure3(v, unit))
	case bool:
		if v {
			return "yes"
		}
		return "no"
	case string:
		return v
	case nil:
		return ""
	}
	return fmt.Sprint(v)
}

func sortedKeys(m map[string]any) []string {
	keys := make([]string, 0, len(m))
	for key := range m {
		keys = append(keys, key)
	}
	slices.Sort(keys)
	return keys
}
