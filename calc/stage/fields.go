package stage

import (
	"math"
	"strconv"

	"railproof/calc/parts"
)

// Field names one number of a stage and says what it may be. Its ID is the
// number's JSON Pointer relative to the stage, without the leading slash, so
// that errors, spreads, assumptions and corner variables all speak of the same
// place.
type Field struct {
	ID       string
	Value    *float64
	Spread   bool     // a tolerance may be given
	Least    float64  // [any] smallest value with a meaning
	Greatest float64  // [any] largest
	Default  *Default // nil: required, or a rating that stays Unknown
	Beside   *float64 // the default says something only beside this number; nil: by itself
	Required bool
	Why      string // what is missing without a required number; "" where nothing is said
}

// Default is the documented stand-in for a number that was not given.
type Default struct {
	Value     float64 // [any]
	Low, High float64 // [any] range over which the real value may lie
	Why       string
}

// Fields lists every number of the stage that its topology uses, in the order of
// the contract. The pointers are into s.
func (s *Stage) Fields() []Field {
	f := make([]Field, 0, 88+10*(len(s.OutputCapacitors)+len(s.InputCapacitors))+4*len(s.Phases))
	f = append(f, required("switching_frequency_hz", &s.SwitchingFrequency, 1e3, 1e8))
	f = mosfetFields(f, "high_side/", &s.HighSide)
	if s.Rectifier == DiodeRectified {
		f = diodeFields(f, "diode/", &s.Diode)
	} else {
		f = mosfetFields(f, "low_side/", &s.LowSide)
	}
	f = inductorFields(f, "inductor/", &s.Inductor)
	for i := range s.OutputCapacitors {
		f = capacitorFields(f, "output_capacitors/"+strconv.Itoa(i)+"/", &s.OutputCapacitors[i])
	}
	for i := range s.InputCapacitors {
		f = capacitorFields(f, "input_capacitors/"+strconv.Itoa(i)+"/", &s.InputCapacitors[i])
	}
	f = controllerFields(f, "controller/", &s.Controller)
	f = loopFields(f, s)
	if s.Feedback.Present {
		f = append(f,
			required("feedback/reference_v", &s.Feedback.Reference, 1e-2, 1e2),
			required("feedback/upper_ohm", &s.Feedback.Upper, 0, 1e8),
			required("feedback/lower_ohm", &s.Feedback.Lower, 1, 1e8))
	}
	f = append(f,
		optional("board/input_path_ohm", &s.Board.InputPath, 0, 10, Default{0, 0, 2e-3, "copper from the source to the input capacitors taken as lossless"}),
		optional("board/output_path_ohm", &s.Board.OutputPath, 0, 10, Default{0, 0, 2e-3, "copper from the output capacitors to the load taken as lossless"}),
		optional("board/switch_node_path_ohm", &s.Board.SwitchNodePath, 0, 10, Default{0, 0, 1e-3, "copper between switches and inductor taken as lossless"}))
	for i := range s.Phases {
		f = phaseFields(f, "phases/"+strconv.Itoa(i)+"/", &s.Phases[i])
	}
	return f
}

// Field returns the number with the given id, or nil.
func (s *Stage) Field(id string) *float64 {
	for _, f := range s.Fields() {
		if f.ID == id {
			return f.Value
		}
	}
	return nil
}

// Lookup finds fields by their ids, at once where it is asked in their order.
type Lookup struct {
	Fields []Field
	next   int
}

// Find returns the place of the field with the id; -1 if there is none.
func (l *Lookup) Find(id string) int {
	for k := range l.Fields {
		i := l.next + k
		if i >= len(l.Fields) {
			i -= len(l.Fields)
		}
		if l.Fields[i].ID == id {
			l.next = i + 1
			return i
		}
	}
	return -1
}

func required(id string, v *float64, least, greatest float64) Field {
	return Field{ID: id, Value: v, Spread: true, Least: least, Greatest: greatest, Required: true}
}

func optional(id string, v *float64, least, greatest float64, d Default) Field {
	return Field{ID: id, Value: v, Spread: true, Least: least, Greatest: greatest, Default: &d}
}

// plain is a rating, a count or a data-sheet condition: no tolerance, and no
// default unless d is given.
func plain(id string, v *float64, least, greatest float64, d *Default) Field {
	return Field{ID: id, Value: v, Least: least, Greatest: greatest, Default: d}
}

// beside is a field whose default says something only beside a number that is
// known: what a life is computed from, where the data sheet states one.
func beside(known *float64, f Field) Field {
	f.Beside = known
	return f
}

func mosfetFields(f []Field, at string, m *parts.MOSFET) []Field {
	return append(f,
		required(at+"on_resistance_ohm", &m.OnResistance, 1e-6, 1e3),
		optional(at+"gate_charge_c", &m.GateCharge, 0, 1e-3, Default{0, 0, 3e-8, "gate charge not given: gate-drive loss taken as zero"}),
		optional(at+"gate_switch_charge_c", &m.GateSwitchCharge, 0, 1e-3, Default{0, 0, 8e-9, "switching gate charge not given: overlap loss taken as zero"}),
		plain(at+"gate_switch_charge_at_v", &m.GateSwitchChargeAt, 1e-1, 1e4, &Default{20, 10, 40, "test voltage of the switching gate charge not given"}),
		optional(at+"plateau_v", &m.Plateau, 1e-1, 20, Default{2.5, 1.8, 3.5, "gate plateau voltage not given: a logic-level value assumed"}),
		optional(at+"internal_gate_ohm", &m.InternalGate, 0, 1e3, Default{1, 0.5, 3, "internal gate resistance not given"}),
		optional(at+"output_charge_c", &m.OutputCharge, 0, 1e-3, Default{0, 0, 3e-8, "output charge not given: its loss taken as zero"}),
		plain(at+"output_charge_at_v", &m.OutputChargeAt, 1e-1, 1e4, &Default{20, 10, 40, "test voltage of the output charge not given"}),
		optional(at+"recovery_charge_c", &m.RecoveryCharge, 0, 1e-3, Default{0, 0, 4e-8, "recovery charge not given: its loss taken as zero"}),
		optional(at+"body_diode_v", &m.BodyDiode, 0, 5, Default{0.85, 0.7, 1.1, "body diode drop not given"}),
		plain(at+"rating/drain_source_v", &m.Rating.DrainSource, 1e-1, 1e5, nil),
		plain(at+"rating/gate_source_v", &m.Rating.GateSource, 1e-1, 1e3, nil),
		plain(at+"rating/drain_current_a", &m.Rating.DrainCurrent, 1e-3, 1e5, nil),
		plain(at+"rating/junction_degc", &m.Rating.JunctionDegC, 0, 500, nil),
		optional(at+"thermal/junction_to_ambient_k_per_w", &m.Thermal.JunctionToAmbient, 0, 1e4, Default{50, 25, 80, "junction-to-ambient resistance not given: a small power package on four layers assumed"}))
}

func diodeFields(f []Field, at string, d *parts.Diode) []Field {
	return append(f,
		required(at+"threshold_v", &d.Threshold, 0, 10),
		optional(at+"slope_ohm", &d.Slope, 0, 1e2, Default{0, 0, 3e-2, "diode slope resistance not given"}),
		optional(at+"threshold_temp_v_per_k", &d.ThresholdTemp, -2e-2, 2e-2, Default{-1.2e-3, -2e-3, 0, "temperature coefficient of the threshold not given: a usual Schottky value assumed"}),
		optional(at+"junction_charge_c", &d.JunctionCharge, 0, 1e-3, Default{0, 0, 2e-8, "junction charge not given: its loss taken as zero"}),
		plain(at+"junction_charge_at_v", &d.JunctionAt, 1e-1, 1e5, &Default{20, 10, 40, "test voltage of the junction charge not given"}),
		optional(at+"recovery_charge_c", &d.RecoveryCharge, 0, 1e-3, Default{0, 0, 3e-8, "recovery charge not given: taken as zero, true of a Schottky diode"}),
		plain(at+"rating/reverse_v", &d.Rating.Reverse, 1e-1, 1e5, nil),
		plain(at+"rating/forward_a", &d.Rating.Forward, 1e-3, 1e5, nil),
		plain(at+"rating/junction_degc", &d.Rating.JunctionDegC, 0, 500, nil),
		optional(at+"thermal/junction_to_ambient_k_per_w", &d.Thermal.JunctionToAmbient, 0, 1e4, Default{60, 30, 100, "junction-to-ambient resistance not given"}))
}

func inductorFields(f []Field, at string, l *parts.Inductor) []Field {
	f = append(f,
		required(at+"inductance_h", &l.Inductance, 1e-9, 1),
		optional(at+"dc_resistance_ohm", &l.DCResistance, 0, 1e3, Default{0, 0, 2e-2, "winding resistance not given: taken as zero"}),
		optional(at+"ac_resistance_ratio", &l.ACResistanceRatio, 1, 1e3, Default{1, 1, 5, "AC winding resistance not given: taken as the DC resistance"}))
	if l.Core.Present {
		f = append(f,
			required(at+"core/steinmetz/k", &l.Core.K, 0, 1e9),
			plain(at+"core/steinmetz/alpha", &l.Core.Alpha, 1, 3, nil),
			plain(at+"core/steinmetz/beta", &l.Core.Beta, 1, 4, nil),
			plain(at+"core/turns", &l.Core.Turns, 1, 1e4, nil),
			plain(at+"core/area_m2", &l.Core.Area, 1e-8, 1, nil),
			plain(at+"core/volume_m3", &l.Core.Volume, 1e-10, 1, nil),
			plain(at+"core/band/low_ratio", &l.Core.BandLow, 0, 1, &Default{0.7, 0.7, 0.7, "core-loss models are good to about 30 %"}),
			plain(at+"core/band/high_ratio", &l.Core.BandHigh, 1, 10, &Default{1.3, 1.3, 1.3, "core-loss models are good to about 30 %"}))
	}
	return append(f,
		plain(at+"rating/saturation_a", &l.Rating.Saturation, 1e-3, 1e5, nil),
		plain(at+"rating/heating_a", &l.Rating.Heating, 1e-3, 1e5, nil),
		plain(at+"rating/winding_degc", &l.Rating.WindingDegC, 0, 500, nil),
		optional(at+"thermal/junction_to_ambient_k_per_w", &l.Thermal.JunctionToAmbient, 0, 1e4, Default{30, 15, 60, "winding-to-ambient resistance not given"}))
}

func capacitorFields(f []Field, at string, c *parts.Capacitor) []Field {
	return append(f,
		required(at+"capacitance_f", &c.Capacitance, 1e-12, 10),
		optional(at+"esr_ohm", &c.ESR, 1e-6, 1e3, Default{3e-3, 1e-3, 1e-2, "series resistance at the switching frequency not given: a ceramic value assumed"}),
		optional(at+"esl_h", &c.ESL, 0, 1e-6, Default{0, 0, 1e-9, "series inductance not given: its edge step left out"}),
		plain(at+"rating/voltage_v", &c.Rating.Voltage, 1e-1, 1e5, nil),
		plain(at+"rating/ripple_current_a", &c.Rating.RippleCurrent, 1e-4, 1e4, nil),
		plain(at+"rating/temperature_degc", &c.Rating.TemperatureDegC, 0, 500, nil),
		plain(at+"life/rated_s", &c.Life.Rated, 1, 1e12, nil),
		beside(&c.Life.Rated, plain(at+"life/rated_rise_k", &c.Life.RatedRise, 0.1, 39, &Default{5, 3, 10, "core rise at rated ripple not given: the usual 5 K assumed"})),
		beside(&c.Life.Rated, plain(at+"life/frequency_factor_ratio", &c.Life.FrequencyFactor, 0.1, 10, &Default{1, 0.7, 1.4, "ripple frequency factor not given"})),
		optional(at+"thermal/junction_to_ambient_k_per_w", &c.Thermal.JunctionToAmbient, 0, 1e4, Default{40, 0, 100, "core-to-ambient resistance not given"}))
}

func controllerFields(f []Field, at string, c *parts.Controller) []Field {
	return append(f,
		optional(at+"drive_v", &c.Drive, 0.5, 50, Default{5, 4.5, 10, "gate drive voltage not given"}),
		optional(at+"gate_on_ohm", &c.GateOn, 0, 1e3, Default{2, 1, 5, "turn-on gate resistance not given"}),
		optional(at+"gate_off_ohm", &c.GateOff, 0, 1e3, Default{1, 0.5, 3, "turn-off gate resistance not given"}),
		optional(at+"dead_time_s", &c.DeadTime, 0, 1e-4, Default{0, 0, 4e-8, "dead time not given: its loss taken as zero"}),
		optional(at+"min_on_time_s", &c.MinOnTime, 0, 1e-3, Default{0, 0, 1.5e-7, "least on-time not given: taken as zero"}),
		optional(at+"min_off_time_s", &c.MinOffTime, 0, 1e-3, Default{0, 0, 2.5e-7, "least off-time not given: taken as zero"}),
		optional(at+"max_duty_ratio", &c.MaxDutyRatio, 1e-2, 1, Default{1, 0.9, 1, "greatest duty ratio not given: taken as one"}),
		optional(at+"quiescent_current_a", &c.QuiescentCurrent, 0, 10, Default{0, 0, 4e-3, "quiescent current not given: taken as zero"}),
		optional(at+"auxiliary_power_w", &c.AuxiliaryPower, 0, 1e4, Default{0, 0, 0.1, "auxiliary power not given: taken as zero"}),
		plain(at+"rating/input_v", &c.Rating.Input, 1e-1, 1e5, nil),
		plain(at+"rating/junction_degc", &c.Rating.JunctionDegC, 0, 500, nil),
		optional(at+"thermal/junction_to_ambient_k_per_w", &c.Thermal.JunctionToAmbient, 0, 1e4, Default{50, 25, 120, "controller's junction-to-ambient resistance not given"}))
}

func loopFields(f []Field, s *Stage) []Field {
	if m := &s.Modulator; m.Present {
		f = append(f, optional("modulator/delay_s", &m.Delay, 0, 1e-5, Default{0, 0, 1e-7, "comparator and driver delay not given: taken as zero"}),
			plain("modulator/current_limit_a", &m.CurrentLimit, 1e-3, 1e5, nil))
		if m.Mode == parts.PeakCurrentMode {
			f = append(f,
				required("modulator/sense_ohm", &m.Sense, 1e-6, 1e3),
				optional("modulator/slope_v_per_s", &m.Slope, 0, 1e9, Default{0, 0, 0, "no slope compensation given"}))
		} else {
			f = append(f,
				required("modulator/ramp_v", &m.Ramp, 1e-3, 1e3),
				plain("modulator/feed_forward_at_v", &m.FeedForwardAt, 1e-1, 1e5, nil))
		}
	}
	c := &s.Compensator
	if !c.Present {
		return f
	}
	if c.Type == parts.TransconductanceType2 || c.Type == parts.TransconductanceType3 {
		f = append(f,
			required("compensator/transconductance_s", &c.Transconductance, 1e-7, 1),
			optional("compensator/output_ohm", &c.OutputOhm, 1e3, 1e12, Default{math.Inf(1), 1e5, math.Inf(1), "output resistance of the amplifier not given: taken as infinite"}))
	} else {
		f = append(f,
			optional("compensator/gain_bandwidth_hz", &c.GainBandwidth, 1e3, 1e12, Default{math.Inf(1), 2e6, math.Inf(1), "unity-gain frequency of the amplifier not given: taken as infinite"}),
			optional("compensator/open_loop_gain_ratio", &c.OpenLoopGain, 10, 1e9, Default{math.Inf(1), 1e3, math.Inf(1), "direct gain of the amplifier not given: taken as infinite"}))
	}
	integrator := required("compensator/feedback_f", &c.FeedbackF, 1e-13, 1e-2)
	integrator.Why = "a compensator without this capacitor has no integrator"
	f = append(f, integrator)
	if c.Type != parts.OpAmpType1 {
		f = append(f,
			required("compensator/feedback_ohm", &c.FeedbackOhm, 0, 1e9),
			optional("compensator/shunt_f", &c.ShuntF, 0, 1e-3, Default{0, 0, 0, "no shunt capacitor given"}))
	}
	if c.Type == parts.OpAmpType3 || c.Type == parts.TransconductanceType3 {
		f = append(f,
			required("compensator/lead_ohm", &c.LeadOhm, 0, 1e9),
			required("compensator/lead_f", &c.LeadF, 1e-13, 1e-3))
	}
	return f
}

func phaseFields(f []Field, at string, p *PhaseOverride) []Field {
	override := func(id string, v *float64, least, greatest float64) Field {
		return Field{ID: at + id, Value: v, Spread: true, Least: least, Greatest: greatest}
	}
	return append(f,
		override("inductance_h", &p.Inductance, 1e-9, 1),
		override("dc_resistance_ohm", &p.DCResistance, 0, 1e3),
		override("high_side_on_resistance_ohm", &p.HighSideOn, 1e-6, 1e3),
		override("low_side_on_resistance_ohm", &p.LowSideOn, 1e-6, 1e3))
}
