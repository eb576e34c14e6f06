package figure

import (
	"fmt"
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Branch is a mode followed through lengths of the cavity.
type Branch struct {
	// Name explains its line, where a few have lines of their own and all have
	// names.
	Name                          string
	Length, Frequency, GrowthRate []float64
}

// Growth shows growth rates and frequencies of a cavity's modes against its
// length.
type Growth struct {
	Branches             []Branch
	Thresholds           []float64
	Length               float64 // the cavity's own, marked
	LengthUnit, RateUnit string
}

var (
	thresholdLine = draw.LineStyle{Color: color.NRGBA{150, 150, 150, 255}, Width: 0.6 * pt, Dashes: []vg.Length{1 * pt, 2 * pt}}
	ownLine       = draw.LineStyle{Color: theoryInk, Width: 1 * pt, Dashes: []vg.Length{5 * pt, 3 * pt}}
)

// branchLines tell modes that are neighbours apart.
var branchLines = []draw.LineStyle{
	{Color: fitInk, Width: 1.3 * pt},
	{Color: color.NRGBA{0, 130, 95, 255}, Width: 1.3 * pt, Dashes: []vg.Length{6 * pt, 1.5 * pt}},
	{Color: color.NRGBA{150, 80, 130, 255}, Width: 1.3 * pt, Dashes: []vg.Length{2.5 * pt, 1.2 * pt}},
}

// Page lays the figure out: growth rates above, frequencies below, on one axis
// of length.
func (f Growth) Page() *Page {
	lengths, rates, frequencies := [][]float64{{f.Length}}, [][]float64{{0}}, [][]float64{{0}}
	for _, b := range f.Branches {
		Curve{X: b.Length, Y: b.Frequency}.check("a branch")
		Curve{X: b.Length, Y: b.GrowthRate}.check("a branch")
		lengths = append(lengths, b.Length)
		rates = append(rates, b.GrowthRate)
		frequencies = append(frequencies, b.Frequency)
	}
	lengths = append(lengths, f.Thresholds)
	e, unit := exponent(max(largest(rates...), largest(frequencies...)))
	unit = joined(unit, f.RateUnit)
	const panelHeight = 175 * pt
	const between = 8 * pt
	width := pageWidth - marginLeft - marginRight
	var list []key
	for i, b := range f.Branches {
		if len(f.Branches) > len(branchLines) || b.Name == "" {
			list = []key{{name: "modes, a line each", lines: branchLines[:1]}}
			break
		}
		list = append(list, key{name: b.Name, lines: branchLines[i : i+1]})
	}
	list = append(list, key{name: "thresholds", lines: []draw.LineStyle{thresholdLine}}, key{name: "this cavity", lines: []draw.LineStyle{ownLine}})
	keys := newLegend(width, list...)
	x := span(0.01, lengths...)
	page := &Page{width: pageWidth, height: marginBottom + 2*panelHeight + between + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		for i, row := range []struct {
			values         [][]float64
			xLabel, yLabel string
		}{
			{frequencies, withUnit("length *D*", f.LengthUnit), withUnit("frequency Re *ω*", unit)},
			{rates, "", withUnit("growth rate Im *ω*", unit)},
		} {
			y := span(0, row.values...)
			y = Range{0, 1.08 * y.Max / math.Pow(10, float64(e))}
			p := newPanel(c, marginLeft, marginBottom+vg.Length(i)*(panelHeight+between), width, panelHeight, x, y)
			for _, d := range f.Thresholds {
				p.vertical(d, thresholdLine)
			}
			p.vertical(f.Length, ownLine)
			for j, b := range f.Branches {
				p.line(b.Length, scaled(row.values[j+1], e), branchLines[j%len(branchLines)])
			}
			p.frame(row.xLabel, row.yLabel, false)
		}
		keys.draw(c, marginLeft, marginBottom+2*panelHeight+between)
	}
	return page
}

// joined puts a power of ten before a unit.
func joined(power, unit string) string {
	if power != "" && unit != "" {
		return power + " " + unit
	}
	return power + unit
}

// Shape is the density of a mode, U + V, at the positions of a figure.
type Shape struct {
	Name     string // what tells it from the others
	Real     []float64
	Imag     []float64
	Envelope []float64 // |U + V|
}

// Patterns shows the density of modes along the cavity, each in a panel of its
// own, in units of its largest value.
type Patterns struct {
	Position   []float64
	Shapes     []Shape
	Inside     Range // between the horizons
	LengthUnit string
}

// Page lays the panels out, the first on top.
func (f Patterns) Page() *Page {
	if len(f.Shapes) == 0 {
		panic("figure: patterns of no modes")
	}
	for _, s := range f.Shapes {
		for _, list := range [][]float64{s.Real, s.Imag, s.Envelope} {
			if len(list) != len(f.Position) {
				panic(fmt.Sprintf("figure: a pattern has %d positions and %d values", len(f.Position), len(list)))
			}
		}
	}
	const between = 8 * pt
	n := len(f.Shapes)
	panelHeight := max(106*pt, 220*pt/vg.Length(n)) // room for three ticks
	width := pageWidth - marginLeft - marginRight
	keys := newLegend(width, key{name: "at one moment", lines: []draw.LineStyle{fitLine}},
		key{name: "a quarter of a period later, growth left out", lines: theory[:1]},
		key{name: "envelope", lines: []draw.LineStyle{levelLine}}, key{name: "between the horizons", tint: windowTint[1]})
	height := vg.Length(n)*panelHeight + vg.Length(n-1)*between
	page := &Page{width: pageWidth, height: marginBottom + height + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		for i, s := range f.Shapes {
			xLabel := ""
			if i == n-1 {
				xLabel = withUnit("*x*", f.LengthUnit)
			}
			top := largest(s.Envelope)
			if top == 0 {
				top = 1
			}
			norm := func(v []float64, sign float64) []float64 {
				out := make([]float64, len(v))
				for j := range v {
					out[j] = sign * v[j] / top
				}
				return out
			}
			p := newPanel(c, marginLeft, marginBottom+vg.Length(n-1-i)*(panelHeight+between), width, panelHeight, span(0, f.Position), Range{-1.15, 1.55})
			p.box(f.Inside, p.y, windowTint[1])
			p.horizontal(0, tickLine)
			p.line(f.Position, norm(s.Envelope, 1), levelLine)
			p.line(f.Position, norm(s.Envelope, -1), levelLine)
			if largest(s.Imag) > 1e-6*top { // a mode that does not oscillate has one phase
				p.line(f.Position, norm(s.Imag, 1), theory[0])
			}
			p.line(f.Position, norm(s.Real, 1), fitLine)
			at := p.at(p.x.Min, p.y.Max)
			write(c, vg.Point{X: at.X + 7*pt, Y: at.Y - 13*pt}, s.Name, noteSize, 0, ink, false)
			p.frame(xLabel, "*δn* / largest", false)
		}
		keys.draw(c, marginLeft, marginBottom+height)
	}
	return page
}
