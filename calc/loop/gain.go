package loop

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

// CompensatorGain returns the gain from the output voltage to the control
// voltage at s = j 2 pi f, counted positive for negative feedback.
//
//	op-amp            Gc = Yi Zf / (1 + (1 + Zf (Yi + Yl)) / A)
//	transconductance  Gc = gm Zl Yi / (Yi + Yl)
//
//	Yi [S]   upper resistor R1, in parallel with R3 + 1/(s C3) for type III
//	Yl [S]   lower resistor
//	Zf [ohm] (R2 + 1/(s C1)) parallel to 1/(s C2)
//	Zl [ohm] Zf parallel to the amplifier's output resistance
//	A  [1]   op-amp gain: 1/A = 1/A0 + j f/GBW
//
// With A infinite these are the usual type I, II and III networks; the lower
// resistor then has no small-signal effect on the op-amp forms.
//
// Source: node equation of the feedback node. Checked by TestReferenceLoop
// loop-11, loop-12 and loop-13, and against the state form of Network.
func CompensatorGain(c *parts.Compensator, f *stage.Feedback, frequency float64) complex128 {
	s := complex(0, 2*math.Pi*frequency)
	yi := complex(1/f.Upper, 0)
	if (c.Type == parts.OpAmpType3 || c.Type == parts.TransconductanceType3) && c.LeadF > 0 {
		yi += 1 / (complex(c.LeadOhm, 0) + 1/(s*complex(c.LeadF, 0)))
	}
	yl := complex(1/f.Lower, 0)
	yf := feedbackAdmittance(c, s)
	if c.Type == parts.TransconductanceType2 || c.Type == parts.TransconductanceType3 {
		return complex(c.Transconductance, 0) / (yf + complex(reciprocalOf(c.OutputOhm), 0)) * yi / (yi + yl)
	}
	inverse := complex(reciprocalOf(c.OpenLoopGain), frequency*reciprocalOf(c.GainBandwidth))
	return yi / (yf + (yf+yi+yl)*inverse)
}

func feedbackAdmittance(c *parts.Compensator, s complex128) complex128 {
	if c.Type == parts.OpAmpType1 {
		return s * complex(c.FeedbackF, 0)
	}
	return 1/(complex(c.FeedbackOhm, 0)+1/(s*complex(c.FeedbackF, 0))) + s*complex(c.ShuntF, 0)
}

// Corners are the zeros and poles of an ideal compensator.
type Corners struct {
	Unity      float64 // [Hz] at which the integrator alone has gain 1
	Zero       float64 // [Hz] of the feedback network; NaN where there is none
	Pole       float64 // [Hz] of the feedback network; NaN where there is none
	LeadZero   float64 // [Hz] of the lead network; NaN where there is none
	LeadPole   float64 // [Hz] of the lead network; NaN where there is none
	BoostBound float64 // [deg] greatest lead the lead network can give; NaN where there is none
}

// CompensatorCorners returns zeros and poles of the compensator with an ideal
// amplifier.
//
//	fz1 = 1/(2π R2 C1), fp1 = 1/(2π R2 C1C2/(C1+C2))
//	op-amp lead: fz2 = 1/(2π (R1+R3) C3), fp2 = 1/(2π R3 C3)
//	transconductance lead: fz2 as above, fp2 = 1/(2π (R3 + R1||Rl) C3),
//	so that fp2/fz2 never exceeds 1 + R1/Rl
//	boost of a pair: asin((r-1)/(r+1)) with r = fp2/fz2
//
// Source: usual networks; checked by TestReferenceLoop loop-09 to loop-13.
func CompensatorCorners(c *parts.Compensator, f *stage.Feedback) Corners {
	nan := math.NaN()
	k := Corners{nan, nan, nan, nan, nan, nan}
	transconductance := c.Type == parts.TransconductanceType2 || c.Type == parts.TransconductanceType3
	sum := c.FeedbackF
	if c.Type != parts.OpAmpType1 {
		sum += c.ShuntF
		k.Zero = 1 / (2 * math.Pi * c.FeedbackOhm * c.FeedbackF)
		if c.ShuntF > 0 {
			k.Pole = sum / (2 * math.Pi * c.FeedbackOhm * c.FeedbackF * c.ShuntF)
		}
	}
	k.Unity = 1 / (2 * math.Pi * f.Upper * sum)
	if transconductance {
		k.Unity = c.Transconductance * f.Lower / (f.Upper + f.Lower) / (2 * math.Pi * sum)
	}
	if (c.Type == parts.OpAmpType3 || c.Type == parts.TransconductanceType3) && c.LeadF > 0 {
		pole := c.LeadOhm
		if transconductance {
			pole += f.Upper * f.Lower / (f.Upper + f.Lower)
		}
		k.LeadZero = 1 / (2 * math.Pi * (f.Upper + c.LeadOhm) * c.LeadF)
		k.LeadPole = 1 / (2 * math.Pi * pole * c.LeadF)
		r := k.LeadPole / k.LeadZero
		k.BoostBound = math.Asin((r-1)/(r+1)) * 180 / math.Pi
	}
	return k
}
