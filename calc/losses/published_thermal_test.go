package losses

import (
	"math"

	"railproof/calc/parts"
	"railproof/calc/thermal"
)

const hour = 3600.0 // [s]

var publishedThermal = map[string]func(*ledger){
	"ps-th-01": func(l *ledger) {
		chain := l.in("rth_jc_k_per_w") + l.in("rth_cs_k_per_w") + l.in("rth_sa_k_per_w")
		ta, tj := l.in("t_a_degc"), l.in("t_j_max_degc")
		perWatt := junction(ta, chain, 1) - ta
		p := (tj - ta) / perWatt
		l.got("p_max_w", p)
		l.got("t_c_degc", junction(ta, chain-l.in("rth_jc_k_per_w"), p))
	},
	"ps-th-02": func(l *ledger) {
		m := parts.MOSFET{OnResistance: l.in("r_ds_on_25_ohm"), OnResistanceTemp: ruleOfThumb((l.in("hot_factor_ratio") - 1) / 125)}
		hot, _ := m.OnResistanceAt(150, 10)
		i := l.in("v_supply_v") / (l.in("r_load_ohm") + hot)
		p := Resistive(hot, l.in("duty_ratio")*square(i))
		l.got("r_ds_on_hot_ohm", hot)
		l.got("i_load_a", i)
		l.got("p_load_w", Resistive(l.in("r_load_ohm"), l.in("duty_ratio")*square(i)))
		l.got("p_switch_w", p)
		l.got("t_j_degc", junction(l.in("t_a_degc"), l.in("rth_ja_k_per_w"), p))
	},
	"ps-th-03": func(l *ledger) {
		rated, t0 := l.in("l_rated_h_time")*hour, l.in("t_rated_degc")
		var lives, shares []float64
		for _, k := range []string{"1", "2", "3"} {
			life := parts.LifeAtCore(rated, t0, l.in("t_"+k+"_degc"))
			l.got("life_"+k+"_h", life/hour)
			lives, shares = append(lives, life), append(shares, l.in("share_"+k+"_ratio"))
		}
		mixed := parts.MixedLife(lives, shares)
		l.got("life_mixed_h", mixed/hour)
		equivalent := t0 - 10*math.Log2(mixed/rated)
		l.got("t_equivalent_degc", equivalent)
		close12(l, "life at the equivalent temperature", parts.LifeAtCore(rated, t0, equivalent), mixed)
	},
	"ps-th-04": func(l *ledger) {
		c := parts.Capacitor{
			Count: 1, Kind: parts.AluminiumElectrolytic,
			Rating: parts.CapacitorRating{RippleCurrent: 1, TemperatureDegC: l.in("t_rated_degc")},
			Life:   parts.CapacitorLife{Rated: l.in("l_rated_h_time") * hour, RatedRise: l.in("dt_rated_k"), FrequencyFactor: 1},
		}
		ta := l.in("t_a_degc")
		l.got("life_at_full_ripple_h", c.LifeAt(ta, c.RippleRise(1))/hour)
		rise := c.RippleRise(l.in("ripple_ratio"))
		l.got("dt_actual_k", rise)
		l.got("life_at_half_ripple_h", c.LifeAt(ta, rise)/hour)
	},
	"ps-th-05": func(l *ledger) {
		t := l.in("t_degc")
		hot, slope := parts.CopperMultiplier(t)
		cold, _ := parts.CopperMultiplier(20)
		zero := parts.ReferenceDegC - 1/slope
		l.got("r100_over_r20_ratio", hot/cold)
		l.got("r100_over_r25_ratio", hot)
		l.got("alpha25_per_k", parts.CopperSlope)
		l.got("inferred_zero_degc", zero)
		l.leaveOut("a rounded rule of thumb, 0.4 % per kelvin from 20 degC; the exact slope is used", "r100_over_r20_rule_ratio")
	},
	"ps-th-06": func(l *ledger) {
		m := parts.MOSFET{OnResistance: 1, OnResistanceTemp: ruleOfThumb(l.in("tc_per_k"))}
		at := func(degC float64) float64 { r, _ := m.OnResistanceAt(degC, 5); return r }
		l.got("delta_50_ratio", at(l.in("t_j_degc"))-1)
		_, slope := m.OnResistanceAt(50, 5)
		l.got("t_j_implied_by_1p3_degc", 25+(l.in("factor_ratio")-1)/slope)
		l.got("factor_100_ratio", at(100))
		l.got("factor_125_ratio", at(125))
	},
	"ps-th-07": func(l *ledger) {
		bank := func(c float64, n int, keep float64) float64 {
			b := parts.Capacitor{Capacitance: c, Count: n}
			b.CapacitanceAtBias.X, b.CapacitanceAtBias.Y = []float64{0, 5}, []float64{1, keep}
			return b.CapacitanceAt(5, 25, 0)
		}
		l.leaveOut("a ratio of two given values", "keep_a_ratio", "keep_d_ratio")
		b := bank(l.in("c_nom_b_f"), int(l.in("n_b_ratio")), l.in("keep_b_ratio"))
		l.got("c_eff_b_f", b)
		l.got("c_eff_b_total_f", b+l.in("c_bulk_f"))
		l.got("c_eff_c_f", bank(l.in("c_nom_c_f"), int(l.in("n_c_ratio")), l.in("keep_c_ratio")))
	},
	"ps-th-08": func(l *ledger) {
		ta, rth, p25, a := l.in("t_a_degc"), l.in("rth_ja_k_per_w"), l.in("p25_w"), l.in("tc_per_k")
		tj, ok := thermal.LinearEquilibrium(ta, rth, 0, p25, a)
		if !ok {
			l.t.Error("no equilibrium found")
		}
		l.got("t_j_degc", tj)
		l.got("p_w", p25*(1+a*(tj-25)))
		l.got("t_j_without_feedback_degc", junction(ta, rth, p25))

		var n thermal.Network
		n.Add(0, rth)
		var power, slope, degC thermal.Vector
		degC[0], slope[0] = ta, p25*a
		gain, _ := n.Feedback(&slope)
		l.got("loop_gain_ratio", gain)
		power[0] = p25 * (1 + a*(degC[0]-25))
		n.Step(ta, &power, &slope, &degC)
		l.got("t_j_degc", degC[0])
	},
}
