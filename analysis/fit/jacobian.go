package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// differences fills dst with three-point differences about p, where the
// residuals are r. The step is ε^⅓ of the parameter or of its scale, which
// balances rounding ε/h against the third derivative's h².
func (s *solver) differences(dst *mat.Dense, p, r []float64) {
	relative := math.Cbrt(0x1p-52)
	for j, v := range p {
		lower, upper := s.problem.bounds(j)
		if lower == upper {
			for i := range r {
				dst.Set(i, j, 0)
			}
			continue
		}
		h := relative * max(math.Abs(v), 1e-3*s.scaleOf(j))
		h = min(h, (upper-lower)/2)
		a, b := v-h, v+h
		oneSided := a < lower || b > upper
		switch {
		case a < lower:
			a, b = v+h, min(v+2*h, upper)
		case b > upper:
			a, b = v-h, max(v-2*h, lower)
		}
		s.at(s.probe1, p, j, a)
		s.at(s.probe2, p, j, b)
		a, b = a-v, b-v // as they were, after rounding
		for i := range r {
			if oneSided {
				// derivative at 0 of the parabola through 0, a, b
				dst.Set(i, j, ((s.probe1[i]-r[i])*b/a-(s.probe2[i]-r[i])*a/b)/(b-a))
			} else {
				dst.Set(i, j, (s.probe2[i]-s.probe1[i])/(b-a))
			}
		}
	}
}

// at evaluates the residuals with parameter j set to v.
func (s *solver) at(dst, p []float64, j int, v float64) {
	copy(s.probeAt, p)
	s.probeAt[j] = v
	s.problem.Residuals(dst, s.probeAt)
	s.result.Evaluations++
}

// scaleOf is the typical magnitude of parameter j.
func (s *solver) scaleOf(j int) float64 {
	switch {
	case s.problem.Scale != nil:
		return s.problem.Scale[j]
	case s.problem.Start[j] != 0:
		return math.Abs(s.problem.Start[j])
	}
	return 1
}
