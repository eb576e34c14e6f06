package figure

import (
	"fmt"

	"gonum.org/v1/plot/vg/draw"
)

// Cut shows the correlation across the band, averaged along it.
type Cut struct {
	Measured  Points
	Fit       Curve     // may be empty
	Low, High []float64 // the fit's 68 % band at Fit.X; may be nil
	Predicted []Curve   // up to three
	Across    string    // what the abscissa is, such as "distance across the band"
	Unit      string    // its unit
	Ordinate  string    // what is shown; empty is g₂ − 1
}

// Page lays the figure out with the keys above the panel, off the data.
func (f Cut) Page() *Page {
	f.Measured.check("Measured")
	f.Fit.check("Fit")
	if len(f.Low) != len(f.High) || f.Low != nil && len(f.Low) != len(f.Fit.X) {
		panic(fmt.Sprintf("figure: the band of a fit of %d points has %d low and %d high ones", len(f.Fit.X), len(f.Low), len(f.High)))
	}
	if len(f.Predicted) > len(theory) {
		panic(fmt.Sprintf("figure: %d predicted curves, at most %d can be told apart", len(f.Predicted), len(theory)))
	}
	list := []key{{name: f.Measured.Name, dot: true, bar: f.Measured.Error != nil}}
	if len(f.Fit.X) > 0 {
		list = append(list, key{name: f.Fit.Name, lines: []draw.LineStyle{fitLine}})
	}
	if f.Low != nil {
		list = append(list, key{name: "68 % band of the fit", tint: fitTint})
	}
	ordinates := [][]float64{f.Measured.edge(1), f.Measured.edge(-1), f.Fit.Y, f.Low, f.High, {0}}
	for i, p := range f.Predicted {
		p.check("Predicted")
		list = append(list, key{name: p.Name, lines: theory[i : i+1]})
		ordinates = append(ordinates, p.Y)
	}
	e, unit := exponent(largest(ordinates...))
	label := "*g*_{2} − 1"
	if f.Ordinate != "" {
		label = f.Ordinate
	}
	if unit != "" {
		label += "  (" + unit + ")"
	}
	for i := range ordinates {
		ordinates[i] = scaled(ordinates[i], e)
	}
	measured := Points{X: f.Measured.X, Y: scaled(f.Measured.Y, e), Error: scaled(f.Measured.Error, e)}
	const panelHeight = 220 * pt
	width := pageWidth - marginLeft - marginRight
	keys := newLegend(width, list...)
	page := &Page{width: pageWidth, height: marginBottom + panelHeight + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		p := newPanel(c, marginLeft, marginBottom, width, panelHeight, span(0.02, f.Measured.X), span(0.06, ordinates...))
		p.horizontal(0, levelLine)
		if f.Low != nil {
			p.fill(f.Fit.X, scaled(f.Low, e), scaled(f.High, e), fitTint)
		}
		p.line(f.Fit.X, scaled(f.Fit.Y, e), fitLine)
		for i, q := range f.Predicted {
			p.line(q.X, scaled(q.Y, e), theory[i])
		}
		p.dots(measured)
		p.frame(withUnit(f.Across, f.Unit), label, false)
		keys.draw(c, marginLeft, marginBottom+panelHeight)
	}
	return page
}
