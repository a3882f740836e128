package wire

import (
	"fmt"
	"reflect"
	"strconv"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/service"
)

// GridRequest asks for every combination of three axes.
type GridRequest struct {
	Input           []float64 `json:"input_v"`
	Load            []float64 `json:"load_current_a"`
	Ambient         []float64 `json:"ambient_degc"`
	Source          *float64  `json:"source_ohm,omitzero"`
	Age             *float64  `json:"age_ratio,omitzero"`
	PartTemperature *float64  `json:"part_temperature_degc,omitzero"`
	Control         *Control  `json:"control,omitzero"`
}

// LossesGrid is the answer to a grid.
type LossesGrid struct {
	Input    []float64     `json:"input_v"`
	Load     []float64     `json:"load_current_a"`
	Ambient  []float64     `json:"ambient_degc"`
	Rows     GridRows      `json:"rows"`
	Failures []GridFailure `json:"failures"`
}

// GridRows holds the cells that have figures, a column per quantity.
type GridRows struct {
	Cell       []int     `json:"cell"`
	Input      []float64 `json:"input_v"`
	Load       []float64 `json:"load_current_a"`
	Ambient    []float64 `json:"ambient_degc"`
	Status     []string  `json:"status"`
	Mode       []string  `json:"conduction_mode"`
	Quantities Columns   `json:"quantities"`
}

// GridFailure is a cell without figures.
type GridFailure struct {
	Cell    int     `json:"cell"`
	Input   float64 `json:"input_v"`
	Load    float64 `json:"load_current_a"`
	Ambient float64 `json:"ambient_degc"`
	Status  string  `json:"status"`
	Detail  string  `json:"detail,omitzero"`
}

// MaxCells bounds a grid.
const MaxCells = 20000

// defaultColumns are the quantities of a grid that asks for none.
var defaultColumns = []string{
	"efficiency_ratio", "loss_total_w", "output_mean_v", "high_side_junction_degc", "low_side_junction_degc", "diode_junction_degc", "inductor_winding_degc",
}

func (w *GridRequest) decode(d *service.Design, asked []string) (*service.GridRequest, error) {
	var faults []Fault
	if cells := float64(len(w.Input)) * float64(len(w.Load)) * float64(len(w.Ambient)); cells > MaxCells {
		faults = append(faults, Fault{Pointer: "/grid", Keyword: "budget", Detail: "the grid has too many cells", Limit: fmt.Sprintf("at most %d cells", MaxCells), Received: figure(cells)})
	}
	if len(asked) == 0 {
		asked = defaultColumns
	}
	r := &service.GridRequest{Design: *d, Input: w.Input, Load: w.Load, Ambient: w.Ambient}
	for i, key := range asked {
		ids, fault := columnIDs(key, banksOf(d.Stage))
		if fault != "" {
			faults = append(faults, Fault{Pointer: "/quantities/" + strconv.Itoa(i), Keyword: "quantity", Detail: fault, Limit: "a key of GET /v1/quantities", Received: key})
		}
		r.Quantities = append(r.Quantities, ids...)
	}
	r.Base = stage.Point{SourceResistance: or(w.Source, 0), AgeRatio: or(w.Age, 0), PartTemperatureDegC: or(w.PartTemperature, parts.Unknown), Control: w.Control.decode()}
	if len(faults) == 0 {
		faults = axisFaults(r)
	}
	if len(faults) > 0 {
		return nil, &InvalidError{faults}
	}
	return r, nil
}

// columnIDs returns the identifiers behind a key: one, or one per bank.
func columnIDs(key string, banks bankCount) (ids []quantity.ID, fault string) {
	for _, info := range quantity.All() {
		if info.Key != key {
			continue
		}
		if info.Group != quantity.SteadyState && info.Group != quantity.Losses {
			return nil, "the quantity belongs to another operation"
		}
		for bank := range banks.of(info.Family) {
			ids = append(ids, info.ID+quantity.ID(bank))
		}
		return ids, ""
	}
	if _, found := quantity.ByKey(key); found {
		return nil, "a grid gives every bank: name the quantity without the bank"
	}
	return nil, "no such quantity"
}

// axisFaults checks a point at the least input voltage, where a control that asks
// for more than the input shows itself.
func axisFaults(r *service.GridRequest) []Fault {
	least := 0
	for i, v := range r.Input {
		if v < r.Input[least] {
			least = i
		}
	}
	p := r.Cell(least * len(r.Load) * len(r.Ambient))
	faults := faultsOf(Located(p.Check(r.Design.Stage), "/grid"))
	for i := range faults {
		if faults[i].Pointer == "/grid/input_v" {
			faults[i].Pointer += "/" + strconv.Itoa(least)
		}
	}
	return faults
}

// EncodeLossesGrid shows the answer to a grid.
func EncodeLossesGrid(w *LossesRequest, r *service.GridRequest, a *service.GridAnswer, head Head) *LossesAnswer {
	grid := &LossesGrid{Input: w.Grid.Input, Load: w.Grid.Load, Ambient: w.Grid.Ambient, Failures: []GridFailure{}}
	rows := &grid.Rows
	n := r.Count()
	rows.Cell = make([]int, 0, n)
	rows.Input, rows.Load, rows.Ambient = make([]float64, 0, n), make([]float64, 0, n), make([]float64, 0, n)
	rows.Status, rows.Mode = make([]string, 0, n), make([]string, 0, n)
	for i := range n {
		p := r.Cell(i)
		if why := a.Failure(i); why != "" {
			grid.Failures = append(grid.Failures, GridFailure{i, p.Input, p.Load.Current, p.AmbientDegC, a.Cells[i].String(), why})
			continue
		}
		rows.Cell = append(rows.Cell, i)
		rows.Input, rows.Load, rows.Ambient = append(rows.Input, p.Input), append(rows.Load, p.Load.Current), append(rows.Ambient, p.AmbientDegC)
		rows.Status, rows.Mode = append(rows.Status, a.Cells[i].String()), append(rows.Mode, modeNames[a.Modes[i]])
	}
	rows.Quantities = encodeColumns(a, rows.Cell, banksOf(r.Design.Stage))
	return &LossesAnswer{Head: head, Status: a.Status.String(), Stage: w.Stage, Grid: grid, Basis: encodeBasis(&a.Basis)}
}

func emptyColumns(n int) [][]float64 {
	list := make([][]float64, n)
	for i := range list {
		list[i] = []float64{}
	}
	return list
}

// encodeColumns keeps the entries of the given cells.
func encodeColumns(a *service.GridAnswer, cells []int, banks bankCount) Columns {
	var c Columns
	to := reflect.ValueOf(&c).Elem()
	for j, id := range a.Quantities {
		column := make([]float64, len(cells))
		for k, i := range cells {
			column[k] = a.Columns[j][i]
		}
		info, bank := quantity.Of(id)
		field := to.Field(places[info.ID])
		if info.Family == quantity.Single {
			field.Set(reflect.ValueOf(column))
			continue
		}
		if field.IsNil() {
			field.Set(reflect.ValueOf(emptyColumns(banks.of(info.Family))))
		}
		field.Index(bank).Set(reflect.ValueOf(column))
	}
	return c
}
