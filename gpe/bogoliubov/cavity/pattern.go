package cavity

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/integrate/quad"
)

// Pattern is the shape of a growing mode: the disturbance of the condensate is
// e^{ivx}(U e^{−iωt} + V* e^{iω*t}), and that of its density, as a share,
// 2 Re[(U + V) e^{−iωt}].
//
// A mode that grows has no norm of its own: ∫(|U|² − |V|²) is zero. It makes a
// pair with the mode of ω*, which dies away as this one grows; in a cavity that
// is its own mirror image that mode is U*(D − x), V*(D − x). The pattern is
// normalised by the product of the two,
//
//	∫ [U(D − x)U(x) − V(D − x)V(x)] dx = 1,
//
// for density 1, that is, for one atom in a healing length; with n₀ξ atoms in
// it U and V are smaller by √(n₀ξ). What is left, a sign, makes the real part
// of U + V positive where |U + V| is greatest of the points asked for. (The
// amplitudes of such pairs: J. Macher, R. Parentani, Phys. Rev. A 80, 043601
// (2009), for the real frequencies; S. Finazzi, R. Parentani, New J. Phys. 12,
// 095015 (2010), for complex ones, with another phase of the product.)
type Pattern struct {
	Mode Mode
	X    []float64
	U, V []complex128
}

// Density returns U + V at the points.
func (p *Pattern) Density() []complex128 {
	s := make([]complex128, len(p.U))
	for i := range s {
		s[i] = p.U[i] + p.V[i]
	}
	return s
}

// Pattern returns the shape of one of the cavity's modes, as Modes found it, at
// the points x. Its error is about an ω at which the two sides do not match.
func (c Cavity) Pattern(m Mode, x []float64) (*Pattern, error) {
	t := c.trace(m.Omega())
	if !(t.mismatch < 1e-5) { // a mode known to 13 digits matches to 1e-9 and better
		return nil, fmt.Errorf("there is no mode at ω = %.6g + %.6gi in a cavity of length %.6g", m.Frequency, m.GrowthRate, c.Length)
	}
	scale := 1 / cmplx.Sqrt(t.norm())
	p := &Pattern{Mode: m, X: x, U: make([]complex128, len(x)), V: make([]complex128, len(x))}
	most, at := 0.0, complex128(1)
	for i, xi := range x {
		w := t.at(xi)
		p.U[i], p.V[i] = w[0]*scale, w[1]*scale
		if s := p.U[i] + p.V[i]; cmplx.Abs(s) > most {
			most, at = cmplx.Abs(s), s
		}
	}
	if real(at) < 0 {
		for i := range x {
			p.U[i], p.V[i] = -p.U[i], -p.V[i]
		}
	}
	return p, nil
}

// trace is a solution followed through the whole cavity.
type trace struct {
	cavity      Cavity
	omega       complex128
	steps       []step
	x           []float64 // where steps begin, and the end of the last
	value       []vector  // there
	mismatch    float64
	left, right tail
}

// tail is the solution outside: two waves from a place.
type tail struct {
	from float64
	k    [2]complex128
	u, v [2]complex128 // their amplitudes there
}

func (t tail) at(x float64) (w vector) {
	for i, k := range t.k {
		e := cmplx.Exp(1i * k * complex(x-t.from, 0))
		u, v := t.u[i]*e, t.v[i]*e
		w[0] += u
		w[1] += v
		w[2] += 1i * k * u
		w[3] += 1i * k * v
	}
	return w
}

// trace follows both planes through the whole cavity, each in the direction in
// which that is stable, and takes the solution that they share at every place;
// short steps between places tell its size.
func (c Cavity) trace(omega complex128) *trace {
	t := &trace{cavity: c, omega: omega, steps: c.paces()}
	n := len(t.steps)
	t.x = make([]float64, n+1)
	t.x[0] = -reach * c.Width
	for i, s := range t.steps {
		t.x[i+1] = t.x[i] + s.length
	}
	outside := growing(omega, c.Velocity, c.Outside)
	other := pair{-outside.sum, -4 * omega * omega / outside.product}
	fromLeft := t.follow(spanned(outside, omega, c.Velocity, c.Outside), c.Velocity)
	fromRight := t.follow(spanned(pair{-other.sum, other.product}, omega, -c.Velocity, c.Outside), -c.Velocity)
	t.value = make([]vector, n+1)
	size := complex128(1)
	for i := range t.value {
		p, q := fromLeft[i], fromRight[n-i].mirrored()
		t.mismatch = math.Max(t.mismatch, cmplx.Abs(meet(p, q)))
		e := shared(p, q)
		if i > 0 {
			moved := t.steps[i-1].carry(t.value[i-1], omega, c.Velocity, t.steps[i-1].length)
			size = 0
			for j := range e {
				size += cmplx.Conj(e[j]) * moved[j]
			}
		}
		for j := range e {
			t.value[i][j] = e[j] * size
		}
	}
	t.left = newTail(t.x[0], outside, t.value[0], omega, c)
	t.right = newTail(t.x[n], other, t.value[n], omega, c)
	return t
}

// paces is the walk through the whole cavity, in short steps where c is
// constant.
func (c Cavity) paces() []step {
	var half []step
	for _, s := range c.walk() {
		if len(s.series) > 1 {
			half = append(half, s)
			continue
		}
		n := max(1, int(math.Ceil(s.length/c.stride())))
		for range n {
			half = append(half, step{s.length / float64(n), s.series, s.share})
		}
	}
	all := slices.Clone(half)
	x := c.Length / 2
	for i := len(half) - 1; i >= 0; i-- {
		s := half[i]
		if len(s.series) > 1 {
			s = c.stepAt(x, s.length)
		}
		all = append(all, s)
		x += s.length
	}
	return all
}

// follow returns the plane at every place, of size 1.
func (t *trace) follow(p plane, v float64) []plane {
	all := make([]plane, 0, len(t.steps)+1)
	for i := range len(t.steps) + 1 {
		if i > 0 {
			e := equation{omega: t.omega, turn: complex(0, 2*v)}
			p = t.steps[i-1].taylor(p, e)
		}
		sum := 0.0
		for _, a := range p {
			sum += real(a)*real(a) + imag(a)*imag(a)
		}
		scale := complex(1/math.Sqrt(sum), 0)
		for j := range p {
			p[j] *= scale
		}
		all = append(all, p)
	}
	return all
}

// carry returns the solution a distance d into a step that it begins as w.
func (s *step) carry(w vector, omega complex128, v, d float64) vector {
	var both [order]complex128 // of U + V
	turn := complex(0, 2*v)
	w2 := 2 * omega
	sum := w
	power := d
	for k := range order {
		both[k] = w[0] + w[1]
		var a complex128
		for j, z := range s.series[:min(k+1, len(s.series))] {
			a += complex(z*real(both[k-j]), z*imag(both[k-j]))
		}
		inverse := complex(1/float64(k+1), 0)
		w = vector{
			w[2] * inverse,
			w[3] * inverse,
			(a - w2*w[0] - turn*w[2]) * inverse,
			(a + w2*w[1] + turn*w[3]) * inverse,
		}
		for i := range sum {
			sum[i] += w[i] * complex(power, 0)
		}
		power *= d
	}
	return sum
}

// newTail splits a solution into the two waves of a pair.
func newTail(from float64, w pair, value vector, omega complex128, c Cavity) tail {
	t := tail{from: from}
	t.k[0], t.k[1] = quadratic(-w.sum, w.product)
	// U = u₁ + u₂, U′ = i(k₁u₁ + k₂u₂).
	t.u[1] = (-1i*value[2] - t.k[0]*value[0]) / (t.k[1] - t.k[0])
	t.u[0] = value[0] - t.u[1]
	c2 := complex(c.Outside*c.Outside, 0)
	for i, k := range t.k {
		t.v[i] = t.u[i] * (omega - complex(c.Velocity, 0)*k - k*k/2 - c2) / c2
	}
	return t
}

// at returns the solution at x.
func (t *trace) at(x float64) vector {
	n := len(t.steps)
	switch {
	case x <= t.x[0]:
		return t.left.at(x)
	case x >= t.x[n]:
		return t.right.at(x)
	}
	i, on := slices.BinarySearch(t.x, x)
	if on {
		return t.value[i]
	}
	return t.steps[i-1].carry(t.value[i-1], t.omega, t.cavity.Velocity, x-t.x[i-1])
}

// norm returns ∫ [U(D−x)U(x) − V(D−x)V(x)] dx.
func (t *trace) norm() complex128 {
	const points = 16 // of a Gauss–Legendre rule in each step
	var y, weight [points]float64
	quad.Legendre{}.FixedLocations(y[:], weight[:], 0, 1)
	n := len(t.steps)
	inside := make([]vector, n*points)
	for i := range t.steps {
		for j, yj := range y {
			inside[i*points+j] = t.steps[i].carry(t.value[i], t.omega, t.cavity.Velocity, yj*t.steps[i].length)
		}
	}
	var sum complex128
	for i, s := range t.steps {
		for j, w := range weight {
			a, b := inside[i*points+j], inside[len(inside)-1-i*points-j]
			sum += complex(w*s.length, 0) * (a[0]*b[0] - a[1]*b[1])
		}
	}
	// Outside; the two sides give the same.
	for i, k := range t.left.k {
		for j, q := range t.right.k {
			sum += 2 * (t.left.u[i]*t.right.u[j] - t.left.v[i]*t.right.v[j]) / (1i * (k - q))
		}
	}
	return sum
}
