package caution

import (
	"math"
	"strings"
	"testing"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// plainStage is a stage in which nothing but the three notices and the fault
// current is to be pointed at.
func plainStage(r stage.Rectifier) *stage.Stage {
	s := stage.NewStage(r, 1, 1, 0, true, false, true, false)
	s.SwitchingFrequency = 400e3
	s.Feedback.Reference, s.Feedback.Upper, s.Feedback.Lower = 0.8, 42e3, 8e3
	for _, c := range []*parts.Capacitor{&s.OutputCapacitors[0], &s.InputCapacitors[0]} {
		c.Count, c.Capacitance, c.Kind = 2, 10e-6, parts.CeramicClass2
	}
	s.Board.InputPath = 0
	return s
}

func point(input float64) *stage.Point {
	return &stage.Point{Input: input, Control: stage.Control{Kind: stage.RegulateTo, Voltage: 5}}
}

// result is a result in which every quantity is unknown except those set.
func result(status evaluate.Status, set map[quantity.ID]float64) *evaluate.Result {
	r := &evaluate.Result{Status: status}
	for i := range r.Quantities {
		r.Quantities[i] = math.NaN()
	}
	for i := range r.PartDegC {
		r.PartDegC[i] = math.NaN()
	}
	for id, v := range set {
		r.Quantities[id] = v
	}
	return r
}

func cautionsOf(s *stage.Stage, p *stage.Point, r *evaluate.Result) []Caution {
	var seen Seen
	seen.Add("/point", s, p, r)
	return Of(s, "/stage", nil, &seen)
}

func find(list []Caution, code Code, pointer string) *Caution {
	for i := range list {
		if list[i].Code == code && (pointer == "" || list[i].Pointer == pointer) {
			return &list[i]
		}
	}
	return nil
}

// A caution must be absent at its threshold and present just above it.
func TestThresholds(t *testing.T) {
	above := func(x float64) float64 { return x * (1 + 1e-12) }
	cases := []struct {
		name    string
		code    Code
		pointer string
		at      float64
		make    func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result)
		unit    string
	}{
		{"es1/direct-voltage", AboveES1Voltage, "/point/input_v", 60, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			return plainStage(stage.Synchronous), point(x), nil
		}, "V"},
		{"es2/direct-voltage", AboveES2Voltage, "/point/input_v", 120, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			return plainStage(stage.Synchronous), point(x), nil
		}, "V"},
		{"charged-capacitor/input", ChargedCapacitor, "/stage/input_capacitors", 60, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			return plainStage(stage.Synchronous), point(x), nil
		}, "V"},
		{"hot-plug/twice-the-input", HotPlugOvershoot, "/stage/high_side/rating/drain_source_v", 20, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.HighSide.Rating.DrainSource = 40
			return s, point(x), nil
		}, "V"},
		{"fault-current/source-power-15-w", FaultCurrent, "/point/input_v", 24, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			p := point(x)
			p.SourceResistance = 24 * 24 / (4 * 15.0)
			return plainStage(stage.Synchronous), p, nil
		}, "A"},
		{"ps2/load-power", PowerSourcePS2, "/stage/output_capacitors", 15, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			return plainStage(stage.Synchronous), point(24), result(evaluate.OK, map[quantity.ID]float64{quantity.OutputPower: x})
		}, "W"},
		{"ps2/current-limit", PowerSourcePS2, "/stage/output_capacitors", 3, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.Modulator.CurrentLimit = x
			return s, point(24), nil
		}, "W"},
		{"ps3/load-power", PowerSourcePS3, "/stage/output_capacitors", 100, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			return plainStage(stage.Synchronous), point(24), result(evaluate.OK, map[quantity.ID]float64{quantity.OutputPower: x})
		}, "W"},
		{"hot-surface/inductor", HotSurface, "/stage/inductor", 70, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			r := result(evaluate.OK, nil)
			r.PartDegC[losses.Inductor] = x
			return plainStage(stage.Synchronous), point(24), r
		}, "Cel"},
		{"maximum/high-side-voltage", BeyondAbsoluteMaximum, "/stage/high_side/rating/drain_source_v", 30, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.HighSide.Rating.DrainSource = 30
			return s, point(x), nil
		}, "V"},
		{"maximum/low-side-current", BeyondAbsoluteMaximum, "/stage/low_side/rating/drain_current_a", 8, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.LowSide.Rating.DrainCurrent = 8
			return s, point(24), result(evaluate.OK, map[quantity.ID]float64{quantity.RectifierRMS: x})
		}, "A"},
		{"maximum/gate-drive", BeyondAbsoluteMaximum, "/stage/high_side/rating/gate_source_v", 6, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.HighSide.Rating.GateSource, s.Controller.Drive = 6, x
			return s, point(24), nil
		}, "V"},
		{"maximum/diode-junction", BeyondAbsoluteMaximum, "/stage/diode/rating/junction_degc", 150, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.DiodeRectified)
			s.Diode.Rating.JunctionDegC = 150
			r := result(evaluate.OverTemperature, nil)
			r.PartDegC[losses.Diode] = x
			return s, point(24), r
		}, "Cel"},
		{"maximum/output-capacitor-with-ripple", BeyondAbsoluteMaximum, "/stage/output_capacitors/0/rating/voltage_v", 0.5, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.OutputCapacitors[0].Rating.Voltage = 5.25
			return s, point(24), result(evaluate.OK, map[quantity.ID]float64{quantity.OutputRipplePP: x})
		}, "V"},
		{"maximum/ripple-current-per-piece", BeyondAbsoluteMaximum, "/stage/input_capacitors/0/rating/ripple_current_a", 4, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.InputCapacitors[0].Rating.RippleCurrent = 2
			return s, point(24), result(evaluate.OK, map[quantity.ID]float64{quantity.InputCapacitorBankRMS: x})
		}, "A"},
		{"near/electrolytic-voltage", CapacitorNearLimit, "/stage/input_capacitors/0/rating/voltage_v", 32, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.InputCapacitors[0].Kind, s.InputCapacitors[0].Rating.Voltage = parts.AluminiumElectrolytic, 40
			return s, point(x), nil
		}, "V"},
		{"near/tantalum-voltage", CapacitorNearLimit, "/stage/input_capacitors/0/rating/voltage_v", 20, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.InputCapacitors[0].Kind, s.InputCapacitors[0].Rating.Voltage = parts.TantalumSolid, 40
			return s, point(x), nil
		}, "V"},
		{"near/electrolytic-temperature", CapacitorNearLimit, "/stage/input_capacitors/0/rating/temperature_degc", 85, func(x float64) (*stage.Stage, *stage.Point, *evaluate.Result) {
			s := plainStage(stage.Synchronous)
			s.InputCapacitors[0].Kind, s.InputCapacitors[0].Rating.TemperatureDegC = parts.AluminiumPolymer, 105
			r := result(evaluate.OK, nil)
			r.PartDegC[losses.InputCapacitor] = x
			return s, point(24), r
		}, "Cel"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			if got := find(cautionsOf(c.make(c.at)), c.code, c.pointer); got != nil {
				t.Errorf("at %g: %+v, want no such caution", c.at, *got)
			}
			got := find(cautionsOf(c.make(above(c.at))), c.code, c.pointer)
			if got == nil {
				t.Fatalf("just above %g: no caution %s at %s", c.at, c.code, c.pointer)
			}
			if got.Unit != c.unit || math.IsNaN(got.Value) || got.Detail == "" {
				t.Errorf("got %+v, want a figure in %s and a detail", *got, c.unit)
			}
			if !math.IsNaN(got.Limit) && !(got.Value > got.Limit) {
				t.Errorf("value %g is not above limit %g", got.Value, got.Limit)
			}
		})
	}
}

func TestStoredEnergyThresholdWithUpperTolerance(t *testing.T) {
	s := plainStage(stage.Synchronous)
	s.OutputCapacitors[0].Count, s.OutputCapacitors[0].Capacitance = 1, 1.28
	seen := Seen{}
	seen.Add("/point", s, point(24), nil)
	if find(Of(s, "/stage", nil, &seen), StoredEnergy, "") != nil {
		t.Error("16 J: caution although below 20 J")
	}
	for _, upper := range []struct {
		c    float64
		want bool
	}{{1.59, false}, {1.6, true}} {
		v := []spread.Variable{{Field: "output_capacitors/0/capacitance_f", Min: 1, Typ: 1.28, Max: upper.c}}
		if got := find(Of(s, "/stage", v, &seen), StoredEnergy, "/stage/output_capacitors") != nil; got != upper.want {
			t.Errorf("greatest capacitance %g F: caution %v, want %v", upper.c, got, upper.want)
		}
	}
}

func TestNoticesAreAlwaysThere(t *testing.T) {
	var seen Seen
	seen.Add("/point", nil, point(5.5), nil)
	list := Of(nil, "/stage", nil, &seen)
	for _, code := range []Code{EstimatesOnly, InputReachesLoad, NotAnalysed} {
		n := 0
		for _, c := range list {
			if c.Code == code {
				n++
			}
		}
		if n != 1 {
			t.Errorf("%s appears %d times, want once", code, n)
		}
	}
	c := find(list, InputReachesLoad, "/point/input_v")
	if c == nil || c.Value != 5.5 || c.Limit != 5 || c.Unit != "V" {
		t.Errorf("input on the load: %+v, want 5.5 V against 5 V", c)
	}
}

func TestRunaway(t *testing.T) {
	s := plainStage(stage.Synchronous)
	r := result(evaluate.Runaway, map[quantity.ID]float64{quantity.OutputPower: 1e9})
	list := cautionsOf(s, point(24), r)
	if c := find(list, ThermalRunaway, "/point"); c == nil {
		t.Errorf("status runaway gives no caution: %+v", list)
	}
	if c := find(list, PowerSourcePS3, ""); c != nil {
		t.Errorf("figures of a point without equilibrium were used: %+v", *c)
	}
	for rho, want := range map[float64]bool{0.999: false, 1: true} {
		r := result(evaluate.OK, map[quantity.ID]float64{quantity.ThermalFeedback: rho})
		if got := find(cautionsOf(s, point(24), r), ThermalRunaway, "/stage") != nil; got != want {
			t.Errorf("feedback %g: caution %v, want %v", rho, got, want)
		}
	}
}

func TestUnknownCapacitorRatingIsPointedAt(t *testing.T) {
	s := plainStage(stage.Synchronous)
	if find(cautionsOf(s, point(24), nil), CapacitorLimitUnknown, "") != nil {
		t.Error("ceramic capacitor: caution about an unknown limit")
	}
	s.OutputCapacitors[0].Kind = parts.TantalumSolid
	if find(cautionsOf(s, point(24), nil), CapacitorLimitUnknown, "/stage/output_capacitors/0/rating/voltage_v") == nil {
		t.Error("tantalum capacitor without a voltage rating: no caution")
	}
	s.OutputCapacitors[0].Rating.Voltage = 16
	if find(cautionsOf(s, point(24), nil), CapacitorLimitUnknown, "") != nil {
		t.Error("tantalum capacitor with a voltage rating: caution about an unknown limit")
	}
}

func TestSeveralPointsKeepTheWorst(t *testing.T) {
	s := plainStage(stage.Synchronous)
	var seen Seen
	for i, in := range []float64{18, 70, 24} {
		seen.Add("/points/"+string(rune('0'+i)), s, point(in), nil)
	}
	c := find(Of(s, "/stage", nil, &seen), AboveES1Voltage, "")
	if c == nil || c.Pointer != "/points/1/input_v" || c.Value != 70 {
		t.Errorf("got %+v, want 70 V at /points/1/input_v", c)
	}
}

func TestConditionsAndRequirement(t *testing.T) {
	s := plainStage(stage.Synchronous)
	var byConditions, byRequirement Seen
	byConditions.AddConditions("/conditions", s, &stage.Conditions{Input: stage.Range{Min: 40, Typ: 50, Max: 66}, Control: stage.Control{Kind: stage.ByFeedback}})
	byRequirement.AddRequirement("/requirement", &stage.Requirement{Input: stage.Range{Min: 40, Typ: 50, Max: 66}, Output: 5})
	if c := find(Of(s, "/stage", nil, &byConditions), AboveES1Voltage, "/conditions/input_v/max"); c == nil {
		t.Error("conditions to 66 V: no caution")
	}
	if c := find(Of(nil, "", nil, &byRequirement), AboveES1Voltage, "/requirement/input/max_v"); c == nil {
		t.Error("requirement to 66 V: no caution")
	}
	if c := find(Of(s, "/stage", nil, &byConditions), InputReachesLoad, ""); math.Abs(c.Limit-5) > 1e-12 {
		t.Errorf("output by feedback %g V, want 5", c.Limit)
	}
}

func TestChargedOutputNamesTheBleed(t *testing.T) {
	s := plainStage(stage.Synchronous)
	p := point(100)
	p.Control.Voltage = 75
	c := find(cautionsOf(s, p, nil), ChargedCapacitor, "/stage/output_capacitors")
	if c == nil || !strings.Contains(c.Detail, "0.2231 s") { // 50 kohm, 20 uF, ln(75/60)
		t.Errorf("got %+v, want the divider's discharge time 0.2231 s", c)
	}
	c = find(cautionsOf(s, p, nil), ChargedCapacitor, "/stage/input_capacitors")
	if c == nil || !strings.Contains(c.Detail, "nothing") {
		t.Errorf("got %+v, want no discharge path", c)
	}
}

func TestSourceWithoutRealResistanceIsStiff(t *testing.T) {
	for _, source := range []float64{0, 1e-300, 1e-9} {
		var seen Seen
		s := plainStage(stage.Synchronous)
		seen.AddConditions("/conditions", s, &stage.Conditions{Input: stage.Range{Min: 18, Typ: 24, Max: 32}, SourceResistance: source})
		found := false
		for _, c := range Of(s, "/stage", nil, &seen) {
			if c.Code == FaultCurrent {
				found = true
				if parts.Known(c.Value) {
					t.Errorf("%g ohm: a current of %g A", source, c.Value)
				}
			}
		}
		if !found {
			t.Errorf("%g ohm: no caution", source)
		}
	}
}
