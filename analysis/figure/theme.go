package figure

import (
	"image/color"

	xfont "golang.org/x/image/font"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/palette"
	"gonum.org/v1/plot/palette/moreland"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// The size of a page across both columns of a journal, and the resolution at
// which that is 1600 pixels.
const (
	pageWidth = 6.4 * vg.Inch
	dpi       = 250
	pixel     = vg.Inch / dpi
)

// pt is a typographic point, gonum's unit of length.
const pt vg.Length = 1

// Distances around a panel.
const (
	marginLeft   = 50 * pt
	marginRight  = 12 * pt
	marginBottom = 33 * pt
	tickLength   = 4 * pt
	barGap       = 9 * pt
	barWidth     = 11 * pt
	barMargin    = 52 * pt // right of the bar, for its labels
)

const (
	labelSize = 10 * pt
	tickSize  = 8.5 * pt
	noteSize  = 8.5 * pt
)

var (
	upright = font.Font{Typeface: "Liberation", Variant: "Sans"}
	italic  = font.Font{Typeface: "Liberation", Variant: "Sans", Style: xfont.StyleItalic}
)

var (
	ink        = color.NRGBA{A: 255}
	quiet      = color.NRGBA{90, 90, 90, 255}
	errorTint  = color.NRGBA{175, 175, 175, 255}
	fitInk     = color.NRGBA{0, 114, 178, 255}   // blue
	fitTint    = color.NRGBA{184, 215, 236, 255} // its 68 % band
	theoryInk  = color.NRGBA{213, 94, 0, 255}    // vermilion
	barsTint   = color.NRGBA{200, 205, 212, 255}
	windowTint = []color.Color{color.NRGBA{231, 239, 248, 255}, color.NRGBA{253, 240, 222, 255}}
	blank      = color.NRGBA{150, 150, 150, 255} // cells that are not finite
)

// theory draws predictions; the dashes tell several of them apart.
var theory = []draw.LineStyle{
	{Color: theoryInk, Width: 1.3 * pt, Dashes: []vg.Length{6 * pt, 3 * pt}},
	{Color: color.NRGBA{0, 130, 95, 255}, Width: 1.3 * pt, Dashes: []vg.Length{1.5 * pt, 2 * pt}},
	{Color: color.NRGBA{150, 80, 130, 255}, Width: 1.3 * pt, Dashes: []vg.Length{8 * pt, 2 * pt, 1.5 * pt, 2 * pt}},
}

var (
	frameLine   = draw.LineStyle{Color: ink, Width: 0.6 * pt}
	tickLine    = draw.LineStyle{Color: ink, Width: 0.5 * pt}
	dataLine    = draw.LineStyle{Color: ink, Width: 0.9 * pt}
	fitLine     = draw.LineStyle{Color: fitInk, Width: 1.4 * pt}
	horizonLine = draw.LineStyle{Color: quiet, Width: 0.7 * pt}
	levelLine   = draw.LineStyle{Color: quiet, Width: 0.5 * pt, Dashes: []vg.Length{1 * pt, 2 * pt}}
	errorLine   = draw.LineStyle{Color: ink, Width: 0.6 * pt}
)

// On a map of any shade a line shows by its two parts: black on a light casing,
// solid or dashed, or light in a dark one.
var (
	casing   = draw.LineStyle{Color: color.NRGBA{255, 255, 255, 255}, Width: 2.4 * pt}
	solid    = []draw.LineStyle{casing, {Color: ink, Width: 1.1 * pt}}
	dashed   = []draw.LineStyle{casing, {Color: ink, Width: 1.1 * pt, Dashes: []vg.Length{5 * pt, 3 * pt}}}
	light    = []draw.LineStyle{{Color: ink, Width: 2.6 * pt}, {Color: color.NRGBA{255, 255, 255, 255}, Width: 1.3 * pt}}
	hairline = []draw.LineStyle{{Color: color.NRGBA{60, 60, 60, 255}, Width: 0.5 * pt}}
)

const dotRadius = 1.8 * pt

// shades is the number of colours of a map; more are not told apart.
const shades = 255

// diverging runs from dark blue (negative) through near-white (zero) to orange
// (positive), each half even in lightness. The ends differ in lightness, so that
// in grey a negative band is darker than anything positive.
func diverging() []color.Color {
	zero := color.NRGBA{247, 247, 247, 255}
	negative := colors(luminance(color.NRGBA{12, 30, 88, 255}, color.NRGBA{62, 130, 186, 255}, zero), shades/2+1)
	positive := colors(luminance(color.NRGBA{200, 92, 8, 255}, color.NRGBA{246, 170, 92, 255}, zero), shades/2+1)
	for i := shades/2 - 1; i >= 0; i-- { // zero is there already
		negative = append(negative, positive[i])
	}
	return negative
}

// luminance is the map through the colours, which rise in lightness, by the
// method of K. Moreland, Proc. 5th Int. Symp. Visual Computing (2009).
func luminance(controls ...color.Color) palette.ColorMap {
	m, err := moreland.NewLuminance(controls)
	if err != nil {
		panic("figure: " + err.Error()) // the controls are constants
	}
	m.SetMin(0)
	m.SetMax(1)
	return m
}

// sequential rises evenly in lightness from dark violet through red to straw.
func sequential() []color.Color {
	return colors(luminance(
		color.NRGBA{14, 9, 62, 255},
		color.NRGBA{106, 28, 110, 255},
		color.NRGBA{196, 64, 76, 255},
		color.NRGBA{243, 146, 62, 255},
		color.NRGBA{250, 238, 180, 255},
	), shades)
}

func colors(m palette.ColorMap, n int) []color.Color {
	c := make([]color.Color, n)
	for i := range c {
		v := m.Min() + (m.Max()-m.Min())*float64(i)/float64(n-1)
		shade, err := m.At(min(v, m.Max()))
		if err != nil {
			panic("figure: " + err.Error()) // v is within the map
		}
		c[i] = color.NRGBAModel.Convert(shade)
	}
	return c
}
