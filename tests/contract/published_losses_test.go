package contract

import (
	"encoding/json"
	"os"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/magnetics"
)

// printed is one published case of tests/reference/power-stage.json.
type printed struct {
	ID       string
	Source   string
	Inputs   map[string]any
	Expected []struct {
		Name      string
		Value     any
		Tolerance float64 `json:"tolerance_abs"`
	}
}

func (p *printed) in(name string) float64 { return p.Inputs[name].(float64) }

// want returns a printed outcome and how far from it an answer may be.
func (p *printed) want(t *testing.T, name string) (value, tolerance float64) {
	t.Helper()
	for _, e := range p.Expected {
		if e.Name == name {
			return e.Value.(float64), e.Tolerance
		}
	}
	t.Fatalf("%s has no outcome %s", p.ID, name)
	return 0, 0
}

// lossCase asks /v1/losses for a stage that carries the numbers of a published case
// and nothing else: an inductor so large that its ripple does not count unless the
// case has one, a duty ratio as printed, every part held at 25 degC.
type lossCase struct {
	vin, duty, load, f float64
	rectifier          string
	inductance         float64 // [H] 0: no ripple to speak of
	highSide, rect     object
	inductor, input    object
	controller         object
}

func (c *lossCase) ask(t *testing.T, at string) map[string]float64 {
	t.Helper()
	over := func(base, own object) object {
		for k, v := range own {
			base[k] = v
		}
		return base
	}
	if c.rectifier == "" {
		c.rectifier = "synchronous"
	}
	if c.inductance == 0 {
		c.inductance = 0.1
	}
	stage := object{
		"rectifier": c.rectifier, "switching_frequency_hz": c.f,
		"high_side":         over(object{"on_resistance_ohm": 1e-6}, c.highSide),
		"inductor":          over(object{"inductance_h": c.inductance}, c.inductor),
		"output_capacitors": []object{{"capacitance_f": 0.1, "esr_ohm": 1e-6}},
		"input_capacitors":  []object{over(object{"capacitance_f": 0.1, "esr_ohm": 1e-6}, c.input)},
		"controller":        over(object{"drive_v": 5}, c.controller),
	}
	if c.rectifier == "diode" {
		stage["diode"] = c.rect
	} else {
		stage["low_side"] = over(object{"on_resistance_ohm": 1e-6}, c.rect)
	}
	point := object{"input_v": c.vin, "load": object{"current_a": c.load}, "ambient_degc": 25, "part_temperature_degc": 25, "control": object{"duty_ratio": c.duty}}
	r := send(t, "POST", at+"/v1/losses", encode(t, object{"stage": stage, "point": point}))
	require.Equal(t, 200, r.status, "%s", r.body)
	var a struct {
		Items []struct {
			Status string
			Losses []struct {
				Part, Mechanism string
				Power           float64 `json:"power_w"`
			}
		}
	}
	require.NoError(t, json.Unmarshal(r.body, &a))
	require.Equal(t, "ok", a.Items[0].Status)
	watts := map[string]float64{}
	for _, l := range a.Items[0].Losses {
		watts[l.Part+"/"+l.Mechanism] += l.Power
	}
	return watts
}

// rounding is what the ripple of a 0.1 H inductor and of 0.1 F adds to a figure
// that its source computes for flat currents and voltages, relative.
const rounding = 1e-5

// Every mechanism that has a published example reproduces it through /v1/losses.
// Leakage and the copper of the board have none.
func TestPublishedLossesThroughTheWholeServer(t *testing.T) {
	raw, err := os.ReadFile("../reference/power-stage.json")
	require.NoError(t, err)
	var list []printed
	require.NoError(t, json.Unmarshal(raw, &list))
	at := server(t)
	covered := map[string]bool{}
	run := func(id string, check func(t *testing.T, p *printed)) {
		t.Run(id, func(t *testing.T) {
			for i := range list {
				if list[i].ID == id {
					check(t, &list[i])
					return
				}
			}
			t.Fatal("no such case")
		})
	}
	same := func(t *testing.T, p *printed, name string, got float64, mechanisms ...string) {
		t.Helper()
		want, tolerance := p.want(t, name)
		require.InDelta(t, want, got, tolerance+rounding*want, "%s of %s", name, p.ID)
		for _, m := range mechanisms {
			covered[m] = true
		}
	}
	// straight is a charge table of a constant capacitance, as the sources take it.
	straight := func(charge, volt float64) []object {
		return []object{{"voltage_v": 0, "charge_c": 0}, {"voltage_v": volt, "charge_c": charge}}
	}

	run("ps-lo-06", func(t *testing.T, p *printed) {
		vin := p.in("v_in_v")
		c := lossCase{
			vin: vin, duty: p.in("duty_ratio"), load: p.in("i_out_a"), f: p.in("f_sw_hz"),
			// 1 ohm at 2.5 V on both edges: the charge takes the printed time
			highSide: object{
				"on_resistance_ohm": p.in("r_hs_ohm"), "plateau_v": 2.5, "internal_gate_ohm": 0,
				"gate_switch_charge_c": p.in("t_r_s") * 2.5, "gate_switch_charge_at_v": vin, "gate_charge_c": p.in("c_gate_total_f") * vin,
			},
			rect:       object{"on_resistance_ohm": p.in("r_ls_ohm")},
			inductor:   object{"dc_resistance_ohm": p.in("dcr_ohm")},
			controller: object{"gate_on_ohm": 1, "gate_off_ohm": 1, "drive_supply": "input"},
		}
		w := c.ask(t, at)
		same(t, p, "p_cond_w", w["high_side/conduction"]+w["low_side/conduction"], "conduction")
		same(t, p, "p_trans_w", w["high_side/overlap"], "overlap")
		same(t, p, "p_gate_w", w["controller/gate_drive"], "gate_drive")
		same(t, p, "p_dcr_w", w["inductor/winding_dc"], "winding_dc")
	})
	run("ps-lo-07", func(t *testing.T, p *printed) {
		vin := p.in("v_in_max_v")
		for _, ch := range []string{"1", "2"} {
			c := lossCase{
				vin: vin, duty: p.in("d_" + ch + "_ratio"), load: p.in("i_rms_" + ch + "_a"), f: p.in("f_sw_hz"),
				highSide:   object{"on_resistance_ohm": p.in("r_hs_" + ch + "_ohm"), "output_charge_table": straight(p.in("c_oss_hs_"+ch+"_f")*vin, vin)},
				rect:       object{"on_resistance_ohm": p.in("r_ls_" + ch + "_ohm"), "output_charge_table": straight(p.in("c_oss_ls_"+ch+"_f")*vin, vin)},
				controller: object{"quiescent_current_a": p.in("i_dd_a")},
			}
			w := c.ask(t, at)
			same(t, p, "p_cond_"+ch+"_w", w["high_side/conduction"]+w["low_side/conduction"], "conduction")
			same(t, p, "p_coss_"+ch+"_w", w["high_side/output_charge"], "output_charge")
			same(t, p, "p_reg_w", w["controller/quiescent"], "quiescent")
		}
	})
	run("ps-lo-08", func(t *testing.T, p *printed) {
		vin, vout, f := p.in("v_in_v"), p.in("v_out_v"), 4e5 // the printed ripple at a frequency of our own
		c := lossCase{
			vin: vin, duty: vout / vin, load: p.in("i_out_a"), f: f, inductance: vout * (1 - vout/vin) / (p.in("i_l_pp_a") * f),
			rect: object{"on_resistance_ohm": p.in("r_ls_each_ohm") / p.in("n_ls_ratio")},
		}
		same(t, p, "p_ls_cond_w", c.ask(t, at)["low_side/conduction"], "conduction")
	})
	run("ps-lo-10", func(t *testing.T, p *printed) {
		vin := p.in("v_in_v")
		c := lossCase{
			vin: vin, duty: 0.25, load: p.in("i_a"), f: p.in("f_sw_hz"), // the duty ratio does not matter
			highSide:   object{"plateau_v": p.in("v_pl_v"), "internal_gate_ohm": 0, "gate_switch_charge_c": p.in("c_miller_f") * vin, "gate_switch_charge_at_v": vin},
			controller: object{"drive_v": p.in("v_cc_v"), "gate_on_ohm": p.in("r_dr_ohm"), "gate_off_ohm": p.in("r_dr_ohm")},
		}
		same(t, p, "p_trans_w", c.ask(t, at)["high_side/overlap"], "overlap")
	})
	run("ps-lo-11", func(t *testing.T, p *printed) {
		vin, i, f, td := p.in("v_in_v"), p.in("i_out_a"), p.in("f_sw_hz"), p.in("t_dead_total_s")/2
		c := lossCase{
			vin: vin, duty: p.in("v_out_v") / vin, load: i, f: f,
			highSide: object{
				"on_resistance_ohm": p.in("r_hs_ohm"), "plateau_v": 2.5, "internal_gate_ohm": 0, "gate_charge_c": p.in("q_g_hs_c"),
				"gate_switch_charge_c": p.in("q_gs2_hs_c") + p.in("q_gd_hs_c"), "gate_switch_charge_at_v": vin,
				"output_charge_table": straight(p.in("q_oss_hs_c"), vin),
			},
			rect: object{
				"on_resistance_ohm": p.in("r_ls_ohm"), "gate_charge_c": p.in("q_g_ls_c"), "recovery_charge_c": p.in("q_rr_ls_c"),
				"body_diode_v": p.in("v_sd_v"), "output_charge_table": straight(p.in("q_oss_ls_c"), vin),
			},
			controller: object{ // 2.5 V over 2.5 ohm: the gate current of one ampere
				"drive_v": p.in("v_dr_v"), "gate_on_ohm": 2.5 / p.in("i_g_a"), "gate_off_ohm": 2.5 / p.in("i_g_a"), "dead_time_s": td, "drive_supply": "external",
			},
		}
		w := c.ask(t, at)
		same(t, p, "p_hs_cond_w", w["high_side/conduction"], "conduction")
		// The source lets the channel conduct during the dead times, too.
		same(t, p, "p_ls_cond_w", w["low_side/conduction"]+p.in("r_ls_ohm")*f*2*td*i*i, "conduction")
		same(t, p, "p_hs_overlap_w", w["high_side/overlap"], "overlap")
		same(t, p, "p_gate_w", w["controller/gate_drive"], "gate_drive")
		same(t, p, "p_oss_w", w["high_side/output_charge"], "output_charge")
		same(t, p, "p_rr_w", w["high_side/recovery"], "recovery")
		same(t, p, "p_dead_w", w["low_side/dead_time"], "dead_time")
	})
	run("ps-lo-04", func(t *testing.T, p *printed) {
		vin, vout := p.in("v_in_v"), p.in("v_out_v")
		c := lossCase{
			vin: vin, duty: vout / vin, load: p.in("i_out_a"), f: p.in("f_sw_hz"), rectifier: "diode",
			// The source has a constant capacitance, half of whose charge is lost; the
			// model's square-root law loses two thirds: 3 mW of the 1.9 W.
			rect: object{"threshold_v": p.in("v_f_v"), "slope_ohm": 0, "junction_charge_c": p.in("c_j_f") * vin, "junction_charge_at_v": vin},
		}
		w := c.ask(t, at)
		same(t, p, "p_diode_w", w["diode/conduction"]+w["high_side/junction_charge"], "conduction", "junction_charge")
		require.InDelta(t, p.in("c_j_f")*vin*vin*p.in("f_sw_hz")*2/3, w["high_side/junction_charge"], 1e-9)
	})
	run("ps-sz-03", func(t *testing.T, p *printed) {
		vin := p.in("v_in_v")
		c := lossCase{
			vin: vin, duty: p.in("v_out_v") / vin, load: p.in("i_out_a"), f: p.in("f_sw_hz"), inductance: p.in("l_chosen_h"),
			inductor: object{"dc_resistance_ohm": p.in("dcr_ohm")},
		}
		w := c.ask(t, at)
		same(t, p, "p_dcr_w", w["inductor/winding_dc"]+w["inductor/winding_ac"], "winding_dc", "winding_ac")
	})
	run("ps-sz-10", func(t *testing.T, p *printed) {
		vin := p.in("v_in_max_v")
		c := lossCase{
			vin: vin, duty: p.in("v_out_v") / vin, load: p.in("i_out_a"), f: p.in("f_sw_hz"), inductance: p.in("l_chosen_h"),
			inductor: object{"dc_resistance_ohm": p.in("dcr_ohm")},
		}
		w := c.ask(t, at)
		same(t, p, "p_dcr_w", w["inductor/winding_dc"]+w["inductor/winding_ac"], "winding_dc", "winding_ac")
	})
	run("ps-sz-04", func(t *testing.T, p *printed) {
		c := lossCase{vin: 12, duty: p.in("duty_ratio"), load: p.in("i_out_a"), f: p.in("f_sw_hz"), input: object{"esr_ohm": p.in("esr_in_ohm")}}
		same(t, p, "p_cin_w", c.ask(t, at)["input_capacitors/0/series_resistance"], "series_resistance")
	})
	run("ps-co-03", func(t *testing.T, p *printed) {
		s := magnetics.FromKI(p.in("ki_ratio"), p.in("alpha_ratio"), p.in("beta_ratio"))
		for _, x := range []struct {
			name       string
			f, b, duty float64
		}{
			{"p_tri_d50_99900hz_96mt9_w_per_m3", 99900, 0.0969, 0.5},
			{"p_tri_d20_99910hz_97mt5_w_per_m3", 99910, 0.0975, 0.2},
			{"p_tri_d10_199170hz_97mt_w_per_m3", 199170, 0.097, 0.1},
		} {
			const turns, area, volume = 10, 1e-4, 1e-6
			c := lossCase{
				vin: 2 * x.b * turns * area * x.f / (x.duty * (1 - x.duty)), duty: x.duty, load: 1, f: x.f, inductance: 1e-3, // volt-seconds of the printed swing
				inductor: object{"core": object{
					"steinmetz": object{"k": s.K, "alpha": s.Alpha, "beta": s.Beta}, "turns": turns, "area_m2": area, "volume_m3": volume,
				}},
			}
			same(t, p, x.name, c.ask(t, at)["inductor/core"]/volume, "core")
		}
	})
	for _, m := range []string{
		"conduction", "overlap", "output_charge", "recovery", "dead_time", "gate_drive", "junction_charge",
		"winding_dc", "winding_ac", "core", "series_resistance", "quiescent",
	} {
		require.True(t, covered[m], m)
	}
}
