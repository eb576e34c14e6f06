package figure

import (
	"image"
	"image/color"
	"math"

	xdraw "golang.org/x/image/draw"

	"gonum.org/v1/plot/vg"
)

// heat is a grid of coloured cells: value[row*columns+column].
type heat struct {
	value         []float64
	columns, rows int
	limits        Range // of the colours; values beyond get the end's colour
	colors        []color.Color
}

// draw fills the panel with the cells. Cells are drawn sharp when they are
// larger than a pixel and averaged when they are smaller.
func (h heat) draw(p panel) {
	cells := image.NewNRGBA(image.Rect(0, 0, h.columns, h.rows))
	for row := range h.rows {
		for column := range h.columns {
			cells.Set(column, h.rows-1-row, h.color(h.value[row*h.columns+column]))
		}
	}
	size := p.canvas.Size()
	fitted := image.NewNRGBA(image.Rect(0, 0, int(math.Round(float64(size.X/pixel))), int(math.Round(float64(size.Y/pixel)))))
	var scaler xdraw.Scaler = xdraw.NearestNeighbor
	if h.columns > fitted.Rect.Dx() || h.rows > fitted.Rect.Dy() {
		scaler = xdraw.BiLinear
	}
	scaler.Scale(fitted, fitted.Rect, cells, cells.Rect, xdraw.Src, nil)
	p.canvas.DrawImage(p.canvas.Rectangle, fitted)
}

func (h heat) color(v float64) color.Color {
	if math.IsNaN(v) {
		return blank
	}
	f := (v - h.limits.Min) / (h.limits.Max - h.limits.Min)
	return h.colors[int(math.Round(min(max(f, 0), 1)*float64(len(h.colors)-1)))]
}

// bar draws the colour bar right of a panel; an end is pointed if values lie
// beyond it.
func (h heat) bar(p panel, label string) {
	r := p.canvas.Rectangle
	tip := barWidth * 0.9
	b := newPanel(p.canvas, r.Max.X+barGap, r.Min.Y+tip, barWidth, r.Size().Y-2*tip, Range{0, 1}, h.limits)
	strip := heat{columns: 1, rows: len(h.colors), limits: h.limits, colors: h.colors}
	for i := range h.colors {
		strip.value = append(strip.value, h.limits.Min+(h.limits.Max-h.limits.Min)*float64(i)/float64(len(h.colors)-1))
	}
	strip.draw(b)
	below, above := false, false
	for _, v := range h.value {
		below, above = below || v < h.limits.Min, above || v > h.limits.Max
	}
	c, q := b.canvas, b.canvas.Rectangle
	middle := c.Center().X
	outline := []vg.Point{{X: q.Min.X, Y: q.Min.Y}}
	if below {
		peak := vg.Point{X: middle, Y: q.Min.Y - tip}
		c.FillPolygon(h.colors[0], []vg.Point{q.Min, {X: q.Max.X, Y: q.Min.Y}, peak})
		outline = append(outline, peak)
	}
	outline = append(outline, vg.Point{X: q.Max.X, Y: q.Min.Y}, q.Max)
	if above {
		peak := vg.Point{X: middle, Y: q.Max.Y + tip}
		c.FillPolygon(h.colors[len(h.colors)-1], []vg.Point{{X: q.Min.X, Y: q.Max.Y}, q.Max, peak})
		outline = append(outline, peak)
	}
	outline = append(outline, vg.Point{X: q.Min.X, Y: q.Max.Y})
	c.StrokeLines(frameLine, append(outline, outline[:2]...))
	widest := vg.Length(0)
	for _, t := range ticks(h.limits, max(2, int(q.Size().Y/(34*pt)))) {
		if t.label == "" {
			continue
		}
		y := b.at(0, t.at).Y
		c.StrokeLine2(tickLine, q.Max.X, y, q.Max.X+0.8*tickLength, y)
		write(c, vg.Point{X: q.Max.X + 0.8*tickLength + 2*pt, Y: y - capHeight(tickSize)/2}, t.label, tickSize, 0, ink, false)
		widest = max(widest, labelWidth(t.label, tickSize))
	}
	x := q.Max.X + 0.8*tickLength + 2*pt + widest + 5*pt + capHeight(labelSize)
	write(c, vg.Point{X: x, Y: c.Center().Y}, label, labelSize, 0.5, ink, true)
}

// cells is the range that cells centred on an even axis cover.
func cells(centres []float64) Range {
	n := len(centres)
	if n < 2 || !(centres[n-1] > centres[0]) {
		panic("figure: a map needs two or more positions that rise")
	}
	half := (centres[n-1] - centres[0]) / float64(n-1) / 2
	return Range{centres[0] - half, centres[n-1] + half}
}
