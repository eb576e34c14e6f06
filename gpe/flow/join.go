package flow

import "math"

// meeting returns the place where the halves are joined. Nothing depends on
// it but the conditioning: near the horizon the solution is sensitive to both
// unknowns. There the step has fallen by about (c_u − v_u)², which for a wide
// step is far out in its tail.
func meeting(up *plateau, us State) float64 {
	short := us.SoundSpeed - us.Velocity
	fallen := 2 * short * short / up.depth
	if fallen >= 1 {
		return 0
	}
	return math.Max(up.width/2*math.Log(fallen), -flatWidths*up.width/2)
}

// gap is what the two halves lack to join: differences of A and A′.
type gap [2]float64

// newton improves z until its step is below accuracy. The Jacobian is found by
// differencing and kept while it serves.
func (q *joint) newton(width float64, z unknowns, accuracy float64) (unknowns, bool) {
	const (
		probe  = 1e-6 // relative error of the Jacobian about 1e-6
		trust  = 1.0  // largest change of an unknown in one go
		rounds = 25
		halves = 5
	)
	up, _, ok := q.ends(width, z)
	if !ok {
		return z, false
	}
	meet := meeting(up, q.upstream(logistic(z.machLogit)))

	// The right half is returned as well: it does not depend on the departure.
	both := func(z unknowns) (r gap, right [2]float64, ok bool) {
		up, down, ok := q.ends(width, z)
		if !ok {
			return r, right, false
		}
		right[0], right[1], ok = q.rightHalf(down, meet)
		if !ok {
			return r, right, false
		}
		a, s, ok := q.leftHalf(up, z, meet)
		r = gap{a - right[0], s - right[1]}
		return r, right, ok && !math.IsNaN(r[0]+r[1])
	}

	r, right, ok := both(z)
	if !ok {
		return z, false
	}
	var a, b, c, d float64
	stale, before := true, math.Inf(1)
	for range rounds {
		if stale {
			rm, _, ok := both(unknowns{z.machLogit + probe, z.departure})
			if !ok {
				return z, false
			}
			up, _, _ := q.ends(width, z)
			la, ls, ok := q.leftHalf(up, unknowns{z.machLogit, z.departure + probe}, meet)
			if !ok {
				return z, false
			}
			a, b = (rm[0]-r[0])/probe, (la-right[0]-r[0])/probe
			c, d = (rm[1]-r[1])/probe, (ls-right[1]-r[1])/probe
		}
		det := a*d - b*c
		dz := unknowns{-(d*r[0] - b*r[1]) / det, -(a*r[1] - c*r[0]) / det}
		size := math.Max(math.Abs(dz.machLogit), math.Abs(dz.departure))
		if math.IsNaN(size) || math.IsInf(size, 0) {
			return z, false
		}
		if size <= accuracy {
			return z.plus(dz, 1), true
		}
		if !stale && size > 0.05*before {
			stale, before = true, math.Inf(1)
			continue
		}
		factor := math.Min(1, trust/size)
		moved := false
		for range halves {
			if rn, rightn, ok := both(z.plus(dz, factor)); ok {
				z, r, right, moved = z.plus(dz, factor), rn, rightn, true
				break
			}
			factor /= 2
		}
		if !moved {
			return z, false
		}
		stale, before = size > 0.1, size
	}
	return z, false
}
