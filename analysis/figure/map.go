package figure

import (
	"math"
	"sort"

	"gonum.org/v1/plot/vg/draw"
)

// Map shows the two-point correlation g₂(x, x') − 1.
type Map struct {
	Position []float64 // x and x', even and rising
	// Value[i*len(Position)+j] is g₂ − 1 at x' = Position[i], x = Position[j].
	Value []float64
	// Limit is where the colours end on both sides of zero; see OffDiagonalLimit.
	Limit float64
	// Band is the predicted line of the band, x against x'; may be empty.
	Band Curve
	// WindowX and WindowXPrime outline the window of the analysis; may be empty.
	WindowX, WindowXPrime Range
	Horizon               float64
	LengthUnit            string
	Quantity              string // what is shown; empty is g₂ − 1
}

// OffDiagonalLimit is the quantile (0 to 1) of |value| over the n×n map without
// the cells within skip of the diagonal, which would hide all the rest.
func OffDiagonalLimit(value []float64, n, skip int, quantile float64) float64 {
	checkCells(value, n, n)
	var rest []float64
	for i := range n {
		for j := range n {
			if v := math.Abs(value[i*n+j]); max(i-j, j-i) > skip && finite(v) {
				rest = append(rest, v)
			}
		}
	}
	if len(rest) == 0 {
		return 0
	}
	sort.Float64s(rest)
	return rest[int(math.Round(min(max(quantile, 0), 1)*float64(len(rest)-1)))]
}

// Page lays the figure out, x to the right and x' upwards on the same scale.
func (m Map) Page() *Page {
	n := len(m.Position)
	checkCells(m.Value, n, n)
	m.Band.check("Band")
	limit := m.Limit
	if !(limit > 0) || !finite(limit) {
		limit = max(largest(m.Value), 1e-300) // better a map in other colours than none
	}
	e, unit := exponent(limit)
	label := "*g*_{2} − 1"
	if m.Quantity != "" {
		label = m.Quantity
	}
	if unit != "" {
		label += "  (" + unit + ")"
	}
	limit /= math.Pow(10, float64(e))
	h := heat{value: scaled(m.Value, e), columns: n, rows: n, limits: Range{-limit, limit}, colors: diverging()}
	axis := cells(m.Position)
	side := pageWidth - marginLeft - barGap - barWidth - barMargin
	var list []key
	if len(m.Band.X) > 0 {
		list = append(list, key{name: m.Band.Name, lines: dashed})
	}
	windowed := !m.WindowX.empty() && !m.WindowXPrime.empty()
	if windowed {
		list = append(list, key{name: "analysis window", lines: solid})
	}
	list = append(list, key{name: "horizon", lines: hairline})
	keys := newLegend(side, list...)
	page := &Page{width: pageWidth, height: marginBottom + side + keys.height() + 2*pt}
	page.draw = func(c draw.Canvas) {
		p := newPanel(c, marginLeft, marginBottom, side, side, axis, axis)
		h.draw(p)
		p.vertical(m.Horizon, hairline...)
		p.horizontal(m.Horizon, hairline...)
		if windowed {
			x, y := m.WindowX, m.WindowXPrime
			p.line([]float64{x.Min, x.Max, x.Max, x.Min, x.Min}, []float64{y.Min, y.Min, y.Max, y.Max, y.Min}, solid...)
		}
		p.line(m.Band.X, m.Band.Y, dashed...)
		p.frame(withUnit("*x*", m.LengthUnit), withUnit("*x*′", m.LengthUnit), true)
		h.bar(p, label)
		keys.draw(c, marginLeft, marginBottom+side)
	}
	return page
}
