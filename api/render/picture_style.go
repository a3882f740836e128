package render

import (
	"image/color"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	xfont "golang.org/x/image/font"
)

// Surfaces.
var (
	paper     = color.RGBA{251, 251, 249, 255}
	inkColor  = color.RGBA{28, 36, 48, 255}
	mutedTone = color.RGBA{84, 94, 108, 255}
	gridTone  = color.RGBA{222, 225, 228, 255}
	axisTone  = color.RGBA{140, 148, 158, 255}
	limitTone = color.RGBA{136, 34, 85, 255}
	faintTone = color.RGBA{236, 238, 239, 255}
)

// seriesTones can be told apart with any common colour blindness.
//
// Source: M. Okabe, K. Ito, Color universal design, 2008.
var seriesTones = []color.RGBA{
	{0, 114, 178, 255}, {213, 94, 0, 255}, {0, 158, 115, 255}, {204, 121, 167, 255}, {230, 159, 0, 255}, {86, 180, 233, 255}, {28, 36, 48, 255},
}

// seriesDashes tell series apart without colour.
var seriesDashes = [][]vg.Length{nil, {px(7), px(3)}, {px(2), px(2)}, {px(9), px(3), px(2), px(3)}, {px(12), px(4)}, {px(4), px(2)}}

// trace is the line of the i-th series.
func trace(i int) draw.LineStyle {
	return draw.LineStyle{Color: seriesTones[i%len(seriesTones)], Width: px(1.8), Dashes: seriesDashes[i%len(seriesDashes)]}
}

func stroke(c color.Color, width float64) draw.LineStyle {
	return draw.LineStyle{Color: c, Width: px(width)}
}

func dashed(c color.Color, width float64) draw.LineStyle {
	return draw.LineStyle{Color: c, Width: px(width), Dashes: []vg.Length{px(4), px(3)}}
}

// fonts holds the two faces that pictures use.
var fonts = func() *font.Cache {
	var two font.Collection
	for _, f := range liberation.Collection() {
		if f.Font.Variant == "Sans" && f.Font.Style == xfont.StyleNormal {
			two = append(two, f)
		}
	}
	return font.NewCache(two)
}()

// ink returns a text style; size in pixels.
func ink(size float64, weight xfont.Weight, tone color.Color) text.Style {
	return text.Style{
		Color: tone, Handler: lettering{text.Plain{Fonts: fonts}},
		Font: font.Font{Typeface: plot.DefaultFont.Typeface, Variant: "Sans", Weight: weight, Size: px(size)},
	}
}

var (
	titleInk = ink(17, xfont.WeightBold, inkColor)
	headInk  = ink(13, xfont.WeightBold, inkColor)
	bodyInk  = ink(12.5, xfont.WeightNormal, inkColor)
	mutedInk = ink(12.5, xfont.WeightNormal, mutedTone)
	smallInk = ink(11.5, xfont.WeightNormal, mutedTone)
	limitInk = ink(11.5, xfont.WeightBold, limitTone)
)
