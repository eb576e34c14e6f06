package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

// The plateau that a sweep makes in a swollen cloud, by direct integration,
// against the simple wave v + ∫c dn/n with the transonic condition: 1e-3.
func TestSweepOfASwollenCloud(t *testing.T) {
	law := fluid.Swollen(0.4)
	g := NewGrid(1024, 384, -120)
	box := Box{Length: 200, WallWidth: 1, WallHeight: 6 * law.Mu(1)}
	land := NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: box.RightEdge()})
	ground, err := FindGround(g, law, land.closed, law.Mu(1))
	if err != nil {
		t.Fatal(err)
	}
	p := &Problem{Grid: g, Law: law, Landscape: land, Ground: ground, Scheme: Strang(), TimeStep: 0.04}
	const at = 100.0
	n, j, err := MeanField(p, []float64{at})
	if err != nil {
		t.Fatal(err)
	}
	want, err := flow.Sweep(law, 0.5, 1, 0.5)
	if err != nil {
		t.Fatal(err)
	}
	xs := land.Position(at)
	nu := plateau(g, n[0], xs-22, xs-6)
	vu := plateau(g, j[0], xs-22, xs-6)/nu + 0.5
	nd := plateau(g, n[0], xs+6, xs+60)
	for _, c := range []struct {
		name      string
		got, want float64
	}{
		{"upstream density", nu, want.Upstream.Density},
		{"upstream velocity", vu, want.Upstream.Velocity},
		{"downstream density", nd, want.Downstream.Density},
	} {
		if math.Abs(c.got/c.want-1) > 1e-3 { // asked for
			t.Errorf("%s %.5f, theory %.5f", c.name, c.got, c.want)
		}
		t.Logf("%s %.5f, theory %.5f", c.name, c.got, c.want)
	}
}
