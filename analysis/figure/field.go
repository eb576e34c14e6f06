package figure

import (
	"math"

	"gonum.org/v1/plot/vg/draw"
)

// Field shows a quantity over two dials. Where it is not finite the cell is
// grey.
type Field struct {
	X, Y           []float64 // even, or even in the logarithm, and rising
	LogX, LogY     bool
	Value          []float64 // Value[i*len(X)+j] at Y[i], X[j]
	XLabel, YLabel string    // with units
	Quantity       string
	Around         float64 // a value for the middle of diverging colours; 0 for sequential ones
	Marked         []Points
}

// Page lays the figure out.
func (f Field) Page() *Page {
	checkCells(f.Value, len(f.X), len(f.Y))
	x, y := cells(onAxis(f.X, f.LogX)), cells(onAxis(f.Y, f.LogY))
	limits, colors := span(0, f.Value), sequential()
	if f.Around != 0 {
		reach := math.Max(limits.Max-f.Around, f.Around-limits.Min)
		limits, colors = Range{f.Around - reach, f.Around + reach}, diverging()
	}
	h := heat{value: f.Value, columns: len(f.X), rows: len(f.Y), limits: limits, colors: colors}
	var list []key
	for _, v := range f.Value {
		if !finite(v) {
			list = append(list, key{name: "no flow", tint: blank})
			break
		}
	}
	for _, m := range f.Marked {
		list = append(list, key{name: m.Name, dot: true})
	}
	const panelHeight = 270 * pt
	width := pageWidth - marginLeft - barGap - barWidth - barMargin
	keys := newLegend(width, list...)
	page := &Page{width: pageWidth, height: marginBottom + panelHeight + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		p := newPanel(c, marginLeft, marginBottom, width, panelHeight, x, y)
		p.logX, p.logY = f.LogX, f.LogY
		h.draw(p)
		for _, m := range f.Marked {
			p.dots(Points{X: onAxis(m.X, f.LogX), Y: onAxis(m.Y, f.LogY)})
		}
		p.frame(f.XLabel, f.YLabel, true)
		h.bar(p, f.Quantity)
		keys.draw(c, marginLeft, marginBottom+panelHeight)
	}
	return page
}
