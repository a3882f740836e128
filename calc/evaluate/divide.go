package evaluate

import (
	"math"

	"railproof/calc/switched"
)

// wave is a shape of periodic current by how fast its harmonics fall.
type wave int

const (
	rectangle wave = 1 // an = sin(n π D)/n
	triangle  wave = 2 // an = sin(n π D)/n²
)

// total is Σ an² over all harmonics.
func (w wave) total(duty float64) float64 {
	x := math.Pi * math.Pi * duty * (1 - duty)
	if w == rectangle {
		return x / 2
	}
	return x * x / 6
}

// dividedHarmonics is how many harmonics of a current the closed form divides one by
// one.
const dividedHarmonics = 3

// divide shares the RMS value of a current [A] among banks in parallel: its first
// harmonics by the banks' admittances, the rest by their conductances.
//
//	Ik² = I² [Σ an² |Yk(n ω)/ΣY(n ω)|² + (A − Σ an²) (gk/Σg)²]/A,  A = Σ an² over all
func divide(w wave, duty, rms, period float64, bank []switched.Bank, share *[switched.MaxBanks]float64) {
	whole := w.total(duty)
	if len(bank) == 1 || !(rms > 0 && whole > 0) {
		share[0] = rms
		return
	}
	var sum [switched.MaxBanks]float64
	left := whole
	for n := 1.0; n <= dividedHarmonics; n++ {
		omega := 2 * math.Pi * n / period
		a := math.Sin(n*math.Pi*duty) / n
		if w == triangle {
			a /= n
		}
		left -= a * a
		var y [switched.MaxBanks]complex128
		var all complex128
		for k := range bank {
			y[k] = bank[k].Admittance(complex(0, omega))
			all += y[k]
		}
		for k := range bank {
			sum[k] += a * a * square(y[k]) / square(all)
		}
	}
	conductance := 0.0
	for k := range bank {
		conductance += 1 / bank[k].ESR
	}
	for k := range bank {
		part := 1 / (bank[k].ESR * conductance)
		share[k] = rms * math.Sqrt((sum[k]+max(0, left)*part*part)/whole)
	}
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// together returns the capacitance [F] and series resistance [ohm] that the output
// banks in parallel have at the switching frequency.
func together(c *switched.Circuit) (capacitance, r float64) {
	if c.Banks == 1 {
		return c.Bank[0].C, c.Bank[0].ESR
	}
	omega := 2 * math.Pi / c.Period
	var y complex128
	for k := range c.Banks {
		y += c.Bank[k].Admittance(complex(0, omega))
	}
	z := 1 / y
	return -1 / (omega * imag(z)), real(z)
}
