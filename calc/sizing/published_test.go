package sizing_test

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/internal/calctest"
	"railproof/calc/sizing"
)

// publishedCase is one case of tests/reference/power-stage.json.
type publishedCase struct {
	ID, Area, Source string
	Inputs           map[string]any
	Expected         []struct {
		Name      string
		Unit      string
		Value     any
		Tolerance float64 `json:"tolerance_abs"`
	}
}

func (c *publishedCase) in(name string) float64 {
	v, ok := c.Inputs[name].(float64)
	if !ok {
		panic(fmt.Sprintf("%s has no input %s", c.ID, name))
	}
	return v
}

func publishedCases(t testing.TB) map[string]*publishedCase {
	var all []*publishedCase
	calctest.Load(t, "power-stage.json", &all)
	m := map[string]*publishedCase{}
	for _, c := range all {
		m[c.ID] = c
	}
	return m
}

// figures are the results of our functions for one case, and those of the source
// that have no function of ours, each with the reason.
type figures struct {
	ours   map[string]float64
	absent map[string]string
}

// ripple of one phase at an input, for the cases' usual names.
func ripple(c *publishedCase, vin, l string) float64 {
	return sizing.RippleCurrent(c.in(vin), c.in("v_out_v"), c.in(l), c.in("f_sw_hz"))
}

// inputRMS is the RMS current of the input capacitor of one phase.
func inputRMS(i, di, duty float64) float64 {
	c := sizing.NewInputCurrent(1, i, di, duty)
	return c.RMS()
}

// inputRipple is the peak-to-peak voltage of an input capacitor without the
// current's ripple.
func inputRipple(i, duty, fs, c, esr float64) float64 {
	x := sizing.NewInputCurrent(1, i, 0, duty)
	return x.RippleCharge(1, fs, esr*c) / c
}

const (
	lossElsewhere = "a loss: computed and checked in calc/losses"
	dcmElsewhere  = "discontinuous waveforms are solved, not given in closed form: calc/switched"
)

var publishedSizing = map[string]func(*publishedCase) figures{
	"ps-sz-01": func(c *publishedCase) figures {
		vin, vo, fs := c.in("v_in_v"), c.in("v_out_v"), c.in("f_sw_hz")
		l := sizing.InductanceForRipple(vin, vo, c.in("i_l_pp_a"), fs)
		return figures{ours: map[string]float64{
			"duty_ratio":   sizing.IdealDuty(vin, vo),
			"l_h":          l,
			"c_f":          sizing.CapacitanceForRipple(c.in("i_l_pp_a"), sizing.IdealDuty(vin, vo), fs, c.in("v_out_pp_v"), 0),
			"l_critical_h": sizing.InductanceForContinuous(vin, vo, vo/c.in("r_load_ohm"), fs),
			// The capacitance at which the ripple formula gives twice the output voltage.
			"c_critical_f": sizing.CapacitanceForRipple(sizing.RippleCurrent(vin, vo, l, fs), 0.5, fs, 2*vo, 0),
		}}
	},
	"ps-sz-02": func(c *publishedCase) figures {
		vo := c.in("v_out_v")
		// A constant saturation voltage stands for the high side's drop at 1 A.
		real := func(vin string) float64 {
			return sizing.DropDuty(c.in(vin), vo, 1, sizing.Drops{HighSide: c.in("v_sat_v"), Threshold: c.in("v_f_v")})
		}
		return figures{ours: map[string]float64{
			"duty_ideal_ratio": sizing.IdealDuty(c.in("v_in_v"), vo), "duty_ideal_min_ratio": sizing.IdealDuty(c.in("v_in_max_v"), vo), "duty_ideal_max_ratio": sizing.IdealDuty(c.in("v_in_min_v"), vo),
			"duty_real_ratio": real("v_in_v"), "duty_real_min_ratio": real("v_in_max_v"), "duty_real_max_ratio": real("v_in_min_v"),
		}}
	},
	"ps-sz-03": func(c *publishedCase) figures {
		i, di := c.in("i_out_a"), c.in("i_l_pp_ratio")*c.in("i_out_a")
		return figures{ours: map[string]float64{
			"duty_ratio": sizing.IdealDuty(c.in("v_in_v"), c.in("v_out_v")), "l_h": sizing.InductanceForRipple(c.in("v_in_v"), c.in("v_out_v"), di, c.in("f_sw_hz")),
			"i_l_rms_a": sizing.TriangleRMS(i, di), "i_l_peak_a": i + di/2, "i_l_pp_a": ripple(c, "v_in_v", "l_chosen_h"),
		}, absent: map[string]string{"p_dcr_w": lossElsewhere}}
	},
	"ps-sz-04": func(c *publishedCase) figures {
		i, di := c.in("i_out_a"), c.in("i_l_pp_ratio")*c.in("i_out_a")
		const edge = "the step of series inductance at the edges is the sum of both, ESL Vin/L: calc/evaluate"
		return figures{ours: map[string]float64{
			"i_cout_rms_a": sizing.TriangleRMS(0, di), "i_cin_rms_a": inputRMS(i, 0, c.in("duty_ratio")),
			// All drop and no charge: a capacitance without bound.
			"v_esr_step_v": sizing.OutputRipple(c.in("i_step_a"), 0.5, c.in("f_sw_hz"), 1e6, c.in("esr_ohm")),
		}, absent: map[string]string{"v_esl_on_v": edge, "v_esl_off_v": edge, "p_cin_w": lossElsewhere}}
	},
	"ps-sz-05": func(c *publishedCase) figures {
		b := ripple(c, "v_in_max_v", "l_b_h")
		return figures{ours: map[string]float64{
			"ripple_a_ratio": ripple(c, "v_in_max_v", "l_a_h") / c.in("i_out_a"), "ripple_b_ratio": b / c.in("i_out_a"), "i_l_peak_b_a": c.in("i_out_a") + b/2,
			"t_on_min_s": sizing.DropDuty(c.in("v_in_max_v"), c.in("v_out_v"), 0, sizing.Drops{}) / c.in("f_sw_hz"),
		}}
	},
	"ps-sz-06": func(c *publishedCase) figures {
		i := c.in("i_out_a")
		di := sizing.RippleCurrent(c.in("v_in_max_v"), c.in("v_out_v"), c.in("l_chosen_h"), c.in("f_sw_hz")*c.in("f_factor_ratio"))
		return figures{ours: map[string]float64{
			"l_min_h":  sizing.InductanceForRipple(c.in("v_in_max_v"), c.in("v_out_v"), c.in("i_l_pp_ratio")*i, c.in("f_sw_hz")),
			"i_l_pp_a": di, "i_l_rms_a": sizing.TriangleRMS(i, di), "i_l_peak_a": i + di/2,
		}}
	},
	"ps-sz-07": func(c *publishedCase) figures {
		i, fs := c.in("i_out_a"), c.in("f_sw_hz")
		di := ripple(c, "v_in_max_v", "l_chosen_h")
		return figures{ours: map[string]float64{
			"l_min_h":  sizing.InductanceForRipple(c.in("v_in_max_v"), c.in("v_out_v"), c.in("i_l_pp_ratio")*i, fs),
			"i_l_pp_a": di, "i_l_rms_a": sizing.TriangleRMS(i, di), "i_l_peak_a": i + di/2,
			"c_out_min_ripple_f": sizing.CapacitanceForRipple(di, 0.5, fs, c.in("v_out_pp_v"), 0),
			"esr_max_ohm":        sizing.ESRForRipple(di, 0.5, fs, 1, c.in("v_out_pp_v")), // no charge ripple: a large capacitor
			"i_cout_rms_a":       sizing.TriangleRMS(0, di),
			"i_cin_rms_a":        inputRMS(i, 0, sizing.IdealDuty(c.in("v_in_min_v"), c.in("v_out_v"))),
			"v_in_pp_v":          inputRipple(i, 0.5, fs, c.in("c_in_f"), 0),
		}}
	},
	"ps-sz-08": func(c *publishedCase) figures {
		i, fs, vo := c.in("i_out_a"), c.in("f_sw_hz"), c.in("v_out_v")
		di := ripple(c, "v_in_max_v", "l_chosen_h")
		return figures{ours: map[string]float64{
			"l_min_h":  sizing.InductanceForRipple(c.in("v_in_max_v"), vo, c.in("i_l_pp_ratio")*i, fs),
			"i_l_pp_a": di, "i_l_rms_a": sizing.TriangleRMS(i, di), "i_l_peak_a": i + di/2,
			"v_in_pp_v":               inputRipple(i, 0.5, fs, c.in("c_in_f"), 0),
			"i_cin_rms_at_v_in_min_a": inputRMS(i, 0, sizing.IdealDuty(c.in("v_in_min_v"), vo)),
			"i_cin_rms_worst_a":       inputRMS(i, 0, 0.5),
			"i_out_boundary_at_12v_a": ripple(c, "v_in_nom_v", "l_chosen_h") / 2,
		}}
	},
	"ps-sz-09": func(c *publishedCase) figures {
		i, fs, vo := c.in("i_out_a"), c.in("f_sw_hz"), c.in("v_out_v")
		di := ripple(c, "v_in_max_v", "l_chosen_h")
		low, high := sizing.IdealDuty(c.in("v_in_min_v"), vo), sizing.IdealDuty(c.in("v_in_max_v"), vo)
		return figures{ours: map[string]float64{
			"l_min_h":  sizing.InductanceForRipple(c.in("v_in_max_v"), vo, c.in("i_l_pp_ratio")*i, fs),
			"i_l_pp_a": di, "i_l_rms_a": sizing.TriangleRMS(i, di),
			"c_out_min_f":    doubledRelease(c.in("l_chosen_h"), c.in("i_step_a"), vo, c.in("v_dev_v")),
			"v_out_pp_cap_v": sizing.OutputRipple(di, high, fs, c.in("c_out_f"), 0),
			// The sheet bounds 1 − D by one.
			"c_in_min_f":              inputRipple(i, low, fs, 1, 0) / (1 - low) / c.in("v_in_pp_cap_v"),
			"esr_in_max_ohm":          c.in("v_in_pp_esr_v") / inputStep(i, di, high),
			"i_cin_rms_at_v_in_max_a": inputRMS(i, di, high), "i_cin_rms_worst_a": inputRMS(i, 0, low),
		}}
	},
	"ps-sz-10": func(c *publishedCase) figures {
		i, fs, vo := c.in("i_out_a"), c.in("f_sw_hz"), c.in("v_out_v")
		di := ripple(c, "v_in_max_v", "l_chosen_h")
		co := doubledRelease(c.in("l_chosen_h"), c.in("i_step_a"), vo, c.in("v_over_v"))
		return figures{ours: map[string]float64{
			"l_min_h":  sizing.InductanceForRipple(c.in("v_in_max_v"), vo, c.in("i_l_pp_ratio")*i, fs),
			"i_l_pp_a": di, "i_l_rms_a": sizing.TriangleRMS(i, di), "i_l_peak_a": i + di/2, "c_out_min_f": co,
			"esr_max_ohm":             esrBesideCharge(di, fs, co, c.in("v_out_pp_v")),
			"i_cin_rms_at_v_in_max_a": inputRMS(i, 0, sizing.IdealDuty(c.in("v_in_max_v"), vo)), "i_cin_rms_worst_a": inputRMS(i, 0, sizing.IdealDuty(c.in("v_in_min_v"), vo)),
		}, absent: map[string]string{"p_dcr_w": lossElsewhere}}
	},
	"ps-sz-11": func(c *publishedCase) figures {
		i, fs, vo := c.in("i_out_a"), c.in("f_sw_hz"), c.in("v_out_v")
		di := ripple(c, "v_in_max_v", "l_chosen_h")
		nominal := sizing.IdealDuty(c.in("v_in_nom_v"), vo)
		return figures{ours: map[string]float64{
			"l_min_h":  sizing.InductanceForRipple(c.in("v_in_max_v"), vo, c.in("i_l_pp_ratio")*i, fs),
			"i_l_pp_a": di, "v_out_pp_cap_v": sizing.OutputRipple(di, 0.5, fs, c.in("c_out_f"), 0),
			"esr_max_ohm":    esrBesideCharge(di, fs, c.in("c_out_f"), c.in("v_out_pp_v")),
			"c_in_min_f":     inputRipple(i, nominal, fs, 1, 0) / (1 - nominal) / c.in("v_in_pp_cap_v"), // bounds 1 − D by one
			"esr_in_max_ohm": c.in("v_in_pp_esr_v") / inputStep(i, di, nominal),
			"i_cin_rms_a":    inputRMS(i, 0, nominal),
		}}
	},
	"ps-sz-12": func(c *publishedCase) figures {
		return figures{ours: map[string]float64{
			"c_out_min_over_a_f": sizing.CapacitanceForRelease(c.in("l_h"), c.in("i_step_a"), c.in("v_out_a_v"), c.in("v_over_v")),
			"c_out_min_over_b_f": sizing.CapacitanceForRelease(c.in("l_h"), c.in("i_step_a"), c.in("v_out_b_v"), c.in("v_over_v")),
			"c_out_min_under_f":  sizing.CapacitanceForWaiting(c.in("i_step_a"), c.in("t_off_max_s"), c.in("v_under_v")),
		}}
	},
	"ps-sz-13": func(c *publishedCase) figures {
		f := figures{ours: map[string]float64{}}
		fs := c.in("f_sw_hz")
		for _, k := range []string{"1", "2"} {
			i, vo, l := c.in("i_out_"+k+"_a"), c.in("v_out_"+k+"_v"), c.in("l_"+k+"_h")
			di := sizing.RippleCurrent(c.in("v_in_max_v"), vo, l, fs)
			co := doubledRelease(l, c.in("i_step_a"), vo, c.in("v_over_v"))
			f.ours["l_min_"+k+"_h"] = sizing.InductanceForRipple(c.in("v_in_max_v"), vo, c.in("i_l_pp_ratio")*i, fs)
			f.ours["i_l_pp_"+k+"_a"], f.ours["i_l_peak_"+k+"_a"], f.ours["c_out_min_"+k+"_f"] = di, i+di/2, co
			f.ours["esr_max_"+k+"_ohm"] = esrBesideCharge(di, fs, co, c.in("v_pp_"+k+"_v"))
			f.ours["i_cin_rms_"+k+"_a"] = inputRMS(i, 0, sizing.IdealDuty(c.in("v_in_min_v"), vo))
		}
		return f
	},
	"ps-sz-14": func(c *publishedCase) figures {
		fs := c.in("f_sw_hz")
		return figures{ours: map[string]float64{
			"duty_ratio": sizing.IdealDuty(c.in("v_in_v"), c.in("v_out_v")), "i_l_pp_a": ripple(c, "v_in_v", "l_h"),
			"c_in_min_f": inputRipple(c.in("i_out_a"), 0.5, fs, 1, 0) / c.in("v_in_pp_v"),
			// Two periods of inaction, for the step of 0.46 A that the print's result needs.
			"c_out_as_printed_f": sizing.CapacitanceForWaiting(0.46, 2/fs, c.in("v_dev_v")),
		}}
	},
	"ps-sz-15": func(c *publishedCase) figures {
		i, fs, ci, esr := c.in("i_out_a"), c.in("f_sw_hz"), c.in("c_in_f"), c.in("esr_ohm")
		return figures{ours: map[string]float64{
			"v_in_pp_v": inputRipple(i, 0.5, fs, ci, esr), "i_cin_rms_bound_a": inputRMS(i, 0, 0.5), "v_in_pp_derated_v": inputRipple(i, 0.5, 0.8*fs, ci, esr),
		}}
	},
	"ps-sz-16": func(c *publishedCase) figures {
		vo := c.in("v_in_v") * c.in("duty_ratio")
		di := sizing.RippleCurrent(c.in("v_in_v"), vo, c.in("l_h"), c.in("f_sw_hz"))
		return figures{ours: map[string]float64{
			"v_out_v": c.in("v_in_v") * sizing.IdealDuty(c.in("v_in_v"), vo), "i_l_max_a": vo/c.in("r_load_ohm") + di/2, "i_l_min_a": vo/c.in("r_load_ohm") - di/2,
			"v_out_pp_ratio": sizing.OutputRipple(di, c.in("duty_ratio"), c.in("f_sw_hz"), c.in("c_f"), 0) / vo,
		}}
	},
	"ps-sz-17": discontinuous,
	"ps-sz-18": func(c *publishedCase) figures {
		vo := c.in("v_out_v")
		i := c.in("p_out_min_w") / vo
		return figures{ours: map[string]float64{
			"r_load_max_ohm":      vo / i,
			"l_min_at_v_in_max_h": sizing.InductanceForContinuous(c.in("v_in_max_v"), vo, i, c.in("f_sw_hz")),
			"l_min_at_v_in_min_h": sizing.InductanceForContinuous(c.in("v_in_min_v"), vo, i, c.in("f_sw_hz")),
		}}
	},
	"ps-sz-19": func(c *publishedCase) figures {
		// With Vin = 1 the output is the duty ratio; the load at the boundary is the
		// one whose least inductance is the case's.
		d, l, fs := c.in("duty_ratio"), c.in("l_h"), c.in("f_sw_hz")
		boundary := l / sizing.InductanceForContinuous(1, d, 1, fs) // [1/A], inverse of a current
		r := d * boundary
		return figures{ours: map[string]float64{
			"r_load_boundary_ohm": r, "k_crit_ratio": 2 * l * fs / r,
			"m_at_boundary_ratio": discontinuousRatio(d, l, fs, r), "m_at_10x_r_ratio": discontinuousRatio(d, l, fs, 10*r),
		}}
	},
	"ps-sz-20": func(c *publishedCase) figures {
		d, fs, di, co := c.in("duty_ratio"), c.in("f_sw_hz"), c.in("i_l_pp_a"), c.in("c_f")
		peak := func(step float64) float64 { return releasePeak(c.in("l_h"), c.in("c_step_f"), step, c.in("v_out_v")) }
		return figures{ours: map[string]float64{
			"v_pp_low_esr_v": sizing.OutputRipple(di, d, fs, co, c.in("esr_low_ohm")), "v_pp_mid_esr_v": sizing.OutputRipple(di, d, fs, co, c.in("esr_mid_ohm")), "v_pp_high_esr_v": sizing.OutputRipple(di, d, fs, co, c.in("esr_high_ohm")),
			"v_peak_after_removal_v": peak(c.in("i_high_a") - c.in("i_low_a")),
			// The difference of squares is the square of another step.
			"v_peak_difference_of_squares_v": peak(math.Sqrt(c.in("i_high_a")*c.in("i_high_a") - c.in("i_low_a")*c.in("i_low_a"))),
		}}
	},
	"ps-wm-01": func(c *publishedCase) figures {
		i, di, d := c.in("i_a"), c.in("i_pp_a"), c.in("duty_ratio")
		return figures{ours: map[string]float64{
			"inductor_rms_a": sizing.TriangleRMS(i, di), "high_side_rms_a": sizing.TrapezoidRMS(i-di/2, i+di/2, d), "low_side_rms_a": sizing.TrapezoidRMS(i+di/2, i-di/2, 1-d),
			"output_cap_rms_a": sizing.TriangleRMS(0, di), "input_cap_rms_a": inputRMS(i, di, d), "input_cap_rms_no_ripple_a": inputRMS(i, 0, d), "trapezoid_a": sizing.TrapezoidRMS(i-di/2, i+di/2, d),
			// A triangle from zero and back is a trapezoid that starts at zero, for both parts of its time.
			"dcm_inductor_rms_a": sizing.TrapezoidRMS(0, c.in("i_peak_a"), c.in("d1_ratio")+c.in("d2_ratio")),
		}, absent: map[string]string{"dcm_inductor_mean_a": dcmElsewhere}}
	},
	"ps-wm-02": func(c *publishedCase) figures {
		n, d := int(c.in("n_ratio")), c.in("duty_ratio")
		vin := c.in("v_out_v") / d // the guide rounds the duty ratio and uses the output voltage
		sum := vin / (c.in("l_h") * c.in("f_sw_hz")) * sizing.InterleavedRipple(n, d)
		x := sizing.NewInputCurrent(n, c.in("i_out_a")/float64(n), 0, d)
		return figures{ours: map[string]float64{
			"k_ratio": sum * c.in("l_h") * c.in("f_sw_hz") / c.in("v_out_v"), "i_out_pp_a": sum,
			"i_pp_per_phase_a": sizing.RippleCurrent(vin, c.in("v_out_v"), c.in("l_h"), c.in("f_sw_hz")), "i_cin_rms_a": x.RMS(),
		}}
	},
	"ps-wm-03": func(c *publishedCase) figures {
		rms := func(n int, d float64) float64 {
			x := sizing.NewInputCurrent(n, 1/float64(n), 0, d)
			return x.RMS()
		}
		return figures{ours: map[string]float64{
			"peak_1_over_i_out_ratio": rms(1, 0.5), "peak_2_at_quarter_ratio": rms(2, 0.25), "peak_2_at_three_quarters_ratio": rms(2, 0.75), "null_2_at_half_ratio": rms(2, 0.5),
			"peak_3_at_sixth_ratio": rms(3, 1.0/6), "peak_3_at_half_ratio": rms(3, 0.5),
			"out_ripple_2_at_half_ratio": sizing.InterleavedRipple(2, 0.5), "out_ripple_2_at_quarter_ratio": sizing.InterleavedRipple(2, 0.25),
		}}
	},
}

// doubledRelease is the sheets' L ΔI²/(Vo ΔV): our exact form for a small deviation,
// doubled on purpose to cover the loop's delay.
func doubledRelease(l, step, vout, dv float64) float64 {
	const small = 1e-7
	return 2 * sizing.CapacitanceForRelease(l, step, vout, small) * small / dv
}

// releasePeak finds the overshoot at which CapacitanceForRelease gives c.
func releasePeak(l, c, step, vout float64) float64 {
	low, high := 0.0, 10*vout
	for range 200 {
		dv := (low + high) / 2
		if sizing.CapacitanceForRelease(l, step, vout, dv) > c {
			low = dv
		} else {
			high = dv
		}
	}
	return vout + low
}

// esrBesideCharge is the sheets' cautious form, which adds charge and resistive
// ripple: (ΔV − charge ripple)/ΔI.
func esrBesideCharge(di, fs, c, dv float64) float64 {
	return (dv - sizing.OutputRipple(di, 0.5, fs, c, 0)) / di
}

// inputStep is the step of the input current at turn-off.
func inputStep(i, di, duty float64) float64 {
	c := sizing.NewInputCurrent(1, i, di, duty)
	return c.Step()
}

// discontinuousRatio finds the Vo/Vin at which the on-time of DiscontinuousOnTime is
// the duty ratio's.
func discontinuousRatio(duty, l, fs, r float64) float64 {
	low, high := 0.0, 1.0
	for range 200 {
		m := (low + high) / 2
		if sizing.DiscontinuousOnTime(1, m, m/r, l, fs, 0)*fs < duty {
			low = m
		} else {
			high = m
		}
	}
	return low
}

func discontinuous(c *publishedCase) figures {
	d, l, fs, r, vin := c.in("duty_ratio"), c.in("l_h"), c.in("f_sw_hz"), c.in("r_load_ohm"), c.in("v_in_v")
	m := discontinuousRatio(d, l, fs, r)
	vo := m * vin
	return figures{ours: map[string]float64{
		// K is the duty ratio's square over that of M: K = D² (1 − M)/M².
		"m_ratio": m, "v_out_v": vo, "k_ratio": d * d * (1 - m) / (m * m),
		"k_crit_ratio": 2 * fs * sizing.InductanceForContinuous(vin, d*vin, d*vin/r, fs) / r,
		// On and off ramps of equal height: D2 = D (Vin − Vo)/Vo.
		"duty_2_ratio": d * (vin - vo) / vo,
		"i_l_peak_a":   sizing.RippleCurrent(vin, vo, l, fs) * d / sizing.IdealDuty(vin, vo),
	}}
}

func TestPublishedSizing(t *testing.T) {
	cases := publishedCases(t)
	for id, c := range cases {
		if c.Area != "sizing" && c.Area != "waveforms-multiphase" {
			continue
		}
		t.Run(id+"/"+strings.ReplaceAll(c.Source, "/", " "), func(t *testing.T) {
			compute, ok := publishedSizing[id]
			require.True(t, ok, "no check for this case")
			f := compute(c)
			seen := 0
			for _, e := range c.Expected {
				if reason, ok := f.absent[e.Name]; ok {
					require.NotEmpty(t, reason)
					seen++
					continue
				}
				got, ok := f.ours[e.Name]
				require.True(t, ok, "%s is neither computed nor listed", e.Name)
				want := e.Value.(float64)
				// The file keeps ten digits, so its own rounding joins the tolerance.
				calctest.Within(t, e.Name+" ["+e.Unit+"]", got, want, e.Tolerance+5e-10*math.Abs(want))
				seen++
			}
			require.Equal(t, len(f.ours)+len(f.absent), seen, "a figure that the case does not have")
		})
	}
	for id := range publishedSizing {
		require.Contains(t, cases, id)
	}
}
