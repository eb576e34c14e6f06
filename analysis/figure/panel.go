package figure

import (
	"fmt"
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Curve is a named line through points. It has a gap where one is not finite.
type Curve struct {
	Name string
	X, Y []float64
}

// Points are measured values with standard errors; Error may be nil.
type Points struct {
	Name        string
	X, Y, Error []float64
}

func (c Curve) check(what string) {
	if len(c.X) != len(c.Y) {
		panic(fmt.Sprintf("figure: %s has %d x and %d y", what, len(c.X), len(c.Y)))
	}
}

func (p Points) check(what string) {
	Curve{X: p.X, Y: p.Y}.check(what)
	if p.Error != nil && len(p.Error) != len(p.Y) {
		panic(fmt.Sprintf("figure: %s has %d y and %d errors", what, len(p.Y), len(p.Error)))
	}
}

// edge is the values plus so many times their errors.
func (p Points) edge(times float64) []float64 {
	out := append([]float64(nil), p.Y...)
	for i := range p.Error {
		if e := times * p.Error[i]; finite(e) {
			out[i] += e
		}
	}
	return out
}

// panel is a rectangle of a page with axes.
type panel struct {
	canvas draw.Canvas // its Rectangle is the panel, which clips
	x, y   Range
	// Logarithmic axes: x and y, and all that is drawn, are decadic logarithms.
	logX, logY bool
}

// newPanel snaps the rectangle to pixels, so that images fit it.
func newPanel(c draw.Canvas, left, bottom, width, height vg.Length, x, y Range) panel {
	snap := func(v vg.Length) vg.Length { return vg.Length(math.Round(float64(v/pixel))) * pixel }
	c.Rectangle = vg.Rectangle{
		Min: vg.Point{X: snap(left), Y: snap(bottom)},
		Max: vg.Point{X: snap(left + width), Y: snap(bottom + height)},
	}
	return panel{canvas: c, x: x, y: y}
}

// at is the place of a point.
func (p panel) at(x, y float64) vg.Point {
	return vg.Point{
		X: p.canvas.X((x - p.x.Min) / (p.x.Max - p.x.Min)),
		Y: p.canvas.Y((y - p.y.Min) / (p.y.Max - p.y.Min)),
	}
}

// inside tells whether a point is within the axes.
func (p panel) inside(x, y float64) bool {
	return p.x.Min <= x && x <= p.x.Max && p.y.Min <= y && y <= p.y.Max
}

// line draws a curve, clipped, once in each style: the later on top.
func (p panel) line(x, y []float64, styles ...draw.LineStyle) {
	var runs [][]vg.Point
	var run []vg.Point
	for i := range x {
		if finite(x[i]) && finite(y[i]) {
			run = append(run, p.at(x[i], y[i]))
			continue
		}
		runs, run = append(runs, run), nil
	}
	runs = append(runs, run)
	for _, s := range styles {
		for _, r := range runs {
			if len(r) > 1 {
				p.canvas.StrokeLines(s, p.canvas.ClipLinesXY(r)...)
			}
		}
	}
}

// fill tints between two curves, clipped.
func (p panel) fill(x, low, high []float64, tint color.Color) {
	for i := 0; i < len(x); {
		j := i
		for j < len(x) && finite(x[j]) && finite(low[j]) && finite(high[j]) {
			j++
		}
		if j-i > 1 {
			var outline []vg.Point
			for k := i; k < j; k++ {
				outline = append(outline, p.at(x[k], high[k]))
			}
			for k := j - 1; k >= i; k-- {
				outline = append(outline, p.at(x[k], low[k]))
			}
			p.canvas.FillPolygon(tint, p.canvas.ClipPolygonXY(outline))
		}
		i = j + 1
	}
}

// box tints a rectangle, cut at the axes.
func (p panel) box(x, y Range, tint color.Color) {
	x = Range{max(x.Min, p.x.Min), min(x.Max, p.x.Max)}
	y = Range{max(y.Min, p.y.Min), min(y.Max, p.y.Max)}
	if !x.empty() && !y.empty() {
		p.fill([]float64{x.Min, x.Max}, []float64{y.Min, y.Min}, []float64{y.Max, y.Max}, tint)
	}
}

// vertical and horizontal draw a line through all of the panel.
func (p panel) vertical(x float64, styles ...draw.LineStyle) {
	p.line([]float64{x, x}, []float64{p.y.Min, p.y.Max}, styles...)
}

func (p panel) horizontal(y float64, styles ...draw.LineStyle) {
	p.line([]float64{p.x.Min, p.x.Max}, []float64{y, y}, styles...)
}

// dots draws points, with error bars where they have errors.
func (p panel) dots(d Points) {
	low, high := d.edge(-1), d.edge(1)
	for i := range d.X {
		if d.Error != nil && finite(d.X[i]) && finite(d.Y[i]) {
			p.line([]float64{d.X[i], d.X[i]}, []float64{low[i], high[i]}, errorLine)
		}
	}
	for i := range d.X {
		if p.inside(d.X[i], d.Y[i]) {
			p.canvas.DrawGlyphNoClip(dotGlyph, p.at(d.X[i], d.Y[i]))
		}
	}
}

var dotGlyph = draw.GlyphStyle{Color: ink, Radius: dotRadius, Shape: draw.CircleGlyph{}}

// frame draws the four sides with ticks and the labels; outward ticks suit
// images, and a panel above another of the same x has no labels below. Ticks
// are as many as there is room for.
func (p panel) frame(xLabel, yLabel string, outward bool) {
	c, r := p.canvas, p.canvas.Rectangle
	length, gap := tickLength, 3*pt
	if outward {
		length, gap = -0.8*tickLength, 3*pt+0.8*tickLength
	}
	mark := func(t tick) vg.Length {
		if t.label == "" {
			return length / 2
		}
		return length
	}
	xCount, yCount := max(2, int(r.Size().X/(44*pt))), max(2, int(r.Size().Y/(34*pt)))
	if p.x == p.y { // one scale, the same ticks
		xCount = yCount
	}
	for _, t := range axisTicks(p.x, xCount, p.logX) {
		x := p.at(t.at, 0).X
		c.StrokeLine2(tickLine, x, r.Min.Y, x, r.Min.Y+mark(t))
		if !outward {
			c.StrokeLine2(tickLine, x, r.Max.Y, x, r.Max.Y-mark(t))
		}
		if xLabel != "" {
			write(c, vg.Point{X: x, Y: r.Min.Y - gap - capHeight(tickSize)}, t.label, tickSize, 0.5, ink, false)
		}
	}
	widest := vg.Length(0)
	for _, t := range axisTicks(p.y, yCount, p.logY) {
		y := p.at(0, t.at).Y
		c.StrokeLine2(tickLine, r.Min.X, y, r.Min.X+mark(t), y)
		if !outward {
			c.StrokeLine2(tickLine, r.Max.X, y, r.Max.X-mark(t), y)
		}
		write(c, vg.Point{X: r.Min.X - gap, Y: y - capHeight(tickSize)/2}, t.label, tickSize, 1, ink, false)
		widest = max(widest, labelWidth(t.label, tickSize))
	}
	p.outline(frameLine)
	center := c.Center()
	if xLabel != "" {
		write(c, vg.Point{X: center.X, Y: r.Min.Y - marginBottom + 7*pt}, xLabel, labelSize, 0.5, ink, false)
	}
	// Labels of panels above each other line up unless the numbers are wide.
	x := r.Min.X - max(30*pt, gap+widest+5*pt)
	write(c, vg.Point{X: x, Y: center.Y}, yLabel, labelSize, 0.5, ink, true)
}

func (p panel) outline(s draw.LineStyle) {
	r := p.canvas.Rectangle
	p.canvas.StrokeLines(s, []vg.Point{r.Min, {X: r.Max.X, Y: r.Min.Y}, r.Max, {X: r.Min.X, Y: r.Max.Y}, r.Min, {X: r.Max.X, Y: r.Min.Y}})
}
