package openapi

import (
	"iter"
	"math"
	"reflect"
	"sort"
	"sync"
	"testing"

	"github.com/stretchr/testify/require"
)

// figuresByName lists members that are not struct fields.
type figuresByName map[string]float64

func (f figuresByName) ContractFields() iter.Seq2[string, any] {
	return func(yield func(string, any) bool) {
		for name, v := range f {
			if !yield(name, v) {
				return
			}
		}
	}
}

type wireSpread struct {
	Min *float64 `json:"min,omitzero"`
	Typ *float64 `json:"typ,omitzero"`
	Tol *float64 `json:"tol,omitzero"`
}

// wireNumber is a number or a spread, with methods on its address.
type wireNumber struct {
	bare   float64
	spread *wireSpread
}

func (n *wireNumber) ContractValue() any {
	if n.spread != nil {
		return n.spread
	}
	return n.bare
}

type wireFeedback struct {
	Reference *wireNumber `json:"reference_v"`
	Upper     wireNumber  `json:"upper_ohm"`
	Lower     wireNumber  `json:"lower_ohm"`
}

func pointers(faults []Fault) []string {
	at := make([]string, 0, len(faults))
	for _, f := range faults {
		at = append(at, f.Pointer+" "+f.Keyword)
	}
	sort.Strings(at)
	return at
}

func TestGoValuesWithTheirOwnForm(t *testing.T) {
	c := Load()
	typ, tol := 0.8, 0.01
	sound := wireFeedback{&wireNumber{spread: &wireSpread{Typ: &typ, Tol: &tol}}, wireNumber{bare: 1e4}, wireNumber{bare: 1e4}}
	require.Empty(t, c.ValidateAs("Feedback", sound))
	require.Empty(t, c.ValidateAs("Feedback", &sound))

	high := 1e3
	broken := wireFeedback{&wireNumber{spread: &wireSpread{Typ: &high, Tol: &high}}, wireNumber{bare: -1}, wireNumber{bare: math.NaN()}}
	require.Equal(t, []string{"/lower_ohm minimum", "/reference_v/tol maximum", "/reference_v/typ maximum", "/upper_ohm minimum"}, pointers(c.ValidateAs("Feedback", broken)))
	require.Equal(t, []string{"/reference_v type"}, pointers(c.ValidateAs("Feedback", wireFeedback{Upper: wireNumber{bare: 1}, Lower: wireNumber{bare: 1}})), "a nil pointer is null")

	require.Empty(t, c.ValidateAs("Quantities", figuresByName{"output_mean_v": 5, "efficiency_ratio": 0.93}))
	require.Equal(t, []string{"/output_mean_v minimum"}, pointers(c.ValidateAs("Quantities", figuresByName{"output_mean_v": math.NaN()})))
	require.Equal(t, []string{"/efficiency_ratio maximum"}, pointers(c.ValidateAs("Quantities", figuresByName{"efficiency_ratio": math.Inf(1)})))
	require.Empty(t, c.ValidateAs("Quantities", map[string]any{"output_mean_v": 5, "output_capacitor_rms_a": []float64{1, 2}}), "Go numbers among a tree")
}

func TestGoValuesBreakTheirSchema(t *testing.T) {
	c := Load()
	item := newAnswer(1).Items[0].Losses[0]
	require.Empty(t, c.ValidateAs("LossItem", item))
	item.Part, item.Count, item.Power = "heatsink", 7, math.Inf(-1)
	require.Equal(t, []string{"/count maximum", "/part enum", "/power_w minimum"}, pointers(c.ValidateAs("LossItem", item)))

	type partial struct {
		Part string `json:"part,omitempty"`
	}
	require.Equal(t, []string{"/count required", "/high_w required", "/low_w required", "/mechanism required", "/part required", "/power_w required"}, pointers(c.ValidateAs("LossItem", partial{})))

	type columns struct {
		Status []string `json:"status"`
	}
	require.Contains(t, pointers(c.ValidateAs("LossesGrid", struct {
		Rows columns `json:"rows"`
	}{})), "/rows/status type", "a nil slice is null")

	require.Equal(t, []string{"/extra additionalProperties"}, pointers(c.ValidateAs("Load", struct {
		Extra int `json:"extra"`
	}{})), "an unknown member of a closed object")
	require.Empty(t, c.ValidateAs("LossItem", struct {
		answerLoss
		New string `json:"new"`
	}{answerLoss: newAnswer(1).Items[0].Losses[0]}), "an unknown member of an open object, an embedded struct")
}

func TestCompareType(t *testing.T) {
	type load struct {
		Current *float64 `json:"current_a"`
		Extra   int      `json:"extra,omitzero"`
	}
	type point struct {
		ID      string      `json:"id,omitzero"`
		Input   float64     `json:"input_v,omitempty"`
		Ambient string      `json:"ambient_degc"`
		Load    *load       `json:"load,omitzero"`
		Control *wireNumber `json:"control,omitzero"`
	}
	require.Equal(t, []string{
		"Point.age_ratio: a property without a field",
		"Point.ambient_degc: string where the contract has a number",
		"Point.asked_v: a property without a field",
		"Point.input_v: required, but left out when empty",
		"Point.load.current_a: optional, but written as null when absent",
		"Point.load.extra: a field that is no property",
		"Point.load.resistance_ohm: a property without a field",
		"Point.part_temperature_degc: a property without a field",
		"Point.source_ohm: a property without a field",
	}, sorted(Load().CompareType("Point", reflect.TypeFor[point]())))
	require.Empty(t, Load().CompareType("LossItem", reflect.TypeFor[answerLoss]()))
	require.Equal(t, []string{"Spread: float64 where the contract has an object"}, Load().CompareType("Spread", reflect.TypeFor[float64]()))
}

func sorted(s []string) []string {
	sort.Strings(s)
	return s
}

// Plans are made once and shared by goroutines.
func TestGoValuesCheckedInParallel(t *testing.T) {
	c := compile(loadGeneral(t))
	a := newAnswer(3)
	var wg sync.WaitGroup
	for range 8 {
		wg.Go(func() {
			for range 50 {
				if faults := validate(c.component("LossesAnswer").properties["items"], a.Items, &c.plans); faults != nil {
					t.Errorf("faults: %v", faults)
				}
			}
		})
	}
	wg.Wait()
}
