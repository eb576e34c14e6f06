package figure

import (
	"fmt"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Chart is curves and points in panels above each other, on one axis x.
type Chart struct {
	Across, Unit string // what the abscissa is
	LogX         bool
	Panels       []ChartPanel // from the top
	Marks        []Mark
}

// ChartPanel is one panel of a Chart.
type ChartPanel struct {
	Ordinate string
	Log      bool
	Lines    []Curve  // up to six; lines of the same name in other panels look alike
	Dots     []Points // one set looks like another
	Tint     []Band
	Levels   []float64 // dotted horizontal lines
	Range    Range     // of y; empty for what is shown
}

// Band is a tinted strip between two curves.
type Band struct {
	Name      string
	X         []float64
	Low, High []float64
}

// Mark is a named vertical line.
type Mark struct {
	Name string
	At   float64
}

// chartLines tells lines apart, without colour too.
var chartLines = append([]draw.LineStyle{fitLine}, append(append([]draw.LineStyle{}, theory...), dataLine,
	draw.LineStyle{Color: quiet, Width: 1.3 * pt, Dashes: []vg.Length{10 * pt, 3 * pt}})...)

// Page lays the figure out, the keys on top.
func (f Chart) Page() *Page {
	const between = 8 * pt
	panelHeight := 150 * pt
	if len(f.Panels) == 1 {
		panelHeight = 210 * pt
	}
	styles := map[string]draw.LineStyle{}
	var list []key
	for _, p := range f.Panels {
		for _, b := range p.Tint {
			if _, known := styles[b.Name]; !known && b.Name != "" {
				styles[b.Name] = draw.LineStyle{}
				list = append(list, key{name: b.Name, tint: fitTint})
			}
		}
		for _, d := range p.Dots {
			d.check("Dots")
			if _, known := styles[d.Name]; !known && d.Name != "" {
				styles[d.Name] = draw.LineStyle{}
				list = append(list, key{name: d.Name, dot: true, bar: d.Error != nil})
			}
		}
	}
	lines := 0
	for _, p := range f.Panels {
		for _, l := range p.Lines {
			l.check("Lines")
			if _, known := styles[l.Name]; known {
				continue
			}
			if lines == len(chartLines) {
				panic(fmt.Sprintf("figure: at most %d lines can be told apart", lines))
			}
			styles[l.Name] = chartLines[lines]
			list = append(list, key{name: l.Name, lines: chartLines[lines : lines+1]})
			lines++
		}
	}
	for _, m := range f.Marks {
		if _, known := styles[m.Name]; !known {
			styles[m.Name] = horizonLine
			list = append(list, key{name: m.Name, lines: []draw.LineStyle{horizonLine}})
		}
	}
	width := pageWidth - marginLeft - marginRight
	keys := newLegend(width, list...)
	top := marginBottom + vg.Length(len(f.Panels))*(panelHeight+between) - between
	page := &Page{width: pageWidth, height: top + keys.height() + 4*pt}
	page.draw = func(c draw.Canvas) {
		x := f.spanX()
		for i, p := range f.Panels {
			bottom := top - vg.Length(i+1)*panelHeight - vg.Length(i)*between
			label := ""
			if i == len(f.Panels)-1 {
				label = withUnit(f.Across, f.Unit)
			}
			f.panel(newPanel(c, marginLeft, bottom, width, panelHeight, x, p.spanY()), p, label, styles)
		}
		keys.draw(c, marginLeft, top)
	}
	return page
}

// onAxis returns values as an axis has them.
func onAxis(values []float64, logarithmic bool) []float64 {
	if logarithmic {
		return logarithms(values)
	}
	return values
}

func (f Chart) spanX() Range {
	var all [][]float64
	widen := 0.0
	for _, p := range f.Panels {
		for _, l := range p.Lines {
			all = append(all, onAxis(l.X, f.LogX))
		}
		for _, d := range p.Dots {
			all, widen = append(all, onAxis(d.X, f.LogX)), 0.02
		}
	}
	return span(widen, all...)
}

func (p ChartPanel) spanY() Range {
	if !p.Range.empty() {
		r := onAxis([]float64{p.Range.Min, p.Range.Max}, p.Log)
		return Range{r[0], r[1]}
	}
	var all [][]float64
	for _, l := range p.Lines {
		all = append(all, onAxis(l.Y, p.Log))
	}
	for _, d := range p.Dots {
		all = append(all, onAxis(d.edge(1), p.Log), onAxis(d.edge(-1), p.Log))
	}
	for _, b := range p.Tint {
		all = append(all, onAxis(b.Low, p.Log), onAxis(b.High, p.Log))
	}
	return span(0.06, append(all, onAxis(p.Levels, p.Log))...)
}

func (f Chart) panel(on panel, p ChartPanel, xLabel string, styles map[string]draw.LineStyle) {
	on.logX, on.logY = f.LogX, p.Log
	for _, b := range p.Tint {
		on.fill(onAxis(b.X, f.LogX), onAxis(b.Low, p.Log), onAxis(b.High, p.Log), fitTint)
	}
	for _, v := range onAxis(p.Levels, p.Log) {
		on.horizontal(v, levelLine)
	}
	for _, m := range f.Marks {
		at := m.At
		if f.LogX {
			at = math.Log10(at)
		}
		on.vertical(at, horizonLine)
	}
	for _, l := range p.Lines {
		on.line(onAxis(l.X, f.LogX), onAxis(l.Y, p.Log), styles[l.Name])
	}
	for _, d := range p.Dots {
		if f.LogX || p.Log {
			low, high := onAxis(d.edge(-1), p.Log), onAxis(d.edge(1), p.Log)
			x, y := onAxis(d.X, f.LogX), onAxis(d.Y, p.Log)
			if d.Error != nil {
				for i := range x {
					bottom := low[i]
					if !finite(bottom) {
						bottom = on.y.Min
					}
					on.line([]float64{x[i], x[i]}, []float64{bottom, high[i]}, errorLine)
				}
			}
			on.dots(Points{X: x, Y: y})
			continue
		}
		on.dots(d)
	}
	on.frame(xLabel, p.Ordinate, false)
}
