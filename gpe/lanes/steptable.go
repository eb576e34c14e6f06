package lanes

import (
	"fmt"
	"math"
)

// StepTable fills a potential array with a moving tanh step at the cost of one
// division a point, and that only near the step.
//
// With E = exp(2(x−xs)/w), (1+tanh((x−xs)/w))/2 = E/(1+E), and E separates
// into a factor of the point, made once, and one of the step position xs. So
// that nothing overflows and no accuracy is lost far from the origin, the grid
// is cut into stretches of a few widths, each with its own origin: within a
// stretch the exponents of both factors are small wherever the step is not flat
// to the last bit, and the stretches where it is flat need no arithmetic.
type StepTable struct {
	n       int
	stretch int       // points per stretch; the last may be shorter
	reach   float64   // largest |exponent| within a stretch
	inverse float64   // 2/w
	origin  []twofold // middle of each stretch
	local   []float64 // exp(2(x_j − origin)/w)
}

// twofold is the unevaluated sum of a number and its rounding error: the
// positions must be good to a rounding error of the width, not of the box.
type twofold struct{ head, tail float64 }

// flat is the exponent beyond which E/(1+E) is 0 or 1 to the last bit.
const flat = 40

// NewStepTable returns the table for the n points x0 + j·dx and a step of the
// given width w. It panics unless n, dx and width are positive and all are
// finite.
func NewStepTable(x0, dx float64, n int, width float64) *StepTable {
	if n <= 0 || !(dx > 0) || !(width > 0) || math.IsInf(dx, 0) || math.IsInf(width, 0) || math.IsInf(x0, 0) || math.IsNaN(x0) {
		panic(fmt.Sprintf("lanes: step table of %d points from %g at spacing %g for a width of %g; the first must be finite, the others positive", n, x0, dx, width))
	}
	// Exponents up to 4 either way: the rounding of an argument of 4 moves E
	// by 4e-16 of itself and the step by a quarter of that.
	const half = 4
	t := &StepTable{n: n, inverse: 2 / width, local: make([]float64, n)}
	t.stretch = n
	if points := 2 * half / (dx * t.inverse); points < float64(n) {
		t.stretch = max(1, int(points))
	}
	t.reach = float64(t.stretch) * dx * t.inverse
	for first := 0; first < n; first += t.stretch {
		middle := first + t.stretch/2
		t.origin = append(t.origin, position(x0, dx, middle))
		for j := first; j < min(first+t.stretch, n); j++ {
			t.local[j] = math.Exp(float64(j-middle) * dx * 2 / width)
		}
	}
	return t
}

// position returns x0 + j·dx without rounding.
func position(x0, dx float64, j int) twofold {
	head := float64(float64(j) * dx) // the conversion forbids fusing it with what follows
	tail := math.FMA(float64(j), dx, -head)
	sum := x0 + head
	part := sum - x0
	return twofold{sum, (x0 - (sum - part)) + (head - part) + tail}
}

// Fill sets v[j] = scale·(base[j] − depth·(1+tanh((x_j−xs)/w))/2) for the step
// at xs. v has the table's length, as has base, unless it is nil and taken for
// zero. The step is accurate to about 1e-15 of its depth. It does not allocate.
func (t *StepTable) Fill(v, base []float64, depth, xs, scale float64) {
	checkLength("potential", len(v), t.n)
	if base != nil {
		checkLength("base potential", len(base), t.n)
	}
	for i, o := range t.origin {
		first := i * t.stretch
		last := min(first+t.stretch, t.n)
		stretch := v[first:last]
		exponent := ((o.head - xs) + o.tail) * t.inverse
		switch {
		case exponent < -flat-t.reach:
			clear(stretch)
		case exponent > flat+t.reach:
			for j := range stretch {
				stretch[j] = -depth
			}
		default:
			e := math.Exp(exponent)
			local := t.local[first:last]
			for j, l := range local {
				stretch[j] = -depth * (e * l / (1 + e*l))
			}
		}
	}
	if base == nil {
		for j := range v {
			v[j] *= scale
		}
		return
	}
	for j := range v {
		v[j] = scale * (base[j] + v[j])
	}
}
