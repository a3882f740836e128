package loop

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// MaxShunts is the greatest number of capacitor branches across the bridge's
// input: the input banks, a filter's capacitor and its damping branch.
const MaxShunts = switched.MaxBanks + 2 // [1]

// Source is the impedance that feeds the bridge: a series inductor with its
// damping, and capacitor branches across the bridge. Not Present: stiff.
type Source struct {
	Present    bool
	Inductance float64 // [H] in series; 0: none
	Resistance float64 // [ohm] in series: source, copper and winding
	Damping    Damping
	DampOhm    float64 // [ohm] of an inductor damping
	DampH      float64 // [H] of an inductor damping
	Shunts     int
	Shunt      [MaxShunts]switched.Bank // a damping capacitor with its resistor is one of them
}

// Damping tells how the series inductor is damped.
type Damping uint8

const (
	NoInductorDamping Damping = iota
	AcrossInductor            // resistor and inductor in series, across the filter inductor
	InSeries                  // resistor across a second inductor, in series with the filter inductor
)

func (s *Source) check(f []stage.Fault) []stage.Fault {
	if !s.Present {
		return f
	}
	least := func(field string, given float64, above bool, detail string) {
		if above && !(given > 0) || !(given >= 0) {
			accepted := "at least 0"
			if above {
				accepted = "above 0"
			}
			f = append(f, stage.Fault{Field: field, Given: given, Limit: 0, Accepted: accepted, Detail: detail})
		}
	}
	least("source/inductance_h", s.Inductance, false, "series inductance")
	least("source/resistance_ohm", s.Resistance, s.Inductance == 0, "a source without inductance needs a resistance")
	if s.Damping != NoInductorDamping {
		least("source/damping_ohm", s.DampOhm, true, "damping resistor")
		least("source/damping_h", s.DampH, true, "damping inductor")
		least("source/inductance_h", s.Inductance, true, "there is no inductor to damp")
	}
	for i := range s.Shunts {
		least("source/capacitors", s.Shunt[i].C, true, "capacitance of a branch")
		least("source/capacitors", s.Shunt[i].ESR, true, "series resistance of a branch")
	}
	if s.Inductance > 0 && s.Shunts == 0 {
		f = append(f, stage.Fault{Field: "source/capacitors", Given: 0, Limit: 1, Accepted: "at least one branch", Detail: "an inductor cannot feed the switched current by itself"})
	}
	return f
}

// states returns how many states the source adds.
func (s *Source) states() int {
	switch {
	case !s.Present:
		return 0
	case s.Inductance == 0:
		return s.Shunts
	case s.Damping == NoInductorDamping:
		return 1 + s.Shunts
	}
	return 2 + s.Shunts
}

// Impedance returns the impedance that the bridge sees looking back into its
// source at a frequency [ohm]; 0 for a stiff source.
func (s *Source) Impedance(frequency float64) complex128 {
	if !s.Present {
		return 0
	}
	w := complex(0, 2*math.Pi*frequency)
	z := w * complex(s.Inductance, 0)
	damp := w * complex(s.DampH, 0)
	switch s.Damping {
	case AcrossInductor:
		z = parallel(z, damp+complex(s.DampOhm, 0))
	case InSeries:
		z += parallel(damp, complex(s.DampOhm, 0))
	}
	y := 1 / (z + complex(s.Resistance, 0))
	for i := range s.Shunts {
		y += s.Shunt[i].Admittance(w)
	}
	return 1 / y
}

func parallel(a, b complex128) complex128 { return a * b / (a + b) }

// Optimum is the damping that makes the filter's greatest output impedance least.
type Optimum struct {
	Resistance float64 // [ohm]
	Peak       float64 // [ohm] greatest output impedance
}

// DampingKind names the three single-resistor dampings of an L-C input filter.
type DampingKind uint8

const (
	CapacitorBranch      DampingKind = iota // Rf + Cb in series, across Cf; n = Cb/Cf
	InductorBranch                          // Rf + Lb in series, across Lf; n = Lb/Lf
	InductorSeriesBranch                    // Rf across Lb, in series with Lf; n = Lb/Lf
)

// OptimumDamping returns the resistor that gives the least peak of the output
// impedance of a filter with characteristic impedance R0 = sqrt(Lf/Cf) for a
// damping element n times the filter's own.
//
//	Rf+Cb across Cf:      Rf/R0 = sqrt((2+n)(4+3n)/(2 n^2 (4+n))), Z/R0 = sqrt(2(2+n))/n
//	Rf+Lb across Lf:      Rf/R0 = sqrt(n(3+4n)(1+2n)/(2(1+4n))),   Z/R0 = sqrt(2n(1+2n))
//	Rf || Lb in series:   Rf/R0 = n/(1+n) sqrt((2+n)(4+3n)/(2(1+n)(4+n))), Z/R0 = sqrt(2(1+n)(2+n))/n
//
// Valid for a lossless filter fed from a stiff source.
// Source: R. W. Erickson, "Optimal single resistor damping of input filters",
// APEC 1999. Checked by TestReferenceLoop loop-17 and by brute-force
// minimisation in TestOptimumDampingIsTheMinimum.
func OptimumDamping(kind DampingKind, lf, cf, n float64) Optimum {
	r0 := math.Sqrt(lf / cf)
	switch kind {
	case CapacitorBranch:
		return Optimum{r0 * math.Sqrt((2+n)*(4+3*n)/(2*n*n*(4+n))), r0 * math.Sqrt(2*(2+n)) / n}
	case InductorBranch:
		return Optimum{r0 * math.Sqrt(n*(3+4*n)*(1+2*n)/(2*(1+4*n))), r0 * math.Sqrt(2*n*(1+2*n))}
	}
	return Optimum{r0 * n / (1 + n) * math.Sqrt((2+n)*(4+3*n)/(2*(1+n)*(4+n))), r0 * math.Sqrt(2*(1+n)*(2+n)) / n}
}

// DampingRatioForPeak returns the n = Cb/Cf at which the optimally damped
// capacitor branch has the given peak impedance:
//
//	n = (1 + sqrt(1 + 4 z^2))/z^2, z = Zpeak/R0
//
// Source: as OptimumDamping, solved for n. Checked by TestReferenceLoop loop-17.
func DampingRatioForPeak(lf, cf, peak float64) float64 {
	z2 := peak * peak * cf / lf
	return (1 + math.Sqrt(1+4*z2)) / z2
}

// FromBanks returns the source that input capacitor banks make with a series
// inductance and resistance.
func FromBanks(inductance, resistance float64, banks []switched.Bank) Source {
	s := Source{Present: true, Inductance: inductance, Resistance: resistance, DampOhm: parts.Unknown, DampH: parts.Unknown}
	s.Shunts = copy(s.Shunt[:], banks)
	return s
}
