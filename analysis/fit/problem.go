// Package fit minimises sums of squares: it finds the parameters p for which
//
//	χ²(p) = Σ_i r_i(p)²,  i = 0 … Count−1,
//
// is least, by the method of K. Levenberg, Quart. Appl. Math. 2, 164 (1944) and
// D. W. Marquardt, J. SIAM 11, 431 (1963), in the trust-region form of
// J. J. Moré, "The Levenberg–Marquardt algorithm: implementation and theory",
// Lecture Notes in Mathematics 630, 105 (Springer 1978). What it returns is a
// local minimum: another start may find a lower one.
//
// For a statistical fit, r_i = (model_i − datum_i)/σ_i with σ_i the standard
// error of the datum; then χ² has its usual meaning and Result.Covariance is
// that of the parameters.
package fit

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Problem is a sum of squares to be minimised.
type Problem struct {
	// Residuals puts the Count residuals at p into dst. It must not keep or
	// change p. A residual that is not finite marks p as forbidden: the step
	// there is taken back and shortened.
	Residuals func(dst, p []float64)
	// Count is the number of residuals, at least the number of parameters.
	Count int
	// Jacobian puts ∂r_i/∂p_j into row i, column j of dst, which is Count by
	// len(Start) and holds old values. If it is nil, differences are taken:
	// central ones of relative error about 1e-10, or one-sided ones of the same
	// order where a bound leaves no room.
	Jacobian func(dst *mat.Dense, p []float64)
	// Start holds the parameters to begin with. It is not changed.
	Start []float64
	// Scale holds a typical magnitude of each parameter, above zero, for the
	// step of the differences where the parameter itself is nearly zero. If it
	// is nil, |Start| is taken, and 1 for a parameter that starts at zero.
	Scale []float64
	// Lower and Upper bound the parameters; nil means no bounds on that side.
	// Start must lie within. Equal bounds hold a parameter fixed.
	Lower, Upper []float64
}

// Options say when to stop. The zero value of each stands for its default.
type Options struct {
	// FunctionTolerance: stop when a step reduced χ², and was expected to
	// reduce it, by less than this fraction. Default 1e-14.
	FunctionTolerance float64
	// StepTolerance: stop when the trust region is this fraction of the scaled
	// parameters' length. Default 1e-12.
	StepTolerance float64
	// GradientTolerance: stop when the cosine of the angle between the
	// residuals and every column of the Jacobian is below it. Default 1e-14.
	GradientTolerance float64
	// MaxIterations bounds the number of Jacobians. Default 1000.
	MaxIterations int
	// InitialStep bounds the first step, in units of the scaled length of
	// Start. Default 100; 0.1 to 1 for a start that must not be left rashly.
	InitialStep float64
}

// Status says which test ended the iteration.
type Status int

// The ways to end. All but NotConverged are checked afterwards: see Solve.
const (
	NotConverged      Status = iota
	FunctionSettled          // χ² changes no more
	StepSettled              // the parameters change no more
	GradientVanished         // the residuals are orthogonal to every column
	ResidualsVanished        // χ² is zero
)

func (s Status) String() string {
	switch s {
	case NotConverged:
		return "not converged"
	case FunctionSettled:
		return "χ² settled"
	case StepSettled:
		return "parameters settled"
	case GradientVanished:
		return "gradient vanished"
	case ResidualsVanished:
		return "residuals vanished"
	}
	return fmt.Sprintf("Status(%d)", int(s))
}

// Result is where the iteration ended.
type Result struct {
	// Params are the parameters of the least χ² found.
	Params []float64
	// Covariance is (JᵀJ)⁻¹ at Params, not scaled by χ²: the covariance of the
	// parameters if each residual has a standard error of one. The rows and
	// columns of parameters that are held by a bound are zero. It is nil if an
	// error is returned.
	Covariance *mat.SymDense
	// ChiSquare is Σ r_i² at Params.
	ChiSquare float64
	// DegreesOfFreedom is Count less the number of parameters not at a bound.
	DegreesOfFreedom int
	// AtBound tells which parameters are held by a bound: χ² would fall beyond it.
	AtBound []bool
	// Iterations counts Jacobians, Evaluations calls of Residuals (those for
	// differences included).
	Iterations, Evaluations int
	// Condition estimates the condition number of the Jacobian with its columns
	// scaled to length one; beyond 1e6 the parameters are hardly distinct.
	Condition float64
	Status    Status
}

// ScaledCovariance is the covariance times χ² per degree of freedom: the
// covariance of the parameters if all residuals have one and the same unknown
// standard error, which the scatter itself then estimates. It is nil if there
// is no Covariance or no degree of freedom to estimate from.
func (r Result) ScaledCovariance() *mat.SymDense {
	if r.Covariance == nil || r.DegreesOfFreedom < 1 {
		return nil
	}
	var scaled mat.SymDense
	scaled.ScaleSym(r.ChiSquare/float64(r.DegreesOfFreedom), r.Covariance)
	return &scaled
}

// Kinds of failure. Each error of Solve wraps one of them.
var (
	ErrTooFewPoints  = errors.New("fewer data points than parameters")
	ErrNotFinite     = errors.New("not a finite number")
	ErrOutOfBounds   = errors.New("start out of bounds")
	ErrSingular      = errors.New("the data do not determine the parameters")
	ErrNoConvergence = errors.New("the fit did not converge")
)

// check refuses what cannot be solved and panics at what cannot be meant.
func (p *Problem) check() error {
	n := len(p.Start)
	if p.Residuals == nil || n == 0 {
		panic("fit: a problem needs residuals and at least one parameter")
	}
	for _, s := range [][]float64{p.Scale, p.Lower, p.Upper} {
		if s != nil && len(s) != n {
			panic("fit: Scale, Lower and Upper need one value for each parameter")
		}
	}
	if p.Count < n {
		return fmt.Errorf("%w: %d points for %d parameters; take more points or hold parameters fixed", ErrTooFewPoints, p.Count, n)
	}
	for j, v := range p.Start {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("parameter %d starts at %v: %w", j, v, ErrNotFinite)
		}
		lo, hi := p.bounds(j)
		if !(lo <= v && v <= hi) {
			return fmt.Errorf("%w: parameter %d starts at %g, its bounds are %g and %g", ErrOutOfBounds, j, v, lo, hi)
		}
		if p.Scale != nil && !(p.Scale[j] > 0 && p.Scale[j] <= math.MaxFloat64) {
			panic("fit: Scale must be above zero and finite")
		}
	}
	return nil
}

// bounds of parameter j, infinite where there are none.
func (p *Problem) bounds(j int) (lower, upper float64) {
	lower, upper = math.Inf(-1), math.Inf(1)
	if p.Lower != nil {
		lower = p.Lower[j]
	}
	if p.Upper != nil {
		upper = p.Upper[j]
	}
	return lower, upper
}

func (o Options) withDefaults() Options {
	positive := func(v *float64, standard float64) {
		if *v == 0 {
			*v = standard
		}
		if !(*v > 0) {
			panic("fit: options must not be negative or NaN")
		}
	}
	positive(&o.FunctionTolerance, 1e-14)
	positive(&o.StepTolerance, 1e-12)
	positive(&o.GradientTolerance, 1e-14)
	positive(&o.InitialStep, 100)
	if o.MaxIterations == 0 {
		o.MaxIterations = 1000
	}
	return o
}
