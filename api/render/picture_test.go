package render

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/recorder"

	"railproof/api/wire"
)

// awkward are pictures of data that does not lend itself to pictures.
func awkward() map[string]*Picture {
	loop := func(n int, gain, phase func(f float64) float64) *bode {
		b := &bode{title: "rail: loop gain", subtitle: "24 V in", crossover: math.NaN(), phaseCrossing: math.NaN()}
		for i := range n {
			f := math.Pow(10, 1+5*float64(i)/float64(max(n-1, 1)))
			b.frequency, b.gain, b.phase = append(b.frequency, f), append(b.gain, gain(f)), append(b.phase, phase(f))
		}
		return b
	}
	usual := loop(300, func(f float64) float64 { return 60 - 20*math.Log10(f/50) }, func(f float64) float64 { return -90 - 90*f/(f+3e5) - 60*math.Atan(f/4e5) })
	usual.averagedGain, usual.averagedPhase = usual.gain, usual.phase
	usual.crossover, usual.phaseMargin, usual.phaseCrossing, usual.gainMargin = 5e4, 68, 4.1e5, 18.3
	point := loop(1, func(float64) float64 { return 3 }, func(float64) float64 { return -100 })
	flat := loop(50, func(float64) float64 { return -20 }, func(float64) float64 { return -180 })
	steep := make([]float64, len(usual.frequency))
	for i, f := range usual.frequency {
		steep[i] = 1e-6 * math.Pow(f/10, 1.3)
	}
	r := &response{title: "rail: load step", time: []float64{0}, output: []float64{5}, inductor: [][]float64{{1}}, load: []float64{1}, duty: []float64{0.2}}
	long := &response{title: "rail: load step of 3 A", subtitle: "24 V in", said: "Falls by 110 mV"}
	for i := range 20000 {
		at := float64(i-2000) * 1e-8
		after := max(at, 0)
		dip := -0.11 * math.Exp(-after/2e-5) * math.Sin(after/1e-5)
		long.time, long.output = append(long.time, at), append(long.output, 5+dip+0.002*math.Sin(at*3e6))
		long.load = append(long.load, 3+3*math.Min(1, after/1e-6))
		long.duty, long.control = append(long.duty, 0.2-dip), append(long.control, 1-dip)
	}
	long.inductor = [][]float64{long.load, long.output}
	long.marks = []mark{{x: 1.5e-5, y: 4.93, label: "deviation −70.1 mV"}, {x: math.NaN(), y: 4.9, label: "least allowed 4.9 V", limit: true}}
	name := strings.Repeat("a very long name of a rail ", 8) + "<script>\x01&\"'"
	stage := &wire.Stage{Name: name}
	two, three, big := 2.0, 3.0, -1e-9
	corner := &wire.CornersAnswer{Outcome: "fail", Stage: stage, Quantities: []wire.QuantityCorners{
		{Quantity: "output_ripple_pp_v", Unit: "V", Verdict: "fail", Nominal: &two, Margin: &big, Limit: &wire.Limit{Max: &two}, OneAtATime: []wire.TornadoBar{
			{Named: wire.Named{Pointer: "/stage/" + strings.Repeat("long/", 30)}, AtMin: &three, AtMax: &big}, {Named: wire.Named{Pointer: "/stage/b"}, AtMin: &two},
		}},
		{Quantity: "inductor_valley_a", Unit: "A", Verdict: "no-limit", Greatest: &wire.WorstPoint{Value: &big}},
		{Quantity: "efficiency_ratio", Unit: "1", Verdict: "incomplete"},
	}}
	losses := &wire.LossesAnswer{Stage: stage, Items: []wire.LossesItem{{Point: &wire.Point{Input: 24}, Quantities: &wire.Quantities{}, Status: "over-temperature", Losses: []wire.LossItem{
		{Part: "high_side", Mechanism: "conduction", Power: 1e3, Count: 1, Low: 1e3, High: 1e3}, {Part: "board", Mechanism: "input_path", Power: 1e-6, Count: 6, Low: 0, High: 1e-3}, {Part: "inductor", Mechanism: "core", Power: -0.5, Count: 1, Low: -0.5, High: -0.5},
	}}}}
	tiny := 1e-3
	sweep := &wire.SizingAnswer{Requirement: &wire.Requirement{Name: name}, Sweep: []wire.SweepRow{{Frequency: 1e5, Status: "infeasible", Loss: &tiny}}}
	empty := &wire.LossesAnswer{Stage: stage, Grid: &wire.LossesGrid{Input: []float64{24}, Load: []float64{1}, Ambient: []float64{25}, Rows: wire.GridRows{
		Cell: []int{0}, Input: []float64{24}, Load: []float64{1}, Ambient: []float64{25}, Status: []string{"ok"}, Mode: []string{"continuous"}, Quantities: wire.Columns{OutputMean: []float64{-5}},
	}}}
	ripple := &wire.SteadyStateAnswer{Status: "ok", Stage: stage, Point: &wire.Point{Input: 24}, Waveforms: &wire.Waveforms{
		Time: []float64{0, 1e-6}, Inductor: [][]float64{{0, 0}}, SwitchNode: [][]float64{{5, 5}}, Output: []float64{5, 5}, Input: []float64{0, 0},
	}}
	return map[string]*Picture{
		"loop": usual.picture(), "loop-one-point": point.picture(), "loop-flat": flat.picture(),
		"impedance": impedances("rail: output impedance", "", "output impedance", usual.frequency, []impedanceCurve{{"open loop", steep, trace(0)}, {"closed loop", steep[:3], trace(1)}}, mark{x: 1e5, y: 0.1, label: "peak"}),
		"step":      long.picture(), "step-one-point": r.picture(),
		"corners-awkward": CornersPicture(corner), "tornado-awkward": Tornado(corner, "output_ripple_pp_v"), "losses-awkward": LossBreakdown(losses, 0),
		"sweep-awkward": SweepPicture(sweep), "map-one-cell": QuantityMap(empty, "output_mean_v"), "curve-one-point": QuantityCurves(empty, "output_mean_v"),
		"waveforms-flat": SteadyStatePicture(ripple),
	}
}

func TestTextIsInsideThePicture(t *testing.T) {
	for name, p := range awkward() {
		require.NotNil(t, p, name)
		for _, width := range []int{LeastWidth, 480, DefaultWidth, MostWidth} {
			t.Run(fmt.Sprint(name, "/", width), func(t *testing.T) {
				w, h := p.size(width)
				var record recorder.Canvas
				p.draw(draw.NewCanvas(&record, w, h))
				texts := 0
				for _, a := range record.Actions {
					s, ok := a.(*recorder.FillString)
					if !ok {
						continue
					}
					texts++
					ink := bodyInk
					if s.Font.Weight == titleInk.Font.Weight {
						ink = titleInk
					}
					face := fonts.Lookup(ink.Font, s.Size)
					end := s.Point.X + face.Width(s.String)
					require.True(t, s.Point.X >= 0 && end <= w && s.Point.Y >= 0 && s.Point.Y <= h, "%q from %.1f to %.1f of %.1f, at %.1f of %.1f", s.String, s.Point.X, end, w, s.Point.Y, h)
				}
				require.Positive(t, texts)
			})
		}
	}
}

func TestPicturesAreWellFormedAndAlwaysTheSame(t *testing.T) {
	for name, p := range awkward() {
		t.Run(name, func(t *testing.T) {
			svg := p.SVG(0)
			d := xml.NewDecoder(bytes.NewReader(svg))
			var inside []string
			for {
				token, err := d.Token()
				if errors.Is(err, io.EOF) {
					break
				}
				require.NoError(t, err)
				if e, ok := token.(xml.StartElement); ok {
					inside = append(inside, e.Name.Local)
					require.NotContains(t, []string{"script", "image", "foreignObject", "a"}, e.Name.Local)
				}
			}
			require.Equal(t, []string{"svg", "title", "desc"}, inside[:3])
			require.NotRegexp(t, ` (d|x|y|width|textLength)="[^"]*([0-9]{6}|NaN|Inf)`, string(svg), "no number that was none")
			require.Equal(t, string(svg), string(awkward()[name].SVG(0)))
			raster := p.PNG(0)
			require.Equal(t, raster, p.PNG(0))
			m, err := png.Decode(bytes.NewReader(raster))
			require.NoError(t, err)
			require.Equal(t, 2*DefaultWidth, m.Bounds().Dx())
			if dir := os.Getenv("RAILPROOF_PICTURES"); dir != "" {
				require.NoError(t, os.WriteFile(filepath.Join(dir, name+".png"), raster, 0o600))
				require.NoError(t, os.WriteFile(filepath.Join(dir, name+"-narrow.png"), p.PNG(LeastWidth), 0o600))
			}
		})
	}
}

func TestDecimationKeepsTheExtremesOfEveryColumn(t *testing.T) {
	n := 100000
	xs, ys := make([]float64, n), make([]float64, n)
	for i := range xs {
		xs[i], ys[i] = float64(i), math.Sin(float64(i)/7)
	}
	ys[54321], ys[67890] = 40, -30
	same := func(scale float64) func(float64) vg.Length {
		return func(v float64) vg.Length { return vg.Length(v * scale) }
	}
	lines := decimate(xs, ys, same(600/float64(n)), same(1), 1)
	require.Len(t, lines, 1)
	require.LessOrEqual(t, len(lines[0]), 4*601)
	least, most := vg.Length(0), vg.Length(0)
	for _, p := range lines[0] {
		least, most = min(least, p.Y), max(most, p.Y)
	}
	require.Equal(t, vg.Length(40), most)
	require.Equal(t, vg.Length(-30), least)
}

func TestStraightenedLinesStayWhereTheyWere(t *testing.T) {
	for name, curve := range map[string]func(i int) vg.Point{
		"sine":     func(i int) vg.Point { return vg.Point{X: vg.Length(i) / 4, Y: 40 * vg.Length(math.Sin(float64(i)/30))} },
		"triangle": func(i int) vg.Point { return vg.Point{X: vg.Length(i) / 4, Y: vg.Length(math.Abs(float64(i%50 - 25)))} },
		"spikes":   func(i int) vg.Point { return vg.Point{X: vg.Length(i / 3), Y: vg.Length(i%3) * 7} },
		"still":    func(int) vg.Point { return vg.Point{X: 3, Y: 3} },
		"steps":    func(i int) vg.Point { return vg.Point{X: vg.Length((i + 1) / 2), Y: vg.Length(i / 2 % 2)} },
	} {
		var line []vg.Point
		for i := range 1000 {
			line = append(line, curve(i))
		}
		given := slices.Clone(line)
		kept := straightened(line)
		require.Equal(t, given, line, name)
		require.Equal(t, []vg.Point{given[0], given[999]}, []vg.Point{kept[0], kept[len(kept)-1]}, name)
		at := 0
		for _, p := range given { // every point is near the pieces about it, which follow in order
			for distance(p, kept[at], kept[at+1]) > 1.01*straight {
				at++
				require.Less(t, at+1, len(kept), "%s: %v left out", name, p)
			}
		}
		require.Less(t, len(kept), map[string]int{"sine": 200, "triangle": 90, "spikes": 1001, "still": 3, "steps": 1001}[name], name)
	}
}

// distance of a point from a piece of a line.
func distance(p, a, b vg.Point) vg.Length {
	d, q := b.Sub(a), p.Sub(a)
	along := vg.Length(0)
	if square := d.X*d.X + d.Y*d.Y; square > 0 {
		along = min(1, max(0, (d.X*q.X+d.Y*q.Y)/square))
	}
	return vg.Length(math.Hypot(float64(q.X-along*d.X), float64(q.Y-along*d.Y)))
}

// The library measures each text from the face; ours remembers.
func TestLettersAreAsWideAsTheLibraryMeasures(t *testing.T) {
	for _, ink := range []text.Style{bodyInk, titleInk} {
		face := fonts.Lookup(ink.Font, ink.Font.Size)
		for _, s := range []string{"", "A", "AVAST, Ty. 1.5 V", "Ω µF → λ−", "ж漢\u2028é", "nominal −0.0901 %"} {
			require.InDelta(t, float64(face.Width(s)), float64(ink.Width(s)), 1e-9, s)
		}
	}
}

func TestTicksAreRoundAndInside(t *testing.T) {
	for _, s := range []scale{
		{unit: "V", least: 0, greatest: 1},
		{unit: "A", least: -3e-6, greatest: 7e-6},
		{unit: "Hz", least: 10, greatest: 1e7, log: true},
		{unit: "Ohm", least: 0.0031, greatest: 0.0042, log: true},
		{unit: "Cel", least: 99.9999, greatest: 100.0001},
		{unit: "F", least: 3, greatest: 24, log: true},
	} {
		seen := map[string]bool{}
		for _, k := range s.ticks(6) {
			require.True(t, k.at >= s.least*(1-1e-6)-1e-12 && k.at <= s.greatest*(1+1e-6), "%v outside %v", k, s)
			if k.label != "" {
				require.False(t, seen[k.label], "%q twice", k.label)
				seen[k.label] = true
			}
		}
		require.GreaterOrEqual(t, len(seen), 2, "%+v", s)
	}
}

func BenchmarkPicture(b *testing.B) {
	for name, p := range awkward() {
		if strings.Contains(name, "-") {
			continue
		}
		b.Run("svg/"+name, func(b *testing.B) {
			for b.Loop() {
				p.SVG(0)
			}
		})
		b.Run("png/"+name, func(b *testing.B) {
			for b.Loop() {
				p.PNG(0)
			}
		})
	}
}
