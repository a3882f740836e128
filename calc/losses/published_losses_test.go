package losses

import (
	"math"

	"railproof/calc/numeric"
	"railproof/calc/parts"
	"railproof/calc/thermal"
)

var publishedLosses = map[string]func(*ledger){
	"ps-lo-01": func(l *ledger) {
		hs := parts.MOSFET{OnResistance: l.in("r_ds_on_25_ohm"), OnResistanceTemp: ruleOfThumb(l.in("tc_per_k"))}
		hot, _ := hs.OnResistanceAt(l.in("t_j_degc"), 5)
		d, i := l.in("v_out_v")/l.in("v_in_v"), l.in("i_out_a")
		conduction := Resistive(hot, d*square(i))
		l.got("p_cond_w", conduction)
		l.leaveOut("the factor 1.7 per ampere is that controller's driver, not a model", "p_trans_w")
		trans, _ := l.want("p_trans_w")
		l.got("p_main_w", conduction+trans)
		l.leaveOut("fold-back of that controller's current limit", "i_short_a")
		short, _ := l.want("i_short_a")
		l.got("p_sync_short_w", Resistive(hs.OnResistance*l.in("tc_sync_ratio"), (1-d)*square(short)))
	},
	"ps-lo-02": func(l *ledger) {
		vin, vout, i, f := l.in("v_in_v"), l.in("v_out_v"), l.in("i_out_a"), l.in("f_sw_hz")
		d := vout / vin
		l.leaveOut("an empirical fit of that switch; its value goes on into the overlap", "t_eff_s")
		t := (vin/1.2 + vin/1.7 + 2*i/0.05) * 1e-9
		cond := Resistive(l.in("r_sw_ohm"), d*square(i))
		overlap := OverlapLoss(vin, f, i, i, t/2, t/2)
		l.got("p_sw_cond_w", cond)
		l.got("p_sw_trans_w", overlap)
		l.got("p_sw_w", cond+overlap)
		l.leaveOut("base drive of a bipolar switch, a part this product does not know", "p_boost_w")
		boost := square(vout) * (i / l.in("k_boost_ratio")) / vin
		q := QuiescentLoss(vin, l.in("i_q1_a")) + QuiescentLoss(vout, l.in("i_q2_a"))
		l.got("p_q_w", q)
		l.got("p_ic_w", cond+overlap+boost+q)
		l.got("p_diode_w", DiodeConduction(l.in("v_f_v"), 0, (1-d)*i, (1-d)*square(i)))
		l.got("p_inductor_w", WindingDCLoss(l.in("dcr_ohm"), i))
	},
	"ps-lo-03": func(l *ledger) {
		vin, i, f := l.in("v_in_v"), l.in("i_out_a"), l.in("f_sw_hz")
		cond := Resistive(l.in("r_ds_on_ohm"), l.in("v_out_v")/vin*square(i))
		l.got("p_cond_w", cond)
		l.leaveOut("an empirical fit of that switch; its value goes on into the overlap", "t_rise_s")
		t := vin*l.in("t_rise_slope_s_per_v") + l.in("t_rise_offset_s")
		overlap := OverlapLoss(vin, f, i, i, t, t)
		gate := GateDriveLoss(l.in("q_g_c"), vin, f)
		q := QuiescentLoss(vin, l.in("i_q_a"))
		l.got("p_sw_w", overlap)
		l.got("p_gate_w", gate)
		l.got("p_q_w", q)
		l.got("p_total_w", cond+overlap+gate+q)
	},
	"ps-lo-04": func(l *ledger) {
		diode := func(vin float64) float64 {
			i, vf := l.in("i_out_a"), l.in("v_f_v")
			share := 1 - l.in("v_out_v")/vin
			q, e := constantCapacitance(l.in("c_j_f"), vin+vf)
			return DiodeConduction(vf, 0, share*i, share*square(i)) + OutputChargeLoss(vin+vf, l.in("f_sw_hz"), 0, q, e)
		}
		l.got("p_diode_w", diode(l.in("v_in_v")))
		l.got("p_diode_worst_w", diode(l.in("v_in_max_v")))
	},
	"ps-lo-05": func(l *ledger) {
		vin, i, t := l.in("v_in_v"), l.in("i_out_a"), l.in("t_sw_s")
		p := Resistive(l.in("r_ds_on_hot_ohm"), l.in("duty_ratio")*square(i)) +
			OverlapLoss(vin, l.in("f_sw_hz"), i, i, t, t) + QuiescentLoss(vin, l.in("i_q_a"))
		l.got("p_total_w", p)
		l.got("t_j_degc", junction(l.in("t_a_degc"), l.in("rth_ja_k_per_w"), p))
	},
	"ps-lo-06": func(l *ledger) {
		vin, i, d, f := l.in("v_in_v"), l.in("i_out_a"), l.in("duty_ratio"), l.in("f_sw_hz")
		cond := Resistive(l.in("r_hs_ohm"), d*square(i)) + Resistive(l.in("r_ls_ohm"), (1-d)*square(i))
		overlap := OverlapLoss(vin, f, i, i, l.in("t_r_s"), l.in("t_f_s"))
		gate := GateDriveLoss(l.in("c_gate_total_f")*vin, vin, f)
		winding := WindingDCLoss(l.in("dcr_ohm"), i)
		l.got("p_cond_w", cond)
		l.got("p_trans_w", overlap)
		l.got("p_gate_w", gate)
		l.got("p_dcr_w", winding)
		l.got("p_total_w", cond+overlap+gate+winding)
	},
	"ps-lo-07": func(l *ledger) {
		vin, f := l.in("v_in_max_v"), l.in("f_sw_hz")
		for _, ch := range []string{"1", "2"} {
			d, ms := l.in("d_"+ch+"_ratio"), square(l.in("i_rms_"+ch+"_a"))
			l.got("p_cond_"+ch+"_w", Resistive(l.in("r_hs_"+ch+"_ohm"), d*ms)+Resistive(l.in("r_ls_"+ch+"_ohm"), (1-d)*ms))
			_, own := constantCapacitance(l.in("c_oss_hs_"+ch+"_f"), vin)
			q, e := constantCapacitance(l.in("c_oss_ls_"+ch+"_f"), vin)
			l.got("p_coss_"+ch+"_w", OutputChargeLoss(vin, f, own, q, e))
		}
		l.got("p_reg_w", QuiescentLoss(vin, l.in("i_dd_a")))
	},
	"ps-lo-08": func(l *ledger) {
		d := l.in("v_out_v") / l.in("v_in_v")
		ms := square(l.in("i_out_a")) + square(rms(l.in("i_l_pp_a")))
		l.got("i_hs_rms_a", math.Sqrt(d*ms))
		l.got("i_ls_rms_a", math.Sqrt((1-d)*ms))
		low := Resistive(l.in("r_ls_each_ohm")/l.in("n_ls_ratio"), (1-d)*ms)
		l.got("p_ls_cond_w", low)
		var s Sheet
		s.Add(Item{Part: HighSide, Mechanism: Conduction, Power: l.in("p_hs_cond_w"), Count: 1})
		s.Add(Item{Part: HighSide, Mechanism: Overlap, Power: l.in("p_hs_sw_w"), Count: 1})
		s.Add(Item{Part: LowSide, Mechanism: Conduction, Power: low, Count: 1})
		s.Add(Item{Part: LowSide, Mechanism: DeadTime, Power: l.in("p_body_diode_w"), Count: 1})
		l.got("p_hs_total_w", s.Of(HighSide))
		l.got("p_ls_total_w", s.Of(LowSide))
	},
	"ps-lo-09": func(l *ledger) {
		vin, vout, i, f := l.in("v_in_v"), l.in("v_out_v"), l.in("i_out_a"), l.in("f_sw_hz")
		vf, vsat := l.in("v_f_v"), l.in("v_sat_v")
		d := (vout + vf) / (vin - vsat + vf)
		l.got("duty_ratio", d)
		// The source charges both edges with the full product, hence twice the time.
		sw := DiodeConduction(vsat, 0, d*i, d*square(i)) + OverlapLoss(vin, f, i, i, 2*l.in("t_sw_s"), 2*l.in("t_sw_s"))
		diode := DiodeConduction(vf, 0, (1-d)*i, (1-d)*square(i)) + RecoveryLoss(vin, i*l.in("t_rr_s"), f)
		ripple := rms(l.in("i_l_pp_a"))
		cap := Resistive(l.in("esr_ohm"), square(ripple))
		ms, dcr := square(i)+square(ripple), l.in("dcr_ohm")
		ac := WindingACLoss(dcr, 1, i, ms) + l.in("p_core_w")
		coil := WindingDCLoss(dcr, i) + ac
		efficiency := func(coil float64) float64 {
			return vout * i / (vout*i + sw + diode + cap + coil + QuiescentLoss(vin, l.in("i_q_a")))
		}
		l.got("p_switch_w", sw)
		l.got("p_diode_w", diode)
		l.got("p_cap_w", cap)
		l.got("p_coil_as_in_script_w", ac)
		l.got("efficiency_as_in_script_ratio", efficiency(ac))
		l.got("p_coil_w", coil)
		l.got("efficiency_ratio", efficiency(coil))
		l.leaveOut("efficiency of a linear regulator", "efficiency_linear_ratio")
	},
	"ps-lo-10": func(l *ledger) {
		vin, r, pl := l.in("v_in_v"), l.in("r_dr_ohm"), l.in("v_pl_v")
		q, _ := constantCapacitance(l.in("c_miller_f"), vin)
		on, off := Transition(q, r, l.in("v_cc_v")-pl), Transition(q, r, pl)
		l.got("q_gd_c", q)
		l.got("t_turn_on_s", on)
		l.got("t_turn_off_s", off)
		p := OverlapLoss(vin, l.in("f_sw_hz"), l.in("i_a"), l.in("i_a"), on, off)
		l.got("p_trans_w", p)
		l.got("p_trans_from_times_w", p)
	},
	"ps-lo-11": func(l *ledger) {
		vin, i, f := l.in("v_in_v"), l.in("i_out_a"), l.in("f_sw_hz")
		d := l.in("v_out_v") / vin
		l.got("p_hs_cond_w", Resistive(l.in("r_hs_ohm"), d*square(i)))
		l.got("p_ls_cond_w", Resistive(l.in("r_ls_ohm"), (1-d)*square(i)))
		t := Transition(l.in("q_gs2_hs_c")+l.in("q_gd_hs_c"), 1, l.in("i_g_a")) // a gate current is a volt over an ohm
		l.got("p_hs_overlap_w", OverlapLoss(vin, f, i, i, t, t))
		l.got("p_gate_w", GateDriveLoss(l.in("q_g_hs_c")+l.in("q_g_ls_c"), l.in("v_dr_v"), f))
		// The source takes half the charge times the voltage: constant capacitances.
		_, own := constantCapacitance(l.in("q_oss_hs_c")/vin, vin)
		q, e := constantCapacitance(l.in("q_oss_ls_c")/vin, vin)
		l.got("p_oss_w", OutputChargeLoss(vin, f, own, q, e))
		l.got("p_rr_w", RecoveryLoss(vin, l.in("q_rr_ls_c"), f))
		edge := l.in("t_dead_total_s") / 2
		l.got("p_dead_w", DeadTimeLoss(f, edge, l.in("v_sd_v"), i)+DeadTimeLoss(f, edge, l.in("v_sd_v"), i))
	},
}

// ruleOfThumb is an on-resistance that rises by a constant fraction per kelvin.
func ruleOfThumb(perKelvin float64) numeric.Table {
	return numeric.Table{X: []float64{25, 125}, Y: []float64{1, 1 + 100*perKelvin}}
}

// junction is the temperature of one part on its own.
func junction(ambient, rth, p float64) float64 {
	var n thermal.Network
	n.Add(0, rth)
	var power, degC thermal.Vector
	power[0] = p
	n.Temperatures(ambient, &power, &degC)
	return degC[0]
}
