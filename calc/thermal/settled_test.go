package thermal

import (
	"math"
	"testing"
)

// For linear losses the bound can be held against the equilibrium itself.
func TestSettledBoundsTheDistanceToTheEquilibrium(t *testing.T) {
	for _, gain := range []float64{0, 0.2, 0.6, 0.95, 1.2} {
		for _, off := range []float64{-2e-3, -4e-4, 0, 3e-4, 2e-3} {
			var n Network
			n.Add(0, 40)
			j := gain / 40
			equilibrium := (25 + 40*(1-25*j)) / (1 - gain) // P = 1 + j (T - 25)
			var power, slope, degC Vector
			degC[0] = equilibrium + off
			power[0], slope[0] = 1+j*(degC[0]-25), j
			settled := n.Settled(25, &power, &slope, &degC, 1e-3)
			if near := math.Abs(off) <= 1e-3 && gain < 1; settled != near {
				t.Errorf("gain %g, %g K off: settled %v", gain, off, settled)
			}
		}
	}
}
