package band

import (
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/moments"
)

// planted is a map with a band of known shape: white noise of the given
// variance at each point and, across the horizon,
//
//	−A sech²(κ s/2) + offset,  s = x/up + x′/down.
type planted struct {
	Geometry
	amplitude, kappa, offset, variance float64
}

// strong is a band of a height for which 500 shots give about 16 standard
// deviations.
var strong = planted{Geometry{Up: 0.31, Down: 0.487}, 0.0015, 0.25, 0, 0.02}

// positions of the points on both sides, as one grid that leaves out the
// horizon.
func positions() []float64 {
	var x []float64
	for v := -16.0; v <= -4; v += 0.5 {
		x = append(x, v)
	}
	for v := 4.0; v <= 28; v += 0.75 {
		x = append(x, v)
	}
	return x
}

var window = Window{-16, -4, 4, 28}

func (p planted) at(x, xp float64) float64 {
	return -p.amplitude*Sech2(p.kappa/2*p.Delay(x, xp)) + p.offset
}

// source draws shots with the planted covariance.
type source struct {
	x    []float64
	root mat.TriDense
}

func (p planted) source(t testing.TB) *source {
	t.Helper()
	s := &source{x: positions()}
	n := len(s.x)
	cov := mat.NewSymDense(n, nil)
	for i := range n {
		cov.SetSym(i, i, p.variance)
		for j := i + 1; j < n; j++ {
			if s.x[i] < 0 && s.x[j] > 0 {
				cov.SetSym(i, j, p.at(s.x[i], s.x[j]))
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

// draw returns shots about a density of 2 upstream and 0.5 downstream: the map
// is of relative fluctuations, which are the planted ones.
func (s *source) draw(count int, seed uint64) (moments.Shots, []float64) {
	r := rand.New(rand.NewPCG(seed, 1))
	n := len(s.x)
	z := mat.NewDense(count, n, nil)
	for i := range z.RawMatrix().Data {
		z.RawMatrix().Data[i] = r.NormFloat64()
	}
	var d mat.Dense
	d.Mul(z, s.root.T())
	mean := make([]float64, n)
	for j, x := range s.x {
		mean[j] = 2
		if x > 0 {
			mean[j] = 0.5
		}
	}
	shots := moments.Shots{Pixels: n, Data: make([]float32, 0, count*n)}
	for i := range count {
		for j, v := range d.RawRowView(i) {
			shots.Data = append(shots.Data, float32(mean[j]*(1+v)))
		}
	}
	return shots, mean
}

func (s *source) sides(t testing.TB, count int, seed uint64) *Sides {
	t.Helper()
	shots, mean := s.draw(count, seed)
	sides, err := NewSides(shots, s.x, mean, window)
	if err != nil {
		t.Fatal(err)
	}
	return sides
}

// pattern returns the planted band over the window.
func (p planted) pattern(s *Sides) []float64 {
	var v []float64
	for _, x := range s.Xu {
		for _, xp := range s.Xd {
			v = append(v, p.at(x, xp))
		}
	}
	return v
}

func TestGeometry(t *testing.T) {
	g := Geometry{Up: 0.25, Down: 0.5}
	if g.Slope() != -2 {
		t.Errorf("slope %v", g.Slope())
	}
	if s := g.Delay(-3, 6); s != 0 {
		t.Errorf("delay %v on the line of the slope", s)
	}
	if s := g.Delay(-1, 6); s != 8 {
		t.Errorf("delay %v, want 8", s)
	}
	if w := AgedWindow(g, 100, 4, 0.6); w != (Window{-15, -4, 4, 30}) {
		t.Errorf("window %v", w)
	}
}

func TestSides(t *testing.T) {
	p := strong
	s := p.source(t).sides(t, 4000, 1)
	if s.Shots() != 4000 || s.Xu[0] != -16 || s.Xu[len(s.Xu)-1] != -4 || s.Xd[0] != 4 || s.Xd[len(s.Xd)-1] != 28 {
		t.Fatalf("%d shots, from %v to %v and %v to %v", s.Shots(), s.Xu[0], s.Xu[len(s.Xu)-1], s.Xd[0], s.Xd[len(s.Xd)-1])
	}
	if math.Abs(s.Nu-2) > 1e-12 || math.Abs(s.Nd-0.5) > 1e-12 {
		t.Errorf("densities %v and %v, want 2 and 0.5", s.Nu, s.Nd)
	}
	for k := range s.Xu {
		if m := stat.Mean(mat.Col(nil, k, s.U), nil); math.Abs(m) > 1e-12 {
			t.Fatalf("the mean at %v is %v, want 0", s.Xu[k], m)
		}
	}
	c := s.Correlation()
	// A covariance of M shots scatters by √((C_ii C_jj + C_ij²)/M).
	e := p.variance / math.Sqrt(4000)
	var pulls []float64
	for i, x := range s.Xu {
		for j, xp := range s.Xd {
			pulls = append(pulls, (c.At(i, j)-p.at(x, xp))/e)
		}
	}
	mean, sd := stat.MeanStdDev(pulls, nil)
	if math.Abs(mean) > 4/math.Sqrt(float64(len(pulls))) || math.Abs(sd-1) > 0.1 { // 825 pulls: 0.035 and 0.025
		t.Errorf("pulls are %.3f ± %.3f, want 0 ± 1", mean, sd)
	}
}

// A cell's correlation is the mean of its points'.
func TestCoarse(t *testing.T) {
	s := strong.source(t).sides(t, 50, 2)
	c := s.Coarse(3, 4)
	if len(c.Xu) != 8 || len(c.Xd) != 8 || c.Xu[0] != -15.5 || c.Xd[0] != 4+1.5*0.75 {
		t.Fatalf("cells at %v and %v", c.Xu, c.Xd)
	}
	fine, coarse := s.Correlation(), c.Correlation()
	for i := range 8 {
		for j := range 8 {
			want := 0.0
			for a := range 3 {
				for b := range 4 {
					want += fine.At(3*i+a, 4*j+b) / 12
				}
			}
			if math.Abs(coarse.At(i, j)-want) > 1e-16 {
				t.Fatalf("cell %d, %d is %v, want %v", i, j, coarse.At(i, j), want)
			}
		}
	}
	if c := s.Coarse(100, 0); len(c.Xu) < minPoints || len(c.Xd) != len(s.Xd) {
		t.Errorf("%d and %d cells are left", len(c.Xu), len(c.Xd))
	}
}

func TestWindowErrors(t *testing.T) {
	shots, mean := strong.source(t).draw(10, 3)
	x := positions()
	empty := slices.Clone(mean)
	empty[5] = 0.01
	for _, c := range []struct {
		name string
		mean []float64
		w    Window
		want string
	}{
		{"beyond the grid upstream", mean, Window{-20, -4, 4, 28}, "the upstream window cannot be used: it reaches from -20 to -4, the grid from -16 to 28"},
		{"beyond the grid downstream", mean, Window{-16, -4, 4, 30}, "the downstream window cannot be used: it reaches from 4 to 30, the grid from -16 to 28"},
		{"few points upstream", mean, Window{-7, -4, 4, 28}, "the upstream window cannot be used: from -7 to -4 it has 7 points, at least 8 are needed; record later, so that the band is longer"},
		{"few points downstream", mean, Window{-16, -4, 4, 9}, "the downstream window cannot be used: from 4 to 9 it has 7 points, at least 8 are needed; record later, so that the band is longer"},
		{"turned round", mean, Window{-2, -4, 4, 28}, "the upstream window cannot be used: from -2 to -4 it has 0 points, at least 8 are needed; record later, so that the band is longer"},
		{"no cloud", empty, Window{-16, -4, 4, 28}, "the upstream window cannot be used: there is hardly any cloud at -13.5"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := NewSides(shots, x, c.mean, c.w)
			var window *ErrWindow
			if !errors.As(err, &window) || err.Error() != c.want {
				t.Errorf("error %v, want %s", err, c.want)
			}
		})
	}
}

// A cut is the mean of the map over the pairs of points in each bin.
func TestCutIsMeanOfMap(t *testing.T) {
	s := strong.source(t).sides(t, 60, 4)
	g := strong.Geometry
	bins := NewBins(g, s.Xu, s.Xd, 30)
	if want := math.Max(0.5/g.Up, 0.75/g.Down); math.Abs(bins.Width-want) > 1e-12 || math.Abs(bins.Centre(bins.Count/2)) > 1e-12 {
		t.Errorf("bins %+v, want one in the middle and a width of %v", bins, want)
	}
	c, m := NewCut(s, g, bins), s.Correlation()
	sum, pairs := make([]float64, bins.Count), make([]int, bins.Count)
	for i, x := range s.Xu {
		for j, xp := range s.Xd {
			if b := int(math.Floor((g.Delay(x, xp) - bins.Low) / bins.Width)); b >= 0 && b < bins.Count {
				sum[b] += m.At(i, j)
				pairs[b]++
			}
		}
	}
	at := 0
	for b := range bins.Count {
		if pairs[b] == 0 {
			continue
		}
		if c.S[at] != bins.Centre(b) || c.Pairs[at] != pairs[b] || math.Abs(c.Mean[at]-sum[b]/float64(pairs[b])) > 1e-15 {
			t.Fatalf("at s = %v the mean of %d pairs is %v, want s = %v, %d pairs, %v", c.S[at], c.Pairs[at], c.Mean[at], bins.Centre(b), pairs[b], sum[b]/float64(pairs[b]))
		}
		at++
	}
	if at != len(c.S) {
		t.Errorf("%d bins, want %d", len(c.S), at)
	}
	if got := bins.Centres(); len(got) != bins.Count || got[0] != bins.Centre(0) {
		t.Errorf("centres %v", got)
	}
}

// expected returns the planted band averaged over the pairs of each bin.
func (p planted) expected(s *Sides, bins Bins) []float64 {
	sum, pairs := make([]float64, bins.Count), make([]float64, bins.Count)
	for _, x := range s.Xu {
		for _, xp := range s.Xd {
			if b := int(math.Floor((p.Delay(x, xp) - bins.Low) / bins.Width)); b >= 0 && b < bins.Count {
				sum[b] += p.at(x, xp)
				pairs[b]++
			}
		}
	}
	var mean []float64
	for b, n := range pairs {
		if n > 0 {
			mean = append(mean, sum[b]/n)
		}
	}
	return mean
}

// The cut shows the planted profile, its errors are the scatter over
// independent sets of shots, and so is its covariance.
func TestCut(t *testing.T) {
	const shots, runs = 500, 80
	p, src := strong, strong.source(t)
	var cuts []*Cut
	var bins Bins
	var want []float64
	for k := range runs {
		s := src.sides(t, shots, uint64(100+k))
		bins = NewBins(p.Geometry, s.Xu, s.Xd, 30)
		want = p.expected(s, bins)
		cuts = append(cuts, NewCut(s, p.Geometry, bins))
	}
	n := len(want)
	ratio, neighbour := 0.0, 0.0
	for b := range n {
		var v, e, cov []float64
		for _, c := range cuts {
			v = append(v, c.Mean[b])
			e = append(e, c.Error[b]*c.Error[b])
		}
		mean, sd := stat.MeanStdDev(v, nil)
		if math.Abs(mean-want[b]) > 4*sd/math.Sqrt(runs) {
			t.Errorf("at s = %.3g the cut is %.6f ± %.6f, want %.6f", cuts[0].S[b], mean, sd/math.Sqrt(runs), want[b])
		}
		ratio += stat.Mean(e, nil) / (sd * sd) / float64(n)
		if b+1 < n {
			var next []float64
			for _, c := range cuts {
				next = append(next, c.Mean[b+1])
				cov = append(cov, c.Covariance().At(b, b+1)/math.Sqrt(c.Covariance().At(b, b)*c.Covariance().At(b+1, b+1)))
			}
			neighbour += (stat.Mean(cov, nil) - stat.Correlation(v, next, nil)) / float64(n)
		}
	}
	// 37 variances of 80 numbers each, hardly correlated: 16 %/√37 = 3 %.
	if math.Abs(ratio-1) > 0.1 {
		t.Errorf("the squared errors are %.3f of the scatter", ratio)
	}
	if math.Abs(neighbour) > 0.08 { // correlations of 80 numbers: 0.11/√37 = 0.02
		t.Errorf("correlations of neighbouring bins are off by %.3f", neighbour)
	}
	// The diagonal of the covariance is the square of the error.
	cov := cuts[0].Covariance()
	for b, e := range cuts[0].Error {
		if r := cov.At(b, b) / (e * e); math.Abs(r-1) > 2.0/shots {
			t.Errorf("variance over squared error is %v", r)
		}
	}
}

// Resampled cuts scatter by the cut's own errors about it.
func TestResample(t *testing.T) {
	s := strong.source(t).sides(t, 300, 5)
	c := NewCut(s, strong.Geometry, NewBins(strong.Geometry, s.Xu, s.Xd, 20))
	r := rand.New(rand.NewPCG(1, 1))
	const resamples = 600
	samples := make([][]float64, len(c.S))
	dst := make([]float64, len(c.S))
	for range resamples {
		c.Resample(dst, r)
		for b, v := range dst {
			samples[b] = append(samples[b], v)
		}
	}
	for b := range samples {
		mean, sd := stat.MeanStdDev(samples[b], nil)
		if math.Abs(mean-c.Mean[b]) > 4*c.Error[b]/math.Sqrt(resamples) {
			t.Errorf("bin %d: resamples have mean %v, the cut %v ± %v", b, mean, c.Mean[b], c.Error[b])
		}
		if q := sd / c.Error[b]; math.Abs(q-1) > 0.12 { // 600 samples: 3 %
			t.Errorf("bin %d: resamples scatter by %.3f of the error", b, q)
		}
	}
}
