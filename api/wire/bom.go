package wire

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"

	"railproof/calc/parts"
	"railproof/service"
	"railproof/service/bom"
)

// BomChecksRequest asks whether a bill of material agrees with what was proven.
type BomChecksRequest struct {
	Bom   *Bom         `json:"bom"`
	Rails []Rail       `json:"rails"`
	Packs []PackChoice `json:"packs,omitzero"`
}

// Bom is a bill of material: lines, or a CSV document.
type Bom struct {
	Lines []BomLine `json:"lines,omitzero"`
	CSV   *BomCSV   `json:"csv,omitzero"`
}

// BomLine is one line.
type BomLine struct {
	Line        *Integer `json:"line,omitzero"`
	Designators []string `json:"designators"`
	Count       *Integer `json:"count,omitzero"`
	Value       string   `json:"value,omitzero"`
	Tolerance   string   `json:"tolerance,omitzero"`
	Rating      string   `json:"rating,omitzero"`
	PartNumber  string   `json:"part_number,omitzero"`
	NotFitted   *bool    `json:"not_fitted,omitzero"`
}

// BomCSV is a CSV document with the names of its columns.
type BomCSV struct {
	Text      string     `json:"text"`
	Delimiter string     `json:"delimiter,omitzero"`
	Columns   BomColumns `json:"columns"`
}

// BomColumns tells which header names which column.
type BomColumns struct {
	Designators string `json:"designators"`
	Count       string `json:"count,omitzero"`
	Value       string `json:"value,omitzero"`
	Tolerance   string `json:"tolerance,omitzero"`
	Rating      string `json:"rating,omitzero"`
	PartNumber  string `json:"part_number,omitzero"`
	NotFitted   string `json:"not_fitted,omitzero"`
}

// Rail is a proven rail and the lines that it is built of.
type Rail struct {
	Name        string       `json:"name"`
	Stage       *Stage       `json:"stage"`
	Requirement *Requirement `json:"requirement"`
	Conditions  *Conditions  `json:"conditions,omitzero"`
	Bindings    []Binding    `json:"bindings"`
	Lineless    []string     `json:"roles_without_line,omitzero"`
	Ranges      []BomRange   `json:"designator_ranges,omitzero"`
	Alternates  []Alternate  `json:"alternates,omitzero"`
}

// Binding ties a role to designators.
type Binding struct {
	Role        string   `json:"role"`
	Designators []string `json:"designators"`
}

// BomRange is a run of designators.
type BomRange struct {
	From string `json:"from"`
	To   string `json:"to"`
}

// Alternate is a part that was approved for a role.
type Alternate struct {
	Role        string      `json:"role"`
	PartNumber  string      `json:"part_number"`
	Replacement Replacement `json:"replacement"`
}

// Decode turns the request into the use case's. The error is an *InvalidError.
func (w *BomChecksRequest) Decode() (*service.BomChecksRequest, error) {
	r := &service.BomChecksRequest{}
	chosen, faults := choosePacks("/packs", w.Packs)
	lines, more := w.Bom.decode()
	faults = append(faults, more...)
	r.Lines = lines
	for i := range w.Rails {
		rail, wrong := w.Rails[i].decode("/rails/" + strconv.Itoa(i))
		faults = append(faults, wrong...)
		if rail != nil {
			rail.Proof.Packs = chosen
			r.Rails = append(r.Rails, *rail)
		}
	}
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return r, nil
}

func (w *Bom) decode() ([]bom.Line, []Fault) {
	if w.CSV != nil {
		return w.CSV.decode()
	}
	lines := make([]bom.Line, len(w.Lines))
	for i := range w.Lines {
		l := &w.Lines[i]
		lines[i] = bom.Line{Row: whole64(l.Line, i+1), Designators: l.Designators, Value: l.Value, Tolerance: l.Tolerance, Rating: l.Rating, PartNumber: l.PartNumber, Count: math.NaN(), NotFitted: isTrue(l.NotFitted)}
		if l.Count != nil {
			lines[i].Count = float64(*l.Count)
		}
	}
	return lines, nil
}

func (w *BomCSV) decode() ([]bom.Line, []Fault) {
	c := &w.Columns
	m := bom.Mapping{Designators: c.Designators, Value: c.Value, Tolerance: c.Tolerance, Rating: c.Rating, PartNumber: c.PartNumber, Count: c.Count, NotFitted: c.NotFitted}
	for _, separator := range w.Delimiter {
		m.Separator = separator
	}
	lines, err := bom.ReadCSV([]byte(w.Text), m)
	var format *bom.FormatError
	switch {
	case err == nil:
		return lines, nil
	case !errors.As(err, &format):
		return nil, []Fault{{Pointer: "/bom/csv/text", Keyword: "csv", Detail: err.Error()}}
	case format.Mapped != "":
		return nil, []Fault{{Pointer: "/bom/csv/columns/" + format.Mapped, Keyword: "column", Detail: format.Detail}}
	}
	at := fmt.Sprintf("line %d", format.Line)
	if format.Column > 0 {
		at += fmt.Sprintf(", column %d", format.Column)
	}
	return nil, []Fault{{Pointer: "/bom/csv/text", Keyword: "csv", Detail: at + ": " + format.Detail, Received: at}}
}

func (w *Rail) decode(at string) (*service.BomRail, []Fault) {
	p, err := (&RuleChecksRequest{Stage: w.Stage, Requirement: w.Requirement, Conditions: w.Conditions}).decode(at)
	if err != nil {
		return nil, faultsOf(err)
	}
	r := &service.BomRail{Name: w.Name, At: at, Proof: *p}
	faults := w.alternates(at, r)
	faults = append(faults, w.bindings(at, r)...)
	for i, role := range w.Lineless {
		if slices.ContainsFunc(w.Bindings, func(b Binding) bool { return b.Role == role }) {
			faults = append(faults, Fault{Pointer: fmt.Sprintf("%s/roles_without_line/%d", at, i), Keyword: "role", Detail: "the role is bound to designators", Received: role})
		}
	}
	r.Lineless = w.Lineless
	for i, g := range w.Ranges {
		one, err := bom.ParseRange(g.From, g.To)
		if err != nil {
			faults = append(faults, Fault{Pointer: at + "/designator_ranges/" + strconv.Itoa(i), Keyword: "range", Detail: "no run of designators: the same letters, the numbers rising", Received: g.From + " to " + g.To})
		}
		r.Ranges = append(r.Ranges, one)
	}
	return r, faults
}

// bindings decodes which designators stand for which role; no designator for two.
func (w *Rail) bindings(at string, r *service.BomRail) (faults []Fault) {
	first, roles := map[string]string{}, map[string]bool{}
	for i := range w.Bindings {
		b, here := &w.Bindings[i], at+"/bindings/"+strconv.Itoa(i)
		one := bom.Binding{Role: b.Role, Designators: b.Designators}
		if roles[b.Role] {
			faults = append(faults, Fault{Pointer: here + "/role", Keyword: "duplicate", Detail: "the role is bound already", Received: b.Role})
		}
		roles[b.Role] = true
		for k, d := range b.Designators {
			if before, twice := first[d]; twice {
				faults = append(faults, Fault{Pointer: here + "/designators/" + strconv.Itoa(k), Keyword: "duplicate", Detail: "the designator is bound already at " + before, Received: d})
				continue
			}
			first[d] = here
		}
		for k := range r.Alternates {
			if r.Alternates[k].Role == b.Role {
				one.Alternates = append(one.Alternates, r.Alternates[k].PartNumber)
			}
		}
		r.Bindings = append(r.Bindings, one)
	}
	for i := range w.Alternates {
		if !roles[w.Alternates[i].Role] {
			faults = append(faults, Fault{Pointer: fmt.Sprintf("%s/alternates/%d/role", at, i), Keyword: "role", Detail: "an alternate for a role that is not bound", Received: w.Alternates[i].Role})
		}
	}
	return faults
}

func (w *Rail) alternates(at string, r *service.BomRail) (faults []Fault) {
	for i := range w.Alternates {
		a, here := &w.Alternates[i], at+"/alternates/"+strconv.Itoa(i)
		if a.Replacement.Role != a.Role {
			faults = append(faults, Fault{Pointer: here + "/replacement/role", Keyword: "role", Detail: "not the role of the alternate", Limit: a.Role, Received: a.Replacement.Role})
			continue
		}
		one, wrong := a.Replacement.decode(here+"/replacement", w.Stage, at+"/stage")
		faults = append(faults, wrong...)
		if one == nil {
			continue
		}
		if one.ID == "" {
			one.ID = clipped(a.PartNumber, 64)
		}
		one.Cost, one.Area = parts.Unknown, parts.Unknown // nothing is ranked here
		r.Alternates = append(r.Alternates, service.BomAlternate{Role: a.Role, PartNumber: a.PartNumber, Replacement: *one})
	}
	return faults
}
