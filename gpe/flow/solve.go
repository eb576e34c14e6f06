package flow

import (
	"math"

	"tailrace/gpe/fluid"
)

// solve finds the transonic flow over a step for a family of plateaus that
// has one member for each Mach number.
func solve(law fluid.Law, depth, width float64, upstream func(mach float64) State) (*Transonic, error) {
	if math.IsNaN(depth) || math.IsInf(depth, 0) {
		return nil, noFlow(BadNumber, "give a finite number above zero", "depth = %g", depth)
	}
	if depth <= 0 {
		return nil, noFlow(TooShallow, "make the step go down, with a depth above zero",
			"depth %.6g does not accelerate the flow", depth)
	}
	if !(width >= 0) || math.IsInf(width, 0) {
		return nil, noFlow(BadNumber, "give a finite number, zero for a sharp edge", "width = %g", width)
	}
	q := joint{law: law, depth: depth, upstream: upstream}
	z, err := q.trace(width)
	if err != nil {
		return nil, err
	}
	up, down, _ := q.ends(width, z)
	us := upstream(logistic(z.machLogit))
	t := &Transonic{Law: law, Depth: depth, Width: width,
		Upstream: us, Downstream: behindStep(law, us, depth), Current: us.Density * us.Velocity}
	meet := meeting(up, us)
	x1, a1, s1, _ := start(up, z)
	left, ok1 := trail(up, x1, a1, s1, meet, q.tolerance)
	right, ok2 := wake(up, down, meet, q.tolerance)
	if !ok1 || !ok2 {
		return nil, noFlow(NotFound, "take a step that is neither extremely deep nor wide",
			"depth %.6g, width %.6g", depth, width)
	}
	t.set(append(left, right...))
	if !t.findHorizon() {
		return nil, noFlow(NoSubsonicPlateau, "make the step deeper or narrower",
			"the flow never reaches the speed of sound for depth %.6g, width %.6g", depth, width)
	}
	return t, nil
}
