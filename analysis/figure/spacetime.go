package figure

import (
	"gonum.org/v1/plot/vg/draw"
)

// SpaceTime shows the density against position and time during the sweep.
type SpaceTime struct {
	Position, Time []float64 // even and rising
	// Density[i*len(Position)+j] is the density at Time[i], Position[j].
	Density                           []float64
	Step                              Curve   // position X against time Y; may be empty
	Characteristics                   []Curve // position X against time Y; one key for all, the name of the first
	LengthUnit, TimeUnit, DensityUnit string
}

// Page lays the figure out, x to the right and time upwards.
func (s SpaceTime) Page() *Page {
	checkCells(s.Density, len(s.Position), len(s.Time))
	s.Step.check("Step")
	x, t := cells(s.Position), cells(s.Time)
	h := heat{value: s.Density, columns: len(s.Position), rows: len(s.Time), limits: span(0, s.Density), colors: sequential()}
	var list []key
	if len(s.Step.X) > 0 {
		list = append(list, key{name: s.Step.Name, lines: light})
	}
	for i, c := range s.Characteristics {
		c.check("Characteristics")
		if i == 0 {
			list = append(list, key{name: c.Name, lines: dashed})
		}
	}
	const panelHeight = 230 * pt
	width := pageWidth - marginLeft - barGap - barWidth - barMargin
	keys := newLegend(width, list...)
	page := &Page{width: pageWidth, height: marginBottom + panelHeight + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		p := newPanel(c, marginLeft, marginBottom, width, panelHeight, x, t)
		h.draw(p)
		for _, q := range s.Characteristics {
			p.line(q.X, q.Y, dashed...)
		}
		p.line(s.Step.X, s.Step.Y, light...)
		p.frame(withUnit("*x*", s.LengthUnit), withUnit("*t*", s.TimeUnit), true)
		h.bar(p, withUnit("*n*", s.DensityUnit))
		keys.draw(c, marginLeft, marginBottom+panelHeight)
	}
	return page
}
