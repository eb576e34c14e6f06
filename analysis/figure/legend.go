package figure

import (
	"image/color"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// key explains one thing drawn.
type key struct {
	name  string
	lines []draw.LineStyle // the later on top
	tint  color.Color      // a patch behind, nil for none
	dot   bool
	bar   bool // an error bar on the dot
}

const (
	sampleWidth = 22 * pt
	keyGap      = 16 * pt
	rowHeight   = 14 * pt
)

func (k key) width() vg.Length { return sampleWidth + 5*pt + labelWidth(k.name, noteSize) }

// legend is a block of keys above a panel, where it cannot cover data.
type legend [][]key

// newLegend breaks the keys that have a name into rows that fit the width.
func newLegend(width vg.Length, keys ...key) (l legend) {
	room := vg.Length(0)
	for _, k := range keys {
		if k.name == "" {
			continue
		}
		if room < k.width() {
			l = append(l, nil)
			room = width
		}
		l[len(l)-1] = append(l[len(l)-1], k)
		room -= k.width() + keyGap
	}
	return l
}

func (l legend) height() vg.Length { return vg.Length(len(l))*rowHeight + 2*pt }

// draw puts the first row on top, starting at left, the last just above bottom.
func (l legend) draw(c draw.Canvas, left, bottom vg.Length) {
	for i, row := range l {
		x := left
		y := bottom + (vg.Length(len(l)-1-i)+0.5)*rowHeight + 1*pt
		for _, k := range row {
			middle := x + sampleWidth/2
			if k.tint != nil {
				h := 4 * pt
				c.SetColor(k.tint)
				c.Fill(vg.Rectangle{Min: vg.Point{X: x, Y: y - h}, Max: vg.Point{X: x + sampleWidth, Y: y + h}}.Path())
			}
			for _, s := range k.lines {
				c.StrokeLine2(s, x, y, x+sampleWidth, y)
			}
			if k.bar {
				c.StrokeLine2(errorLine, middle, y-5*pt, middle, y+5*pt)
			}
			if k.dot {
				c.DrawGlyphNoClip(dotGlyph, vg.Point{X: middle, Y: y})
			}
			write(c, vg.Point{X: x + sampleWidth + 5*pt, Y: y - capHeight(noteSize)/2}, k.name, noteSize, 0, ink, false)
			x += k.width() + keyGap
		}
	}
}
