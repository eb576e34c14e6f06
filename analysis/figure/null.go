package figure

import (
	"math"
	"sort"

	"gonum.org/v1/plot/vg/draw"
)

// Null shows how strong a band chance alone makes, and the measured one.
type Null struct {
	Shuffled []float64 // strengths with the windows shuffled between shots
	Measured float64
	Strength string // what the abscissa is, such as "band strength"
	Unit     string
	Note     string // such as "6.2 standard deviations", said beside the line; may be empty
}

// Page lays the figure out: a histogram with the bin width of D. Freedman,
// P. Diaconis, Z. Wahrsch. 57, 453 (1981), 2·IQR·N^(−1/3), and a line.
func (f Null) Page() *Page {
	e, unit := exponent(largest(f.Shuffled, []float64{f.Measured}))
	if unit == "" {
		unit = f.Unit
	} else if f.Unit != "" {
		unit += " " + f.Unit
	}
	measured := f.Measured / math.Pow(10, float64(e))
	edges, counts := histogram(scaled(f.Shuffled, e))
	top := Range{0, 1.12 * max(largest(counts), 1)}
	x := span(0.06, edges, []float64{measured})
	const panelHeight = 190 * pt
	width := pageWidth - marginLeft - marginRight
	keys := newLegend(width, key{name: "shuffled between shots", tint: barsTint}, key{name: "measured", lines: []draw.LineStyle{fitLine}})
	page := &Page{width: pageWidth, height: marginBottom + panelHeight + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		p := newPanel(c, marginLeft, marginBottom, width, panelHeight, x, top)
		var outlineX, outlineY []float64
		for i, n := range counts {
			outlineX = append(outlineX, edges[i], edges[i+1])
			outlineY = append(outlineY, n, n)
		}
		p.fill(outlineX, make([]float64, len(outlineX)), outlineY, barsTint)
		if n := len(outlineX); n > 0 {
			outlineX = append(append([]float64{outlineX[0]}, outlineX...), outlineX[n-1])
			outlineY = append(append([]float64{0}, outlineY...), 0)
		}
		p.line(outlineX, outlineY, dataLine)
		p.vertical(measured, fitLine)
		if f.Note != "" && finite(measured) {
			at, align := p.at(measured, top.Max), 0.0
			at.X += 5 * pt
			at.Y -= 13 * pt
			if at.X+labelWidth(f.Note, noteSize) > p.canvas.Max.X-5*pt {
				at.X -= 10 * pt
				align = 1
			}
			write(c, at, f.Note, noteSize, align, fitInk, false)
		}
		p.frame(withUnit(f.Strength, unit), "shuffles per bin", false)
		keys.draw(c, marginLeft, marginBottom+panelHeight)
	}
	return page
}

// histogram counts the finite values in even bins.
func histogram(values []float64) (edges, counts []float64) {
	var v []float64
	for _, x := range values {
		if finite(x) {
			v = append(v, x)
		}
	}
	if len(v) == 0 {
		return nil, nil
	}
	sort.Float64s(v)
	n := len(v)
	bins := 1
	if spread := v[n-1] - v[0]; spread > 0 {
		width := 2 * (v[3*(n-1)/4] - v[(n-1)/4]) / math.Cbrt(float64(n))
		bins = 60
		if width > 0 {
			bins = int(min(max(math.Ceil(spread/width), 1), 60))
		}
	}
	r := span(0, v)
	counts = make([]float64, bins)
	for i := range bins + 1 {
		edges = append(edges, r.Min+(r.Max-r.Min)*float64(i)/float64(bins))
	}
	for _, x := range v {
		counts[min(int((x-r.Min)/(r.Max-r.Min)*float64(bins)), bins-1)]++
	}
	return edges, counts
}
