package figure

import (
	"fmt"
	"math"

	"gonum.org/v1/plot/vg/draw"
)

// Flow shows mean density and Mach number against position in the step's frame.
type Flow struct {
	Density, Mach                   Points // of the ensemble; Error is one standard error
	PredictedDensity, PredictedMach Curve  // of the stationary flow; may be empty
	Horizon                         float64
	Upstream, Downstream            Range // windows of the analysis, shaded; may be empty
	LengthUnit, DensityUnit         string
}

// dense is the number of points from which a line shows them better than dots.
const dense = 120

// Page lays the figure out: density above, v/c below, on one axis x.
func (f Flow) Page() *Page {
	f.Density.check("Density")
	f.Mach.check("Mach")
	f.PredictedDensity.check("PredictedDensity")
	f.PredictedMach.check("PredictedMach")
	const panelHeight = 150 * pt
	const between = 8 * pt
	width := pageWidth - marginLeft - marginRight
	measured := key{name: f.Density.Name, lines: []draw.LineStyle{dataLine}, tint: errorTint}
	if len(f.Density.X) < dense {
		measured = key{name: f.Density.Name, dot: true, bar: f.Density.Error != nil}
	}
	keys := newLegend(width, measured, key{name: f.PredictedDensity.Name, lines: theory[:1]},
		key{name: "horizon", lines: []draw.LineStyle{horizonLine}},
		windowKey("upstream window", f.Upstream, 0), windowKey("downstream window", f.Downstream, 1))
	widen := 0.0
	if len(f.Density.X) < dense {
		widen = 0.01 // room for half a dot
	}
	x := span(widen, f.Density.X, f.Mach.X)
	page := &Page{width: pageWidth, height: marginBottom + 2*panelHeight + between + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		f.panel(newPanel(c, marginLeft, marginBottom, width, panelHeight, x,
			span(0.06, f.Mach.edge(1), f.Mach.edge(-1), f.PredictedMach.Y, []float64{1})),
			f.Mach, f.PredictedMach, withUnit("*x*", f.LengthUnit), "*v* / *c*", true)
		f.panel(newPanel(c, marginLeft, marginBottom+panelHeight+between, width, panelHeight, x,
			span(0.06, f.Density.edge(1), f.Density.edge(-1), f.PredictedDensity.Y)),
			f.Density, f.PredictedDensity, "", withUnit("*n*", f.DensityUnit), false)
		keys.draw(c, marginLeft, marginBottom+2*panelHeight+between)
	}
	return page
}

func (f Flow) panel(p panel, measured Points, predicted Curve, xLabel, yLabel string, unity bool) {
	p.box(f.Upstream, p.y, windowTint[0])
	p.box(f.Downstream, p.y, windowTint[1])
	if unity {
		p.horizontal(1, levelLine)
	}
	p.vertical(f.Horizon, horizonLine)
	if len(measured.X) < dense {
		p.dots(measured)
	} else {
		if measured.Error != nil {
			p.fill(measured.X, measured.edge(-1), measured.edge(1), errorTint)
		}
		p.line(measured.X, measured.Y, dataLine)
	}
	p.line(predicted.X, predicted.Y, theory[0])
	p.frame(xLabel, yLabel, false)
}

func windowKey(name string, r Range, side int) key {
	if r.empty() {
		return key{}
	}
	return key{name: name, tint: windowTint[side]}
}

// checkCells panics unless each cell of a map has a value.
func checkCells(value []float64, columns, rows int) {
	if len(value) != columns*rows {
		panic(fmt.Sprintf("figure: a map of %d by %d cells has %d values", columns, rows, len(value)))
	}
}

// largest is the largest finite absolute value.
func largest(lists ...[]float64) (most float64) {
	for _, list := range lists {
		for _, v := range list {
			if finite(v) {
				most = max(most, math.Abs(v))
			}
		}
	}
	return most
}
