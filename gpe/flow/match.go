package flow

import (
	"math"

	"tailrace/gpe/fluid"
)

// The flow is found by integrating from both ends, each in the direction in
// which it is stable, and joining the two halves about where the horizon is:
//
//   - from far downstream leftwards, where the flow is uniform but for the
//     forced response to the step's own tail (small departures there
//     oscillate, they do not grow);
//   - from upstream rightwards, starting on the separatrix of the plateau
//     where the step is flat. Departures from the separatrix would grow
//     leftwards, so shooting in one go from downstream loses the upstream end.
//
// The two unknowns are the upstream Mach number and the place of the
// separatrix; the two conditions are that A and A′ join.
type unknowns struct {
	machLogit float64 // ln(m/(1−m))
	departure float64 // ln of −a·e^{−rate·x} at the starting point
}

func (u unknowns) plus(du unknowns, factor float64) unknowns {
	return unknowns{u.machLogit + factor*du.machLogit, u.departure + factor*du.departure}
}

// joint is a step together with the family of plateaus it may have.
type joint struct {
	law       fluid.Law
	depth     float64
	upstream  func(mach float64) State
	tolerance float64 // of each integration, relative
}

// tailCut is the size of the step's tail, relative to the step, at which the
// downstream half starts; the response of second order is its square.
const tailCut = 1e-9

// ends returns the two plateaus of a trial.
func (q *joint) ends(width float64, z unknowns) (up, down *plateau, ok bool) {
	us := q.upstream(logistic(z.machLogit))
	ds := behindStep(q.law, us, q.depth)
	if !(ds.Density > 0) || !(ds.Velocity >= ds.SoundSpeed) {
		return nil, nil, false
	}
	return newPlateau(q.law, us, q.depth, width, true), newPlateau(q.law, ds, q.depth, width, false), true
}

// start returns the point from which the upstream half is integrated: beyond
// it the step is flat, and the separatrix is well away from its turning point.
func start(up *plateau, z unknowns) (x, a, slope float64, ok bool) {
	x = -flatWidths*up.width - 2/up.rate
	a = -math.Exp(z.departure + up.rate*x)
	s2 := up.slope2(a)
	if a <= -up.amp || !(s2 > 0) {
		return 0, 0, 0, false
	}
	return x, a, -math.Sqrt(s2), true
}

func (q *joint) leftHalf(up *plateau, z unknowns, meet float64) (A, slope float64, ok bool) {
	x, a, slope, ok := start(up, z)
	if !ok {
		return 0, 0, false
	}
	a, slope, ok = stormer(up, x, a, slope, meet, 0.5/up.rate, q.tolerance)
	return up.amp + a, slope, ok
}

func (q *joint) rightHalf(down *plateau, meet float64) (A, slope float64, ok bool) {
	if down.width == 0 {
		return down.amp, 0, true
	}
	x := -math.Log(tailCut) / 2 * down.width
	a, slope := down.response(x)
	a, slope, ok = stormer(down, x, a, slope, meet, down.width/2, q.tolerance)
	return down.amp + a, slope, ok
}

// sharp returns the solution for a step of zero width. There the downstream
// state itself must be the turning point of the upstream separatrix.
func (q *joint) sharp() (unknowns, bool) {
	height := func(s float64) float64 {
		us := q.upstream(logistic(s))
		ds := behindStep(q.law, us, q.depth)
		p := newPlateau(q.law, us, q.depth, 0, true)
		dn := ds.Density - us.Density
		return p.slope2(math.Sqrt(ds.Density)-p.amp) / (dn * dn)
	}
	s, ok := illinois(height, -30, 30)
	if !ok {
		return unknowns{}, false
	}
	// For the cubic law the separatrix is a grey soliton,
	// n = n_u − (n_u − n_d) sech²(rate·x/2); for others it is near enough to
	// start from.
	us := q.upstream(logistic(s))
	ds := behindStep(q.law, us, q.depth)
	p := newPlateau(q.law, us, q.depth, 0, true)
	sech := 1 / math.Cosh(1) // at x = −2/rate, where the upstream half starts
	dn := (us.Density - ds.Density) * sech * sech
	a := dn / (p.amp + math.Sqrt(us.Density-dn))
	return q.newton(0, unknowns{s, math.Log(a) + 2}, 1e-3)
}

// illinois finds a root of f in the bracket by the false-position method with
// the Illinois modification.
func illinois(f func(float64) float64, a, b float64) (float64, bool) {
	fa, fb := f(a), f(b)
	if !(fa*fb <= 0) {
		return 0, false
	}
	// The function is flat at the ends of so wide a bracket: halve it first.
	for b-a > 1 {
		m := (a + b) / 2
		if fm := f(m); fa*fm > 0 {
			a, fa = m, fm
		} else {
			b, fb = m, fm
		}
	}
	for range 100 {
		x := b - fb*(b-a)/(fb-fa)
		fx := f(x)
		if math.IsNaN(fx) {
			return 0, false
		}
		if fx == 0 || math.Abs(b-a) < 1e-13 || math.Abs(x-b) < 1e-14 {
			return x, true
		}
		if fx*fb < 0 {
			a, fa = b, fb
		} else {
			fa /= 2
		}
		b, fb = x, fx
	}
	return b, math.Abs(b-a) < 1e-9
}

// closest is how near to 1 the upstream Mach number may come. Beyond it the
// flow crosses the speed of sound so gently (κ falls as (1−m_u)^{3/2}) that
// nothing could be told of the horizon, and rounding spoils the solution.
const closest = 2e-4

// trace follows the solution from zero width to the width wanted. The error
// it gives is a *NoFlow.
func (q *joint) trace(width float64) (unknowns, error) {
	const (
		rough      = 1e-3 // accuracy on the way
		final      = 1e-7 // Newton's last step; the error left is below 1e-12
		roughTrace = 1e-8
		fineTrace  = 1e-13
	)
	lost := func(at float64) error {
		return noFlow(NotFound, "take a step that is neither extremely deep nor wide",
			"depth %.6g, width %.6g (solved up to width %.4g)", q.depth, width, at)
	}
	q.tolerance = roughTrace
	z, ok := q.sharp()
	switch {
	case !ok:
		return z, lost(0)
	case logistic(-z.machLogit) < closest:
		return z, noFlow(TooShallow, "deepen the step",
			"depth %.6g leaves the plateau within %.1g of the speed of sound", q.depth, closest)
	}
	// The path is followed in a variable that is linear in the width while
	// that is small and logarithmic when it is large.
	us := q.upstream(logistic(z.machLogit))
	unit := 0.5 / us.SoundSpeed
	end := math.Asinh(width / unit)
	at, step := 0.0, 0.8
	before, beforeAt := z, 0.0
	for at < end {
		next := math.Min(at+step, end)
		guess := z
		if at > 0 {
			f := (next - at) / (at - beforeAt)
			guess = z.plus(unknowns{z.machLogit - before.machLogit, z.departure - before.departure}, f)
		}
		found, ok := q.newton(unit*math.Sinh(next), guess, rough)
		if !ok {
			if step /= 2; step < 1e-2 {
				return z, lost(unit * math.Sinh(at))
			}
			continue
		}
		before, beforeAt = z, at
		z, at = found, next
		step *= 1.3
		if logistic(-z.machLogit) < closest {
			return z, noFlow(SonicEverywhere, "narrow the step",
				"width %.6g leaves the plateau within %.1g of the speed of sound", width, closest)
		}
	}
	// Close to sonic the solution is known less well than 1e-7.
	accuracy := math.Max(final, 1e-9/logistic(-z.machLogit))
	q.tolerance = fineTrace
	z, ok = q.newton(width, z, accuracy)
	if !ok {
		return z, lost(unit * math.Sinh(beforeAt))
	}
	return z, nil
}
