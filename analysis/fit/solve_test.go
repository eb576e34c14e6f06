package fit

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// A straight line has a closed form, covariance included.
func TestLine(t *testing.T) {
	x := []float64{0, 1, 2, 3, 4, 7}
	y := []float64{1.1, 2.9, 5.2, 6.8, 9.1, 15.2}
	sigma := []float64{0.1, 0.2, 0.1, 0.3, 0.1, 0.2}
	var s, sx, sy, sxx, sxy float64
	for i := range x {
		w := 1 / (sigma[i] * sigma[i])
		s, sx, sy, sxx, sxy = s+w, sx+w*x[i], sy+w*y[i], sxx+w*x[i]*x[i], sxy+w*x[i]*y[i]
	}
	det := s*sxx - sx*sx
	want := []float64{(sxx*sy - sx*sxy) / det, (s*sxy - sx*sy) / det}
	covariance := mat.NewSymDense(2, []float64{sxx / det, -sx / det, -sx / det, s / det})

	r, err := Solve(Problem{
		Residuals: func(dst, p []float64) {
			for i := range x {
				dst[i] = (p[0] + p[1]*x[i] - y[i]) / sigma[i]
			}
		},
		Count: len(x), Start: []float64{0, 0},
	}, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for j := range want {
		if relative(r.Params[j], want[j]) > 1e-9 { // differences
			t.Errorf("parameter %d: %.12g, want %.12g", j, r.Params[j], want[j])
		}
	}
	if !mat.EqualApprox(r.Covariance, covariance, 1e-9) {
		t.Errorf("covariance %v, want %v", mat.Formatted(r.Covariance), mat.Formatted(covariance))
	}
	covariance.ScaleSym(r.ChiSquare/4, covariance)
	if r.DegreesOfFreedom != 4 || !mat.EqualApprox(r.ScaledCovariance(), covariance, 1e-9) {
		t.Errorf("scaled covariance %v, want %v", mat.Formatted(r.ScaledCovariance()), mat.Formatted(covariance))
	}
}

// Fits of many noisy data sets must scatter as the covariance of one says.
func TestCovarianceIsTheScatter(t *testing.T) {
	const sets, sigma = 2000, 0.02
	random := rand.New(rand.NewPCG(7, 8))
	y := make([]float64, 30)
	model := func(i int, p []float64) float64 {
		c := math.Cosh(p[1] * (float64(i) - 15) / 10)
		return p[0]/(c*c) + p[2]
	}
	truth := []float64{-1, 1.3, 0.1}
	var sum, square [3]float64
	var claimed [3]float64
	for range sets {
		for i := range y {
			y[i] = model(i, truth) + sigma*random.NormFloat64()
		}
		r, err := Solve(Problem{
			Residuals: func(dst, p []float64) {
				for i := range y {
					dst[i] = (model(i, p) - y[i]) / sigma
				}
			},
			Count: len(y), Start: []float64{-0.5, 1, 0},
		}, Options{})
		if err != nil {
			t.Fatal(err)
		}
		for j, p := range r.Params {
			d := p - truth[j]
			sum[j], square[j] = sum[j]+d, square[j]+d*d
			claimed[j] += math.Sqrt(r.Covariance.At(j, j)) / sets
		}
	}
	for j := range sum {
		deviation := math.Sqrt(square[j] / sets)
		// the spread of 2000 is known to 1/√4000 = 1.6 %; four times that
		if relative(deviation, claimed[j]) > 0.064 {
			t.Errorf("parameter %d scatters by %.4g, the covariance says %.4g", j, deviation, claimed[j])
		}
		if math.Abs(sum[j]/sets) > 5*deviation/math.Sqrt(sets) {
			t.Errorf("parameter %d is off by %.3g on average", j, sum[j]/sets)
		}
	}
}

func TestBounds(t *testing.T) {
	inf := math.Inf(1)
	rosenbrock := minpackProblems[0].residuals
	misra := nistProblems[0]
	cases := []struct {
		name         string
		problem      Problem
		lower, upper []float64
		want         []float64
		held         []bool
	}{
		// (1−x)² + 100(y−x²)² with x ≤ ½: y = x², x = ½.
		{"wall before the minimum", Problem{Residuals: rosenbrock, Count: 2, Start: []float64{-1.2, 1}},
			nil, []float64{0.5, inf}, []float64{0.5, 0.25}, []bool{true, false}},
		{"wall out of the way", Problem{Residuals: rosenbrock, Count: 2, Start: []float64{-1.2, 1}},
			[]float64{-5, -5}, []float64{5, 5}, []float64{1, 1}, []bool{false, false}},
		// y ≤ ¼: d/dx[(1−x)² + 100(¼−x²)²] = 0 at 200x³ − 49x − 1 = 0, x = 0.5048843...
		{"wall across the valley", Problem{Residuals: rosenbrock, Count: 2, Start: []float64{-1.2, 0}},
			nil, []float64{inf, 0.25}, []float64{cubicRoot(), 0.25}, []bool{false, true}},
		{"start on the wall", Problem{Residuals: rosenbrock, Count: 2, Start: []float64{0.5, 1}},
			nil, []float64{0.5, inf}, []float64{0.5, 0.25}, []bool{true, false}},
		{"start on a wall to leave", Problem{Residuals: rosenbrock, Count: 2, Start: []float64{-2, 3}},
			[]float64{-2, -inf}, nil, []float64{1, 1}, []bool{false, false}},
		{"held fixed", Problem{Residuals: rosenbrock, Count: 2, Start: []float64{-1.2, 1}},
			[]float64{-1.2, -inf}, []float64{-1.2, inf}, []float64{-1.2, 1.44}, []bool{true, false}},
		{"a certified problem inside", misra.problem([]float64{500, 1e-4}),
			[]float64{0, 0}, []float64{1000, 1}, misra.certified, []bool{false, false}},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			p := c.problem
			p.Lower, p.Upper = c.lower, c.upper
			inner := p.Residuals
			p.Residuals = func(dst, x []float64) {
				for j, v := range x {
					if lo, hi := p.bounds(j); v < lo || v > hi {
						t.Fatalf("asked for %v, out of bounds", x)
					}
				}
				inner(dst, x)
			}
			r, err := Solve(p, Options{})
			if err != nil {
				t.Fatal(err)
			}
			for j := range c.want {
				if math.Abs(r.Params[j]-c.want[j]) > 1e-7*max(1e-4, math.Abs(c.want[j])) || r.AtBound[j] != c.held[j] {
					t.Errorf("parameters %.10g, held %v; want %.10g, held %v", r.Params, r.AtBound, c.want, c.held)
				}
				if v := r.Covariance.At(j, j); (v == 0) != c.held[j] {
					t.Errorf("variance %d is %g, held %v", j, v, c.held[j])
				}
			}
		})
	}
}

// cubicRoot solves 200x³ − 49x − 1 = 0 by Newton's method from ½.
func cubicRoot() float64 {
	x := 0.5
	for range 20 {
		x -= (200*x*x*x - 49*x - 1) / (600*x*x - 49)
	}
	return x
}

func TestErrors(t *testing.T) {
	line := func(dst, p []float64) {
		for i := range dst {
			dst[i] = p[0] + p[1]*float64(i) - 1
		}
	}
	cases := []struct {
		name    string
		problem Problem
		options Options
		kind    error
		says    string
	}{
		{"two parameters, one point", Problem{Residuals: line, Count: 1, Start: []float64{0, 0}}, Options{},
			ErrTooFewPoints, "1 points for 2 parameters"},
		{"no points", Problem{Residuals: line, Count: 0, Start: []float64{0, 0}}, Options{}, ErrTooFewPoints, "0 points"},
		{"start NaN", Problem{Residuals: line, Count: 3, Start: []float64{0, math.NaN()}}, Options{},
			ErrNotFinite, "parameter 1 starts at NaN"},
		{"start below its bound", Problem{Residuals: line, Count: 3, Start: []float64{0, 0}, Lower: []float64{1, 0}}, Options{},
			ErrOutOfBounds, "parameter 0 starts at 0, its bounds are 1 and +Inf"},
		{"bounds crossed", Problem{Residuals: line, Count: 3, Start: []float64{0, 0}, Lower: []float64{1, 0}, Upper: []float64{-1, 0}}, Options{},
			ErrOutOfBounds, "its bounds are 1 and -1"},
		{"residual NaN at the start", Problem{Residuals: func(dst, p []float64) { dst[0] = math.Log(p[0]) }, Count: 1, Start: []float64{-1}}, Options{},
			ErrNotFinite, "at the start [-1]"},
		{"residual infinite at the start", Problem{Residuals: func(dst, p []float64) { dst[0] = 1 / p[0] }, Count: 1, Start: []float64{0}}, Options{},
			ErrNotFinite, "at the start [0]"},
		{"derivative infinite", Problem{Residuals: line, Count: 3, Start: []float64{0, 0},
			Jacobian: func(dst *mat.Dense, p []float64) { dst.Set(2, 1, math.Inf(1)) }}, Options{},
			ErrNotFinite, "derivative of residual 2 by parameter 1"},
		{"the minimum behind a wall of NaN", Problem{Residuals: func(dst, p []float64) {
			dst[0], dst[1] = p[0]-5, 1
			if p[0] > 2 {
				dst[0] = math.NaN()
			}
		}, Count: 2, Start: []float64{0}, Jacobian: func(dst *mat.Dense, p []float64) {
			dst.SetCol(0, []float64{1, 0})
		}}, Options{},
			ErrNotFinite, "just beyond"},
		{"two parameters that do the same", Problem{Residuals: func(dst, p []float64) {
			for i := range dst {
				dst[i] = (p[0]+p[1])*float64(i) - 1
			}
		}, Count: 5, Start: []float64{0, 3}}, Options{},
			ErrSingular, "1 of 2 are independent"},
		{"a parameter that does nothing", Problem{Residuals: func(dst, p []float64) {
			for i := range dst {
				dst[i] = p[1]*float64(i) - 1
			}
		}, Count: 5, Start: []float64{0, 3}}, Options{},
			ErrSingular, "1 of 2"},
		{"iterations used up", Problem{Residuals: minpackProblems[0].residuals, Count: 2, Start: []float64{-1.2, 1}}, Options{MaxIterations: 3},
			ErrNoConvergence, "in 3 iterations"},
		{"derivatives of the wrong sign", Problem{Residuals: line, Count: 3, Start: []float64{0, 5},
			Jacobian: func(dst *mat.Dense, p []float64) {
				for i := range 3 {
					dst.Set(i, 0, -1)
					dst.Set(i, 1, -float64(i))
				}
			}}, Options{},
			ErrNoConvergence, "stuck"},
		{"a staircase", Problem{Residuals: func(dst, p []float64) { dst[0], dst[1] = math.Floor(p[0]), 1 }, Count: 2, Start: []float64{7.5}}, Options{},
			ErrSingular, "0 of 1"},
		{"no minimum at all", Problem{Residuals: func(dst, p []float64) { dst[0], dst[1] = math.Exp(-p[0]), math.Exp(-p[0]) }, Count: 2, Start: []float64{0}}, Options{MaxIterations: 50},
			ErrNoConvergence, "in 50 iterations"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			r, err := Solve(c.problem, c.options)
			if !errors.Is(err, c.kind) || !strings.Contains(err.Error(), c.says) {
				t.Fatalf("error %v\nwant one that wraps %q and says %q", err, c.kind, c.says)
			}
			if r.Covariance != nil || r.ScaledCovariance() != nil {
				t.Error("a covariance comes with the error")
			}
		})
	}
}

func TestMistakesPanic(t *testing.T) {
	good := Problem{Residuals: minpackProblems[0].residuals, Count: 2, Start: []float64{0, 0}}
	cases := []struct {
		name  string
		spoil func(p *Problem, o *Options)
	}{
		{"no residuals", func(p *Problem, o *Options) { p.Residuals = nil }},
		{"no parameters", func(p *Problem, o *Options) { p.Start = nil }},
		{"one bound for two", func(p *Problem, o *Options) { p.Upper = []float64{1} }},
		{"scale of zero", func(p *Problem, o *Options) { p.Scale = []float64{1, 0} }},
		{"negative tolerance", func(p *Problem, o *Options) { o.StepTolerance = -1 }},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			defer func() {
				if s, ok := recover().(string); !ok || !strings.HasPrefix(s, "fit: ") {
					t.Errorf("recovered %q, want a panic of fit", s)
				}
			}()
			p, o := good, Options{}
			c.spoil(&p, &o)
			Solve(p, o)
		})
	}
}

// A wall of NaN away from the minimum must only shorten the steps.
func TestForbiddenRegionIsAvoided(t *testing.T) {
	r, err := Solve(Problem{
		Residuals: func(dst, p []float64) {
			for i := range dst {
				x := float64(i + 1)
				dst[i] = math.Log(p[0]*x) - math.Log(2*x) // NaN for p < 0, where the first step leads
			}
		},
		Count: 4, Start: []float64{20},
	}, Options{})
	if err != nil || math.Abs(r.Params[0]-2) > 1e-9 {
		t.Errorf("parameter %v, %v; want 2", r.Params, err)
	}
}

// The unit of a parameter must not change the course, but for rounding: it
// changes the order in which the columns are factorised.
func TestUnitsDoNotMatter(t *testing.T) {
	q := nistProblems[0]
	var first Result
	for i, unit := range []float64{1, 1e12, 1e-12} {
		r, err := Solve(Problem{
			Residuals: func(dst, b []float64) {
				for i, x := range q.x {
					dst[i] = q.model(x, []float64{b[0], b[1] * unit}) - q.y[i]
				}
			},
			Count: len(q.x), Start: []float64{500, 1e-4 / unit},
		}, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if i == 0 {
			first = r
		} else if math.Abs(float64(r.Iterations-first.Iterations)) > 2 || relative(r.Params[1]*unit, first.Params[1]) > 1e-9 {
			t.Errorf("unit %g: %d iterations to %.17g, else %d to %.17g", unit, r.Iterations, r.Params[1]*unit, first.Iterations, first.Params[1])
		}
	}
}

func TestStartIsKeptAndLoopAllocatesNothing(t *testing.T) {
	q := nistProblems[2]
	start := append([]float64(nil), q.starts[0]...)
	solve := func(iterations int) {
		Solve(q.problem(start), Options{MaxIterations: iterations})
	}
	few := testing.AllocsPerRun(20, func() { solve(5) })
	many := testing.AllocsPerRun(20, func() { solve(200) }) // both end without convergence
	if few != many {
		t.Errorf("%v allocations in 5 iterations, %v in 200", few, many)
	}
	for j := range start {
		if start[j] != q.starts[0][j] {
			t.Error("Start was changed")
		}
	}
}

// The factorisation against gonum's, which does not pivot: RᵀR must be AᵀA, and
// (AᵀA)⁻¹ the inverse.
func TestFactor(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for _, size := range [][2]int{{1, 1}, {4, 4}, {9, 3}, {30, 7}} {
		m, n := size[0], size[1]
		a := mat.NewDense(m, n, nil)
		f := newFactor(m, n)
		for j := range n {
			for i := range m {
				a.Set(i, j, random.NormFloat64()*math.Pow(10, float64(j)))
			}
			mat.Col(f.columns[j], j, a)
		}
		b := make([]float64, m)
		b[0] = 1
		f.factorise(b)
		var ata, inverse mat.Dense
		ata.Mul(a.T(), a)
		if err := inverse.Inverse(&ata); err != nil {
			if _, bad := err.(mat.Condition); !bad {
				t.Fatal(err)
			}
		}
		ours := mat.NewSymDense(n, nil)
		f.inverse(func(i, j int, v float64) { ours.SetSym(i, j, v) })
		for i := range n {
			for j := range n {
				sum := 0.0
				for k := range min(i, j) + 1 {
					sum += f.at(k, i) * f.at(k, j)
				}
				p, q := f.pivot[i], f.pivot[j]
				scale := f.norm[p] * f.norm[q]
				if math.Abs(sum-ata.At(p, q)) > 1e-14*float64(m)*scale {
					t.Errorf("%v: RᵀR at %d, %d is %g, AᵀA %g", size, i, j, sum, ata.At(p, q))
				}
				// the normal equations square the condition, up to 1e6 here
				if d := math.Sqrt(ours.At(p, p) * ours.At(q, q)); math.Abs(ours.At(p, q)-inverse.At(p, q)) > 1e-6*d {
					t.Errorf("%v: inverse at %d, %d is %g, want %g", size, p, q, ours.At(p, q), inverse.At(p, q))
				}
			}
		}
	}
}

func BenchmarkSolve(b *testing.B) {
	q := nistProblems[5]
	for b.Loop() {
		if _, err := Solve(q.problem(q.starts[1]), Options{}); err != nil {
			b.Fatal(err)
		}
	}
}
