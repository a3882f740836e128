package transient

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/internal/calctest"
	"railproof/calc/loop"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// published is one case of loop-corners-rules.json; its source is named there.
// Cases of other areas have lists among their values.
type published struct {
	ID     string
	Area   string
	Inputs map[string]struct{ Value any }
	Expect map[string]struct {
		Value  any
		TolRel float64 `json:"tol_rel"`
		TolAbs float64 `json:"tol_abs"`
	} `json:"expected"`
}

func (p *published) in(name string) float64 { return p.Inputs[name].Value.(float64) }

func (p *published) check(t *testing.T, got map[string]float64) {
	t.Helper()
	for name, want := range p.Expect {
		g, ok := got[name]
		require.True(t, ok, "%s is not computed", name)
		w := want.Value.(float64)
		require.InDelta(t, w, g, max(want.TolAbs, want.TolRel*math.Abs(w)), "%s: got %.9g, printed arithmetic %.9g", name, g, w)
	}
}

func TestReferenceTransient(t *testing.T) {
	run := map[string]func(t *testing.T, p *published){
		"xient-01": releaseByEnergy, "xient-02": rideThrough, "xient-03": linearAgainstEnergy,
		"xient-04": bounds04, "xient-05": textbookLoadStep,
	}
	var file struct{ Cases []*published }
	calctest.Load(t, "loop-corners-rules.json", &file)
	count := 0
	for _, c := range file.Cases {
		if c.Area == "transient" {
			require.Contains(t, run, c.ID)
			t.Run(c.ID, func(t *testing.T) { run[c.ID](t, c) })
			count++
		}
	}
	require.Equal(t, len(run), count)
}

func releaseByEnergy(t *testing.T, p *published) {
	s := Step{Output: p.in("Vout"), Inductance: p.in("L"), Change: p.in("delta_I")}
	p.check(t, map[string]float64{"C_min": s.ReleaseCapacitance(p.in("overshoot"))})
}

func rideThrough(t *testing.T, p *published) {
	s := Step{Change: p.in("delta_I")}
	p.check(t, map[string]float64{"C_min": s.RideThroughCapacitance(p.in("undershoot"), p.in("t_off_max"))})
}

func linearAgainstEnergy(t *testing.T, p *published) {
	s := Step{Output: p.in("Vout"), Inductance: p.in("L"), Change: p.in("delta_I")}
	energy := s.ReleaseCapacitance(p.in("overshoot"))
	// The linearised form is the capacitance whose slew bound is the overshoot.
	s.Capacitance = energy
	linear := energy * s.ReleaseBound().Voltage / p.in("overshoot")
	p.check(t, map[string]float64{"C_linear": linear, "C_energy": energy})
}

func bounds04(t *testing.T, p *published) {
	s := Step{Input: p.in("Vin"), Output: p.in("Vout"), Inductance: p.in("L"), Capacitance: p.in("C"), Change: p.in("delta_I")}
	up, release := s.LoadUpBound(), s.ReleaseBound()
	p.check(t, map[string]float64{
		"undershoot_bound": up.Voltage, "overshoot_bound": release.Voltage, "t_load": up.Time, "t_release": release.Time,
		"bandwidth_estimate": s.BandwidthEstimate(p.in("fc")),
	})
}

// textbookPlant is the stage of loop-04 with its compensator.
func textbookPlant(p *published) loop.Plant {
	const r1 = 10e3
	h, v := p.in("H"), p.in("V")
	wz, wp, wl := 2*math.Pi*p.in("fz"), 2*math.Pi*p.in("fp"), 2*math.Pi*p.in("fL")
	r2 := p.in("Gc0") * h * r1
	c3 := (1/wz - 1/wp) / r1
	return loop.Plant{
		Circuit: switched.Circuit{
			Vin: p.in("Vg"), Period: 1 / p.in("fs"), Phases: 1, Leg: switched.Leg{L: p.in("L")},
			Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: p.in("C"), ESR: 1e-6}}, Conductance: 1 / p.in("R"),
		},
		Duty: v / p.in("Vg"), Output: v, Mode: switched.Continuous,
		Modulator: parts.Modulator{Present: true, Ramp: p.in("VM"), CurrentLimit: parts.Unknown},
		Compensator: parts.Compensator{
			Present: true, Type: parts.OpAmpType3, FeedbackOhm: r2, FeedbackF: 1 / (r2 * wl), LeadF: c3, LeadOhm: 1 / (wp * c3),
			GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
		},
		Feedback: stage.Feedback{Present: true, Reference: v * h, Upper: r1, Lower: r1 / (1/h - 1)},
	}
}

func textbookLoadStep(t *testing.T, p *published) {
	plant := textbookPlant(p)
	var l loop.LinearStep
	require.True(t, l.Set(&plant))
	r, ok := l.Run(p.in("delta_I"), 2e-3, 2000)
	require.True(t, ok)
	var a loop.Averaged
	a.Set(&plant)
	peak, fc := 0.0, 0.0
	for f := 10.0; f < 50e3; f *= 1.0005 {
		x := a.At(f)
		peak = max(peak, cmplx.Abs(x.ClosedImpedance))
		if cmplx.Abs(x.Loop) > 1 {
			fc = f
		}
	}
	s := Step{Input: p.in("Vg"), Output: p.in("V"), Inductance: p.in("L"), Capacitance: p.in("C"), Change: p.in("delta_I")}
	p.check(t, map[string]float64{
		"peak_deviation": r.Peak, "t_peak": r.PeakAt, "Zout_peak": peak,
		"estimate_dI_over_2pi_fc_C": s.BandwidthEstimate(fc), "slew_bound": s.LoadUpBound().Voltage,
	})

	// The switched run shows the same within the ripple of the output, for a step
	// at whatever place of the period.
	for _, place := range []float64{0, 0.25, 0.5, 0.75} {
		at := (100 + place) / p.in("fs")
		setup := Setup{
			Plant: plant, Bounds: bounds(&plant), Duration: at + 1e-3, Band: 0.01, Saturation: parts.Unknown,
			Events: []Event{{Kind: LoadStep, At: at, Change: p.in("delta_I")}},
		}
		_, result := run(t, &setup)
		o := result.Outcomes[1]
		ripple := result.Outcomes[0].Down
		require.InDelta(t, r.Peak, o.Down-ripple, 0.1*r.Peak, "step at %g of the period", place)
	}
}
