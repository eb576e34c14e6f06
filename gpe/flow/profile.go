package flow

import (
	"math"
	"sort"

	"tailrace/gpe/fluid"
)

// node is a point of the profile: the departure a of the amplitude from that
// of the plateau it is counted from, and its slope.
type node struct {
	x, a, slope float64
	from        *plateau
}

// spline is the amplitude between nodes: on each interval the polynomial of
// degree 7 that has A, A′, A″, A‴ of the flow's equation at both ends.
type spline struct {
	coef [][8]float64 // in t = (x − x_i)/(x_{i+1} − x_i)
}

// third is A‴, the derivative of force along the solution.
func (p *plateau) third(law fluid.Law, x, a, slope float64) float64 {
	A := p.amp + a
	n := A * A
	var tilt float64 // dV/dx
	if p.width > 0 {
		z := 2 * x / p.width
		tilt = -2 * p.depth / p.width * logistic(z) * logistic(-z)
	}
	// force = A·G(x, n)
	G := p.force(x, a) / A
	dG := 4*A*law.Slope(n) - 4*p.speed2*p.density*p.density/(n*n*A)
	return 2*A*tilt + (G+A*dG)*slope
}

// set fills the profile from its nodes, which must be in order of x.
func (t *Transonic) set(nodes []node) {
	t.X = make([]float64, len(nodes))
	t.Density = make([]float64, len(nodes))
	t.Velocity = make([]float64, len(nodes))
	var left [4]float64
	t.profile.coef = make([][8]float64, 0, len(nodes)-1)
	for i, q := range nodes {
		A := q.from.amp + q.a
		t.X[i] = q.x
		t.Density[i] = A * A
		t.Velocity[i] = t.Current / t.Density[i]
		right := [4]float64{A, q.slope, q.from.force(q.x, q.a), q.from.third(t.Law, q.x, q.a, q.slope)}
		if i > 0 {
			t.profile.coef = append(t.profile.coef, hermite(left, right, q.x-nodes[i-1].x))
		}
		left = right
	}
}

// hermite returns the polynomial in t = x/h on 0 ≤ t ≤ 1 with the given value
// and first three derivatives with respect to x at both ends.
func hermite(l, r [4]float64, h float64) (c [8]float64) {
	h2 := h * h
	h3 := h2 * h
	c[0], c[1], c[2], c[3] = l[0], l[1]*h, l[2]*h2/2, l[3]*h3/6
	d0 := r[0] - c[0] - c[1] - c[2] - c[3]
	d1 := r[1]*h - c[1] - 2*c[2] - 3*c[3]
	d2 := r[2]*h2 - 2*c[2] - 6*c[3]
	d3 := r[3]*h3 - 6*c[3]
	c[4] = 35*d0 - 15*d1 + 5*d2/2 - d3/6
	c[5] = -84*d0 + 39*d1 - 7*d2 + d3/2
	c[6] = 70*d0 - 34*d1 + 13*d2/2 - d3/2
	c[7] = -20*d0 + 10*d1 - 2*d2 + d3/6
	return c
}

// amplitude returns A = √n and its derivative.
func (t *Transonic) amplitude(x float64) (A, slope float64) {
	last := len(t.X) - 1
	switch {
	case x <= t.X[0]:
		return math.Sqrt(t.Upstream.Density), 0
	case x >= t.X[last]:
		return math.Sqrt(t.Downstream.Density), 0
	}
	i := sort.SearchFloat64s(t.X, x)
	if i > 0 && t.X[i] > x {
		i--
	}
	return t.on(i, x)
}

// on evaluates interval i at x.
func (t *Transonic) on(i int, x float64) (A, slope float64) {
	h := t.X[i+1] - t.X[i]
	u := (x - t.X[i]) / h
	c := &t.profile.coef[i]
	A, slope = c[7], 0
	for k := 6; k >= 0; k-- {
		slope = slope*u + A
		A = A*u + c[k]
	}
	return A, slope / h
}

// spacing returns the distance of nodes near x: fine enough for the step
// where it is not flat and for the flow's own length elsewhere, so that the
// polynomials of degree 7 are good to about 1e-12.
func spacing(up *plateau, x float64) float64 {
	d := math.Abs(x)
	h := math.Min(0.13/up.rate+0.015*d, 0.08/math.Sqrt(2*up.depth)+0.03*d)
	if d < flatWidths*up.width {
		h = math.Min(h, 0.07*up.width)
	}
	return h
}

// negligible is the departure from a plateau, relative to its amplitude, at
// which the grid ends.
const negligible = 1e-17

// trail walks the upstream half from x1, where it is on the separatrix and
// the step is flat, both ways: to the meeting point, and leftwards until
// the plateau is reached. Leftwards the separatrix is unstable as a solution of
// the second-order equation, so the slope is set from the first integral at
// each node.
func trail(up *plateau, x1, a1, slope1, meet, tolerance float64) ([]node, bool) {
	var back []node
	x, a, s := x1, a1, slope1
	for -a > negligible*up.amp {
		h := spacing(up, x)
		if x > -flatWidths*up.width {
			break
		}
		var ok bool
		a, _, ok = stormer(up, x, a, s, x-h, h, tolerance)
		if !ok {
			return nil, false
		}
		x -= h
		s = -math.Sqrt(up.slope2(a))
		back = append(back, node{x, a, s, up})
	}
	nodes := make([]node, 0, 2*len(back)+500)
	for i := len(back) - 1; i >= 0; i-- {
		nodes = append(nodes, back[i])
	}
	x, a, s = x1, a1, slope1
	for {
		nodes = append(nodes, node{x, a, s, up})
		if x == meet {
			return nodes, true
		}
		h := spacing(up, x)
		// Entering the step, do not stride over its edge.
		if edge := -flatWidths * up.width; x < edge && x+h > edge {
			h = edge - x
		}
		end := x + h
		if end > meet-h/4 {
			end = meet
		}
		var ok bool
		if a, s, ok = stormer(up, x, a, s, end, h, tolerance); !ok {
			return nil, false
		}
		x = end
	}
}

// wake walks the downstream half from where the step has become flat to the
// meeting point; the nodes come in order of x, without that point.
func wake(up, down *plateau, meet, tolerance float64) ([]node, bool) {
	if down.width == 0 {
		return nil, true
	}
	var nodes []node
	cut := -math.Log(tailCut) / 2 * down.width
	for x := flatWidths * down.width; x > cut; x -= spacing(up, x) {
		a, s := down.response(x)
		nodes = append(nodes, node{x, a, s, down})
	}
	x := cut
	a, s := down.response(x)
	for x > meet {
		nodes = append(nodes, node{x, a, s, down})
		h := math.Min(spacing(up, x), 0.07*down.width)
		end := x - h
		if end < meet+h/4 {
			break
		}
		var ok bool
		if a, s, ok = stormer(down, x, a, s, end, h, tolerance); !ok {
			return nil, false
		}
		x = end
	}
	for i, j := 0, len(nodes)-1; i < j; i, j = i+1, j-1 {
		nodes[i], nodes[j] = nodes[j], nodes[i]
	}
	return nodes, true
}

// findHorizon sets the horizon: the first place from upstream where v = c.
func (t *Transonic) findHorizon() bool {
	// n³f′(n) = j² there; Newton in ln n, on a rising function.
	j2 := t.Current * t.Current
	n := math.Cbrt(j2)
	for range 50 {
		f := t.Law.Slope(n)
		g := math.Log(n * n * n * f / j2)
		dl := g / (3 + n*t.Law.Curvature(n)/f)
		n *= math.Exp(-dl)
		if math.Abs(dl) < 1e-16 {
			break
		}
	}
	A := math.Sqrt(n)
	for i := range t.profile.coef {
		if t.Density[i+1] > n {
			continue
		}
		lo, hi := t.X[i], t.X[i+1]
		x := (lo + hi) / 2
		for range 60 {
			a, s := t.on(i, x)
			if a > A {
				lo = x
			} else {
				hi = x
			}
			next := x - (a-A)/s
			if !(next > lo && next < hi) {
				next = (lo + hi) / 2
			}
			if math.Abs(next-x) <= 1e-15*(t.X[i+1]-t.X[i]) {
				break
			}
			x = next
		}
		_, s := t.on(i, x)
		v := t.Current / n
		t.Horizon = horizonAt(x, -(v/n+t.Law.SoundSlope(n))*2*A*s)
		return true
	}
	return false
}
