package render_test

import (
	"encoding/json"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/render"
	"railproof/api/wire"
)

var rails = []string{"buoy-5v0", "buoy-3v3", "mast-12v0"}

// changed puts members into an example and takes others out.
func changed(t testing.TB, name string, put map[string]string, drop ...string) []byte {
	t.Helper()
	var tree map[string]json.RawMessage
	require.NoError(t, json.Unmarshal(example(t, name), &tree))
	for _, d := range drop {
		delete(tree, d)
	}
	for k, v := range put {
		tree[k] = json.RawMessage(v)
	}
	body, err := json.Marshal(tree)
	require.NoError(t, err)
	return body
}

const someGrid = `{"input_v":[18,24,32],"load_current_a":[0.01,0.03,0.1,0.3,1,2,3,4,5,6],"ambient_degc":[25,60],"control":{"regulate_by":"feedback"}}`

func TestPicturesOfLosses(t *testing.T) {
	for _, rail := range rails {
		a := answer[*wire.LossesAnswer](t, "losses", changed(t, rail+"/losses.json", map[string]string{"grid": someGrid}, "point", "points", "quantities"))
		show(t, rail+"-efficiency", render.EfficiencyCurves(a))
		show(t, rail+"-map", render.QuantityMap(a, "high_side_junction_degc"))
		b := answer[*wire.LossesAnswer](t, "losses", changed(t, rail+"/losses.json", map[string]string{"point": `{"input_v":24,"load":{"current_a":2},"ambient_degc":45,"control":{"regulate_by":"feedback"}}`}, "grid", "points", "quantities"))
		show(t, rail+"-breakdown", render.LossBreakdown(b, 0))
	}
}

func TestPicturesOfTheSteadyState(t *testing.T) {
	for _, rail := range rails {
		a := answer[*wire.SteadyStateAnswer](t, "steadyState", changed(t, rail+"/steady-state.json", map[string]string{"waveform_points": "400"}))
		show(t, rail+"-waveforms", render.SteadyStatePicture(a))
	}
}

func TestPictureOfASweep(t *testing.T) {
	var tree map[string]any
	require.NoError(t, json.Unmarshal(example(t, "buoy-5v0/sizing.json"), &tree))
	tree["requirement"].(map[string]any)["switching_frequency_hz"] = map[string]any{"min": 1.5e5, "max": 2.5e6}
	body, err := json.Marshal(tree)
	require.NoError(t, err)
	a := answer[*wire.SizingAnswer](t, "sizing", body)
	show(t, "sweep", render.SweepPicture(a))
}

func TestPicturesOfCorners(t *testing.T) {
	drawn, base, of := "2000", "256", rails
	if testing.Short() {
		drawn, base, of = "200", "64", rails[:1]
	}
	for _, rail := range of {
		a := answer[*wire.CornersAnswer](t, "corners", changed(t, rail+"/corners.json", map[string]string{"methods": `["extreme-value","root-sum-square","monte-carlo","attribution"]`, "attribution_samples": base, "samples": drawn}))
		show(t, rail+"-corners", render.CornersPicture(a))
		show(t, rail+"-tornado", render.Tornado(a, ""))
		show(t, rail+"-histogram", render.HistogramPicture(a, "output_ripple_pp_v"))
	}
}
