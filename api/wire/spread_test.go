package wire

import (
	"errors"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// Each case replaces one value of the example stage and names the pointer of the
// one fault that follows.
func TestSpreadFaultsPointAtTheField(t *testing.T) {
	cases := []struct{ name, was, is, pointer, keyword string }{
		{"tol-with-min", `{"typ": 6.8e-6, "tol": 0.2}`, `{"typ": 6.8e-6, "tol": 0.2, "min": 6e-6}`, "/stage/inductor/inductance_h/tol", "spread"},
		{"tol-of-zero", `{"typ": 7e-3, "tol": 0.1}`, `{"typ": 0, "tol": 0.1}`, "/stage/inductor/dc_resistance_ohm/tol", "spread"},
		{"min-above-typ", `{"typ": 6.8e-6, "tol": 0.2}`, `{"typ": 6.8e-6, "min": 7e-6}`, "/stage/inductor/inductance_h/min", "spread"},
		{"max-below-typ", `{"typ": 6.8e-6, "tol": 0.2}`, `{"typ": 6.8e-6, "max": 6e-6}`, "/stage/inductor/inductance_h/max", "spread"},
		{"no-typ", `{"typ": 6.8e-6, "tol": 0.2}`, `{"min": 6e-6}`, "/stage/inductor/inductance_h", "spread"},
		{"match-without-group", `{"typ": 6.8e-6, "tol": 0.2}`, `{"typ": 6.8e-6, "tol": 0.2, "match_tol": 0.01}`, "/stage/inductor/inductance_h/match_tol", "spread"},
		{"group-of-no-width", `{"typ": 6.8e-6, "tol": 0.2}`, `{"typ": 6.8e-6, "group": "lot"}`, "/stage/inductor/inductance_h/group", "group"},
		{"group-of-two-laws", `{"typ": 6.8e-6, "tol": 0.2}`, `{"typ": 6.8e-6, "tol": 0.2, "group": "lot"}`, "/stage/inductor/inductance_h/distribution", "group"},
		{"end-beyond-physics", `"dead_time_s": 2e-8`, `"dead_time_s": {"typ": 2e-8, "min": -1e-9}`, "/stage/controller/dead_time_s/min", "physics"},
		{"tol-beyond-physics", `"drive_v": 5`, `"drive_v": 5, "max_duty_ratio": {"typ": 0.9, "tol": 0.2}`, "/stage/controller/max_duty_ratio/tol", "physics"},
		{"value-beyond-physics", `{"typ": 6.8e-6, "tol": 0.2}`, `22`, "/stage/inductor/inductance_h", "physics"},
		{"missing", `"upper_ohm": 56.2e3, `, ``, "/stage/feedback/upper_ohm", "required"},
		{"table-falls", `{"junction_degc": 125, "multiplier_ratio": 1.45}`, `{"junction_degc": 20, "multiplier_ratio": 1.45}`, "/stage/high_side/on_resistance_temp/1/junction_degc", "table"},
	}
	text := readExample(t)
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			require.Contains(t, text, c.was)
			_, err := parseStage(t, []byte(strings.Replace(text, c.was, c.is, 1))).Decode("/stage")
			invalid, ok := errors.AsType[*InvalidError](err)
			require.True(t, ok, "%v", err)
			require.Len(t, invalid.Faults, 1, "%+v", invalid.Faults)
			require.Equal(t, c.pointer, invalid.Faults[0].Pointer)
			require.Equal(t, c.keyword, invalid.Faults[0].Keyword)
			require.NotEmpty(t, invalid.Faults[0].Detail)
		})
	}
}

func TestUnusedNumbersAreNamed(t *testing.T) {
	text := strings.Replace(readExample(t), `"feedback":`, `"diode": {"threshold_v": 0.4}, "feedback":`, 1)
	d, err := parseStage(t, []byte(text)).Decode("/stage")
	require.NoError(t, err)
	require.Equal(t, []string{"/stage/diode/threshold_v"}, d.Unused)
}

func TestUnitOf(t *testing.T) {
	for pointer, unit := range map[string]string{
		"/stage/inductor/inductance_h": "H", "/stage/inductor/inductance_h/max": "H", "/stage/inductor/inductance_h/tol": "1",
		"/stage/diode/threshold_temp_v_per_k": "V/K", "/stage/high_side/thermal/junction_to_ambient_k_per_w": "K/W",
		"/stage/compensator/transconductance_s": "S", "/stage/modulator/delay_s": "s", "/stage/name": "", "": "",
		"/requirement/input/min_v": "V", "/point/ambient_degc": "Cel",
	} {
		require.Equal(t, unit, UnitOf(pointer), pointer)
	}
}

func readExample(t *testing.T) string {
	t.Helper()
	text, err := testdata.ReadFile("testdata/stage.json")
	require.NoError(t, err)
	return string(text)
}
