package loop

import (
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/internal/calctest"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
)

// published is one case of loop-corners-rules.json; its source is named there.
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

// check compares every expected output of the case; got must have them all.
func (p *published) check(t *testing.T, got map[string]float64) {
	t.Helper()
	for name, want := range p.Expect {
		g, ok := got[name]
		require.True(t, ok, "%s is not computed", name)
		w := want.Value.(float64)
		tolerance := max(want.TolAbs, want.TolRel*math.Abs(w))
		require.InDelta(t, w, g, tolerance, "%s: got %.9g, printed arithmetic %.9g", name, g, w)
	}
}

func publishedCases(t *testing.T) map[string]*published {
	var file struct{ Cases []*published }
	calctest.Load(t, "loop-corners-rules.json", &file)
	byID := map[string]*published{}
	for _, c := range file.Cases {
		byID[c.ID] = c
	}
	return byID
}

var loopReference = map[string]func(t *testing.T, p *published){
	"loop-01": textbookConstants, "loop-02": textbookWithoutCompensator, "loop-03": textbookLead,
	"loop-04": textbookLoop, "loop-05": twoPoleLoop, "loop-06": controlToOutputWithLosses,
	"loop-07": discontinuous, "loop-08": currentModeLoadPole, "loop-09": typeThreeParts,
	"loop-10": kFactorTwo, "loop-11": typeThreeLoop, "loop-12": typeTwoCorners,
	"loop-13": feedForwardCapacitor, "loop-14": currentLoopEigenvalue, "loop-15": sampledCurrentMode,
	"loop-16": inputFilter, "loop-17": optimumDamping, "loop-18": negativeResistance,
}

func TestReferenceLoop(t *testing.T) {
	cases := publishedCases(t)
	for id, p := range cases {
		if p.Area == "loop" {
			require.Contains(t, loopReference, id)
		}
	}
	for id, run := range loopReference {
		require.Contains(t, cases, id)
		t.Run(id, func(t *testing.T) { run(t, cases[id]) })
	}
}

// textbook returns the averaged model of the ideal stage that loop-01 to loop-04
// and the load step of the same book describe.
func textbook(p *published, k parts.Compensator, f stage.Feedback) *Averaged {
	const nearlyZero = 1e-9 // [ohm] the capacitor of the book has no series resistance
	v := p.in("V")
	plant := Plant{
		Circuit: switched.Circuit{
			Vin: p.in("Vg"), Period: 1 / p.in("fs"), Phases: 1, Leg: switched.Leg{L: p.in("L")},
			Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: p.in("C"), ESR: nearlyZero}}, Conductance: 1 / p.in("R"),
		},
		Duty: v / p.in("Vg"), Output: v, Mode: switched.Continuous,
		Modulator: parts.Modulator{Present: true, Ramp: p.in("VM")}, Compensator: k, Feedback: f,
	}
	a := &Averaged{}
	a.Set(&plant)
	return a
}

func textbookConstants(t *testing.T, p *published) {
	a := textbook(p, parts.Compensator{}, stage.Feedback{})
	low := real(a.At(1).Duty)
	// The resonance of the ideal filter is where the gain is in quadrature.
	f0 := bisect(100, 10e3, true, func(f float64) bool { return real(a.At(f).Duty) < 0 })
	q := cmplx.Abs(a.At(f0).Duty) / low
	tu := real(a.At(1).Control) * p.in("H")
	p.check(t, map[string]float64{
		"D": a.plant.Duty, "Gd0": low, "f0": f0, "Q0": q, "Q0_dB": decibels(q), "Tu0": tu, "Tu0_dB": decibels(tu),
	})
}

// divided is a plain divider in front of the modulator: the gain H without
// frequency dependence.
type divided struct {
	a *Averaged
	h float64
}

func (d divided) Loop(f float64) complex128 { return d.a.At(f).Control * complex(d.h, 0) }

func searched(l gain, nyquist float64) Margins {
	var g scan
	var m Margins
	g.reset(nyquist)
	m.search(l, &g)
	return m
}

func textbookWithoutCompensator(t *testing.T, p *published) {
	a := textbook(p, parts.Compensator{}, stage.Feedback{})
	m := searched(divided{a, p.in("H")}, p.in("fs")/2)
	p.check(t, map[string]float64{"fc": m.Crossover, "phase_margin": m.PhaseMargin})
}

func textbookLead(t *testing.T, p *published) {
	a := textbook(p, parts.Compensator{}, stage.Feedback{})
	fc := p.in("fc_target")
	pair := PlaceLead(fc, p.in("phase_lead"))
	// The book reads the gain off the -40 dB per decade asymptote.
	f0 := 1 / (2 * math.Pi * math.Sqrt(p.in("L")*p.in("C")))
	tu := real(a.At(1).Control) * p.in("H")
	gc := math.Sqrt(pair.Zero/pair.Pole) / (tu * (f0 / fc) * (f0 / fc))
	p.check(t, map[string]float64{"fz": pair.Zero, "fp": pair.Pole, "Gc0": gc, "Gc0_dB": decibels(gc), "T0": gc * tu})
}

// textbookCompensator is the book's Gc0 (1+wL/s)(1+s/wz)/(1+s/wp) behind the gain
// H as a type III network without shunt capacitor.
func textbookCompensator(p *published) (parts.Compensator, stage.Feedback) {
	const r1 = 10e3
	wz, wp, wl := 2*math.Pi*p.in("fz"), 2*math.Pi*p.in("fp"), 2*math.Pi*p.in("fL")
	r2 := p.in("Gc0") * p.in("H") * r1
	c3 := (1/wz - 1/wp) / r1
	network := parts.Compensator{
		Present: true, Type: parts.OpAmpType3, FeedbackOhm: r2, FeedbackF: 1 / (r2 * wl), LeadF: c3, LeadOhm: 1 / (wp * c3),
		GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
	}
	divider := stage.Feedback{Present: true, Reference: p.in("V") * p.in("H"), Upper: r1, Lower: r1 / (1/p.in("H") - 1)}
	return network, divider
}

func textbookLoop(t *testing.T, p *published) {
	k, f := textbookCompensator(p)
	a := textbook(p, k, f)
	m := searched(a, p.in("fs")/2)
	p.check(t, map[string]float64{
		"fc": m.Crossover, "phase_margin": m.PhaseMargin, "Gvg_closed": cmplx.Abs(a.At(p.in("f_line")).ClosedLine),
	})
	require.True(t, math.IsNaN(m.GainMargin), "the ideal model never reaches -180°: no gain margin, not an infinite one")
	require.Zero(t, m.PhaseCount)
}

func twoPoleLoop(t *testing.T, p *published) {
	got := map[string]float64{"phase_margin_for_10pct": MarginForOvershoot(p.in("overshoot_target"))}
	for _, margin := range p.Inputs["phase_margins"].Value.([]any) {
		q := TwoPoleQuality(margin.(float64))
		name := strings.TrimSuffix(number(margin.(float64)), ".0")
		got["Q_"+name] = q
		got["overshoot_"+name] = ReferenceOvershoot(q)
	}
	p.check(t, got)
}

func controlToOutputWithLosses(t *testing.T, p *published) {
	plant := Plant{
		Circuit: switched.Circuit{
			Vin: p.in("Vin"), Period: 2e-6, Phases: 1, Leg: switched.Leg{L: p.in("L"), Winding: p.in("DCR")},
			Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: p.in("C"), ESR: p.in("ESR")}}, Conductance: 1 / p.in("R"),
		},
		Duty: p.in("Vout") / p.in("Vin"), Output: p.in("Vout"), Mode: switched.Continuous,
		Modulator: parts.Modulator{Present: true, Ramp: 1},
	}
	var a Averaged
	a.Set(&plant)
	// With s² L C (R+Rc)/(R+DCR) = -1 the even part of the denominator vanishes,
	// and Gvd has the phase of (1 + s Rc C) less 90°.
	esr := 1 / (2 * math.Pi * p.in("ESR") * p.in("C"))
	f0 := bisect(1e3, 50e3, true, func(f float64) bool {
		return real(a.At(f).Duty/complex(1, f/esr)) < 0
	})
	got := map[string]float64{"f0_exact": f0, "f_esr": esr}
	for name, f := range map[string]float64{"5k": 5e3, "10k": 10e3, "50k": 50e3, "300k": 300e3} {
		g := a.At(f).Duty
		got["Gvd_dB_"+name], got["Gvd_phase_"+name] = decibels(cmplx.Abs(g)), degrees(cmplx.Phase(g))
	}
	p.check(t, got)
}

func discontinuous(t *testing.T, p *published) {
	r, l, fs, vg, v := p.in("R"), p.in("L"), p.in("fs"), p.in("Vg"), p.in("V")
	m := v / vg
	k := 2 * l * fs / r
	d := m * math.Sqrt(k/(1-m))
	plant := Plant{
		Circuit: switched.Circuit{
			Vin: vg, Period: 1 / fs, Phases: 1, Leg: switched.Leg{L: l, Rectifier: switched.Rectifier{Blocks: true}},
			Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: p.in("C"), ESR: 1e-9}}, Conductance: 1 / r,
		},
		Duty: d, Output: v, Mode: switched.Discontinuous, Modulator: parts.Modulator{Present: true, Ramp: 1},
	}
	var a Averaged
	a.Set(&plant)
	gd0 := cmplx.Abs(a.At(1e-3).Duty)
	pole := bisect(1, 10e3, true, func(f float64) bool { return cmplx.Abs(a.At(f).Duty) < gd0/math.Sqrt2 })
	require.InEpsilon(t, m, cmplx.Abs(a.At(1e-3).Line), 1e-4, "line gain at low frequency is M")
	p.check(t, map[string]float64{"K": k, "K_crit": 1 - m, "D": d, "Gd0": gd0, "f_pole": pole})

	// The exact solver agrees with the remembered static characteristic as far as
	// the ripple of the output, which that neglects, allows.
	var solver switched.Solver
	var s switched.Solution
	solver.FixedDuty(&plant.Circuit, d, &s)
	require.InEpsilon(t, v, s.OutputMean, 1e-3)
}

func currentModeLoadPole(t *testing.T, p *published) {
	r := p.in("Vout") / p.in("Iout")
	sense := p.in("current_sense_gain") * p.in("Rs")
	// The data sheet's modulator is an ideal current source: an inductor so large
	// that duty ratio and slope no longer enter.
	c := IdealCurrentLoop(IdealStage{Input: 24, Output: p.in("Vout"), Inductance: 1, Capacitance: p.in("Cout"), ESR: 1e-3, Load: r, Frequency: 250e3}, sense, 0)
	p.check(t, map[string]float64{"R_load": r, "f_load_pole": c.Pole, "dc_gain": c.Gain, "dc_gain_dB": decibels(c.Gain)})
}

// typeThreeParts reads the printed parts back as corner frequencies. The data
// sheet takes one part at a time: the lead zero without R3, the pole without C1,
// and each step uses the standard value already chosen.
func typeThreeParts(t *testing.T, p *published) {
	f := stage.Feedback{Upper: p.in("R_top"), Lower: 1e3}
	corners := func(c parts.Compensator) Corners {
		c.Type = parts.OpAmpType3
		return CompensatorCorners(&c, &f)
	}
	const open, large = 1e-30, 1.0 // [ohm], [F] parts that do not act in a step
	leadZero := corners(parts.Compensator{LeadF: 1e-9, LeadOhm: open, FeedbackF: large}).LeadZero
	leadPole := corners(parts.Compensator{LeadF: p.in("C_ff_selected"), LeadOhm: 1e3, FeedbackF: large}).LeadPole
	chosen := parts.Compensator{FeedbackOhm: p.in("R_fb_selected"), FeedbackF: large, ShuntF: 1e-12}
	pole := corners(chosen).Pole
	chosen.FeedbackF = 1e-9
	zero := corners(chosen).Zero
	lead := 1 / (1/p.in("R_ff_selected") + 1/p.in("R_top"))
	p.check(t, map[string]float64{
		"C_ff":  1e-9 * leadZero / p.in("fz2"),
		"R_ff":  1e3 * leadPole / p.in("fp1"),
		"R_fb":  p.in("midband_gain") * lead,
		"C_hf":  1e-12 * pole / p.in("fp2"),
		"C_int": 1e-9 * zero / p.in("fz1"),
	})
	// The middle gain is that of the network between its zeros and its poles.
	c := parts.Compensator{
		Type: parts.OpAmpType3, FeedbackOhm: p.in("midband_gain") * lead, FeedbackF: large, LeadOhm: p.in("R_ff_selected"), LeadF: large,
		GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
	}
	require.InEpsilon(t, p.in("midband_gain"), cmplx.Abs(CompensatorGain(&c, &f, 100e3)), 1e-6)
}

func kFactorTwo(t *testing.T, p *published) {
	fc, r := p.in("fc"), p.in("R_fb")
	f := stage.Feedback{Upper: 10e3, Lower: 1e3}
	exact := want{fc, 1, p.in("boost")}.network(parts.Compensator{Type: parts.OpAmpType2}, &f)
	// The same network at the impedance level of the printed resistor.
	level := r / exact.FeedbackOhm
	exact.FeedbackOhm, exact.FeedbackF, exact.ShuntF = r, exact.FeedbackF/level, exact.ShuntF/level
	corners := CompensatorCorners(&exact, &f)
	// The notes print 72 pF for the pole, which would lie at 39.5 kHz or above.
	p.check(t, map[string]float64{
		"K": KFactorTwo(p.in("boost")), "fz": corners.Zero, "fp": corners.Pole, "C_zero": exact.FeedbackF, "C_pole_exact": exact.ShuntF,
	})
}

func typeThreeLoop(t *testing.T, p *published) {
	fc := p.in("fc_target")
	vout := p.in("Vout")
	plant := Plant{
		Circuit: switched.Circuit{
			Vin: p.in("Vin"), Period: 1 / p.in("fs"), Phases: 1, Leg: switched.Leg{L: p.in("L"), Winding: p.in("DCR")},
			Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: p.in("C"), ESR: p.in("ESR")}}, Conductance: p.in("Iout") / vout,
		},
		Duty: vout / p.in("Vin"), Output: vout, Mode: switched.Continuous,
		Modulator: parts.Modulator{Present: true, Ramp: p.in("V_ramp")},
		Compensator: parts.Compensator{
			Present: true, Type: parts.OpAmpType3, FeedbackOhm: p.in("R2"), FeedbackF: p.in("C1"), ShuntF: p.in("C2"),
			LeadOhm: p.in("R3"), LeadF: p.in("C3"), GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
		},
		Feedback: stage.Feedback{Present: true, Reference: vout / 2, Upper: p.in("R1"), Lower: p.in("R1")},
	}
	var a Averaged
	a.Set(&plant)
	g := a.At(fc).Control
	boost := p.in("pm_target") - degrees(cmplx.Phase(g)) - 90
	m := searched(&a, p.in("fs")/2)
	p.check(t, map[string]float64{
		"plant_phase_10k": degrees(cmplx.Phase(g)), "plant_gain_10k": cmplx.Abs(g), "boost_needed": boost, "K": KFactorThree(boost),
		"fc": m.Crossover, "phase_margin": m.PhaseMargin,
	})
	// With K-1 where the source has K the margin asked for is met.
	w := want{fc, 1 / cmplx.Abs(g), boost}
	plant.Compensator = w.network(plant.Compensator, &plant.Feedback)
	a.Set(&plant)
	m = searched(&a, p.in("fs")/2)
	require.InDelta(t, p.in("pm_target"), m.PhaseMargin, 0.01)
	require.InEpsilon(t, fc, m.Crossover, 1e-6)
}

func typeTwoCorners(t *testing.T, p *published) {
	c := parts.Compensator{
		Type: parts.OpAmpType2, FeedbackOhm: p.in("R2"), FeedbackF: p.in("C1"), ShuntF: p.in("C2"),
		GainBandwidth: math.Inf(1), OpenLoopGain: math.Inf(1),
	}
	f := stage.Feedback{Upper: p.in("R1"), Lower: 1e3}
	corners := CompensatorCorners(&c, &f)
	g := CompensatorGain(&c, &f, p.in("fc"))
	p.check(t, map[string]float64{
		"fz": corners.Zero, "fp": corners.Pole, "f_unity_integrator": corners.Unity,
		"gain_fc": cmplx.Abs(g), "boost_fc": degrees(cmplx.Phase(g)) + 90,
	})
}

func feedForwardCapacitor(t *testing.T, p *published) {
	c := parts.Compensator{Type: parts.TransconductanceType3, LeadOhm: p.in("R_ff"), LeadF: p.in("C_ff"), FeedbackOhm: 1e3, FeedbackF: 1e-9, Transconductance: 1e-3}
	f := stage.Feedback{Upper: p.in("R_upper"), Lower: p.in("R_lower")}
	corners := CompensatorCorners(&c, &f)
	p.check(t, map[string]float64{"fz": corners.LeadZero, "fp": corners.LeadPole, "max_boost": corners.BoostBound})
	require.Less(t, corners.BoostBound, leadBound(&f), "the divider bounds the boost")
}

func currentLoopEigenvalue(t *testing.T, p *published) {
	const sense = 1 // slopes in amperes per second
	at := func(slope float64) CurrentLoop {
		return IdealCurrentLoop(IdealStage{Input: p.in("Vin"), Output: p.in("Vout"), Inductance: p.in("L"), Capacitance: 1e-3, ESR: 1e-3, Load: 1, Frequency: p.in("fs")}, sense, slope)
	}
	none := at(0)
	p.check(t, map[string]float64{
		"D": p.in("Vout") / p.in("Vin"), "m1": none.RiseSlope, "m2": none.FallSlope, "alpha_none": none.Eigenvalue,
		"alpha_half_m2": at(none.FallSlope / 2).Eigenvalue, "alpha_m2": at(none.DeadBeat).Eigenvalue, "ma_min": none.LeastSlope,
	})
	require.False(t, none.Stable())
	require.True(t, at(none.FallSlope/2).Stable())
}

func sampledCurrentMode(t *testing.T, p *published) {
	v := IdealStage{Input: p.in("Vin"), Output: p.in("Vout"), Inductance: p.in("L"), Capacitance: p.in("C"), ESR: p.in("ESR"), Load: p.in("R"), Frequency: p.in("fs")}
	sn := p.in("Ri") * (v.Input - v.Output) / v.Inductance
	slope := p.in("Se_over_Sn") * sn
	c := IdealCurrentLoop(v, p.in("Ri"), slope)
	p.check(t, map[string]float64{
		"mc": c.RampRatio, "Qp": c.Quality, "Fm": c.Modulator, "dc_gain": c.Gain, "f_pole": c.Pole, "f_esr_zero": c.Zero, "f_n": c.HalfRate,
	})
	// Without slope compensation it is stable but strongly peaked, below D = 0.5.
	require.InDelta(t, 7.0, IdealCurrentLoop(v, p.in("Ri"), 0).Quality, 0.01)

	// The averaged model with the remembered sampling term says the same as the
	// closed formula, and the exact model agrees with both.
	circuit := switched.Circuit{
		Vin: v.Input, Period: 1 / v.Frequency, Phases: 1, Leg: switched.Leg{L: v.Inductance},
		Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: v.Capacitance, ESR: v.ESR}}, Conductance: 1 / v.Load,
	}
	plant := solvedPlant(t, circuit, v.Output, parts.Modulator{Present: true, Mode: parts.PeakCurrentMode, Sense: p.in("Ri"), Slope: slope}, parts.Compensator{})
	var a Averaged
	a.Set(&plant)
	exact := &Sampled{}
	require.True(t, exact.Set(&plant).OK())
	// The closed formula leaves out the last per cent of the load's damping, both
	// leave out the aliases of the sampling.
	for f, tolerance := range map[float64]float64{10: 1e-3, 465: 0.012, 3e3: 0.02, 10e3: 0.042, 20e3: 0.065} {
		s := complex(0, 2*math.Pi*f)
		closed := complex(c.Gain, 0) * (1 + s/complex(2*math.Pi*c.Zero, 0)) / (1 + s/complex(2*math.Pi*c.Pole, 0)) /
			(1 + s/complex(2*math.Pi*c.HalfRate*c.Quality, 0) + s*s/complex(4*math.Pi*math.Pi*c.HalfRate*c.HalfRate, 0))
		averaged, sampled := a.At(f).Control, exact.At(f).Control
		require.Less(t, cmplx.Abs(averaged/closed-1), min(tolerance, 0.014), "averaged at %g Hz", f)
		require.Less(t, cmplx.Abs(sampled/closed-1), tolerance, "exact at %g Hz", f)
	}
}

func inputFilter(t *testing.T, p *published) {
	r, d := p.in("R"), p.in("D")
	const small = 1e-9
	plant := Plant{
		Circuit: switched.Circuit{
			Vin: 1, Period: 1e-5, Phases: 1, Leg: switched.Leg{L: p.in("L")},
			Banks: 1, Bank: [switched.MaxBanks]switched.Bank{{C: p.in("C"), ESR: small}}, Conductance: 1 / r,
		},
		Duty: d, Output: d, Mode: switched.Continuous, Modulator: parts.Modulator{Present: true, Ramp: 1},
	}
	var a Averaged
	a.Set(&plant)
	undamped := Source{Present: true, Inductance: p.in("Lf"), Shunts: 1, Shunt: [MaxShunts]switched.Bank{{C: p.in("Cf"), ESR: small}}}
	damped := undamped
	damped.Shunts = 2
	damped.Shunt[1] = switched.Bank{C: p.in("C_damp"), ESR: p.in("R_damp")}
	ff := 1 / (2 * math.Pi * math.Sqrt(p.in("Lf")*p.in("Cf")))
	least, peak := math.Inf(1), 0.0
	for f := 10.0; f < 20e3; f *= 1.0002 {
		least = min(least, cmplx.Abs(a.InteractionAt(&undamped, f).Driving))
		peak = max(peak, cmplx.Abs(damped.Impedance(f)))
	}
	at := a.InteractionAt(&undamped, ff)
	p.check(t, map[string]float64{
		"R0f": math.Sqrt(p.in("Lf") / p.in("Cf")), "ff": ff, "ZN": real(at.Null), "ZD_dc": cmplx.Abs(a.InteractionAt(&undamped, 1e-3).Driving),
		"ZD_min": least, "ZD_at_ff": cmplx.Abs(at.Driving), "Zo_peak_damped": peak,
	})
	require.Less(t, a.SourceMargins(&undamped).Driving, 0.0, "the undamped filter violates the separation")
}

func optimumDamping(t *testing.T, p *published) {
	lf, cf, n := p.in("Lf"), p.in("Cf"), p.in("n")
	o := OptimumDamping(CapacitorBranch, lf, cf, n)
	p.check(t, map[string]float64{
		"C_damp": n * cf, "R_opt": o.Resistance, "Z_peak": o.Peak, "n_for_Z_peak": DampingRatioForPeak(lf, cf, p.in("Z_peak_allowed")),
	})
}

func negativeResistance(t *testing.T, p *published) {
	l, c := p.in("L"), p.in("C")
	p.check(t, map[string]float64{
		"Z0": math.Sqrt(l / c), "f0": 1 / (2 * math.Pi * math.Sqrt(l*c)), "R_in_incremental": NegativeResistance(p.in("Vin"), p.in("P")),
		"C_damp_min": 4 * c, // a rule of thumb, not the optimum: for n = 4 that is 0.61 R0
	})
	require.InDelta(t, 0.61, OptimumDamping(CapacitorBranch, l, c, 4).Resistance/math.Sqrt(l/c), 0.005)
}

func decibels(x float64) float64 { return 20 * math.Log10(x) }
