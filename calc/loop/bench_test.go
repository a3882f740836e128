package loop

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"
)

func benchPlants(t testing.TB) map[string]Plant {
	return map[string]Plant{
		"voltage/one-bank":  solvedPlant(t, buoy(), 5, voltageMode(), typeThree()),
		"voltage/two-banks": solvedPlant(t, twoBanks(buoy()), 5, voltageMode(), typeThree()),
		"current/one-bank":  solvedPlant(t, buoy(), 5, currentModulator(), transconductor()),
		"voltage/dcm":       solvedPlant(t, diodeLight(buoy()), 5, voltageMode(), typeThree()),
	}
}

func TestAnalysisAllocatesNothing(t *testing.T) {
	for name, p := range benchPlants(t) {
		var s Sampled
		var a Averaged
		var m Margins
		require.Zero(t, testing.AllocsPerRun(5, func() {
			s.Set(&p)
			s.Margins(&m)
			a.Set(&p)
			for f := 100.0; f < 200e3; f *= 3 {
				s.At(f)
				a.At(f)
			}
		}), name)
	}
}

func BenchmarkMargins(b *testing.B) {
	for name, p := range benchPlants(b) {
		b.Run(name, func(b *testing.B) {
			var s Sampled
			var m Margins
			for b.Loop() {
				s.Set(&p)
				s.Margins(&m)
			}
		})
	}
}

func BenchmarkAnalysis300Frequencies(b *testing.B) {
	for name, p := range benchPlants(b) {
		b.Run(name, func(b *testing.B) {
			var s Sampled
			var a Averaged
			var m Margins
			for b.Loop() {
				s.Set(&p)
				s.Margins(&m)
				a.Set(&p)
				f, step := 10.0, math.Pow(25e3, 1.0/299)
				for range 300 {
					s.At(f)
					a.At(f)
					f *= step
				}
			}
		})
	}
}

func BenchmarkFrequency(b *testing.B) {
	for name, p := range benchPlants(b) {
		b.Run(name, func(b *testing.B) {
			var s Sampled
			var a Averaged
			s.Set(&p)
			a.Set(&p)
			b.ReportAllocs()
			for b.Loop() {
				s.At(20e3)
				a.At(20e3)
			}
		})
	}
}
