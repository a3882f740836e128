package wire

import (
	"railproof/calc/preferred"
	"railproof/calc/quantity"
)

// QuantitiesAnswer is the dictionary of quantities.
type QuantitiesAnswer struct {
	Engine     Engine         `json:"engine"`
	Quantities []QuantityInfo `json:"quantities"`
}

// QuantityInfo describes one quantity.
type QuantityInfo struct {
	Key     string `json:"key"`
	Unit    string `json:"unit"`
	Symbol  string `json:"symbol"`
	Meaning string `json:"meaning"`
	Source  string `json:"source"`
	Family  string `json:"family"`
	Group   string `json:"group"`
}

var families = map[quantity.Family]string{quantity.Single: "single", quantity.PerOutputBank: "per-output-bank", quantity.PerInputBank: "per-input-bank"}

var quantityGroups = map[quantity.Group]string{quantity.SteadyState: "steady-state", quantity.Losses: "losses", quantity.Loop: "loop", quantity.Transient: "transient"}

// EncodeQuantities shows the dictionary of quantities.
func EncodeQuantities(e Engine) *QuantitiesAnswer {
	a := &QuantitiesAnswer{Engine: e}
	for _, q := range quantity.All() {
		a.Quantities = append(a.Quantities, QuantityInfo{q.Key, q.Unit, q.Symbol, q.Meaning, q.Source, families[q.Family], quantityGroups[q.Group]})
	}
	return a
}

// PreferredValuesAnswer is the dictionary of preferred values.
type PreferredValuesAnswer struct {
	Engine Engine            `json:"engine"`
	Source string            `json:"source"`
	Series []PreferredSeries `json:"series"`
}

// PreferredSeries is one series within a decade.
type PreferredSeries struct {
	Series    string    `json:"series"`
	Tolerance float64   `json:"tolerance_ratio"`
	Values    []float64 `json:"values"`
}

// usualTolerance is the tolerance that each series is made for: its values with
// their tolerances cover the decade (IEC 60063).
var usualTolerance = map[preferred.Series]float64{
	preferred.E3: 0.4, preferred.E6: 0.2, preferred.E12: 0.1, preferred.E24: 0.05, preferred.E48: 0.02, preferred.E96: 0.01, preferred.E192: 0.005,
}

// EncodePreferredValues shows the series of IEC 60063.
func EncodePreferredValues(e Engine) *PreferredValuesAnswer {
	a := &PreferredValuesAnswer{Engine: e, Source: "IEC 60063"}
	for _, s := range preferred.All() {
		a.Series = append(a.Series, PreferredSeries{Series: s.String(), Tolerance: usualTolerance[s], Values: s.Mantissas()})
	}
	return a
}
