package render_test

import (
	"io/fs"
	"os"
	"path/filepath"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
	"railproof/api/render"
	"railproof/api/wire"
	"railproof/openapi"
	"railproof/service"
)

// answer computes an example with the changes made to its text.
func answer[A any](t testing.TB, operation string, body []byte) A {
	t.Helper()
	contract := openapi.Load()
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	a, problem := x.Do(t.Context(), operation, body)
	require.Nil(t, problem)
	return a.Value.(A)
}

func example(t testing.TB, name string) []byte {
	t.Helper()
	body, err := fs.ReadFile(openapi.Examples(), name)
	require.NoError(t, err)
	return body
}

// show writes a picture where RAILPROOF_PICTURES says, to be looked at.
func show(t testing.TB, name string, p *render.Picture) {
	t.Helper()
	require.NotNil(t, p, name)
	dir := os.Getenv("RAILPROOF_PICTURES")
	if dir == "" {
		return
	}
	require.NoError(t, os.WriteFile(filepath.Join(dir, name+".png"), p.PNG(0), 0o600))
	require.NoError(t, os.WriteFile(filepath.Join(dir, name+"-narrow.png"), p.PNG(400), 0o600))
	require.NoError(t, os.WriteFile(filepath.Join(dir, name+".svg"), p.SVG(0), 0o600))
}

// The promise: any picture within 20 ms.
func BenchmarkGallery(b *testing.B) {
	steady := answer[*wire.SteadyStateAnswer](b, "steadyState", changed(b, "buoy-5v0/steady-state.json", map[string]string{"waveform_points": "600"}))
	losses := answer[*wire.LossesAnswer](b, "losses", example(b, "buoy-5v0/losses.json"))
	grid := answer[*wire.LossesAnswer](b, "losses", changed(b, "buoy-5v0/losses.json", map[string]string{"grid": someGrid}, "point", "points", "quantities"))
	corners := answer[*wire.CornersAnswer](b, "corners", example(b, "buoy-5v0/corners.json"))
	loop := answer[*wire.LoopGainAnswer](b, "loopGain", example(b, "buoy-5v0/loop-gain.json"))
	step := answer[*wire.TransientsAnswer](b, "transients", changed(b, "buoy-5v0/transients.json", map[string]string{"waveform_points": "3000"}))
	sizing := answer[*wire.SizingAnswer](b, "sizing", example(b, "buoy-5v0/sizing.json"))
	for _, c := range []struct {
		name    string
		picture *render.Picture
	}{
		{"waveforms", render.SteadyStatePicture(steady)},
		{"breakdown", render.LossBreakdown(losses, 0)},
		{"curves", render.QuantityCurves(grid, "efficiency_ratio")},
		{"map", render.QuantityMap(grid, "efficiency_ratio")},
		{"strips", render.CornersPicture(corners)},
		{"tornado", render.Tornado(corners, "efficiency_ratio")},
		{"histogram", render.HistogramPicture(corners, "output_ripple_pp_v")},
		{"bode", render.BodePicture(loop, 0)},
		{"output-impedance", render.OutputImpedancePicture(loop, 0)},
		{"response", render.TransientPicture(step)},
		{"windows", render.WindowsPicture(sizing)},
	} {
		require.NotNil(b, c.picture, c.name)
		b.Run("svg/"+c.name, func(b *testing.B) {
			for b.Loop() {
				c.picture.SVG(0)
			}
		})
		b.Run("png/"+c.name, func(b *testing.B) {
			for b.Loop() {
				c.picture.PNG(0)
			}
		})
	}
}
