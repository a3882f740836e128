package losses

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/calc/thermal"
)

// buoy is the 24 V to 5 V, 6 A synchronous stage of the examples.
func buoy() *stage.Stage {
	s := stage.NewStage(stage.Synchronous, 1, 1, 0, false, false, false, true)
	s.SwitchingFrequency = 500e3
	fet := parts.MOSFET{
		OnResistance: 9e-3, OnResistanceTemp: numeric.Table{X: []float64{25, 125}, Y: []float64{1, 1.45}},
		GateCharge: 12e-9, GateSwitchCharge: 3.2e-9, GateSwitchChargeAt: 20, Plateau: 2.7, InternalGate: 1.2,
		OutputCharge: 14e-9, OutputChargeAt: 20, RecoveryCharge: 18e-9, BodyDiode: 0.85, Thermal: parts.Thermal{JunctionToAmbient: 38},
	}
	s.HighSide, s.LowSide = fet, fet
	s.Inductor = parts.Inductor{
		Inductance: 6.8e-6, InductanceAtCurrent: numeric.Table{X: []float64{0, 8, 14}, Y: []float64{1, 0.95, 0.7}},
		DCResistance: 7e-3, ACResistanceRatio: 3, Thermal: parts.Thermal{JunctionToAmbient: 22},
		Core: parts.Core{
			Present: true, K: 1.9, Alpha: 1.4, Beta: 2.4, Turns: 9, Area: 2.1e-5, Volume: 8e-7, BandLow: 0.7, BandHigh: 1.3,
			Temp: numeric.Table{X: []float64{25, 90}, Y: []float64{1.3, 1}},
		},
	}
	s.OutputCapacitors[0] = parts.Capacitor{Capacitance: 22e-6, Count: 4, ESR: 3e-3, Thermal: parts.Thermal{JunctionToAmbient: 40}}
	s.InputCapacitors[0] = parts.Capacitor{Capacitance: 10e-6, Count: 2, ESR: 4e-3, Thermal: parts.Thermal{JunctionToAmbient: 40}}
	s.Controller = parts.Controller{
		Drive: 5, GateOn: 2.5, GateOff: 1.5, DeadTime: 20e-9, MaxDutyRatio: 0.98, QuiescentCurrent: 2e-3,
		Thermal: parts.Thermal{JunctionToAmbient: 50},
	}
	s.Board = stage.Board{InputPath: 1e-3, OutputPath: 1e-3, SwitchNodePath: 5e-4}
	return s
}

// straight is the solution of an ideal stage with straight current ramps.
func straight(vin, vout, load, l, period float64) *switched.Solution {
	d := vout / vin
	ripple := (vin - vout) * d * period / l
	branch := func(share float64) switched.Branch {
		return switched.Branch{Mean: share * load, RMS: math.Sqrt(share * (load*load + ripple*ripple/12))}
	}
	leg := switched.LegSolution{
		Mode: switched.Continuous, Conduct: 1 - d, Inductor: branch(1), HighSide: branch(d), Rectifier: branch(1 - d),
		Peak: load + ripple/2, Valley: load - ripple/2, TurnOn: load - ripple/2, TurnOff: load + ripple/2,
	}
	return &switched.Solution{Status: switched.Solved, Duty: d, OutputMean: vout, Leg: leg, BankRMS: [switched.MaxBanks]float64{ripple / math.Sqrt(12)}}
}

func operation() *Operation {
	op := &Operation{Bridge: 24, Output: 5, BoardDegC: 25, Inductance: 6.6e-6, PathMean: 1.3, LoadRMS: 6, Solution: straight(24, 5, 6, 6.6e-6, 2e-6)}
	op.InputBank[0] = 2.4
	return op
}

func TestItemsAddUpToPowers(t *testing.T) {
	var m Model
	m.Prepare(buoy())
	m.Begin(24, 5)
	m.Freeze(operation())
	var degC, power, slope thermal.Vector
	for i := range degC {
		degC[i] = 60
	}
	var sheet Sheet
	calctest.Poison(&sheet)
	m.Powers(&degC, &power, &slope)
	m.Fill(&degC, &sheet)
	for part := range PartCount {
		if part != Board {
			calctest.Close(t, part.String(), sheet.Of(part), power[part], 1e-12)
		}
	}
}

func BenchmarkModel(b *testing.B) {
	var m Model
	m.Prepare(buoy())
	op := operation()
	m.Begin(24, 5)
	m.Freeze(op)
	var temp, p, s thermal.Vector
	var sheet Sheet
	for i := range temp {
		temp[i] = 60
	}
	b.Run("begin", func(b *testing.B) {
		for b.Loop() {
			m.Begin(24, 5)
		}
	})
	b.Run("freeze", func(b *testing.B) {
		for b.Loop() {
			m.Freeze(op)
		}
	})
	b.Run("powers", func(b *testing.B) {
		for b.Loop() {
			m.Powers(&temp, &p, &s)
		}
	})
	b.Run("fill", func(b *testing.B) {
		for b.Loop() {
			m.Fill(&temp, &sheet)
		}
	})
}
