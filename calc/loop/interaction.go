package loop

import (
	"math"
	"math/cmplx"
)

// Interaction tells what a source impedance does to the loop at one frequency.
type Interaction struct {
	Source  complex128 // [ohm] Zo, seen by the bridge
	Null    complex128 // [ohm] ZN, input impedance with the output held still by the duty ratio
	Driving complex128 // [ohm] ZD, input impedance with the control voltage held still
	Closed  complex128 // [ohm] Zi, input impedance with the loop closed
	Loop    complex128 // [1] loop gain with the source impedance
}

// InteractionAt returns the interaction of the averaged model with a source.
//
//	T' = T (1 + Zo/ZN)/(1 + Zo/ZD)
//	in continuous conduction and voltage mode ZN = -Ve/(I D), ZD = (Zs + Zp)/D²
//
// With |Zo| well below |ZN| and |ZD| at every frequency the loop does not notice;
// where it is not, T' tells, and Sampled with the plant's Source decides.
//
// Source: R. D. Middlebrook, "Input filter considerations in design and
// application of switching regulators", IEEE IAS 1976 (remembered, unverified).
// Checked by TestReferenceLoop loop-16 and against the sampled-data model of the
// stage with its source.
func (a *Averaged) InteractionAt(s *Source, frequency float64) Interaction {
	w := complex(0, 2*math.Pi*frequency)
	t := a.At(frequency)
	null, driving := a.admittance(w, 0), a.admittance(w, t.Line)
	zo := s.Impedance(frequency)
	return Interaction{
		Source: zo, Null: 1 / null, Driving: 1 / driving, Closed: 1 / a.admittance(w, t.ClosedLine),
		Loop: t.Loop * (1 + zo*null) / (1 + zo*driving),
	}
}

// admittance returns the response of the mean input current to the source voltage [S],
// with the control voltage such that the output follows the source by as much as told.
func (a *Averaged) admittance(s, follows complex128) complex128 {
	_, all := a.sums(s)
	control := (follows*(1/a.load(s)+all.output) - all.line) / all.drive
	d := complex(a.plant.Duty, 0)
	sum := complex128(0)
	for k := range a.count {
		l := &a.limb[k]
		m := a.command(l, s)
		f := l.bare(s, a.plant.Duty).under(m)
		current := f.drive*control + f.line - f.output*follows
		duty := m.control*control + m.current*current + m.line + m.output*follows
		if l.rests {
			r := &l.resting
			sum += complex(r.onDuty, 0)*duty + complex(r.onLine, 0) + complex(r.onOutput, 0)*follows
		} else {
			sum += d*current + complex(l.current, 0)*duty
		}
	}
	return complex(a.weight, 0) * sum
}

// SourceMargin is the verdict on a source impedance over frequency.
type SourceMargin struct {
	Null      float64 // [dB] least of |ZN|/|Zo|
	NullAt    float64 // [Hz]
	Driving   float64 // [dB] least of |ZD|/|Zo|
	DrivingAt float64 // [Hz]
	Input     float64 // [dB] least of |Zi|/|Zo|, loop closed
	InputAt   float64 // [Hz]
}

// Customary is the separation of the impedances that is customarily asked for
// [dB]; 6 to 10 dB are usual (remembered, unverified).
const Customary = 6.0

// farthest is the separation beyond which rounding alone is seen [dB]: without a load
// the stage has no input admittance.
const farthest = 240.0

// SourceMargins returns the least separation of source and input impedances on a
// logarithmic grid up to half the decision rate; +Inf where there is none.
func (a *Averaged) SourceMargins(s *Source) SourceMargin {
	m := SourceMargin{Null: math.Inf(1), Driving: math.Inf(1), Input: math.Inf(1)}
	nyquist := a.plant.Nyquist()
	const points = 400
	step := math.Pow(searchSpan, 1.0/(points-1))
	f := nyquist / searchSpan
	for range points {
		x := a.InteractionAt(s, f)
		least := func(z complex128, db, at *float64) {
			if d := 20 * math.Log10(cmplx.Abs(z)/cmplx.Abs(x.Source)); d < min(*db, farthest) {
				*db, *at = d, f
			}
		}
		least(x.Null, &m.Null, &m.NullAt)
		least(x.Driving, &m.Driving, &m.DrivingAt)
		least(x.Closed, &m.Input, &m.InputAt)
		f *= step
	}
	return m
}

// NegativeResistance returns the low-frequency input resistance of a stage that
// keeps its output power whatever the input voltage [ohm]:
//
//	R = -Vin²/P
//
// Source: C. Basso, Switch-Mode Power Supplies, 2nd ed., 2014, section 1.10, as
// summarised in a public guide. Checked by TestReferenceLoop loop-18.
func NegativeResistance(vin, power float64) float64 { return -vin * vin / power }
