package camera

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"tailrace/gpe"
)

// wave is moments whose only fluctuation is a density wave with random phase.
func wave(n int, dx, k, size float64) (*gpe.Moments, []float64) {
	m := &gpe.Moments{Density: make([]float64, n), Directions: make([]float64, 2*n)}
	x := make([]float64, n)
	for j := range x {
		x[j] = (float64(j) - float64(n)/2) * dx
		m.Density[j] = 1
		m.Directions[j], m.Directions[n+j] = size*math.Cos(k*x[j]), size*math.Sin(k*x[j])
	}
	return m, x
}

// A density wave appears in the pixels with the camera's response, and photons
// add their Poisson variance.
func TestVirtualVariance(t *testing.T) {
	for _, c := range []struct {
		camera Camera
		k      float64
	}{
		{Camera{Pixel: 0.5}, 1},
		{Camera{Pixel: 0.5, Resolution: 0.6}, 1},
		{Camera{Pixel: 0.8, Resolution: 0.4}, 1.5},
		{Camera{Pixel: 0.5, Resolution: 0.6, PhotonsPerAtom: 30}, 1},
		{Camera{Pixel: 0.5, Resolution: 0.6, ReadNoise: 0.02}, 1},
	} {
		const size, perXi = 0.1, 50
		m, x := wave(1024, 0.1, c.k, size)
		v, err := NewVirtual(m, x, perXi, c.camera, -20, 20, Everything)
		if err != nil {
			t.Fatal(err)
		}
		shots := v.Draw(4000, 1)
		response := math.Sqrt(c.camera.Response(0)(c.k, c.k))
		want := math.Pow(size*response, 2) + c.camera.ReadNoise*c.camera.ReadNoise
		if c.camera.PhotonsPerAtom > 0 {
			want += 1 / (c.camera.PhotonsPerAtom * perXi * c.camera.Pixel)
		}
		var got float64
		for k := range v.X {
			column := make([]float64, shots.Count())
			for i := range column {
				column[i] = float64(shots.Shot(i)[k])
			}
			mean, variance := stat.MeanVariance(column, nil)
			if math.Abs(mean-1) > 6*math.Sqrt(want/4000) {
				t.Fatalf("pixel %d has mean %v", k, mean)
			}
			got += variance / float64(len(v.X))
		}
		if math.Abs(got/want-1) > 0.08 { // 3 standard deviations of one wave in 4,000 shots
			t.Errorf("%+v: variance %.5g, want %.5g", c.camera, got, want)
		}
	}
}

// The step's jitter is told with each shot, and shots of a moving step are the
// mean moved.
func TestVirtualJitter(t *testing.T) {
	m, x := wave(2048, 0.1, 1, 0)
	for j, at := range x {
		m.Density[j] = 1 - 0.5*(1+math.Tanh(at))/2
	}
	c := Camera{Pixel: 0.5, Resolution: 0.3, Jitter: 0.7}
	v, err := NewVirtual(m, x, 50, c, -20, 20, Everything)
	if err != nil {
		t.Fatal(err)
	}
	still, err := NewVirtual(m, x, 50, Camera{Pixel: 0.05, Resolution: 0.3}, -22, 22, Everything)
	if err != nil {
		t.Fatal(err)
	}
	shots := v.Draw(300, 2)
	mean, sd := stat.MeanStdDev(shots.StepPosition, nil)
	if math.Abs(mean+v.X[0]) > 0.2 || math.Abs(sd-0.7) > 0.1 { // chance
		t.Errorf("the step is at %.3f ± %.3f, want %.3f ± 0.7", mean, sd, -v.X[0])
	}
	for i := range shots.Count() {
		for k, at := range v.X {
			if k < 8 || k > len(v.X)-8 {
				continue
			}
			fromStep := at - (shots.StepPosition[i] + v.X[0])
			// Averaged over the pixel.
			var want float64
			for q := range 10 {
				s := fromStep + (float64(q)-4.5)*0.05
				want += still.phase[0].mean[int(math.Round((s-still.X[0])/0.05))] / 10
			}
			if d := math.Abs(float64(shots.Shot(i)[k]) - want); d > 0.015 { // a fiftieth of a pixel on the slope, and q's rounding
				t.Fatalf("shot %d, %.2f from the step: %.4f, want %.4f", i, fromStep, shots.Shot(i)[k], want)
			}
		}
	}
}

// Without correlation across the step there is none, and each side keeps its own.
func TestUncorrelated(t *testing.T) {
	m, x := wave(512, 0.2, 0.5, 0.1)
	for _, choice := range []Choice{Everything, Uncorrelated} {
		v, err := NewVirtual(m, x, 50, Camera{Pixel: 0.5, PhotonsPerAtom: 10}, -10, 10, choice)
		if err != nil {
			t.Fatal(err)
		}
		s := v.Draw(3000, 3)
		corr := func(a, b int) float64 {
			u, w := make([]float64, s.Count()), make([]float64, s.Count())
			for i := range u {
				u[i], w[i] = float64(s.Shot(i)[a]), float64(s.Shot(i)[b])
			}
			return stat.Correlation(u, w, nil)
		}
		across, within := corr(2, len(v.X)-3), corr(2, 4)
		if within < 0.3 {
			t.Errorf("choice %d: neighbours correlate by %.3f", choice, within)
		}
		if (math.Abs(across) > 0.1) == (choice == Uncorrelated) {
			t.Errorf("choice %d: both sides correlate by %.3f", choice, across)
		}
	}
}
