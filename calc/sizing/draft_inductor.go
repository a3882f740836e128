package sizing

import (
	"math"

	"railproof/calc/magnetics"
	"railproof/calc/parts"
)

// What a placeholder inductor can do, per stored energy: a moulded powder core.
const (
	energyDensity = 240.0 // [J/m3] at the saturation rating
	fluxAtRating  = 0.27  // [T] at the saturation rating
	windingTime   = 1e-3  // [s] inductance over DC resistance of a part that stores windingEnergy
	windingEnergy = 2e-4  // [J]
	surfaceRth    = 22.0  // [K/W] of a part of surfaceVolume
	surfaceVolume = 8e-7  // [m3]
	ringArea      = 0.24  // [1] core area over volume to the power 2/3
)

// inductorPlaceholder returns an inductor that stores its energy at the saturation
// current sat.
//
//	V = L Isat²/2 / energyDensity,  N A = L Isat/B,  L/DCR = τ (E/E0)^(2/3)
//
// The volume follows from the energy, the core area from the volume, the turns from
// the flux, and the winding's time constant grows with the two-thirds power of the
// energy, as copper and core area do. size > 1 is a part larger than need be, with
// less resistance.
func inductorPlaceholder(l, sat, rms, dcr, size, junction float64) parts.Inductor {
	energy := size * l * sat * sat / 2
	volume := neat(energy / energyDensity)
	area := neat(ringArea * math.Pow(volume, 2.0/3))
	turns := math.Max(1, math.Round(l*sat/(fluxAtRating*area)))
	return parts.Inductor{
		Inductance:          l,
		InductanceAtCurrent: table(saturation[:], sat),
		DCResistance:        dcr,
		ACResistanceRatio:   3,
		Core: parts.Core{
			Present: true, K: 1.9, Alpha: 1.4, Beta: 2.4,
			Turns: turns, Area: area, Volume: volume,
			Temp:    table([][2]float64{{25, 1.3}, {90, 1}, {125, 1.1}}, 1),
			BandLow: 0.7, BandHigh: 1.3,
		},
		Rating:  parts.InductorRating{Saturation: sat, Heating: roundUp(currentMargin * rms), WindingDegC: min(500, max(125, 5*math.Ceil(junction/5)))},
		Thermal: parts.Thermal{JunctionToAmbient: neat(surfaceRth * math.Sqrt(surfaceVolume/volume))},
		Assumed: true,
	}
}

// windingLeast returns the least DC resistance that a placeholder of that size can
// have [ohm].
func windingLeast(l, sat, size float64) float64 {
	energy := size * l * sat * sat / 2
	return l / (windingTime * math.Pow(energy/windingEnergy, 2.0/3))
}

// Sizes of inductor looked at, in steps of their stored energy.
const (
	largestPart = 16.0 // [1] over what is needed
	sizeStep    = 1.25 // [1]
)

// winding chooses the size of the inductor: the smallest whose winding resistance
// keeps within the budget, but none larger than the one of least loss. It reports
// whether the budget is kept; if not, the drops are raised to the part found.
func (z *sizer) winding() bool {
	copper, _ := parts.CopperMultiplier(z.junction)
	hot := (1 + windingTol) * copper
	i := z.req.LoadCurrent.Max / z.phases
	size, dcr, least := 1.0, 0.0, math.Inf(1)
	for s := 1.0; s <= largestPart; s *= sizeStep {
		r := windingLeast(z.rated, z.saturationAt, s)
		loss := r*hot*i*i + z.coreLoss(s)
		if loss > least {
			break // a larger core loses more than its copper saves
		}
		size, dcr, least = s, r, loss
		if r <= z.windingBudget {
			break
		}
	}
	within := dcr <= z.windingBudget
	if within {
		dcr = math.Min(z.windingBudget, 2*dcr)
	}
	dcr = neat(dcr)
	z.draft.Inductor = inductorPlaceholder(z.rated, z.saturationAt, z.inductorRMS, dcr, size, z.junction)
	if !within {
		z.windingBudget, z.drops.Winding = dcr, dcr*hot
	}
	return within
}

// coreLoss returns the core loss of a placeholder of a size at the typical input
// [W], where its temperature multiplier is 1.
func (z *sizer) coreLoss(size float64) float64 {
	p := inductorPlaceholder(z.rated, z.saturationAt, z.inductorRMS, 0, size, z.junction)
	c := &p.Core
	duty := IdealDuty(z.req.Input.Typ, z.req.Output)
	t := magnetics.PrepareTriangle(c.Alpha, c.Beta)
	t.At(c.K, z.fs)
	linkage := z.req.Output * (1 - duty) / z.fs
	return c.Volume * t.Density(magnetics.FluxSwing(linkage, c.Turns, c.Area), duty, 1-duty)
}
