package exchange

import (
	"maps"
	"strings"

	"railproof/api/render"
	"railproof/api/wire"
)

// View says which picture of an answer is wanted, and how large.
type View struct {
	Picture  string // of those the operation has; empty: the first
	Quantity string // key of the quantity that it shows; empty: the picture's own choice
	Item     int    // of a list of points
	Width    int    // [px] 0: the default
}

// Forms of pictures.
const (
	svgForm = "image/svg+xml"
	pngForm = "image/png"
)

// Drawn reports whether a form is a picture.
func Drawn(form string) bool { return form == svgForm || form == pngForm }

// picture draws an answer; nil where it has nothing to show.
type picture struct {
	name string
	draw func(value any, v View) *render.Picture
}

// pictures lists what can be drawn of each operation, the usual one first. Which
// one that is may depend on the answer.
var pictures = map[string][]picture{
	"corners": {
		{"strips", func(a any, _ View) *render.Picture { return render.CornersPicture(a.(*wire.CornersAnswer)) }},
		{"tornado", func(a any, v View) *render.Picture { return render.Tornado(a.(*wire.CornersAnswer), v.Quantity) }},
		{"histogram", func(a any, v View) *render.Picture {
			return render.HistogramPicture(a.(*wire.CornersAnswer), v.Quantity)
		}},
	},
	"loopGain": {
		{"bode", func(a any, v View) *render.Picture { return render.BodePicture(a.(*wire.LoopGainAnswer), v.Item) }},
		{"output-impedance", func(a any, v View) *render.Picture {
			return render.OutputImpedancePicture(a.(*wire.LoopGainAnswer), v.Item)
		}},
		{"source-impedance", func(a any, v View) *render.Picture {
			return render.SourceImpedancePicture(a.(*wire.LoopGainAnswer), v.Item)
		}},
	},
	"losses": {
		{"breakdown", func(a any, v View) *render.Picture { return render.LossBreakdown(a.(*wire.LossesAnswer), v.Item) }},
		{"curves", func(a any, v View) *render.Picture {
			return render.QuantityCurves(a.(*wire.LossesAnswer), v.quantity("efficiency_ratio"))
		}},
		{"map", func(a any, v View) *render.Picture {
			return render.QuantityMap(a.(*wire.LossesAnswer), v.quantity("efficiency_ratio"))
		}},
	},
	"sizing": {
		{"sweep", func(a any, _ View) *render.Picture { return render.SweepPicture(a.(*wire.SizingAnswer)) }},
		{"windows", func(a any, _ View) *render.Picture { return render.WindowsPicture(a.(*wire.SizingAnswer)) }},
	},
	"transients":  {{"response", func(a any, _ View) *render.Picture { return render.TransientPicture(a.(*wire.TransientsAnswer)) }}},
	"steadyState": {{"waveforms", func(a any, _ View) *render.Picture { return render.SteadyStatePicture(a.(*wire.SteadyStateAnswer)) }}},
}

func (v View) quantity(otherwise string) string {
	if v.Quantity == "" {
		return otherwise
	}
	return v.Quantity
}

// drawnPoints are the instants of waveforms that only a picture asks for: enough
// for the least and the greatest of every curve in each of its columns.
var drawnPoints = map[string]float64{"steadyState": 600, "transients": 3000}

// Draw asks for a picture of the answer. It is more, or less, than the result that
// the request names, so the answer is not to be kept.
func (r *Request) Draw(v View) {
	r.view = v
	if tree, is := r.tree.(map[string]any); is && drawnPoints[r.Operation] > 0 && tree["waveform_points"] == nil {
		tree = maps.Clone(tree)
		tree["waveform_points"] = drawnPoints[r.Operation]
		r.tree = tree
	}
}

// Drawable reports whether there are pictures of an operation's answers.
func Drawable(operation string) bool { return pictures[operation] != nil }

// PictureNames lists the pictures of an operation for reading.
func PictureNames(operation string) string {
	var names []string
	for _, p := range pictures[operation] {
		names = append(names, p.name)
	}
	return strings.Join(names, ", ")
}

// Draw draws the answer in the form of a picture.
func (a *Answer) Draw(form string, v View) ([]byte, *Problem) {
	for _, p := range pictures[a.Operation] {
		if v.Picture != "" && v.Picture != p.name {
			continue
		}
		if drawn := p.draw(a.Value, v); drawn != nil {
			if form == pngForm {
				return drawn.PNG(v.Width), nil
			}
			return drawn.SVG(v.Width), nil
		}
	}
	const detail = "the answer has nothing that such a picture shows"
	return nil, NewProblem(UnknownParameter, detail, wire.Fault{Keyword: "picture", Detail: detail, Limit: PictureNames(a.Operation), Received: v.Picture})
}
