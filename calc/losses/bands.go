package losses

import "math"

var nan = math.NaN()

// Band is how far a mechanism's model may lie from the truth with exact part
// data, as least and greatest factor on its loss.
type Band struct {
	Low  float64 // [1]
	High float64 // [1]
}

// ModelBand returns a mechanism's band. Circuit items are exact for given part
// data. The core's band is the part's own.
//
// Overlap: the straight-line model is good to a factor of two. Recovery charge
// depends on current and slope, and is given at the maker's. Output charge is
// scaled with the square root of voltage. Dead time neglects that the body
// diode's drop depends on current, leakage that it grows with voltage, the AC
// winding loss that one ratio stands for all harmonics. The figures are
// engineering judgement.
func ModelBand(m Mechanism) Band { return modelBands[m] }

var modelBands = [MechanismCount]Band{
	Conduction:       {1, 1},
	Overlap:          {0.5, 2},
	OutputCharge:     {0.8, 1.2},
	Recovery:         {0.5, 1.5},
	DeadTime:         {0.8, 1.2},
	GateDrive:        {1, 1},
	Leakage:          {0.5, 1.5},
	JunctionCharge:   {0.8, 1.2},
	WindingDC:        {1, 1},
	WindingAC:        {0.8, 1.3},
	CoreHysteresis:   {0.7, 1.3},
	SeriesResistance: {1, 1},
	Quiescent:        {1, 1},
	Auxiliary:        {1, 1},
	InputPath:        {1, 1},
	OutputPath:       {1, 1},
	SwitchNodePath:   {1, 1},
	SourcePath:       {1, 1},
}
