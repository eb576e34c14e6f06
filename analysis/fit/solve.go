package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"
)

const epsilon = 0x1p-52

// Solve minimises χ² from p.Start.
//
// Every iteration takes the step that is best for the linearised residuals
// within a trust region ‖D·step‖ ≤ Δ, by a QR factorisation of the Jacobian; D
// holds the largest length each of its columns has had, so that the units of
// the parameters do not matter. Δ shrinks when the step reduced χ² by less than
// a quarter of what was expected and grows when by more than three quarters
// (Moré 1978). At a bound, a parameter whose gradient points outwards is left
// out of the step, and a step that would cross a bound is cut there.
//
// The iteration ends by one of Options' tests, and then has to prove that it is
// at a minimum and not merely stuck: the residuals' part in the space of the
// Jacobian's columns must be below a thousandth of the rest, each per degree of
// freedom (the relative offset of D. M. Bates, D. G. Watts, Technometrics 23,
// 179 (1981)), or the full Gauss–Newton step below a millionth of the
// parameters.
//
// Errors wrap ErrTooFewPoints, ErrOutOfBounds, ErrNotFinite, ErrSingular or
// ErrNoConvergence. With the last two, and with ErrNotFinite once the iteration
// has begun, the result still tells where it ended, without Covariance.
func Solve(p Problem, o Options) (Result, error) {
	if err := p.check(); err != nil {
		return Result{}, err
	}
	s := newSolver(p, o.withDefaults())
	err := s.iterate()
	s.result.Params = s.x
	s.result.ChiSquare = s.norm * s.norm
	if err != nil {
		return s.result, err
	}
	return s.result, s.judge()
}

type solver struct {
	problem Problem
	options Options
	result  Result

	x, r     []float64 // the best parameters, their residuals
	norm     float64   // ‖r‖
	trial    []float64
	rTrial   []float64
	jacobian *mat.Dense
	gradient []float64 // Jᵀr

	free   []int // parameters not held by a bound
	qr     *factor
	qtr    []float64 // Qᵀr
	damped *damped
	scale  []float64 // D, of all parameters
	// of the free parameters, and work space
	scaleFree, step, image []float64

	forbidden bool // the last trial was not finite

	probe1, probe2, probeAt []float64
}

func newSolver(p Problem, o Options) *solver {
	m, n := p.Count, len(p.Start)
	vector := func(k int) []float64 { return make([]float64, k) }
	s := &solver{
		problem: p, options: o,
		x: append([]float64(nil), p.Start...), r: vector(m), trial: vector(n), rTrial: vector(m),
		jacobian: mat.NewDense(m, n, nil), gradient: vector(n),
		free: make([]int, 0, n), qr: newFactor(m, n), qtr: vector(m), damped: newDamped(n),
		scale: vector(n), scaleFree: vector(n), step: vector(n), image: vector(m),
	}
	s.result.AtBound = make([]bool, n)
	if p.Jacobian == nil {
		s.probe1, s.probe2, s.probeAt = vector(m), vector(m), vector(n)
	}
	return s
}

func (s *solver) evaluate(dst, p []float64) (norm float64) {
	s.problem.Residuals(dst, p)
	s.result.Evaluations++
	return floats.Norm(dst, 2)
}

// linearise takes the Jacobian at x, finds which parameters are free and
// factorises their columns.
func (s *solver) linearise() error {
	m, n := s.jacobian.Dims()
	if s.problem.Jacobian != nil {
		s.problem.Jacobian(s.jacobian, s.x)
	} else {
		s.differences(s.jacobian, s.x, s.r)
	}
	s.result.Iterations++
	s.free = s.free[:0]
	for j := range n {
		g := 0.0
		for i, r := range s.r {
			v := s.jacobian.At(i, j)
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return fmt.Errorf("derivative of residual %d by parameter %d at %.6g is %v: %w", i, j, s.x, v, ErrNotFinite)
			}
			g += v * r
		}
		s.gradient[j] = g
		lower, upper := s.problem.bounds(j)
		held := lower == upper || s.x[j] <= lower && g > 0 || s.x[j] >= upper && g < 0
		s.result.AtBound[j] = held
		if !held {
			s.free = append(s.free, j)
		}
	}
	s.result.DegreesOfFreedom = m - len(s.free)
	s.qr.resize(len(s.free))
	for k, j := range s.free {
		mat.Col(s.qr.columns[k], j, s.jacobian)
	}
	copy(s.qtr, s.r)
	s.qr.factorise(s.qtr)
	for k, j := range s.free {
		s.scale[j] = max(s.scale[j], s.qr.norm[k])
		s.scaleFree[k] = s.scale[j]
		if s.scale[j] == 0 {
			s.scaleFree[k] = 1
		}
	}
	return nil
}

// length is ‖D v‖.
func (s *solver) length(v []float64) float64 {
	sum := 0.0
	for j, x := range v {
		d := s.scale[j]
		if d == 0 {
			d = 1
		}
		sum = math.Hypot(sum, d*x)
	}
	return sum
}

// cosine is the largest cosine between the residuals and a free column.
func (s *solver) cosine() float64 {
	most := 0.0
	for k, j := range s.free {
		if s.qr.norm[k] > 0 {
			most = max(most, math.Abs(s.gradient[j]/s.norm/s.qr.norm[k]))
		}
	}
	return most
}

func (s *solver) iterate() error {
	const vanished = 0x1p-500 // its square is still a number
	o := s.options
	if s.norm = s.evaluate(s.r, s.x); math.IsNaN(s.norm) || math.IsInf(s.norm, 0) {
		return fmt.Errorf("the residuals at the start %.6g: %w", s.x, ErrNotFinite)
	}
	radius, lambda := 0.0, 0.0
	for first := true; ; first = false {
		if s.norm <= vanished {
			s.result.Status = ResidualsVanished
			return s.linearise()
		}
		if err := s.linearise(); err != nil {
			return err
		}
		if len(s.free) == 0 || s.cosine() <= o.GradientTolerance {
			s.result.Status = GradientVanished
			return nil
		}
		if first {
			if radius = o.InitialStep * s.length(s.x); radius == 0 {
				radius = o.InitialStep
			}
		}
		for accepted := false; !accepted; {
			lambda = s.damped.within(s.step[:len(s.free)], s.qr, s.scaleFree, s.qtr, radius, lambda)
			cut := s.try()
			for j := range s.x {
				s.step[j] = s.trial[j] - s.x[j]
			}
			length := s.length(s.step)
			if first && s.result.Iterations == 1 {
				radius = min(radius, length)
			}
			norm := s.evaluate(s.rTrial, s.trial)
			s.forbidden = math.IsNaN(norm) || math.IsInf(norm, 0)
			if s.forbidden {
				norm = math.Inf(1)
			}
			actual := -1.0
			if 0.1*norm < s.norm {
				actual = 1 - (norm/s.norm)*(norm/s.norm)
			}
			expected, slope := s.expected(cut, lambda, length)
			ratio := 0.0
			if expected > 0 {
				ratio = actual / expected
			}
			if ratio <= 0.25 {
				shrink := 0.5
				if actual < 0 {
					shrink = 0.5 * slope / (slope + 0.5*actual)
				}
				if 0.1*norm >= s.norm || !(shrink >= 0.1) {
					shrink = 0.1
				}
				shrink = min(shrink, 0.5)
				if length > 0 { // zero if bounds took all of the step
					radius = min(radius, length/0.1)
				}
				radius *= shrink
				lambda /= shrink
			} else if lambda == 0 || ratio >= 0.75 {
				radius = length / 0.5
				lambda *= 0.5
			}
			if accepted = ratio >= 1e-4; accepted {
				s.x, s.trial = s.trial, s.x
				s.r, s.rTrial = s.rTrial, s.r
				s.norm = norm
			}
			switch {
			case length > 0 && math.Abs(actual) <= o.FunctionTolerance && expected <= o.FunctionTolerance && ratio <= 2:
				s.result.Status = FunctionSettled
			case radius <= max(o.StepTolerance, epsilon)*s.length(s.x):
				s.result.Status = StepSettled
			case s.norm > vanished && s.result.Iterations >= o.MaxIterations:
				return fmt.Errorf("%w in %d iterations: χ² is %.6g at %.6g; start nearer, or check the model and its derivatives",
					ErrNoConvergence, s.result.Iterations, s.norm*s.norm, s.x)
			default:
				continue
			}
			if accepted {
				return s.linearise()
			}
			return nil
		}
	}
}

// try puts x less the step of the free parameters into trial, cut at the
// bounds, and tells whether it was cut.
func (s *solver) try() (cut bool) {
	copy(s.trial, s.x)
	for k, j := range s.free {
		v := s.x[j] - s.step[k]
		lower, upper := s.problem.bounds(j)
		inside := min(max(v, lower), upper)
		cut = cut || inside != v
		s.trial[j] = inside
	}
	return cut
}

// expected is the reduction of χ² that the linearised residuals promise for
// s.step, and half of the slope of χ² along it, both as fractions of χ².
func (s *solver) expected(cut bool, lambda, length float64) (reduction, slope float64) {
	clear(s.image)
	for j, v := range s.step {
		if v != 0 {
			for i := range s.image {
				s.image[i] += v * s.jacobian.At(i, j)
			}
		}
	}
	a := floats.Norm(s.image, 2) / s.norm
	if !cut { // no cancellation this way
		b := math.Sqrt(lambda) * length / s.norm
		return a*a + 2*b*b, -(a*a + b*b)
	}
	slope = floats.Dot(s.image, s.r) / s.norm / s.norm
	return -2*slope - a*a, slope
}

// judge requires a proper minimum, and gives it a covariance.
func (s *solver) judge() error {
	n := len(s.free)
	tolerance := 10 * float64(s.problem.Count) * epsilon
	if s.problem.Jacobian == nil {
		tolerance = 1e-9 // the differences' own error, and ten for safety
	}
	rank, condition := s.qr.rank(tolerance)
	s.result.Condition = condition
	if rank < n {
		return s.singular(rank)
	}
	if !s.minimum() {
		if s.forbidden {
			return fmt.Errorf("the residuals just beyond %.6g (χ² %.6g): %w", s.x, s.norm*s.norm, ErrNotFinite)
		}
		if s.cosine() <= 1e-6 { // χ² is level here, though the linearised step is long
			return s.singular(rank)
		}
		status := s.result.Status
		s.result.Status = NotConverged
		return fmt.Errorf("%w: it got stuck (%v) away from a minimum at %.6g, χ² %.6g; the residuals or their derivatives are wrong or not smooth",
			ErrNoConvergence, status, s.x, s.norm*s.norm)
	}
	s.result.Covariance = mat.NewSymDense(len(s.x), nil)
	s.qr.inverse(func(a, b int, v float64) { s.result.Covariance.SetSym(s.free[a], s.free[b], v) })
	return nil
}

func (s *solver) singular(rank int) error {
	return fmt.Errorf("%w: %d of %d are independent at %.6g (χ² %.6g, condition %.1e); hold some fixed, or take data that tell them apart",
		ErrSingular, rank, len(s.free), s.x, s.norm*s.norm, s.result.Condition)
}

// minimum is the test described at Solve.
func (s *solver) minimum() bool {
	n := len(s.free)
	if n == 0 || s.result.Status == ResidualsVanished {
		return true
	}
	inside := floats.Norm(s.qtr[:n], 2) / math.Sqrt(float64(n))
	if rest := s.qtr[n:]; len(rest) > 0 && inside <= 1e-3*floats.Norm(rest, 2)/math.Sqrt(float64(len(rest))) {
		return true
	}
	step := s.step[:n]
	s.qr.gaussNewton(step, s.qtr, s.damped.y[:n])
	for k := range step {
		s.trial[k] = step[k] * s.scaleFree[k]
	}
	return floats.Norm(s.trial[:n], 2) <= 1e-6*s.length(s.x)
}
