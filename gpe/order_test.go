package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// carry takes a swept box from 0 to end in steps of dt and returns lane 0.
func carry(t testing.TB, p *Problem, scheme Scheme, dt, end float64) []complex128 {
	t.Helper()
	prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, scheme, dt, []float64{end})
	if err != nil {
		t.Fatal(err)
	}
	b := lanes.NewBatch(p.Grid.N)
	for l := range lanes.Width {
		b.SetLane(l, complexOf(p.Ground.Field))
	}
	prop.NewWalker(false).Leg(b, 0)
	return b.Lane(nil, 0)
}

func distance(a, b []complex128) float64 {
	sum := 0.0
	for j := range a {
		d := a[j] - b[j]
		sum += real(d)*real(d) + imag(d)*imag(d)
	}
	return math.Sqrt(sum)
}

// smoothSweep is a step so wide that the grid resolves everything: a problem
// with a potential that moves, for the orders.
func smoothSweep(t testing.TB, law fluid.Law) *Problem {
	t.Helper()
	g := NewGrid(128, 60, -30)
	box := Box{Length: 24, WallWidth: 2, WallHeight: 3}
	land := NewSweep(g, Sweep{Trap: box, Depth: 0.7, Width: 2, Speed: 0.8, Start: 0, Ramp: 0})
	v := trapOn(g, box)
	ground, err := FindGround(g, law, v, law.Mu(1))
	if err != nil {
		t.Fatal(err)
	}
	return &Problem{Grid: g, Law: law, Landscape: land, Ground: ground, AtomsPerLength: 50}
}

// The splittings converge with the order they claim, with a potential that
// moves: errors against a far finer solution, halved steps; within 0.05.
func TestOrdersOfTheSplittings(t *testing.T) {
	const end = 3.2
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.5)} {
		p := smoothSweep(t, law)
		exact := carry(t, p, Quartic(), 0.0025, end)
		for _, c := range []struct {
			scheme Scheme
			dt     float64
		}{{Strang(), 0.02}, {Quartic(), 0.05}} {
			coarse := distance(carry(t, p, c.scheme, c.dt, end), exact)
			fine := distance(carry(t, p, c.scheme, c.dt/2, end), exact)
			order := math.Log2(coarse / fine)
			if math.Abs(order-float64(c.scheme.Order)) > 0.05 {
				t.Errorf("η = %g, %s: order %.3f (errors %.3g, %.3g), want %d", law.Swelling(), c.scheme.Name, order, coarse, fine, c.scheme.Order)
			}
		}
	}
}

// The norm is kept to rounding: 1e-12 in 1,000 steps, asked for.
func TestNormIsKept(t *testing.T) {
	p := smoothSweep(t, fluid.Cubic())
	prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, Strang(), 0.01, []float64{10})
	if err != nil {
		t.Fatal(err)
	}
	b := lanes.NewBatch(p.Grid.N)
	for l := range lanes.Width {
		b.SetLane(l, complexOf(p.Ground.Field))
	}
	w := prop.NewWalker(false)
	before := w.Norms(b)
	w.Leg(b, 0)
	for l, after := range w.Norms(b) {
		if d := math.Abs(after/before[l] - 1); d > 1e-12 {
			t.Errorf("lane %d: norm drifts by %.2g", l, d)
		}
	}
}

// What the moving step puts in is what the energy gains, up to the error of
// the splitting: a quarter of it for half the step, within a tenth.
func TestEnergyBalanceOfASweep(t *testing.T) {
	p := smoothSweep(t, fluid.Cubic())
	off := func(dt float64) float64 {
		prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, Strang(), dt, []float64{8})
		if err != nil {
			t.Fatal(err)
		}
		b := lanes.NewBatch(p.Grid.N)
		for l := range lanes.Width {
			b.SetLane(l, complexOf(p.Ground.Field))
		}
		w := prop.NewWalker(true)
		before := w.Energies(b, 0)
		w.Leg(b, 0)
		gain := w.Energies(b, 8)[0] - before[0]
		if math.Abs(w.Work[0]) < 1 {
			t.Fatalf("the step does no work: %g", w.Work[0])
		}
		return gain - w.Work[0]
	}
	coarse, fine := off(0.04), off(0.02)
	if ratio := coarse / fine; math.Abs(ratio/4-1) > 0.1 {
		t.Errorf("imbalance %.3g and %.3g at half the step: ratio %.3f, want 4", coarse, fine, ratio)
	}
}

func TestLegAllocatesNothing(t *testing.T) {
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.5)} {
		p := smoothSweep(t, law)
		prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, Strang(), 0.02, []float64{0.2})
		if err != nil {
			t.Fatal(err)
		}
		b := lanes.NewBatch(p.Grid.N)
		w := prop.NewWalker(true)
		if n := testing.AllocsPerRun(5, func() { w.Leg(b, 0) }); n != 0 {
			t.Errorf("η = %g: %v allocations in a leg", law.Swelling(), n)
		}
	}
}
