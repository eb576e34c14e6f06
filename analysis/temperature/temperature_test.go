package temperature

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/band"
	"tailrace/analysis/moments"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// The uniform flow of v = 0.75, c_u = 1, c_d = 0.5, whose ω_max is 0.1003, with
// 50 atoms per healing length.
var (
	up       = flow.State{Density: 1, Velocity: 0.75, SoundSpeed: 1}
	down     = flow.State{Density: 1, Velocity: 0.75, SoundSpeed: 0.5}
	geometry = band.Geometry{Up: up.SoundSpeed - up.Velocity, Down: down.Velocity - down.SoundSpeed}
)

const atoms = 50

// points from lo to hi in steps of dx.
func points(lo, hi, dx float64) []float64 {
	var x []float64
	for i := 0; lo+float64(i)*dx <= hi+1e-9; i++ {
		x = append(x, lo+float64(i)*dx)
	}
	return x
}

// source draws shots of white noise with a band across the horizon.
type source struct {
	xu, xd []float64
	root   mat.TriDense
}

func newSource(t testing.TB, xu, xd []float64, variance float64, at func(i, j int) float64) *source {
	t.Helper()
	s := &source{xu: xu, xd: xd}
	nu := len(xu)
	n := nu + len(xd)
	cov := mat.NewSymDense(n, nil)
	for i := range n {
		cov.SetSym(i, i, variance)
		if i < nu {
			for j := nu; j < n; j++ {
				cov.SetSym(i, j, at(i, j-nu))
			}
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		t.Fatal("the planted band is stronger than the noise allows")
	}
	chol.LTo(&s.root)
	return s
}

func (s *source) sides(t testing.TB, count int, seed uint64) *band.Sides {
	t.Helper()
	r := rand.New(rand.NewPCG(seed, 1))
	x := append(append([]float64(nil), s.xu...), s.xd...)
	n := len(x)
	z, d := mat.NewDense(count, n, nil), new(mat.Dense)
	for i := range z.RawMatrix().Data {
		z.RawMatrix().Data[i] = r.NormFloat64()
	}
	d.Mul(z, s.root.T())
	shots, mean := moments.Shots{Pixels: n, Data: make([]float32, count*n)}, make([]float64, n)
	for i, v := range d.RawMatrix().Data {
		shots.Data[i] = float32(1 + v)
	}
	for j := range mean {
		mean[j] = 1
	}
	sides, err := band.NewSides(shots, x, mean, band.Window{UpFar: x[0], UpNear: s.xu[len(s.xu)-1], DownNear: s.xd[0], DownFar: x[n-1]})
	if err != nil {
		t.Fatal(err)
	}
	return sides
}

// exactCut is a cut without noise, whose profile is given.
func exactCut(bins band.Bins, profile func(s float64) float64) *band.Cut {
	c := &band.Cut{Bins: bins, Shot: mat.NewDense(2, bins.Count, nil)}
	for b := range bins.Count {
		s := bins.Centre(b)
		c.S, c.Pairs = append(c.S, s), append(c.Pairs, 1)
		c.Mean, c.Error = append(c.Mean, profile(s)), append(c.Error, 1e-5)
	}
	return c
}

// An exact sech² profile, averaged over bins by its integral, gives back its
// four parameters.
func TestWidthExact(t *testing.T) {
	const amplitude, offset = 3e-4, 2e-5
	for _, c := range []struct {
		name                string
		kappa, delay, width float64
		told                float64 // κ the fit starts from
		tolerance           float64 // of Simpson's rule over a bin: (κ·width)⁴/2880 and less
	}{
		{"fine bins", 0.2, 0, 0.5, 0.2, 1e-5},
		{"wide bins", 0.2, 0, 4, 0.2, 1e-3},
		{"off the middle", 0.2, 7, 1, 0.2, 1e-5},
		{"told half the width", 0.2, -5, 1, 0.4, 1e-5},
		{"told twice the width", 0.2, 3, 1, 0.1, 1e-5},
		{"told three times the width", 0.3, 0, 1, 0.1, 1e-4},
	} {
		t.Run(c.name, func(t *testing.T) {
			n := int(45 / c.width)
			bins := band.Bins{Low: -(float64(n) + 0.5) * c.width, Width: c.width, Count: 2*n + 1}
			cut := exactCut(bins, func(s float64) float64 {
				a, b := c.kappa/2*(s-c.width/2-c.delay), c.kappa/2*(s+c.width/2-c.delay)
				return -amplitude*(math.Tanh(b)-math.Tanh(a))/(b-a) + offset
			})
			w, err := FitWidth(cut, c.told, 0, 1)
			if err != nil {
				t.Fatal(err)
			}
			for _, p := range []struct {
				name            string
				got, want, unit float64
			}{
				{"κ", w.Kappa, c.kappa, c.kappa}, {"amplitude", w.Amplitude, amplitude, amplitude},
				{"delay", w.Delay, c.delay, 1 / c.kappa}, {"offset", w.Offset, offset, amplitude},
			} {
				if off := math.Abs(p.got-p.want) / p.unit; !(off < c.tolerance) {
					t.Errorf("%s is %.8g, want %.8g (off by %.2g)", p.name, p.got, p.want, off)
				}
			}
			value, low, high := w.Temperature()
			if value != w.Kappa/(2*math.Pi) || !math.IsNaN(low) || !math.IsNaN(high) {
				t.Errorf("temperature %v from %v to %v without resamples", value, low, high)
			}
			if m := w.Model(c.delay); math.Abs(m-(offset-amplitude)) > c.tolerance*amplitude*4 {
				t.Errorf("the model's bottom is %v", m)
			}
			if w.DegreesOfFreedom != len(cut.S)-4 {
				t.Errorf("%d degrees of freedom of %d bins", w.DegreesOfFreedom, len(cut.S))
			}
		})
	}
}

// A band that is wider than the window has no width.
func TestWidthRunsOut(t *testing.T) {
	bins := band.Bins{Low: -20.5, Width: 1, Count: 41}
	cut := exactCut(bins, func(s float64) float64 { return 1e-4 * s }) // no band at all: a slope
	if w, err := FitWidth(cut, 0.2, 0, 1); err == nil {
		t.Errorf("a slope has κ = %v, amplitude %v at %v", w.Kappa, w.Amplitude, w.Delay)
	}
}

// The errors from the shots' own scatter, and the bootstrap's, are the scatter
// over independent sets of shots.
func TestWidthErrors(t *testing.T) {
	const kappa, amplitude, shots, runs = 0.3, 1.5e-3, 900, 60
	xu, xd := points(-12, -3, 0.5), points(3, 12, 0.5)
	src := newSource(t, xu, xd, 0.02, func(i, j int) float64 {
		return -amplitude * band.Sech2(kappa/2*geometry.Delay(xu[i], xd[j]))
	})
	var values [4][]float64
	var variances [4]float64
	var fitted, covered int
	for k := range runs {
		s := src.sides(t, shots, uint64(k))
		c := band.NewCut(s, geometry, band.NewBins(geometry, s.Xu, s.Xd, 8/kappa))
		w, err := FitWidth(c, kappa, 40, uint64(k))
		if err != nil {
			t.Logf("set %d: %v", k, err)
			continue
		}
		fitted++
		for i, v := range []float64{w.Amplitude, w.Kappa, w.Delay, w.Offset} {
			values[i] = append(values[i], v)
			variances[i] += w.Covariance.At(i, i)
		}
		if _, low, high := w.Temperature(); low < kappa/(2*math.Pi) && kappa/(2*math.Pi) < high {
			covered++
		}
	}
	if fitted < runs-1 {
		t.Errorf("%d of %d sets could be fitted", fitted, runs)
	}
	for i, name := range []string{"amplitude", "κ", "delay", "offset"} {
		mean, sd := stat.MeanStdDev(values[i], nil)
		r := math.Sqrt(variances[i]/float64(fitted)) / sd
		t.Logf("%s %.4g ± %.2g, error over scatter %.2f", name, mean, sd, r)
		if r < 0.7 || r > 1.4 { // a scatter of 60 numbers is known to 9 %; the fit is not quite linear
			t.Errorf("the error of %s is %.2f of the scatter", name, r)
		}
		want := []float64{amplitude, kappa, 0, 0}[i]
		if math.Abs(mean-want) > sd { // the fit's bias: less than one shot set's error
			t.Errorf("%s is %.4g on average, want %.4g ± %.2g", name, mean, want, sd)
		}
	}
	if share := float64(covered) / float64(fitted); share < 0.5 || share > 0.85 { // 0.68 ± 0.06
		t.Errorf("the interval holds the truth in %.0f %% of sets, want 68 %%", 100*share)
	}
}

// The dispersive fit finds the temperature of a band that is drawn from theory.
func TestDispersive(t *testing.T) {
	const truth, shots, runs = 0.03, 1500, 60
	xu, xd := points(-16, -4, 1), points(4, 16, 1)
	theory := bogoliubov.NewBand(up, down, atoms)
	src := newSource(t, xu, xd, 0.004, func(i, j int) float64 { return theory.At(xu[i], xd[j], truth, 0) })
	var values []float64
	var covered int
	var width float64
	for k := range runs {
		s := src.sides(t, shots, uint64(500+k))
		c := band.NewCut(s, geometry, band.NewBins(geometry, s.Xu, s.Xd, 9/(2*math.Pi*truth)))
		d, err := FitDispersive(c, s, geometry, theory, truth*1.3, Sampling{Resamples: 40, Seed: uint64(k)})
		if err != nil {
			t.Fatalf("set %d: %v", k, err)
		}
		value, low, high := d.Temperature()
		if value != d.T || len(d.Samples)+d.Failed != 40 {
			t.Fatalf("%v, %d samples, %d failed", value, len(d.Samples), d.Failed)
		}
		values = append(values, value)
		width += (high - low) / 2 / runs
		if low < truth && truth < high {
			covered++
		}
	}
	mean, sd := stat.MeanStdDev(values, nil)
	t.Logf("T = %.4f ± %.4f, half the interval %.4f, covered %d of %d", mean, sd, width, covered, runs)
	if math.Abs(mean-truth) > sd {
		t.Errorf("T is %.4f on average, want %.4f ± %.4f", mean, truth, sd)
	}
	if sd > 0.3*truth {
		t.Errorf("T scatters by %.4f: the test would pass whatever came out", sd)
	}
	if r := width / sd; r < 0.7 || r > 1.4 {
		t.Errorf("half the interval is %.2f of the scatter", r)
	}
	if share := float64(covered) / runs; share < 0.5 || share > 0.85 {
		t.Errorf("the interval holds the truth in %.0f %% of sets, want 68 %%", 100*share)
	}
}

// Without noise it finds temperature, delay and offset exactly.
func TestDispersiveExact(t *testing.T) {
	const truth, delay, offset = 0.025, 3.0, 4e-5
	xu, xd := points(-16, -4, 0.5), points(4, 16, 0.5)
	theory := bogoliubov.NewBand(up, down, atoms)
	s := newSource(t, xu, xd, 1, func(int, int) float64 { return 0 }).sides(t, 100, 1)
	c := band.NewCut(s, geometry, band.NewBins(geometry, s.Xu, s.Xd, 60))
	for b := range c.Mean {
		c.Mean[b], c.Error[b] = 0, 1e-6
	}
	for _, x := range xu {
		for _, xp := range xd {
			for b, centre := range c.S {
				if d := geometry.Delay(x, xp) - centre; d >= -c.Bins.Width/2-1e-9 && d < c.Bins.Width/2-1e-9 {
					c.Mean[b] += theory.At(x, xp, truth, delay) / float64(c.Pairs[b])
				}
			}
		}
	}
	for b := range c.Mean {
		c.Mean[b] += offset
	}
	d, err := FitDispersive(c, s, geometry, theory, 0.04, Sampling{Resamples: 0, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(d.T/truth-1) > 1e-6 || math.Abs(d.Delay-delay) > 1e-4 || math.Abs(d.Offset-offset) > 1e-9 { // the fit's own tolerance
		t.Errorf("T = %.8g, delay %.8g, offset %.8g, want %v, %v, %v", d.T, d.Delay, d.Offset, truth, delay, offset)
	}
	model := d.Model()
	for b, v := range model {
		if math.Abs(v-c.Mean[b]) > 1e-9 {
			t.Errorf("bin %d: model %v, cut %v", b, v, c.Mean[b])
		}
	}
	for b, v := range d.Predicted(truth) {
		if math.Abs(v+offset-c.Mean[b]) > 1e-8 {
			t.Errorf("bin %d: prediction %v, cut less offset %v", b, v, c.Mean[b]-offset)
		}
	}
	if _, low, high := d.Temperature(); !math.IsNaN(low) || !math.IsNaN(high) {
		t.Errorf("an interval from %v to %v without resamples", low, high)
	}
}

// A width fit reads the temperature of a band only while dispersion is slight:
// T ≪ ω_max and a window near the horizon.
func TestWidthBias(t *testing.T) {
	theory := bogoliubov.NewBand(up, down, atoms)
	last := math.Inf(1)
	for _, c := range []struct {
		T, reach, low, high float64
	}{
		{0.002, 300, 0.99, 1.01},
		{0.004, 160, 0.97, 1.01},
		{0.01, 60, 0.85, 1},
		{0.05, 16, 0.1, 0.6}, // 0.018 for 0.0535 by measurement on an exact map
	} {
		xu, xd := points(-c.reach, -4, c.reach/80), points(4, c.reach, c.reach/80)
		kappa := 2 * math.Pi * c.T
		s := &band.Sides{Xu: xu, Xd: xd, U: mat.NewDense(2, len(xu), nil), D: mat.NewDense(2, len(xd), nil)}
		cut := band.NewCut(s, geometry, band.NewBins(geometry, xu, xd, 9/kappa))
		profile := theory.Over(xu, xd, c.T, 1).Profile(len(cut.S), func(i, j int) int {
			b := int(math.Floor((geometry.Delay(xu[i], xd[j]) - cut.Bins.Low) / cut.Bins.Width))
			if b < 0 || b >= cut.Bins.Count {
				return -1
			}
			return b
		}).At(nil, c.T, 0)
		for b := range cut.Error {
			cut.Error[b] = 1e-5
		}
		bias := WidthBias(cut, profile, kappa) / c.T
		t.Logf("T = %v: %.3f", c.T, bias)
		if !(bias > c.low && bias < c.high) {
			t.Errorf("T = %v: the width reads %.3f of it, want %v to %v", c.T, bias, c.low, c.high)
		}
		if bias > last {
			t.Errorf("T = %v: the width reads %.3f of it, more than at a lower temperature", c.T, bias)
		}
		last = bias
	}
}

func TestInterval(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	var v []float64
	for range 20000 {
		v = append(v, 3+2*r.NormFloat64())
	}
	low, high := interval(v)
	if math.Abs(low-1) > 0.08 || math.Abs(high-5) > 0.08 { // mean ± one standard deviation; a quantile scatters by 0.02
		t.Errorf("from %.3f to %.3f, want 1 to 5", low, high)
	}
	if low, high := interval(v[:19]); !math.IsNaN(low) || !math.IsNaN(high) {
		t.Errorf("from %v to %v of 19 samples", low, high)
	}
}
