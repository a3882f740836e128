package wire

import (
	"encoding/json"
	"errors"
	"reflect"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

func parseStage(t *testing.T, text []byte) *Stage {
	t.Helper()
	var tree any
	require.NoError(t, json.Unmarshal(text, &tree))
	var w Stage
	require.NoError(t, FromTree(tree, &w))
	return &w
}

func exampleStage(t *testing.T) *Stage {
	t.Helper()
	text, err := testdata.ReadFile("testdata/stage.json")
	require.NoError(t, err)
	return parseStage(t, text)
}

func TestStageIsWrittenAsItWasRead(t *testing.T) {
	text, err := testdata.ReadFile("testdata/stage.json")
	require.NoError(t, err)
	again, err := json.Marshal(parseStage(t, text))
	require.NoError(t, err)
	require.JSONEq(t, string(text), string(again))
}

func TestDecodePutsNumbersWhereTheirNamesSay(t *testing.T) {
	d, err := exampleStage(t).Decode("/stage")
	require.NoError(t, err)
	s := d.Stage
	require.Equal(t, stage.Synchronous, s.Rectifier)
	require.Equal(t, 500e3, s.SwitchingFrequency)
	require.Equal(t, 9e-3, s.HighSide.OnResistance)
	require.Equal(t, []float64{25, 125}, s.HighSide.OnResistanceTemp.X)
	require.Equal(t, []float64{1, 1.45}, s.HighSide.OnResistanceTemp.Y)
	require.Equal(t, 6e-3, s.LowSide.OnResistance, "no typ: the midpoint")
	require.True(t, s.LowSide.Assumed)
	require.Equal(t, 9.0, s.Inductor.Core.Turns)
	require.Equal(t, 4, s.OutputCapacitors[0].Count)
	require.Equal(t, parts.CeramicClass2, s.OutputCapacitors[0].Kind)
	require.Equal(t, parts.DriveFromExternal, s.Controller.DriveSupply)
	require.Equal(t, 1e-3, s.Board.InputPath)
	require.False(t, parts.Known(s.LowSide.Rating.DrainSource), "an absent rating is unknown")
}

func TestDecodeCollectsEverySpread(t *testing.T) {
	d, err := exampleStage(t).Decode("/stage")
	require.NoError(t, err)
	byField := map[string]spread.Variable{}
	for _, v := range d.Variables {
		require.Equal(t, "/stage/"+v.Field, v.Pointer)
		byField[v.Field] = v
	}
	require.Len(t, byField, 7)
	require.Equal(t, spread.Variable{Pointer: "/stage/high_side/on_resistance_ohm", Field: "high_side/on_resistance_ohm", Min: 9e-3, Typ: 9e-3, Max: 12e-3}, byField["high_side/on_resistance_ohm"])
	low := byField["low_side/on_resistance_ohm"]
	require.Equal(t, spread.Normal, low.Distribution)
	require.Equal(t, "lot", low.Group)
	require.Equal(t, 0.01, low.MatchTol)
	l := byField["inductor/inductance_h"]
	require.InEpsilon(t, 6.8e-6*0.8, l.Min, 1e-15)
	require.InEpsilon(t, 6.8e-6*1.2, l.Max, 1e-15)
}

func TestDecodeTellsEveryDefaultItUsed(t *testing.T) {
	d, err := exampleStage(t).Decode("/stage")
	require.NoError(t, err)
	assumed := map[string]float64{}
	for _, a := range d.Assumed {
		assumed[a.Field] = a.Value
	}
	require.Contains(t, assumed, "low_side/gate_charge_c")
	require.Contains(t, assumed, "controller/quiescent_current_a")
	require.NotContains(t, assumed, "high_side/gate_charge_c")
}

// Every registered number of every topology has a place in the wire structs, of
// the kind the registry says.
func TestWireStructsCoverTheRegistry(t *testing.T) {
	places := map[string]slot{}
	full := &Stage{OutputCapacitors: []*Capacitor{{}}, InputCapacitors: []*Capacitor{{}}, Phases: []*PhaseOverride{{}}}
	walk(reflect.ValueOf(full).Elem(), "", true, func(id string, s slot) { places[id] = s })
	used := map[string]bool{}
	for _, r := range []stage.Rectifier{stage.Synchronous, stage.DiodeRectified} {
		for mode := parts.VoltageMode; mode <= parts.PeakCurrentMode; mode++ {
			for kind := parts.OpAmpType1; kind <= parts.TransconductanceType3; kind++ {
				s := stage.NewStage(r, 1, 1, 1, true, true, true, true)
				s.Modulator.Mode, s.Compensator.Type = mode, kind
				for _, f := range s.Fields() {
					p, found := places[f.ID]
					require.True(t, found, "no place for %s", f.ID)
					require.Equal(t, f.Spread, p.number != nil, "%s takes a spread", f.ID)
					used[f.ID] = true
				}
			}
		}
	}
	for id := range places {
		require.True(t, used[id], "%s names no registered number", id)
	}
}

func TestEncodeAndDecodeAgree(t *testing.T) {
	d, err := exampleStage(t).Decode("/stage")
	require.NoError(t, err)
	text, err := json.Marshal(EncodeStage(d.Stage, d.Variables))
	require.NoError(t, err)
	again, err := parseStage(t, text).Decode("/stage")
	require.NoError(t, err)
	require.Equal(t, d.Variables, again.Variables)
	require.Empty(t, again.Assumed, "every default was written out")
	was, is := d.Stage.Fields(), again.Stage.Fields()
	require.Len(t, is, len(was))
	for i := range was {
		require.Equal(t, was[i].ID, is[i].ID)
		if parts.Known(*was[i].Value) || parts.Known(*is[i].Value) {
			require.Equal(t, *was[i].Value, *is[i].Value, was[i].ID)
		}
	}
	require.Equal(t, d.Stage.HighSide.OnResistanceTemp, again.Stage.HighSide.OnResistanceTemp)
	require.Equal(t, d.Stage.OutputCapacitors[0].CapacitanceAtBias, again.Stage.OutputCapacitors[0].CapacitanceAtBias)
}

// The numbers that only some modulators and compensators have are unknown until
// they are given, whatever the order in which the topology becomes known.
func TestLoopValuesAreUnknownUntilGiven(t *testing.T) {
	text := strings.Replace(readExample(t), `"feedback":`, `"modulator": {"mode": "peak-current", "sense_ohm": 0.05},
		"compensator": {"type": "transconductance-2", "transconductance_s": 1e-3, "feedback_f": 1e-8, "feedback_ohm": 1e4}, "feedback":`, 1)
	d, err := parseStage(t, []byte(text)).Decode("/stage")
	require.NoError(t, err)
	var assumed []string
	for _, a := range d.Assumed {
		assumed = append(assumed, a.Field)
	}
	require.Subset(t, assumed, []string{"modulator/slope_v_per_s", "compensator/output_ohm", "compensator/shunt_f"})
	_, err = parseStage(t, []byte(strings.Replace(text, `, "sense_ohm": 0.05`, ``, 1))).Decode("/stage")
	invalid, ok := errors.AsType[*InvalidError](err)
	require.True(t, ok)
	require.Equal(t, "required", invalid.Faults[0].Keyword)
	require.Equal(t, "/stage/modulator/sense_ohm", invalid.Faults[0].Pointer)
}
