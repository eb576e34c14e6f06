package correlation

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/moments"
)

// sample draws shots of |ψ|² from draw, which fills a field.
func sample(shots, points int, seed uint64, draw func(psi []complex128, normal func() float64)) moments.Shots {
	r := rand.New(rand.NewPCG(seed, 1))
	s := moments.Shots{Pixels: points}
	psi := make([]complex128, points)
	for range shots {
		draw(psi, r.NormFloat64)
		for _, z := range psi {
			s.Data = append(s.Data, float32(real(z)*real(z)+imag(z)*imag(z)))
		}
	}
	return s
}

// densities draws shots of Gaussian densities about mean: mean + L z.
func densities(shots int, mean []float64, root *mat.TriDense, seed uint64) moments.Shots {
	r := rand.New(rand.NewPCG(seed, 2))
	s := moments.Shots{Pixels: len(mean)}
	z := mat.NewVecDense(len(mean), nil)
	for range shots {
		for i := range len(mean) {
			z.SetVec(i, r.NormFloat64())
		}
		var d mat.VecDense
		d.MulVec(root, z)
		for i, m := range mean {
			s.Data = append(s.Data, float32(m+d.AtVec(i)))
		}
	}
	return s
}

func newMap(t testing.TB, shots moments.Shots, o Ordering) *Map {
	t.Helper()
	s := moments.NewSums(shots.Pixels)
	if err := s.Add(shots); err != nil {
		t.Fatal(err)
	}
	x := make([]float64, shots.Pixels)
	for i := range x {
		x[i] = float64(i)
	}
	m, err := New(s, shots, x, o)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// vacuum returns half a quantum on a point: complex, ⟨|z|²⟩ = s/2.
func vacuum(s float64, normal func() float64) complex128 {
	return complex(math.Sqrt(s)/2*normal(), math.Sqrt(s)/2*normal())
}

// agrees demands that g₂ − 1 is want within its own errors: no pixel more than
// 4.5 of them off (of a few hundred Gaussian ones the farthest is at 3 to 4),
// scattered by 1 ± 0.15 of them, and the mean over the diagonal, where normal
// ordering acts, within 4 of its own.
func agrees(t *testing.T, m *Map, want func(i, j int) float64) {
	t.Helper()
	var pulls []float64
	diagonal, variance := 0.0, 0.0
	n := len(m.X)
	for i := range n {
		for j := i; j < n; j++ {
			if m.G2.At(i, j) != m.G2.At(j, i) || m.Error.At(i, j) != m.Error.At(j, i) {
				t.Fatalf("the map is not symmetric at %d, %d", i, j)
			}
			off := m.G2.At(i, j) - want(i, j)
			pull := off / m.Error.At(i, j)
			if !(math.Abs(pull) < 4.5) {
				t.Errorf("g₂−1 at %d, %d is %.5f ± %.5f, want %.5f: %.1f standard errors off", i, j, m.G2.At(i, j), m.Error.At(i, j), want(i, j), pull)
			}
			pulls = append(pulls, pull)
			if i == j {
				diagonal += off
				variance += m.Error.At(i, j) * m.Error.At(i, j)
			}
		}
	}
	if pull := diagonal / math.Sqrt(variance); !(math.Abs(pull) < 4) {
		t.Errorf("the diagonal is off by %.1f standard errors", pull)
	}
	if sd := stat.StdDev(pulls, nil); !(math.Abs(sd-1) < 0.15) {
		t.Errorf("pulls scatter by %.2f, want 1", sd)
	}
}

// A coherent state has no normally ordered fluctuations whatever its density
// and phase: the vacuum noise that the Wigner sample has must go, and only it.
func TestCoherentState(t *testing.T) {
	const points, shots, s = 24, 4000, 0.3
	density := func(j int) float64 { return 1 + 0.5*math.Sin(float64(j)) }
	m := newMap(t, sample(shots, points, 1, func(psi []complex128, normal func() float64) {
		for j := range psi {
			psi[j] = cmplx.Rect(math.Sqrt(density(j)), 0.7*float64(j)) + vacuum(s, normal)
		}
	}), Ordering{Commutator: s})
	agrees(t, m, func(i, j int) float64 { return 0 })
	for j, n := range m.MeanDensity {
		// variance of |ψ|² is ns + s²/4
		if e := math.Sqrt((density(j)*s + s*s/4) / shots); math.Abs(n-density(j)) > 4*e {
			t.Errorf("density at %d is %.4f ± %.4f, want %.4f", j, n, e, density(j))
		}
	}
	if m.Shots != shots {
		t.Errorf("%d shots", m.Shots)
	}
}

// A single mode in a thermal state bunches wherever the mode is: g₂ = 2, and
// there is no map at the nodes. All other modes are empty.
func TestThermalMode(t *testing.T) {
	const points, shots, s, quanta = 16, 4000, 0.2, 40.0
	mode := make([]float64, points) // normalised to Σ mode² = 1
	for j := range mode {
		mode[j] = math.Sqrt2 / 4 * math.Cos(2*math.Pi*float64(j)/points)
	}
	m := newMap(t, sample(shots, points, 2, func(psi []complex128, normal func() float64) {
		// Vacuum everywhere; what of it is in the mode is replaced by ½ + quanta.
		inMode := complex128(0)
		for j := range psi {
			psi[j] = vacuum(s, normal)
			inMode += psi[j] * complex(mode[j], 0)
		}
		sd := math.Sqrt(s * (0.5 + quanta) / 2)
		b := complex(sd*normal(), sd*normal())
		for j := range psi {
			psi[j] += (b - inMode) * complex(mode[j], 0)
		}
	}), Ordering{Commutator: s})
	peak := s * quanta / 8
	for i := range points {
		for j := range points {
			g, e := m.G2.At(i, j), m.Error.At(i, j)
			if i%8 == 4 || j%8 == 4 { // a node of the cosine
				if !math.IsNaN(g) || !math.IsNaN(e) {
					t.Errorf("g₂−1 at the node %d, %d is %v ± %v, want NaN", i, j, g, e)
				}
				continue
			}
			if math.Abs(g-1) > 4*e || e > 0.15 {
				t.Errorf("g₂−1 at %d, %d is %.3f ± %.3f, want 1", i, j, g, e)
			}
		}
		want := peak * math.Pow(math.Cos(2*math.Pi*float64(i)/points), 2)
		if e := (want + s/2) / math.Sqrt(shots); math.Abs(m.MeanDensity[i]-want) > 4*e {
			t.Errorf("density at %d is %.4f ± %.4f, want %.4f", i, m.MeanDensity[i], e, want)
		}
	}
}

// Densities drawn from a known covariance.
func TestKnownCovariance(t *testing.T) {
	const points, shots = 20, 3000
	mean, cov := make([]float64, points), mat.NewSymDense(points, nil)
	for i := range points {
		mean[i] = 1 + 0.03*float64(i)
		for j := i; j < points; j++ {
			c := 0.01 * math.Exp(-math.Abs(float64(i-j))/3)
			if i+j == points-1 {
				c -= 0.004 // as a band across the map
			}
			if i == j {
				c += 0.004
			}
			cov.SetSym(i, j, c)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		t.Fatal("not a covariance")
	}
	var root mat.TriDense
	chol.LTo(&root)
	m := newMap(t, densities(shots, mean, &root, 3), Ordering{})
	for i := range points {
		for j := range points {
			want := cov.At(i, j) / (mean[i] * mean[j])
			if g, e := m.G2.At(i, j), m.Error.At(i, j); math.Abs(g-want) > 4.5*e {
				t.Errorf("g₂−1 at %d, %d is %.5f ± %.5f, want %.5f", i, j, g, e, want)
			}
			// Of Gaussian numbers: var(cov) = (C_ii C_jj + C_ij²)/M.
			e := math.Sqrt((cov.At(i, i)*cov.At(j, j)+cov.At(i, j)*cov.At(i, j))/shots) / (mean[i] * mean[j])
			if r := m.Error.At(i, j) / e; math.Abs(r-1) > 0.15 { // a fourth moment of 3000 shots scatters by 3 %
				t.Errorf("error at %d, %d is %.3f of the Gaussian one", i, j, r)
			}
		}
	}
}

// The error of a pixel is the scatter of its value over independent runs.
func TestError(t *testing.T) {
	const points, shots, runs, s = 4, 200, 400, 0.1
	var g, e [points][points][]float64
	for k := range runs {
		m := newMap(t, sample(shots, points, uint64(100+k), func(psi []complex128, normal func() float64) {
			common := 0.06 * normal() // so that points are correlated
			for j := range psi {
				psi[j] = complex(1+common, 0) + vacuum(s, normal)
			}
		}), Ordering{Commutator: s})
		for i := range points {
			for j := range points {
				g[i][j] = append(g[i][j], m.G2.At(i, j))
				e[i][j] = append(e[i][j], m.Error.At(i, j)*m.Error.At(i, j))
			}
		}
	}
	for i := range points {
		for j := i; j < points; j++ {
			mean, scatter := stat.MeanStdDev(g[i][j], nil)
			reported := math.Sqrt(stat.Mean(e[i][j], nil))
			// A scatter of 400 numbers is known to 3.5 %; 4 of those.
			if r := reported / scatter; math.Abs(r-1) > 0.14 {
				t.Errorf("at %d, %d the error is %.3f of the scatter", i, j, r)
			}
			// n = (1 + 0.06z)²: mean 1 + a², variance 4a² + 2a⁴ with a = 0.06.
			want := (4*0.0036 + 2*0.0036*0.0036) / (1.0036 * 1.0036)
			// The mean of 200 shots is in the denominator, which biases g₂ by
			// up to 3·var/200.
			if bias := 3 * want / shots; math.Abs(mean-want) > 4*scatter/math.Sqrt(runs)+bias {
				t.Errorf("at %d, %d g₂−1 is %.4f ± %.4f, want %.4f", i, j, mean, scatter/math.Sqrt(runs), want)
			}
		}
	}
}

// Noise in part of the grid's waves has a commutator that is not diagonal, and
// with it corrections off the diagonal. The condensate moves, so its coherence
// turns sign from point to point.
func TestCutoff(t *testing.T) {
	const points, shots, waves, turns, s = 24, 6000, 4, 3, 0.3
	kernel := func(i, j int) float64 {
		sum := 0.0
		for q := -waves; q <= waves; q++ {
			sum += math.Cos(2 * math.Pi * float64(q*(i-j)) / points)
		}
		return s / (2*waves + 1) * sum
	}
	coherence := func(i, j int) float64 { return math.Cos(2 * math.Pi * float64(turns*(i-j)) / points) }
	shotsOf := sample(shots, points, 5, func(psi []complex128, normal func() float64) {
		for j := range psi {
			psi[j] = cmplx.Rect(1, 2*math.Pi*float64(turns*j)/points)
		}
		for q := -waves; q <= waves; q++ {
			b := vacuum(s/(2*waves+1), normal)
			for j := range psi {
				psi[j] += b * cmplx.Rect(1, 2*math.Pi*float64(q*j)/points)
			}
		}
	})
	m := newMap(t, shotsOf, Ordering{Commutator: s, Kernel: kernel, Coherence: coherence})
	for i := range points {
		for j := range points {
			if g, e := m.G2.At(i, j), m.Error.At(i, j); !(math.Abs(g) < 4*e) {
				t.Errorf("g₂−1 at %d, %d is %.4f ± %.4f, want 0", i, j, g, e)
			}
		}
	}
	// Without the kernel neighbours seem correlated: this is what the test
	// above sees vanish.
	bare := newMap(t, shotsOf, Ordering{Commutator: s})
	if g, e := bare.G2.At(0, 1), bare.Error.At(0, 1); g < 10*e {
		t.Errorf("without the kernel g₂−1 of neighbours is %.4f ± %.4f, want much more than nought", g, e)
	}
}

// Outside the cloud there is no g₂, and the rest of the map does not mind.
func TestOutsideTheCloud(t *testing.T) {
	const points, shots, s = 10, 500, 0.01
	thin := func(j int) bool { return j < 2 || j == 9 }
	m := newMap(t, sample(shots, points, 6, func(psi []complex128, normal func() float64) {
		for j := range psi {
			psi[j] = vacuum(s, normal)
			if !thin(j) {
				psi[j]++
			}
		}
	}), Ordering{Commutator: s})
	for i := range points {
		for j := range points {
			outside := thin(i) || thin(j)
			if math.IsNaN(m.G2.At(i, j)) != outside || math.IsNaN(m.Error.At(i, j)) != outside {
				t.Errorf("g₂−1 at %d, %d is %v ± %v", i, j, m.G2.At(i, j), m.Error.At(i, j))
			}
		}
	}
}

func TestTooFewShots(t *testing.T) {
	shots := moments.Shots{Pixels: 2, Data: []float32{1, 1}}
	s := moments.NewSums(2)
	if err := s.Add(shots); err != nil {
		t.Fatal(err)
	}
	const want = "a correlation map needs at least 2 trajectories, there are 1"
	if _, err := New(s, shots, []float64{0, 1}, Ordering{}); err == nil || err.Error() != want {
		t.Errorf("error %v, want %s", err, want)
	}
}
