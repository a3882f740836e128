package transient

import (
	"math"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/loop"
	"railproof/calc/parts"
)

// plain is a step-by-step integration of one phase, one bank and a type III
// op-amp loop in voltage mode with the circuit's own equations: no matrices, no
// crossing search, nothing shared with the engine.
type plain struct {
	p          *loop.Plant
	b          Bounds
	load, vref float64
	on         bool
	held       int // -1 low, 1 high
}

// state: inductor current, capacitor voltage, C1, C2, C3.
func (x *plain) rates(s [5]float64) (d [5]float64, vo, vc, push float64) {
	c, k, f := &x.p.Circuit, &x.p.Compensator, &x.p.Feedback
	i, v := s[0], s[1]
	bank := c.Bank[0]
	vo = (v + bank.ESR*(i-x.load)) / (1 + bank.ESR*c.Conductance)
	r := c.Leg.Winding
	drive := -c.Leg.Rectifier.Threshold
	if x.on {
		drive = c.Vin
		r += c.Leg.HighSide
	} else {
		r += c.Leg.Rectifier.Slope
	}
	d[0] = (drive - r*i - vo) / c.Leg.L
	if !x.on && c.Leg.Rectifier.Blocks && i <= 0 {
		d[0] = 0
	}
	d[1] = (vo - v) / (bank.ESR * bank.C)
	v1, v2, v3 := s[2], s[3], s[4]
	vfb := x.vref
	vc = vfb - v2
	if x.held != 0 {
		vc = x.b.ControlLow
		if x.held > 0 {
			vc = x.b.ControlHigh
		}
		vfb = vc + v2
	}
	into := (vo-vfb)/f.Upper + (vo-vfb-v3)/k.LeadOhm - vfb/f.Lower
	branch := (v2 - v1) / k.FeedbackOhm
	d[2], d[3], d[4] = branch/k.FeedbackF, (into-branch)/k.ShuntF, (vo-vfb-v3)/(k.LeadOhm*k.LeadF)
	return d, vo, vc, x.vref - vfb
}

func (x *plain) step(s *[5]float64, h float64) {
	add := func(a [5]float64, d [5]float64, h float64) [5]float64 {
		for i := range a {
			a[i] += h * d[i]
		}
		return a
	}
	k1, _, _, _ := x.rates(*s)
	k2, _, _, _ := x.rates(add(*s, k1, h/2))
	k3, _, _, _ := x.rates(add(*s, k2, h/2))
	k4, _, _, _ := x.rates(add(*s, k3, h))
	for i := range s {
		s[i] += h / 6 * (k1[i] + 2*k2[i] + 2*k3[i] + k4[i])
	}
	if !x.on && x.p.Circuit.Leg.Rectifier.Blocks && s[0] < 0 {
		s[0] = 0
	}
}

// run integrates from the state with the load stepping to another value, and
// returns the extremes of the output after the step and the greatest current.
func (x *plain) run(s [5]float64, stepAt, to, until float64) (least, greatest, peak float64) {
	substeps := 4000
	if testing.Short() {
		substeps = 1000
	}
	period := x.p.Circuit.Period
	h := period / float64(substeps)
	least, greatest = math.Inf(1), math.Inf(-1)
	for n := 0; float64(n)*h < until; n++ {
		at := float64(n) * h
		if at >= stepAt {
			x.load = to
		}
		phase := n % substeps
		_, vo, vc, push := x.rates(s)
		switch {
		case x.held == 0 && vc > x.b.ControlHigh:
			x.held = 1
		case x.held == 0 && vc < x.b.ControlLow:
			x.held = -1
		case x.held > 0 && push < 0, x.held < 0 && push > 0:
			x.held = 0
		}
		ramp := x.p.Modulator.Ramp * float64(phase) / float64(substeps)
		if phase == 0 {
			x.on = ramp < vc
		}
		if x.on && (ramp >= vc || s[0] >= x.p.Modulator.CurrentLimit || float64(phase) >= x.b.MaxDuty*float64(substeps)) {
			x.on = false
		}
		if at >= stepAt {
			least, greatest, peak = min(least, vo), max(greatest, vo), max(peak, s[0])
		}
		x.step(&s, h)
	}
	return least, greatest, peak
}

func TestLargeStepsAgainstPlainIntegration(t *testing.T) {
	diode := buoy()
	diode.Leg.Rectifier.Threshold, diode.Leg.Rectifier.Slope, diode.Leg.Rectifier.Blocks = 0.42, 0.02, true
	for name, c := range map[string]struct {
		diode bool
		from  float64
		to    float64
		limit float64
	}{
		"load-up":                               {from: 1, to: 5, limit: parts.Unknown},
		"load-up/amplifier-clamps":              {from: 1, to: 14, limit: parts.Unknown},
		"load-up/current-limit":                 {from: 1, to: 8, limit: 9},
		"release":                               {from: 6, to: 0.5, limit: parts.Unknown},
		"release/into-discontinuous-conduction": {diode: true, from: 6, to: 0.3, limit: parts.Unknown},
		"load-up/out-of-discontinuous":          {diode: true, from: 0.3, to: 5, limit: parts.Unknown},
	} {
		t.Run(name, func(t *testing.T) {
			circuit := buoy()
			if c.diode {
				circuit = diode
			}
			circuit.Current = 6
			design := designed(t, solved(t, circuit, voltageMode(), opAmp()), parts.OpAmpType3, 50e3, 55)
			circuit.Current = c.from
			p := solved(t, circuit, voltageMode(), design.Compensator)
			p.Modulator.CurrentLimit = c.limit
			b := bounds(&p)
			b.MaxDuty = 0.9
			period := p.Circuit.Period
			at := 10.3 * period
			setup := Setup{
				Plant: p, Bounds: b, Duration: 60 * period, Saturation: parts.Unknown,
				Events: []Event{{Kind: LoadStep, At: at, Change: c.to - c.from}}, Record: Record{Points: 100},
			}
			e, err := New(&setup)
			require.NoError(t, err)
			var s [5]float64
			copy(s[:], e.now.z[:5])
			for e.Advance(7) {
			}
			o := e.Result().Outcomes[1]
			x := plain{p: &p, b: b, load: c.from, vref: p.Feedback.Reference}
			least, greatest, peak := x.run(s, at, c.to, setup.Duration)
			// The plain integration sees edges on its own grid, 1/4000 of a period.
			tolerance, scale := 5e-3, greatest-least
			if testing.Short() {
				tolerance = 0.02
			}
			require.InDelta(t, least, o.Lowest.Value, tolerance*scale)
			require.InDelta(t, greatest, o.Highest.Value, tolerance*scale)
			require.InDelta(t, peak, o.InductorPeak.Value, tolerance*peak)
		})
	}
}
