package figure

import (
	"image/color"
	"math"
	"strings"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

var fonts = font.NewCache(liberation.Collection())

// A piece of a label: text in one font at one height.
type piece struct {
	text  string
	face  font.Face
	raise vg.Length
}

// parse splits a label: *x* is italic, ^{2} raised, _{0} lowered. The raised
// minus sign has no character of its own in the fonts.
func parse(label string, size vg.Length) (pieces []piece) {
	style, height, scale := upright, vg.Length(0), 1.0
	var run strings.Builder
	flush := func() {
		if run.Len() > 0 {
			face := fonts.Lookup(style, size*vg.Length(scale))
			pieces = append(pieces, piece{run.String(), face, height * size})
			run.Reset()
		}
	}
	runes := []rune(label)
	for i := 0; i < len(runes); i++ {
		opens := i+1 < len(runes) && runes[i+1] == '{'
		switch r := runes[i]; {
		case r == '*':
			flush()
			if style == upright {
				style = italic
			} else {
				style = upright
			}
		case (r == '^' || r == '_') && opens:
			flush()
			height, scale = 0.38, 0.72
			if r == '_' {
				height = -0.18
			}
			i++
		case r == '}' && scale != 1:
			flush()
			height, scale = 0, 1
		default:
			run.WriteRune(r)
		}
	}
	flush()
	return pieces
}

func labelWidth(label string, size vg.Length) (w vg.Length) {
	for _, p := range parse(label, size) {
		w += p.face.Width(p.text)
	}
	return w
}

// capHeight is about the height of a digit, by which labels are centred.
func capHeight(size vg.Length) vg.Length { return 0.72 * size }

// write draws a label whose baseline runs through at; align is 0 for text to
// the right of it, ½ for centred, 1 for text to the left; turned text runs
// upwards.
func write(c draw.Canvas, at vg.Point, label string, size vg.Length, align float64, shade color.Color, turned bool) {
	c.Push()
	defer c.Pop()
	c.Translate(at)
	if turned {
		c.Rotate(math.Pi / 2)
	}
	c.SetColor(shade)
	x := -labelWidth(label, size) * vg.Length(align)
	for _, p := range parse(label, size) {
		c.FillString(p.face, vg.Point{X: x, Y: p.raise}, p.text)
		x += p.face.Width(p.text)
	}
}

// withUnit puts a unit in brackets behind a quantity; none if it has none.
func withUnit(quantity, unit string) string {
	if unit == "" {
		return quantity
	}
	return quantity + " (" + unit + ")"
}
