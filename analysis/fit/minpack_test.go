package fit

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// Problems of J. J. Moré, B. S. Garbow, K. E. Hillstrom, "Testing unconstrained
// optimization software", ACM Trans. Math. Softw. 7, 17 (1981), with the
// standard start and the minimal sums of squares given there; typed from
// memory and checked by reaching those sums.
type minpack struct {
	name      string
	residuals func(r, x []float64)
	count     int
	start     []float64
	least     float64   // published, 6 digits; 0 is exact
	at        []float64 // published minimum, nil where none is given
	err       error     // what is wrong with the minimum itself
}

var bardY = []float64{0.14, 0.18, 0.22, 0.25, 0.29, 0.32, 0.35, 0.39, 0.37, 0.58, 0.73, 0.96, 1.34, 2.10, 4.39}

var osborneY = []float64{0.844, 0.908, 0.932, 0.936, 0.925, 0.908, 0.881, 0.850, 0.818, 0.784, 0.751, 0.718, 0.685, 0.658,
	0.628, 0.603, 0.580, 0.558, 0.538, 0.522, 0.506, 0.490, 0.478, 0.467, 0.457, 0.448, 0.438, 0.431, 0.424, 0.420, 0.414,
	0.411, 0.406}

var minpackProblems = []minpack{
	{
		name: "Rosenbrock",
		residuals: func(r, x []float64) {
			r[0], r[1] = 10*(x[1]-x[0]*x[0]), 1-x[0]
		},
		count: 2, start: []float64{-1.2, 1}, at: []float64{1, 1},
	},
	{
		name: "helical valley",
		residuals: func(r, x []float64) {
			turn := math.Atan(x[1]/x[0]) / (2 * math.Pi)
			if x[0] < 0 {
				turn += 0.5
			}
			r[0], r[1], r[2] = 10*(x[2]-10*turn), 10*(math.Hypot(x[0], x[1])-1), x[2]
		},
		count: 3, start: []float64{-1, 0, 0}, at: []float64{1, 0, 0},
	},
	{
		name: "Powell singular", // its Jacobian has rank 2 at the minimum
		residuals: func(r, x []float64) {
			r[0], r[1] = x[0]+10*x[1], math.Sqrt(5)*(x[2]-x[3])
			r[2], r[3] = (x[1]-2*x[2])*(x[1]-2*x[2]), math.Sqrt(10)*(x[0]-x[3])*(x[0]-x[3])
		},
		count: 4, start: []float64{3, -1, 0, 1}, at: []float64{0, 0, 0, 0}, err: ErrSingular,
	},
	{
		name: "Freudenstein and Roth", // a local minimum, where the square Jacobian must be singular
		residuals: func(r, x []float64) {
			r[0] = -13 + x[0] + ((5-x[1])*x[1]-2)*x[1]
			r[1] = -29 + x[0] + ((x[1]+1)*x[1]-14)*x[1]
		},
		count: 2, start: []float64{0.5, -2}, least: 48.9842, at: []float64{11.4128, -0.896805}, err: ErrSingular,
	},
	{
		name: "Bard",
		residuals: func(r, x []float64) {
			for i, y := range bardY {
				u := float64(i + 1)
				v := 16 - u
				r[i] = y - (x[0] + u/(v*x[1]+min(u, v)*x[2]))
			}
		},
		count: 15, start: []float64{1, 1, 1}, least: 8.21487e-3,
	},
	{
		name: "Kowalik and Osborne",
		residuals: func(r, x []float64) {
			q := nistProblems[2] // MGH09 is this problem
			for i, u := range q.x {
				r[i] = q.y[i] - q.model(u, x)
			}
		},
		count: 11, start: []float64{0.25, 0.39, 0.415, 0.39}, least: 3.07505e-4,
	},
	{
		name: "Meyer",
		residuals: func(r, x []float64) {
			q := nistProblems[3] // MGH10 is this problem
			for i, u := range q.x {
				r[i] = q.model(u, x) - q.y[i]
			}
		},
		count: 16, start: []float64{0.02, 4000, 250}, least: 87.9458,
	},
	{
		name: "Osborne 1",
		residuals: func(r, x []float64) {
			for i, y := range osborneY {
				u := 10 * float64(i)
				r[i] = y - (x[0] + x[1]*math.Exp(-u*x[3]) + x[2]*math.Exp(-u*x[4]))
			}
		},
		count: 33, start: []float64{0.5, 1.5, -1, 0.01, 0.02}, least: 5.46489e-5,
	},
}

func TestMINPACK(t *testing.T) {
	for i, q := range minpackProblems {
		t.Run(q.name, func(t *testing.T) {
			r, err := Solve(Problem{Residuals: q.residuals, Count: q.count, Start: q.start}, Options{})
			t.Logf("χ² %.6g at %.6g, %d iterations, condition %.1e, %v", r.ChiSquare, r.Params, r.Iterations, r.Condition, r.Status)
			if !errors.Is(err, q.err) {
				t.Errorf("error %v, want %v", err, q.err)
			}
			if (r.Covariance != nil) != (err == nil) {
				t.Error("a covariance comes with an error, or none without")
			}
			if q.least == 0 && r.ChiSquare > 1e-20 { // squares of residuals of rounding size
				t.Errorf("χ² %.3g, want zero", r.ChiSquare)
			}
			if q.least != 0 && relative(r.ChiSquare, q.least) > 3.3e-6 { // one unit of the six published digits, some of which are cut, not rounded
				t.Errorf("χ² %.8g, want %.6g", r.ChiSquare, q.least)
			}
			for j, want := range q.at {
				// digits published; Freudenstein and Roth's valley is flat
				if math.Abs(r.Params[j]-want) > 1e-5*(1+math.Abs(want)) {
					t.Errorf("parameter %d of %d: %.8g, want %.6g", j, i, r.Params[j], want)
				}
			}
		})
	}
}

// Exact derivatives and differences must lead to the same place; the former
// also reach it from ten times as far.
func TestExactJacobian(t *testing.T) {
	q := minpackProblems[0]
	for _, start := range [][]float64{{-1.2, 1}, {-12, 10}, {-120, 100}} {
		r, err := Solve(Problem{
			Residuals: q.residuals, Count: 2, Start: start,
			Jacobian: func(dst *mat.Dense, x []float64) {
				dst.Set(0, 0, -20*x[0])
				dst.Set(0, 1, 10)
				dst.Set(1, 0, -1)
				dst.Set(1, 1, 0)
			},
		}, Options{})
		if err != nil || r.ChiSquare > 1e-24 || r.Evaluations > 60 {
			t.Errorf("from %v: χ² %g, %d evaluations, %v", start, r.ChiSquare, r.Evaluations, err)
		}
	}
}
