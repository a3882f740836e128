package losses

import "railproof/calc/magnetics"

var publishedCore = map[string]func(*ledger){
	"ps-co-01": func(l *ledger) {
		for _, c := range []struct {
			name, alpha string
			duty        float64
		}{
			{"ratio_alpha_1_any_duty", "alpha_1_ratio", 0.3},
			{"ratio_alpha_125_d50", "alpha_125_ratio", 0.5},
			{"ratio_alpha_15_d50", "alpha_15_ratio", 0.5},
			{"ratio_alpha_15_d30", "alpha_15_ratio", 0.3},
			{"ratio_alpha_15_d10", "alpha_15_ratio", 0.1},
			{"ratio_alpha_2_d50", "alpha_2_ratio", 0.5},
			{"ratio_alpha_2_d10", "alpha_2_ratio", 0.1},
		} {
			alpha := l.in(c.alpha)
			l.got(c.name, magnetics.TriangleOverSine(alpha, c.duty))
			// The kernel that evaluation uses must say the same, for any beta.
			const f, b, beta = 3e5, 0.08, 2.6
			s := magnetics.Steinmetz{K: 1.2, Alpha: alpha, Beta: beta}
			l.got(c.name, triangle(s, f, b, c.duty)/s.SineDensity(f, b))
		}
	},
	"ps-co-02": func(l *ledger) {
		s := magnetics.Steinmetz{K: l.in("k_ratio"), Alpha: l.in("alpha_ratio"), Beta: l.in("beta_ratio")}
		l.got("k_i_exact_ratio", s.KI())
		l.got("k_i_approx_ratio", s.KIApproximate())
		l.got("relative_error_ratio", s.KIApproximate()/s.KI()-1)
	},
	"ps-co-03": func(l *ledger) {
		s := magnetics.FromKI(l.in("ki_ratio"), l.in("alpha_ratio"), l.in("beta_ratio"))
		l.got("p_sin_99950hz_100mt3_w_per_m3", s.SineDensity(99950, 0.1003))
		l.got("p_tri_d50_99900hz_96mt9_w_per_m3", triangle(s, 99900, 0.0969, 0.5))
		l.got("p_tri_d30_99910hz_97mt3_w_per_m3", triangle(s, 99910, 0.0973, 0.3))
		l.got("p_tri_d20_99910hz_97mt5_w_per_m3", triangle(s, 99910, 0.0975, 0.2))
		l.got("p_tri_d50_199170hz_98mt3_w_per_m3", triangle(s, 199170, 0.0983, 0.5))
		l.got("p_tri_d10_199170hz_97mt_w_per_m3", triangle(s, 199170, 0.097, 0.1))
	},
	"ps-co-04": func(l *ledger) {
		s := magnetics.FromKI(l.in("ki_ratio"), l.in("alpha_ratio"), l.in("beta_ratio"))
		l.got("over_prediction_sin_99950hz_98mt2_ratio", s.SineDensity(99950, 0.0982)/l.in("p_meas_sin_w_per_m3"))
		l.got("over_prediction_tri_d50_99900hz_97mt2_ratio", triangle(s, 99900, 0.0972, 0.5)/l.in("p_meas_tri_w_per_m3"))
	},
	"ps-co-05": func(l *ledger) {
		p500, p700, p1000 := l.in("p_500k_50m_w_per_m3"), l.in("p_700k_50m_w_per_m3"), l.in("p_1m_50m_w_per_m3")
		l.got("alpha_500_700_ratio", magnetics.Exponent(500e3, p500, 700e3, p700))
		alpha := magnetics.Exponent(700e3, p700, 1e6, p1000)
		l.got("alpha_700_1000_ratio", alpha)
		beta := magnetics.Exponent(0.01, l.in("p_3m_10m_w_per_m3"), 0.03, l.in("p_3m_30m_w_per_m3"))
		l.got("beta_3m_ratio", beta)
		l.got("p_850k_50m_interp_w_per_m3", magnetics.Through(700e3, 0.05, p700, alpha, beta).SineDensity(850e3, 0.05))
	},
	"ps-co-06": func(l *ledger) {
		hot := l.in("p_90k_100m_100c_w_per_m3")
		l.got("alpha_90_270_100c_ratio", magnetics.Exponent(90e3, hot, 270e3, l.in("p_270k_100m_100c_w_per_m3")))
		l.got("beta_100_200_100c_ratio", magnetics.Exponent(0.1, hot, 0.2, l.in("p_90k_200m_100c_w_per_m3")))
		l.got("beta_100_200_25c_ratio", magnetics.Exponent(0.1, l.in("p_90k_100m_25c_w_per_m3"), 0.2, l.in("p_90k_200m_25c_w_per_m3")))
		l.leaveOut("a ratio of two measurements; no Steinmetz form knows of temperature or bias", "cold_over_hot_100m_ratio", "bias_100m_increase_ratio")
	},
	"ps-co-07": func(l *ledger) {
		p := l.in("p_100k_200m_w_per_m3")
		alpha := magnetics.Exponent(25e3, l.in("p_25k_200m_w_per_m3"), 100e3, p)
		l.got("alpha_25_100_ratio", alpha)
		l.got("k_through_100k_200m_beta_265_ratio", magnetics.Through(100e3, 0.2, p, alpha, 2.65).K)
	},
}

// triangle is the density of a triangular flux of amplitude b.
func triangle(s magnetics.Steinmetz, f, b, duty float64) float64 {
	t := magnetics.PrepareTriangle(s.Alpha, s.Beta)
	t.At(s.K, f)
	return t.Density(2*b, duty, 1-duty)
}
