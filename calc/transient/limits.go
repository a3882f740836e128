package transient

import "math"

// Step is a load step and what stands behind the output, for the closed formulas.
type Step struct {
	Input       float64 // [V]
	Output      float64 // [V]
	Inductance  float64 // [H] all phases in parallel
	Capacitance float64 // [F]
	ESR         float64 // [ohm]
	Change      float64 // [A] size of the step
}

// Excursion is a deviation that no controller can avoid, and how long the
// inductor takes to follow.
type Excursion struct {
	Voltage float64 // [V]
	Time    float64 // [s]
}

// LoadUpBound returns the least undershoot after a sudden rise of the load, with
// the duty ratio at one at once.
//
//	m = (Vin - V)/L, t = dI/m
//	dI/m > ESR C:  dV = ESR² C m/2 + dI²/(2 C m);  else dV = ESR dI
//
// Valid for a step at once, constant L and C. Without ESR this is
// L dI²/(2 C (Vin-V)). Source: charge balance, derived; checked by
// TestReferenceTransient xient-04 and against the run with a duty ratio of one.
func (s Step) LoadUpBound() Excursion { return s.bound((s.Input - s.Output) / s.Inductance) }

// ReleaseBound returns the least overshoot after a sudden fall of the load, with
// the duty ratio at zero at once: as LoadUpBound with m = V/L.
func (s Step) ReleaseBound() Excursion { return s.bound(s.Output / s.Inductance) }

func (s Step) bound(m float64) Excursion {
	e := Excursion{Time: s.Change / m, Voltage: s.ESR * s.Change}
	if e.Time > s.ESR*s.Capacitance {
		e.Voltage = s.ESR*s.ESR*s.Capacitance*m/2 + s.Change*s.Change/(2*s.Capacitance*m)
	}
	return e
}

// BandwidthEstimate returns the deviation of a loop with the given crossover,
//
//	dV = dI/(2 π fc C)
//
// Valid for ESR < 1/(2 π fc C) and a phase margin above 45°; a design deviates by
// at least the larger of this and the bound. Source: usual estimate (remembered,
// unverified); checked by TestReferenceTransient xient-04, and in xient-05 the
// exact linear peak is 0.82 of it.
func (s Step) BandwidthEstimate(crossover float64) float64 {
	return s.Change / (2 * math.Pi * crossover * s.Capacitance)
}

// ReleaseCapacitance returns the capacitance that holds the overshoot of a full
// release when all of the inductor's energy goes into it:
//
//	C = L dI²/((V + dV)² - V²)
//
// Source: Texas Instruments, TPS40200-EP data sheet SGLS371A, p. 22, eq. 16.
// Checked by TestReferenceTransient xient-01 and xient-03; the linearised form
// L dI²/(2 V dV) asks for (1 + dV/2V) times as much.
func (s Step) ReleaseCapacitance(overshoot float64) float64 {
	return s.Inductance * s.Change * s.Change / (overshoot * (2*s.Output + overshoot))
}

// RideThroughCapacitance returns the capacitance that carries the step alone for
// the time given, such as the longest off-time:
//
//	C = dI t/dV
//
// Source: as ReleaseCapacitance, eq. 15. Checked by TestReferenceTransient
// xient-02, where the source rounds 99 uF to 100 uF.
func (s Step) RideThroughCapacitance(undershoot, time float64) float64 {
	return s.Change * time / undershoot
}
