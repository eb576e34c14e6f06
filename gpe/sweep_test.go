package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

// plateau returns the mean of f over lo < x < hi.
func plateau(g Grid, f []float64, lo, hi float64) float64 {
	sum, n := 0.0, 0
	for j, v := range f {
		if x := g.X(j); lo < x && x < hi {
			sum += v
			n++
		}
	}
	return sum / float64(n)
}

// sweptBox is the sweep (v_s, V₀, w) = (0.5, 1, 0.5) into a box of length 200.
func sweptBox(t testing.TB, points int, length float64) *Problem {
	g := NewGrid(points, length, -120)
	box := Box{Length: 200, WallWidth: 1, WallHeight: 6}
	land := NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: box.RightEdge()})
	ground, err := FindGround(g, fluid.Cubic(), land.closed, 1)
	if err != nil {
		t.Fatal(err)
	}
	return &Problem{Grid: g, Law: fluid.Cubic(), Landscape: land, Ground: ground, Scheme: Strang(), TimeStep: 0.04}
}

// The upstream plateau of a sweep is a simple wave from the cloud at rest that
// fits the transonic flow of the step: n_u = 0.89330, v_u = 0.60971, three
// digits asked of the direct integration.
func TestSweepMakesThePlateau(t *testing.T) {
	p := sweptBox(t, 1024, 512*0.75)
	const at = 90.0
	n, j, err := MeanField(p, []float64{at})
	if err != nil {
		t.Fatal(err)
	}
	xs := p.Landscape.(*Sweep).Position(at)
	nu := plateau(p.Grid, n[0], xs-22, xs-6)
	vu := plateau(p.Grid, j[0], xs-22, xs-6)/nu + 0.5
	nd := plateau(p.Grid, n[0], xs+6, xs+60)
	if math.Abs(nu-0.89330) > 5e-4 {
		t.Errorf("upstream density %.5f, want 0.89330 to three digits", nu)
	}
	if math.Abs(vu-0.60971) > 5e-4 {
		t.Errorf("upstream velocity %.5f, want 0.60971 to three digits", vu)
	}
	if math.Abs(nd/nu-0.3221) > 1e-3 {
		t.Errorf("n_d/n_u = %.5f, want 0.3221 to three digits", nd/nu)
	}
	t.Logf("n_u %.5f v_u %.5f n_d/n_u %.5f residual %.2g", nu, vu, nd/nu, p.Ground.Residual)
}
