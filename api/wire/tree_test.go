package wire

import (
	"encoding/json"
	"testing"

	"github.com/stretchr/testify/require"
)

func read[R any](t *testing.T, text string) (*R, error) {
	t.Helper()
	var tree any
	require.NoError(t, json.Unmarshal([]byte(text), &tree))
	r := new(R)
	return r, FromTree(tree, r)
}

func TestFromTree(t *testing.T) {
	p, err := read[Point](t, `{"input_v": 24, "load": {"resistance_ohm": 2}, "ambient_degc": -5, "control": {"regulate_by": "feedback"}}`)
	require.NoError(t, err)
	require.Equal(t, 24.0, p.Input)
	require.Equal(t, 2.0, *p.Load.Resistance)
	require.Nil(t, p.Load.Current)
	require.Equal(t, "feedback", p.Control.RegulateBy)
	c, err := read[Capacitor](t, `{"capacitance_f": {"typ": 1e-6, "tol": 0.1}, "count": 4.0, "assumed": false, "ageing": [], "capacitance_at_bias": [{"bias_v": 0, "multiplier_ratio": 1}]}`)
	require.NoError(t, err)
	require.Equal(t, Integer(4), *c.Count)
	require.Equal(t, 0.1, *c.Capacitance.Spread.Tol)
	require.Equal(t, []AgeFactor{}, c.Ageing)
	require.Equal(t, []BiasFactor{{0, 1}}, c.CapacitanceAtBias)
	again, err := json.Marshal(c)
	require.NoError(t, err)
	require.JSONEq(t, `{"capacitance_f": {"typ": 1e-6, "tol": 0.1}, "count": 4, "assumed": false, "ageing": [], "capacitance_at_bias": [{"bias_v": 0, "multiplier_ratio": 1}]}`, string(again))
	for _, bad := range []string{
		`{"input_v": "24"}`, `{"input_v": null}`, `{"input": 24}`, `{"load": []}`, `{"load": 6}`, `[]`, `7`,
	} {
		_, err := read[Point](t, bad)
		require.Error(t, err, bad)
	}
	for _, bad := range []string{`{"count": 1.5}`, `{"count": 1e300}`, `{"count": "4"}`, `{"capacitance_f": []}`, `{"ageing": {}}`} {
		_, err := read[Capacitor](t, bad)
		require.Error(t, err, bad)
	}
}
