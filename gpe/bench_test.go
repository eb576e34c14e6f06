package gpe

import (
	"fmt"
	"testing"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// BenchmarkSplitStep is a whole Strang step with a moving step potential and
// its energy balance, in ns per grid point and step of one trajectory.
func BenchmarkSplitStep(b *testing.B) {
	for _, n := range []int{1024, 2048, 4096} {
		prop, batch := benchPropagator(b, n), benchBatch(n)
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			w := prop.NewWalker(true)
			b.ReportAllocs()
			for b.Loop() {
				w.Leg(batch, 0)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(benchSteps*n*lanes.Width), "ns/point")
		})
	}
}

// BenchmarkSplitStepSingle is the same in single precision, with the way there
// and back.
func BenchmarkSplitStepSingle(b *testing.B) {
	for _, n := range []int{1024, 2048, 4096} {
		prop, pair := benchPropagator(b, n), []*lanes.Batch{benchBatch(n), benchBatch(n)}
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			w := prop.Single().NewWalker(true)
			b.ReportAllocs()
			for b.Loop() {
				w.Leg(pair, 0)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(benchSteps*n*lanes.SingleWidth), "ns/point")
		})
	}
}

const benchSteps = 200

func benchPropagator(b *testing.B, n int) *Propagator {
	b.Helper()
	g := NewGrid(n, 0.35*float64(n), -0.2*float64(n))
	box := Box{Length: 0.15 * float64(n), WallWidth: 1, WallHeight: 6}
	land := NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: box.RightEdge()})
	prop, err := NewPropagator(g, fluid.Cubic(), land, nil, Strang(), 0.05, []float64{0.05 * benchSteps})
	if err != nil {
		b.Fatal(err)
	}
	return prop
}

func benchBatch(n int) *lanes.Batch {
	batch := lanes.NewBatch(n)
	for i := range batch.Re {
		batch.Re[i] = 1
	}
	return batch
}

// BenchmarkNoise is the initial noise of a trapped cloud, in ms per trajectory.
func BenchmarkNoise(b *testing.B) {
	g := NewGrid(512, 180, -90)
	box := Box{Length: 120, WallWidth: 1, WallHeight: 6}
	v := trapOn(g, box)
	ground, err := FindGround(g, fluid.Cubic(), v, 1)
	if err != nil {
		b.Fatal(err)
	}
	modes, err := FindModes(ground, 0)
	if err != nil {
		b.Fatal(err)
	}
	noise := NewTrappedNoise(ground, modes, 0.03, 50, 0)
	batch := lanes.NewBatch(g.N)
	first := 0
	for b.Loop() {
		if err := noise.Sample(batch, 1, first); err != nil {
			b.Fatal(err)
		}
		first += lanes.Width
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())*1e-6/float64(b.N)/lanes.Width, "ms/trajectory")
}

func BenchmarkNormal(b *testing.B) {
	s := NewStream(1, 1)
	for b.Loop() {
		s.Normal()
	}
}
