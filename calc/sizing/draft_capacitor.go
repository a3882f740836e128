package sizing

import (
	"math"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/preferred"
)

// capacitorMake says what a kind of capacitor can do: the placeholder pieces of
// that kind are drawn from it.
type capacitorMake struct {
	kind        parts.CapacitorKind
	ratings     []float64 // [V] in which it is sold
	derating    float64   // [1] rating over the voltage applied
	charge      float64   // [C] capacitance times rating of the largest piece
	fixed       float64   // [ohm] of leads and foil
	dissipation float64   // [1] loss factor of the dielectric
	time        float64   // [s] ESR times capacitance of wet and solid electrolytes
	esl         float64   // [H]
	ripple      float64   // [A] rated ripple current of the largest piece
	degc        float64   // [degC] rated
	rth         float64   // [K/W]
	bias        [][2]float64
	temp        [][2]float64
	esrTemp     [][2]float64
	ageing      [][2]float64
	esrAgeing   [][2]float64
}

// Middling values of data sheets; tables of bias are relative to the rated voltage.
var makes = [...]capacitorMake{
	{
		kind: parts.CeramicClass2, ratings: []float64{4, 6.3, 10, 16, 25, 35, 50, 63, 100, 200, 250, 450, 630, 1000}, derating: 2, charge: 3.6e-4,
		fixed: 2e-3, dissipation: 0.02, esl: 5e-10, ripple: 4, degc: 125, rth: 40,
		bias: [][2]float64{{0, 1}, {0.25, 0.93}, {0.5, 0.78}, {1, 0.45}}, temp: [][2]float64{{-55, 0.87}, {25, 1}, {85, 0.95}, {125, 0.88}},
		ageing: [][2]float64{{0, 1}, {1, 0.9}},
	},
	{
		kind: parts.CeramicClass1, ratings: []float64{16, 25, 50, 100, 200, 250, 450, 630, 1000}, derating: 1.25, charge: 2.5e-5,
		fixed: 1e-3, dissipation: 0.001, esl: 5e-10, ripple: 4, degc: 125, rth: 40,
	},
	{
		kind: parts.Film, ratings: []float64{50, 63, 100, 160, 250, 400, 630, 1000, 1250, 1600}, derating: 1.25, charge: 1e-3,
		fixed: 3e-3, dissipation: 0.005, esl: 1e-8, ripple: 6, degc: 105, rth: 20, temp: [][2]float64{{-55, 0.98}, {25, 1}, {105, 0.99}},
	},
	{
		kind: parts.AluminiumPolymer, ratings: []float64{2.5, 4, 6.3, 10, 16, 20, 25, 35, 50, 63, 80, 100}, derating: 1.25, charge: 3.5e-3,
		fixed: 1e-2, time: 1e-6, esl: 3e-9, ripple: 4, degc: 105, rth: 25,
		temp: [][2]float64{{-55, 0.88}, {25, 1}, {105, 1.05}}, esrTemp: [][2]float64{{-55, 1.15}, {25, 1}, {105, 0.95}}, ageing: [][2]float64{{0, 1}, {1, 0.8}}, esrAgeing: [][2]float64{{0, 1}, {1, 1.5}},
	},
	{
		kind: parts.AluminiumElectrolytic, ratings: []float64{6.3, 10, 16, 25, 35, 50, 63, 80, 100, 160, 200, 250, 350, 400, 450, 500}, derating: 1.25, charge: 1.6e-2,
		time: 1.5e-5, esl: 1e-8, ripple: 1.5, degc: 105, rth: 25,
		temp: [][2]float64{{-40, 0.75}, {25, 1}, {105, 1.1}}, esrTemp: [][2]float64{{-40, 8}, {-20, 3}, {25, 1}, {105, 0.6}}, ageing: [][2]float64{{0, 1}, {1, 0.8}}, esrAgeing: [][2]float64{{0, 1}, {1, 2}},
	},
	{
		kind: parts.TantalumSolid, ratings: []float64{4, 6.3, 10, 16, 20, 25, 35, 50}, derating: 2, charge: 1.5e-3,
		fixed: 6e-2, time: 2e-6, esl: 2e-9, ripple: 1.2, degc: 125, rth: 60,
		temp: [][2]float64{{-55, 0.92}, {25, 1}, {125, 1.1}}, ageing: [][2]float64{{0, 1}, {1, 0.95}},
	},
	{
		kind: parts.TantalumPolymer, ratings: []float64{2.5, 4, 6.3, 10, 16, 20, 25, 35, 50}, derating: 1.25, charge: 2e-3,
		fixed: 2e-2, time: 1e-6, esl: 2e-9, ripple: 2.5, degc: 105, rth: 60,
		temp: [][2]float64{{-55, 0.9}, {25, 1}, {105, 1.08}}, ageing: [][2]float64{{0, 1}, {1, 0.85}}, esrAgeing: [][2]float64{{0, 1}, {1, 1.5}},
	},
}

// makeOf returns what a kind can do.
func makeOf(kind parts.CapacitorKind) *capacitorMake {
	for i := range makes {
		if makes[i].kind == kind {
			return &makes[i]
		}
	}
	panic("sizing: no such kind of capacitor")
}

// piece returns the largest single piece for a direct voltage, fs being the
// frequency at which its series resistance counts. Its rating is NaN where the kind
// is not made for the voltage.
func (m *capacitorMake) piece(volts, fs float64, series preferred.Series) parts.Capacitor {
	rating := ratingAtLeast(m.ratings, m.derating*volts)
	return m.pieceOf(series.AtMost(m.charge/rating), rating, fs)
}

// pieceOf returns a piece of a capacitance and rating.
func (m *capacitorMake) pieceOf(c, rating, fs float64) parts.Capacitor {
	relative := func(pairs [][2]float64, scale float64) numeric.Table {
		if pairs == nil {
			return numeric.Table{}
		}
		return table(pairs, scale)
	}
	p := parts.Capacitor{
		Kind: m.kind, Capacitance: c, Count: 1,
		ESR:               neat(m.fixed + m.dissipation/(2*math.Pi*fs*c) + m.time/c),
		ESL:               m.esl,
		CapacitanceAtBias: relative(m.bias, rating),
		CapacitanceTemp:   relative(m.temp, 1),
		ESRTemp:           relative(m.esrTemp, 1),
		CapacitanceAgeing: relative(m.ageing, 1),
		ESRAgeing:         relative(m.esrAgeing, 1),
		Rating:            parts.CapacitorRating{Voltage: rating, RippleCurrent: m.ripple, TemperatureDegC: m.degc},
		Life:              parts.CapacitorLife{Rated: parts.Unknown, RatedRise: 5, FrequencyFactor: 1},
		Thermal:           parts.Thermal{JunctionToAmbient: m.rth},
		Assumed:           true,
	}
	if m.kind == parts.AluminiumElectrolytic {
		p.Life.Rated = 5000 * 3600
	}
	return p
}
