package gpe

import (
	"fmt"
	"math"
	"testing"

	"tailrace/gpe/lanes"
)

// BenchmarkAccuracy carries a sweep with its noise over t = 10 by either
// splitting and reports the cost, in ns per point and unit of time, and the
// error, relative L2 of the field against steps eight times finer than the
// finest here: which scheme reaches an accuracy for less.
func BenchmarkAccuracy(b *testing.B) {
	const n, end = 512, 10.0
	g := NewGrid(n, 0.345*n, -80)
	box := Box{Length: 100, WallWidth: 1, WallHeight: 6}
	land := NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: box.RightEdge()})
	v := trapOn(g, box)
	ground, err := FindGround(g, (&Problem{}).Law, v, 1)
	if err != nil {
		b.Fatal(err)
	}
	modes, err := FindModes(ground, 0)
	if err != nil {
		b.Fatal(err)
	}
	noise := NewTrappedNoise(ground, modes, 0.03, 50, 0)
	p := &Problem{Grid: g, AtomsPerLength: 50}
	s := make([]float64, n)
	fill(s, p.Commutator())
	carry := func(scheme Scheme, dt float64, batch *lanes.Batch) {
		prop, err := NewPropagator(g, p.Law, land, s, scheme, dt, []float64{end})
		if err != nil {
			b.Fatal(err)
		}
		if err := noise.Sample(batch, 1, 0); err != nil {
			b.Fatal(err)
		}
		prop.NewWalker(false).Leg(batch, 0)
	}
	exact, got := lanes.NewBatch(n), lanes.NewBatch(n)
	carry(Quartic(), 0.0025, exact)
	for _, c := range []struct {
		scheme Scheme
		steps  []float64
	}{{Strang(), []float64{0.07, 0.05, 0.035, 0.02, 0.01}}, {Quartic(), []float64{0.07, 0.05, 0.035, 0.02}}} {
		for _, dt := range c.steps {
			b.Run(fmt.Sprintf("%s/%g", c.scheme.Name, dt), func(b *testing.B) {
				for b.Loop() {
					carry(c.scheme, dt, got)
				}
				off, norm := 0.0, 0.0
				for i := range got.Re {
					off += math.Pow(got.Re[i]-exact.Re[i], 2) + math.Pow(got.Im[i]-exact.Im[i], 2)
					norm += exact.Re[i]*exact.Re[i] + exact.Im[i]*exact.Im[i]
				}
				b.ReportMetric(math.Sqrt(off/norm), "error")
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/(n*lanes.Width*end), "ns/point/time")
			})
		}
	}
}
