package loop

import "math"

// currentMode is the averaged modulator of peak current mode,
//
//	d = Fm (vc - Ri He i + kf vin + kr vo)
//
// In continuous conduction, with Sn and Sf the sensed slopes and Ts the period,
//
//	Fm = 1/((Sn + Se) Ts), He = 1 - s Ts/2 + s²/(π fs)²
//	kf = -(D Ts Ri/L)(1 - D/2), kr = Ts Ri/(2 L)
//
// In discontinuous conduction the comparator sees the peak current, which starts
// from rest every period: no sampling, Fm = 1/(Ri dIpk/dd + Se Ts),
// kf = -Ri dIpk/dvin, kr = -Ri dIpk/dvo.
//
// Valid up to half the switching frequency. Source: R. B. Ridley, "A new,
// continuous-time model for current-mode control", IEEE Trans. Power Electron.
// 6(2), 1991 (remembered, unverified); checked against the sampled-data model.
type currentMode struct {
	fm, sense, kf, kr float64
	period            float64
	sampled           bool
}

func (m *currentMode) set(p *Plant, l *limb) {
	ri, se, ts := p.Modulator.Sense, p.Modulator.Slope, p.Circuit.Period
	m.period = ts
	if l.rests {
		r := &l.resting
		m.fm = 1 / (ri*r.peakDuty + se*ts)
		m.kf, m.kr = -ri*r.peakLine, -ri*r.peakOutput
		return
	}
	m.sampled, m.sense = true, ri
	sn := ri * (p.Circuit.Vin - l.current*(l.leg.HighSide+l.leg.Winding) - p.Output) / l.leg.L
	m.fm = 1 / ((sn + se) * ts)
	m.kf = -p.Duty * ts * ri / l.leg.L * (1 - p.Duty/2)
	m.kr = ts * ri / (2 * l.leg.L)
}

// command returns how the duty ratio follows, delayed by lag.
func (m *currentMode) command(s, lag complex128) command {
	fm := complex(m.fm, 0) * lag
	c := command{control: fm, line: fm * complex(m.kf, 0), output: fm * complex(m.kr, 0)}
	if m.sampled {
		wn := math.Pi / m.period
		c.current = -fm * complex(m.sense, 0) * (1 - s*complex(m.period/2, 0) + s*s/complex(wn*wn, 0))
	}
	return c
}

// CurrentLoop describes the inner loop of peak current mode in the usual terms.
type CurrentLoop struct {
	RiseSlope  float64 // [V/s] Sn, sensed
	FallSlope  float64 // [V/s] Sf, sensed
	RampRatio  float64 // [1] mc = 1 + Se/Sn
	Eigenvalue float64 // [1] -(Sf - Se)/(Sn + Se): what is left of a disturbance after one period
	Quality    float64 // [1] Qp = 1/(π(mc D' - 1/2)); not positive: subharmonic oscillation
	Modulator  float64 // [1/V] Fm = 1/((Sn + Se) Ts)
	LeastSlope float64 // [V/s] slope compensation at which it becomes stable, (Sf - Sn)/2 or 0
	DeadBeat   float64 // [V/s] slope at which a disturbance is gone after one period, Sf
	HalfRate   float64 // [Hz] fn = fs/2
	Gain       float64 // [1] control to output at low frequency; IdealCurrentLoop only
	Pole       float64 // [Hz] load pole; IdealCurrentLoop only
	Zero       float64 // [Hz] of the series resistance; IdealCurrentLoop only
}

// Stable reports whether a disturbance of the inductor current dies out.
func (c CurrentLoop) Stable() bool { return math.Abs(c.Eigenvalue) < 1 }

// IdealCurrentLoop returns the textbook figures of peak current mode for a
// lossless stage in continuous conduction with one output capacitor and a
// resistive load.
//
//	vo/vc = (R/Ri)/(1 + (R Ts/L)(mc D' - 1/2)) (1 + s C Rc)/(1 + s/wp) 1/(1 + s/(wn Qp) + s²/wn²)
//	wp = 1/(C R) + (Ts/(L C))(mc D' - 1/2), wn = π fs
//
//	vin, vout [V]; l [H]; c [F]; esr, r [ohm]; fs [Hz]; sense [ohm]; slope [V/s]
//
// Source: R. B. Ridley, IEEE Trans. Power Electron. 6(2), 1991 (remembered,
// unverified). Checked by TestReferenceLoop loop-14 and loop-15.
func IdealCurrentLoop(v IdealStage, sense, slope float64) CurrentLoop {
	ts := 1 / v.Frequency
	c := currentLoop(sense*(v.Input-v.Output)/v.Inductance, sense*v.Output/v.Inductance, slope, v.Output/v.Input, ts)
	x := c.RampRatio*(1-v.Output/v.Input) - 0.5
	c.Gain = v.Load / sense / (1 + v.Load*ts/v.Inductance*x)
	c.Pole = (1/(v.Capacitance*v.Load) + ts/(v.Inductance*v.Capacitance)*x) / (2 * math.Pi)
	c.Zero = 1 / (2 * math.Pi * v.ESR * v.Capacitance)
	return c
}

// currentLoop returns what follows from the sensed slopes, the ramp and the duty
// ratio alone.
func currentLoop(sn, sf, slope, duty, period float64) CurrentLoop {
	mc := 1 + slope/sn
	nan := math.NaN()
	return CurrentLoop{
		RiseSlope: sn, FallSlope: sf, RampRatio: mc,
		Eigenvalue: -(sf - slope) / (sn + slope),
		Quality:    1 / (math.Pi * (mc*(1-duty) - 0.5)),
		Modulator:  1 / ((sn + slope) * period),
		LeastSlope: max(0, (sf-sn)/2), DeadBeat: sf,
		HalfRate: 0.5 / period, Gain: nan, Pole: nan, Zero: nan,
	}
}

// CurrentLoop returns the figures of the current loop from the slopes at the mean
// current, drops included, in continuous conduction; of unequal phases those of the
// least damped one. The exact eigenvalue is that of Margins.
func (p *Plant) CurrentLoop() CurrentLoop {
	c := &p.Circuit
	i := (c.Current + c.Conductance*p.Output) / float64(c.Phases)
	ri := p.Modulator.Sense
	var worst CurrentLoop
	for k := range c.Phases {
		leg := p.leg(k)
		rise := ri * (c.Vin - i*(leg.HighSide+leg.Winding) - p.Output) / leg.L
		fall := ri * (p.Output + leg.Rectifier.Threshold + i*(leg.Rectifier.Slope+leg.Winding)) / leg.L
		one := currentLoop(rise, fall, p.Modulator.Slope, p.Duty, c.Period)
		if k == 0 || math.Abs(one.Eigenvalue) > math.Abs(worst.Eigenvalue) {
			worst = one
		}
	}
	return worst
}

// IdealStage is a lossless stage for the textbook formulas.
type IdealStage struct {
	Input       float64 // [V]
	Output      float64 // [V]
	Inductance  float64 // [H]
	Capacitance float64 // [F]
	ESR         float64 // [ohm]
	Load        float64 // [ohm] resistive
	Frequency   float64 // [Hz] switching frequency
}
