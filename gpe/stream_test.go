package gpe

import (
	"math"
	"slices"
	"testing"
)

// The stream must never change: runs made with an earlier release go on with
// the same noise. First numbers of (seed 1, trajectory 0).
func TestStreamIsGolden(t *testing.T) {
	s := NewStream(1, 0)
	for i, want := range []float64{1.1182827391837742, -0.5177723532925592, -0.6732626387824797, -0.45935390055372877} {
		if got := s.Normal(); got != want {
			t.Errorf("number %d is %v, want %v", i, got, want)
		}
	}
}

// Kolmogorov's distance of 200,000 numbers from the Gaussian is below its 0.1 %
// point 1.95/√n; moments are within 4 standard errors.
func TestNormal(t *testing.T) {
	const n = 200000
	s := NewStream(42, 3)
	v := make([]float64, n)
	var m [5]float64
	for i := range v {
		v[i] = s.Normal()
		for p := range m {
			m[p] += math.Pow(v[i], float64(p)) / n
		}
	}
	for p, c := range map[int]struct{ want, variance float64 }{1: {0, 1}, 2: {1, 2}, 3: {0, 15}, 4: {3, 96}} {
		if d := math.Abs(m[p] - c.want); d > 4*math.Sqrt(c.variance/n) {
			t.Errorf("moment %d is %.4f, want %g", p, m[p], c.want)
		}
	}
	slices.Sort(v)
	worst := 0.0
	for i, x := range v {
		f := 0.5 * math.Erfc(-x/math.Sqrt2)
		worst = math.Max(worst, math.Max(math.Abs(f-float64(i)/n), math.Abs(f-float64(i+1)/n)))
	}
	if worst > 1.95/math.Sqrt(n) {
		t.Errorf("Kolmogorov's distance is %.4f, at most %.4f", worst, 1.95/math.Sqrt(n))
	}
}

// Neighbouring trajectories and seeds share nothing: correlation within four
// standard errors.
func TestStreamsAreIndependent(t *testing.T) {
	const n = 5000
	for _, c := range [][4]int{{1, 0, 1, 1}, {1, 0, 2, 0}, {1, 1, 2, 0}} {
		a, b := NewStream(uint64(c[0]), c[1]), NewStream(uint64(c[2]), c[3])
		sum := 0.0
		for range n {
			sum += a.Normal() * b.Normal()
		}
		if math.Abs(sum/n) > 4/math.Sqrt(n) {
			t.Errorf("streams %v correlate by %.4f", c, sum/n)
		}
	}
}

// The layers of the Gaussian close: the topmost one, too, has the area of the
// others, to the digits to which the edge is known, a hundredfold.
func TestLayersClose(t *testing.T) {
	last := layerX[layers-1]
	top := last * (1 - math.Exp(-last*last/2))
	if math.Abs(top/layerArea-1) > 1e-8 {
		t.Errorf("the topmost layer has area %.12g, the others %.12g", top, layerArea)
	}
	tail := math.Sqrt(math.Pi/2) * math.Erfc(layerEdge/math.Sqrt2)
	bottom := layerEdge*math.Exp(-layerEdge*layerEdge/2) + tail
	if math.Abs(bottom/layerArea-1) > 1e-9 {
		t.Errorf("the lowest layer has area %.12g, the others %.12g", bottom, layerArea)
	}
}

// Beyond the edge of the layers the tail has the weight it should, and its
// own shape.
func TestTail(t *testing.T) {
	const n = 4_000_000
	s := NewStream(6, 1)
	beyond, far, positive := 0.0, 0.0, 0.0
	for range n {
		x := s.Normal()
		if math.Abs(x) > layerEdge {
			beyond++
			if x > 0 {
				positive++
			}
			if math.Abs(x) > 4 {
				far++
			}
		}
	}
	want := n * math.Erfc(layerEdge/math.Sqrt2)
	if d := math.Abs(beyond - want); d > 4*math.Sqrt(want) { // standard deviations of a count
		t.Errorf("%g beyond the edge, want %.0f", beyond, want)
	}
	if d := math.Abs(positive - beyond/2); d > 2*math.Sqrt(beyond) { // four
		t.Errorf("%g of %g positive", positive, beyond)
	}
	want = n * math.Erfc(4/math.Sqrt2)
	if d := math.Abs(far - want); d > 4*math.Sqrt(want) {
		t.Errorf("%g beyond 4, want %.0f", far, want)
	}
}
