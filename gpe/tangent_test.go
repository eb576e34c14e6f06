package gpe

import (
	"context"
	"math"
	"testing"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// swept is a small problem of a step swept into a box.
func smallSweep(t testing.TB, law fluid.Law, scheme Scheme) *Problem {
	t.Helper()
	g := NewGrid(192, 96, -40)
	box := Box{Length: 50, WallWidth: 1, WallHeight: 6}
	sweep := NewSweep(g, Sweep{Trap: box, Depth: 1, Width: 0.5, Speed: 0.5, Start: 25})
	v := make([]float64, g.N)
	for j := range v {
		v[j] = box.At(g.X(j))
	}
	ground, err := FindGround(g, law, v, law.Mu(1))
	if err != nil {
		t.Fatal(err)
	}
	modes, err := FindModes(ground, 0)
	if err != nil {
		t.Fatal(err)
	}
	return &Problem{Grid: g, Law: law, Landscape: sweep, Ground: ground, Noise: NewTrappedNoise(ground, modes, 0.1, 1e4, 0),
		AtomsPerLength: 1e4, Scheme: scheme, TimeStep: 0.02, Times: []float64{3, 10}}
}

// A direction comes out as the difference of two trajectories that start a
// little apart along it: the tangent map is that of the propagator.
func TestTangentIsDerivative(t *testing.T) {
	for _, c := range []struct {
		name   string
		law    fluid.Law
		scheme Scheme
	}{{"cubic", fluid.Cubic(), Strang()}, {"swollen", fluid.Swollen(0.4), Quartic()}} {
		t.Run(c.name, func(t *testing.T) {
			p := smallSweep(t, c.law, c.scheme)
			tangent, err := NewTangent(p)
			if err != nil {
				t.Fatal(err)
			}
			moments, err := tangent.Run(context.Background(), 2, nil)
			if err != nil {
				t.Fatal(err)
			}
			prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, p.Scheme, p.TimeStep, p.Times)
			if err != nil {
				t.Fatal(err)
			}
			const first, step = 16, 2e-3
			direction := lanes.NewBatch(p.Grid.N)
			p.Noise.Direct(direction, first)
			var fields [2]*lanes.Batch
			for s, sign := range []float64{1, -1} {
				b := lanes.NewBatch(p.Grid.N)
				for i := range b.Re {
					b.Re[i] = p.Ground.Field[i/lanes.Width] + sign*step*direction.Re[i]
					b.Im[i] = sign * step * direction.Im[i]
				}
				prop.NewWalker(false).Leg(b, 0)
				fields[s] = b
			}
			var worst, size float64
			for i := range fields[0].Re {
				rho := func(b *lanes.Batch) float64 { return b.Re[i]*b.Re[i] + b.Im[i]*b.Im[i] }
				want := (rho(fields[0]) - rho(fields[1])) / (2 * step)
				got := moments.Directions[(first+i%lanes.Width)*p.Grid.N+i/lanes.Width]
				worst, size = math.Max(worst, math.Abs(got-want)), math.Max(size, math.Abs(want))
			}
			if worst > 3e-8*size { // rounding over the step, 1e-13/(2·2e-3·size)
				t.Errorf("directions are off by %.2g of their size", worst/size)
			}
		})
	}
}

// The covariance of the ensemble is that of the tangent where the noise is
// weak, within its sampling error.
func TestTangentCovarianceAtStart(t *testing.T) {
	p := smallSweep(t, fluid.Cubic(), Strang())
	const batches = 250
	n := p.Grid.N
	count := p.Noise.Directions()
	directions := make([]float64, 0, count*n)
	b := lanes.NewBatch(n)
	for first := 0; first < count; first += lanes.Width {
		p.Noise.Direct(b, first)
		for l := range min(lanes.Width, count-first) {
			for j := range n {
				directions = append(directions, b.Re[j*lanes.Width+l])
			}
		}
	}
	sums := make([]float64, n)
	for i := range batches {
		if err := p.Noise.Sample(b, 7, i*lanes.Width); err != nil {
			t.Fatal(err)
		}
		for j := range n {
			for l := range lanes.Width {
				d := b.Re[j*lanes.Width+l] - p.Ground.Field[j]
				sums[j] += d * d
			}
		}
	}
	var chi float64
	points := 0
	for j := range n {
		var want float64
		for i := range count {
			want += directions[i*n+j] * directions[i*n+j]
		}
		if p.Ground.Field[j] < 0.5 {
			continue
		}
		got := sums[j] / (batches * lanes.Width)
		chi += math.Pow((got/want-1)/math.Sqrt(2./(batches*lanes.Width)), 2)
		points++
	}
	if chi /= float64(points); chi < 0.5 || chi > 1.6 { // neighbouring points are correlated
		t.Errorf("χ² of the initial variance is %.2f a point", chi)
	}
}

// Stopping and going on changes nothing; neither does the number of workers.
func TestTangentResumes(t *testing.T) {
	p := smallSweep(t, fluid.Cubic(), Strang())
	whole, err := NewTangent(p)
	if err != nil {
		t.Fatal(err)
	}
	var want *Moments
	for range p.Times {
		if want, err = whole.Run(context.Background(), 1, nil); err != nil {
			t.Fatal(err)
		}
	}
	if m, err := whole.Run(context.Background(), 1, nil); m != nil || err != nil {
		t.Errorf("after the last time Run returns %v, %v", m, err)
	}
	part, err := NewTangent(p)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	if _, err := part.Run(ctx, 3, func(int) { cancel() }); err == nil {
		t.Fatal("a cancelled run returned moments")
	}
	if part.Done() == 0 || part.Done() >= part.Steps() {
		t.Fatalf("stopped after %d of %d steps", part.Done(), part.Steps())
	}
	rest, err := NewTangent(p)
	if err != nil {
		t.Fatal(err)
	}
	if !rest.Restore(part.State()) {
		t.Fatal("the state of the stopped one is refused")
	}
	var got *Moments
	for range p.Times {
		if got, err = rest.Run(context.Background(), 3, nil); err != nil {
			t.Fatal(err)
		}
	}
	for i, v := range want.Directions {
		if got.Directions[i] != v {
			t.Fatalf("value %d is %v after a stop and %v without", i, got.Directions[i], v)
		}
	}
	if rest.Restore(9, 0, nil) {
		t.Error("a state of nothing is taken")
	}
}

func BenchmarkTangent(b *testing.B) {
	g := NewGrid(1024, 512, -256)
	land := NewSwitch(g, Switch{Velocity: 0.75, SoundUp: 1, SoundDown: 0.5, Width: 2, Ramp: 3})
	ground := UniformGround(g, fluid.Cubic())
	noise, err := NewPlaneWaves(ground, 1, 0, 500, 0)
	if err != nil {
		b.Fatal(err)
	}
	p := &Problem{Grid: g, Law: fluid.Cubic(), Landscape: land, Ground: ground, Noise: noise, AtomsPerLength: 500, Scheme: Strang(), TimeStep: 0.03, Times: []float64{3}}
	steps := 0
	for b.Loop() {
		t, err := NewTangent(p)
		if err != nil {
			b.Fatal(err)
		}
		if _, err := t.Run(context.Background(), 2, nil); err != nil {
			b.Fatal(err)
		}
		steps = t.Steps()
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(steps)/float64(noise.Directions())/float64(g.N), "ns/point/step/direction")
}
