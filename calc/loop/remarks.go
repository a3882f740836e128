package loop

import (
	"fmt"
	"math"
	"math/cmplx"

	"railproof/calc/parts"
	"railproof/calc/switched"
)

// PhaseBudget splits the phase of the averaged loop gain at one frequency into
// what the parts of the loop contribute [deg]; they add up to Total.
type PhaseBudget struct {
	Frequency float64 // [Hz]
	Stage     float64 // [deg] control to output without the delay
	Delay     float64 // [deg] comparator and driver
	Origin    float64 // [deg] -90, the integrator
	Zero      float64 // [deg] of the feedback network
	Pole      float64 // [deg] of the feedback network
	Lead      float64 // [deg] zero and pole of the lead network
	Amplifier float64 // [deg] limits of the amplifier: what the ideal network does not explain
	Total     float64 // [deg] phase of the loop gain
}

// Budget returns the phase budget at a frequency.
func (a *Averaged) Budget(frequency float64) PhaseBudget {
	p := &a.plant
	t := a.At(frequency)
	k := CompensatorCorners(&p.Compensator, &p.Feedback)
	b := PhaseBudget{
		Frequency: frequency, Origin: -90, Delay: -360 * frequency * p.Modulator.Delay,
		Zero: lift(frequency, k.Zero), Pole: -lift(frequency, k.Pole), Lead: lift(frequency, k.LeadZero) - lift(frequency, k.LeadPole),
	}
	b.Stage = wrapDeg(degrees(cmplx.Phase(t.Control)) - b.Delay)
	if b.Stage > 90 {
		b.Stage -= 360
	}
	gc := degrees(cmplx.Phase(CompensatorGain(&p.Compensator, &p.Feedback, frequency)))
	b.Amplifier = wrapDeg(gc - b.Origin - b.Zero - b.Pole - b.Lead)
	b.Total = b.Stage + b.Delay + b.Origin + b.Zero + b.Pole + b.Lead + b.Amplifier
	return b
}

// lift is the phase of 1 + jf/f0 [deg]; 0 where there is no such corner.
func lift(f, f0 float64) float64 {
	if !(f0 > 0) {
		return 0
	}
	return degrees(math.Atan(f / f0))
}

// Topic says what a remark is about.
type Topic uint8

const (
	LoopUnstable      Topic = iota // an eigenvalue lies outside the unit circle
	CurrentAlternates              // subharmonic oscillation of the current loop
	LowerGainUnstable              // conditionally stable
	NoCrossover                    // the loop gain never falls through 1
	LittlePhase                    // less phase margin than is comfortable
	ZerosTooHigh                   // a zero lies above the output filter's resonance
	CrossoverTooHigh               // above a fifth of the decision rate
	CrossoverTooLow                // below three times the resonance, where the phase is low
	AmplifierTooSlow               // the network asks for more gain than the amplifier has
	LittleDirectGain               // the output is off by more than a thousandth for want of gain
)

// Remark is one observation about a loop, with the field it points at.
type Remark struct {
	Topic  Topic
	Field  string  // field id of the stage
	Value  float64 // [any] observed
	Limit  float64 // [any] what it is held against
	Detail string
}

const (
	comfortable     = 45.0 // [deg] phase margin
	highestShare    = 0.2  // [1] of the decision rate
	leastOverFilter = 3.0  // [1] crossover over resonance
	amplifierRoom   = 0.25 // [1] of the amplifier's own gain that the network may ask for
	directError     = 1e-3 // [1] of the output
)

// Remarks explains the margins of a plant whose models are set: what is wrong and
// which part to look at, most serious first.
func (s *Sampled) Remarks(a *Averaged, m *Margins) []Remark {
	var r []Remark
	p := &s.plant
	add := func(t Topic, field string, value, limit float64, format string, args ...any) {
		r = append(r, Remark{t, field, value, limit, fmt.Sprintf(format, args...)})
	}
	if m.Subharmonic {
		least := p.CurrentLoop().LeastSlope
		add(CurrentAlternates, "modulator/slope_v_per_s", p.Modulator.Slope, least,
			"a disturbance of the inductor current is %.3g times as large, with the other sign, one period later; at least %.3g V/s of slope compensation are needed", math.Abs(real(m.CurrentLoop)), least)
	}
	if m.Stability == Unstable {
		add(LoopUnstable, "compensator", m.SpectralRadius, 1, "a disturbance grows %.3g times from one decision of the comparator to the next and oscillates at %s", m.SpectralRadius, hertz(m.DominantAt))
	}
	if m.Conditional {
		add(LowerGainUnstable, "compensator", m.GainReduction, math.NaN(), "stable, but not with %.3g dB less gain, as at low input or while the amplifier is overdriven", m.GainReduction)
	}
	if m.Crossed != Crosses {
		add(NoCrossover, "compensator", cmplx.Abs(s.Loop(m.LowestFrequency)), 1, "the loop gain does not fall through 1 between %s and %s", hertz(m.LowestFrequency), hertz(m.Nyquist))
		return r
	}
	if m.PhaseMargin < comfortable {
		b := a.Budget(m.Crossover)
		sampling := wrapDeg(degrees(cmplx.Phase(s.Loop(m.Crossover))) - b.Total)
		add(LittlePhase, "compensator", m.PhaseMargin, comfortable,
			"at %s the stage turns the phase by %s, the delay by %s, the integrator by -90°, the zero by %s, the lead by %s, the pole by %s, the amplifier's limits by %s, sampling and ripple by %s",
			hertz(m.Crossover), turn(b.Stage), turn(b.Delay), turn(b.Zero), turn(b.Lead), turn(b.Pole), turn(b.Amplifier), turn(sampling))
	}
	s.remarkPlacement(m, add)
	s.remarkAmplifier(m, add)
	return r
}

// remarkPlacement looks at crossover and zeros against filter and decision rate.
func (s *Sampled) remarkPlacement(m *Margins, add func(Topic, string, float64, float64, string, ...any)) {
	p := &s.plant
	if most := highestShare * 2 * m.Nyquist; m.Crossover > most {
		add(CrossoverTooHigh, "compensator", m.Crossover, most, "the loop crosses 1 at %s, above a fifth of the rate at which the comparator decides", hertz(m.Crossover))
	}
	if p.Modulator.Mode != parts.VoltageMode || p.Mode != switched.Continuous {
		return
	}
	f0 := p.Resonance()
	if m.Crossover < leastOverFilter*f0 {
		add(CrossoverTooLow, "compensator", m.Crossover, leastOverFilter*f0, "the loop crosses 1 at %s, close to the output filter's resonance at %s", hertz(m.Crossover), hertz(f0))
	}
	k := CompensatorCorners(&p.Compensator, &p.Feedback)
	if k.Zero > leastOverFilter*f0 {
		add(ZerosTooHigh, "compensator/feedback_f", k.Zero, f0, "the zero at %s lies far above the output filter's resonance at %s: it lifts the phase too late", hertz(k.Zero), hertz(f0))
	}
	if k.LeadZero > leastOverFilter*f0 {
		add(ZerosTooHigh, "compensator/lead_f", k.LeadZero, f0, "the lead zero at %s lies far above the output filter's resonance at %s: it lifts the phase too late", hertz(k.LeadZero), hertz(f0))
	}
}

// remarkAmplifier looks at what the network asks of the amplifier.
func (s *Sampled) remarkAmplifier(m *Margins, add func(Topic, string, float64, float64, string, ...any)) {
	p := &s.plant
	c := p.Compensator
	if c.Type <= parts.OpAmpType3 && limited(c.GainBandwidth) {
		c.OpenLoopGain, c.GainBandwidth = math.Inf(1), math.Inf(1)
		asked, own := cmplx.Abs(CompensatorGain(&c, &p.Feedback, m.Crossover)), p.Compensator.GainBandwidth/m.Crossover
		if asked > amplifierRoom*own {
			add(AmplifierTooSlow, "compensator/gain_bandwidth_hz", p.Compensator.GainBandwidth, asked*m.Crossover/amplifierRoom,
				"at %s the network asks for a gain of %.3g, the amplifier has %.3g", hertz(m.Crossover), asked, own)
		}
	}
	if math.Abs(s.Error) > directError {
		field := "compensator/open_loop_gain_ratio"
		if c.Type > parts.OpAmpType3 {
			field = "compensator/output_ohm"
		}
		add(LittleDirectGain, field, math.Abs(s.Error), directError, "for want of direct gain the output is %.2g %% off", 100*math.Abs(s.Error))
	}
}

// turn writes an angle for a sentence.
func turn(deg float64) string {
	if math.Abs(deg) < 0.5 {
		return "0°"
	}
	return fmt.Sprintf("%+.0f°", deg)
}

// hertz writes a frequency for a sentence.
func hertz(f float64) string {
	switch {
	case f >= 1e6:
		return fmt.Sprintf("%.4g MHz", f/1e6)
	case f >= 1e3:
		return fmt.Sprintf("%.4g kHz", f/1e3)
	}
	return fmt.Sprintf("%.4g Hz", f)
}

// Resonance returns the frequency of the output filter [Hz], all phases and banks
// in parallel: 1/(2π sqrt(L C)).
func (p *Plant) Resonance() float64 {
	c := 0.0
	for k := range p.Circuit.Banks {
		c += p.Circuit.Bank[k].C
	}
	inverse := 0.0
	for k := range p.Circuit.Phases {
		inverse += 1 / p.leg(k).L
	}
	return 1 / (2 * math.Pi * math.Sqrt(c/inverse))
}
