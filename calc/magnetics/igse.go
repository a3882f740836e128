package magnetics

import "math"

// Triangle is the improved generalised Steinmetz equation for a triangular flux,
// with everything that does not depend on flux or duty computed beforehand.
type Triangle struct {
	alpha, beta float64
	kiOverK     float64
	scale       float64 // ki f^alpha
}

// PrepareTriangle takes the exponents; they cost two gamma functions.
func PrepareTriangle(alpha, beta float64) Triangle {
	return Triangle{alpha: alpha, beta: beta, kiOverK: kiOverK(alpha, beta)}
}

// At sets the sine coefficient k [W/m3 at 1 Hz, 1 T] and the frequency [Hz].
func (t *Triangle) At(k, f float64) {
	t.scale = k * t.kiOverK * binaryPower(t.alpha*binaryLog(f))
}

// Density returns the loss density [W/m3] of a flux that rises for the fraction
// rise of the period, falls for the fraction fall and rests for what is left.
//
//	p = ki f^α ΔB^β [d1^(1−α) + d2^(1−α)]
//
//	ΔB     [T] peak to peak
//	d1, d2 [1] rise and fall; d1 + d2 = 1 in continuous conduction, less in
//	           discontinuous, where the flat piece adds nothing in this model
//
// From p = mean of ki |dB/dt|^α ΔB^(β−α). Valid for d1, d2 > 0, d1 + d2 <= 1.
// Against measurement (open data of N27): 1.10 to 1.26 for duty 0.2 to 0.5, 0.76
// at duty 0.1 and 200 kHz, where relaxation is missing.
//
// No flux, or no change of it, has no loss. Derived; checked by TestTriangleAgainstPieces and
// power-stage cases ps-co-01 and ps-co-03.
func (t *Triangle) Density(swing, rise, fall float64) float64 {
	if !(swing > 0 && rise > 0 && fall > 0) {
		return 0
	}
	a := 1 - t.alpha
	swung := t.beta * binaryLog(swing)
	return t.scale * (binaryPower(swung+a*binaryLog(rise)) + binaryPower(swung+a*binaryLog(fall)))
}

// PiecewiseDensity returns the loss density [W/m3] of any flux made of straight
// pieces, by the same equation.
//
//	p = (ki/T) Σ |ΔBj|^α Δtj^(1−α) · ΔB^(β−α)
//
//	times [s]  strictly increasing, times[n-1] − times[0] is one period
//	flux  [T]  at those times; the last repeats the first
//
// ΔB is the swing of the whole waveform: valid for a flux without minor loops; a
// minor loop is to be given as a waveform of its own.
//
// Source: as Steinmetz.KI.
func (s Steinmetz) PiecewiseDensity(times, flux []float64) float64 {
	low, high, sum := flux[0], flux[0], 0.0
	for i := 1; i < len(flux); i++ {
		low, high = min(low, flux[i]), max(high, flux[i])
		sum += math.Pow(math.Abs(flux[i]-flux[i-1]), s.Alpha) * math.Pow(times[i]-times[i-1], 1-s.Alpha)
	}
	if !(high > low) {
		return 0
	}
	return s.KI() * math.Pow(high-low, s.Beta-s.Alpha) * sum / (times[len(times)-1] - times[0])
}

// TriangleOverSine returns the loss of a triangular flux relative to a sine of
// equal frequency and amplitude; it does not depend on β.
//
//	2^α [D^(1−α) + (1−D)^(1−α)]/[(2π)^(α−1) J]
//
// 1 at α = 1 for any duty; 8/π² at α = 2, D = 0.5. Derived from KI and Density.
func TriangleOverSine(alpha, duty float64) float64 {
	return math.Pow(2, alpha) * (math.Pow(duty, 1-alpha) + math.Pow(1-duty, 1-alpha)) /
		(math.Pow(2*math.Pi, alpha-1) * cosineIntegral(alpha))
}

// FluxSwing returns the peak-to-peak flux density [T] in a core.
//
//	ΔB = Δλ/(N Ae) = L ΔI/(N Ae)
//
//	linkage [Vs] swing of flux linkage, turns [1], area [m2] effective
func FluxSwing(linkage, turns, area float64) float64 { return linkage / (turns * area) }
