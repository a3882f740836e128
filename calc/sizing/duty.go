package sizing

import "math"

// IdealDuty returns the duty ratio of a lossless stage in continuous conduction.
//
//	D = Vo / Vin
//
//	vin, vout [V] input and mean output voltage
//
// Valid for 0 < vout < vin. Drops raise it: from 12 V to 3.3 V with a 0.5 V diode
// by 10 %; the exact value is evaluate's.
//
// Source: every textbook; M. H. Rashid, Power Electronics, 4th ed., Example 5.5.
// Checked by TestPublishedSizing, cases ps-sz-01 and ps-sz-02.
func IdealDuty(vin, vout float64) float64 { return vout / vin }

// Drops are the voltages lost in one phase of a stage.
type Drops struct {
	HighSide  float64 // [ohm] on-resistance
	Rectifier float64 // [ohm] on-resistance of the low side, or slope of the diode
	Threshold float64 // [V] of the diode
	Winding   float64 // [ohm] inductor and its copper
}

// DropDuty returns the duty ratio in continuous conduction with constant drops and
// resistances: the volt-seconds of the inductor balance.
//
//	D = Voff / (Von + Voff)
//	Von  = Vin − I (Rhs + Rl) − Vo
//	Voff = Vo + Vth + I (Rr + Rl)
//
//	vin, vout [V] input and mean output voltage
//	i         [A] mean inductor current of one phase
//
// Valid in continuous conduction, ripple small enough that the mean current stands
// for the drop. It exceeds 1 where the input cannot feed the load.
//
// Source: volt-second balance; S. Franco, Design with Operational Amplifiers and
// Analog Integrated Circuits, 3rd ed., ch. 11, for constant drops (a saturation
// voltage Vsat stands there for I Rhs).
// Checked by TestPublishedSizing, case ps-sz-02, and against the exact engine by
// TestClosedFormsAgainstTheEngine.
func DropDuty(vin, vout, i float64, d Drops) float64 {
	on, off := inductorVoltages(vin, vout, i, d)
	return off / (on + off)
}

// inductorVoltages returns the voltages across the ideal inductor while the high
// side is on and while it is off [V], both positive in normal operation.
func inductorVoltages(vin, vout, i float64, d Drops) (on, off float64) {
	on = vin - i*(d.HighSide+d.Winding) - vout
	off = vout + d.Threshold + i*(d.Rectifier+d.Winding)
	return on, off
}

// RippleCurrent returns the peak-to-peak inductor current of an ideal stage in
// continuous conduction.
//
//	ΔI = Vo (1 − Vo/Vin) / (L fs)
//
//	vin, vout [V]  input and mean output voltage
//	l         [H]  inductance over the current swing
//	fs        [Hz] switching frequency
//
// Valid for 0 < vout < vin, lossless switches, output ripple far below vout.
//
// Source: every textbook; Linear Technology LTC3728 data sheet, p. 28.
// Checked by TestPublishedSizing, cases ps-sz-03 to ps-sz-14.
func RippleCurrent(vin, vout, l, fs float64) float64 {
	return vout * (1 - vout/vin) / (l * fs)
}

// InductanceForRipple returns the inductance at which an ideal stage has the
// peak-to-peak inductor current di [A]; the inverse of RippleCurrent.
//
//	L = Vo (1 − Vo/Vin) / (ΔI fs)
//
// Source: M. H. Rashid, Power Electronics, 4th ed., Example 5.5.
// Checked by TestPublishedSizing, cases ps-sz-01, 03, 06 to 11, 13.
func InductanceForRipple(vin, vout, di, fs float64) float64 {
	return vout * (1 - vout/vin) / (di * fs)
}

// InductanceForContinuous returns the least inductance that keeps an ideal stage
// in continuous conduction down to the mean inductor current i [A].
//
//	L = (1 − Vo/Vin) Vo / (2 I fs)
//
// At the boundary the ripple is twice the mean, ΔI = 2 I. The binding corner is
// the greatest input voltage and the least load.
//
// Source: N. Mohan, T. Undeland, W. Robbins, Power Electronics, Problem 7-1.
// Checked by TestPublishedSizing, case ps-sz-18.
func InductanceForContinuous(vin, vout, i, fs float64) float64 {
	return InductanceForRipple(vin, vout, 2*i, fs)
}

// DiscontinuousOnTime returns the on-time that a diode-rectified stage needs in
// discontinuous conduction.
//
//	ton = sqrt(2 L I (Vo + Vth) / (fs (Vin − Vo)(Vin + Vth)))
//
//	i   [A] mean inductor current
//	vth [V] diode drop; 0 for a switch that blocks reverse current
//
// Valid below the conduction boundary, resistances neglected. The charge of the
// triangle is Ipk (D + D2)/(2 fs) = I/fs with Ipk = (Vin − Vo) ton/L and
// D2 = D (Vin − Vo)/(Vo + Vth).
//
// Source: derived as above. Checked by TestDiscontinuousOnTime against
// DiscontinuousRatio, and against the exact engine by
// TestClosedFormsAgainstTheEngine.
func DiscontinuousOnTime(vin, vout, i, l, fs, vth float64) float64 {
	return math.Sqrt(2 * l * i * (vout + vth) / (fs * (vin - vout) * (vin + vth)))
}
