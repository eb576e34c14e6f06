package cavity

import (
	"errors"
	"math"
	"math/cmplx"
)

// contour follows the phase of an analytic function along straight lines.
// Values are kept, so that cells that share a side share its work.
type contour struct {
	f     func(complex128) complex128
	known map[complex128]complex128
	// step is the longest piece that is accepted around z.
	step  func(z complex128) float64
	least float64 // the shortest that is tried
}

// errOnZero means that a line passes too close to a zero to tell on which side
// it lies.
var errOnZero = errors.New("a zero on the contour")

func (c *contour) at(z complex128) complex128 {
	if v, ok := c.known[z]; ok {
		return v
	}
	v := c.f(z)
	c.known[z] = v
	return v
}

// closeness is how much two neighbouring values may differ, as a share of the
// one in the middle: then all three lie in a half-plane that excludes zero.
const closeness = 0.7

// turn returns by how much the phase of f grows from a to b; the way is halved
// until values are close.
func (c *contour) turn(a, b complex128) (float64, error) {
	m := (a + b) / 2
	length := cmplx.Abs(b - a)
	if length > c.step(m) {
		return c.halves(a, m, b)
	}
	fa, fm, fb := c.at(a), c.at(m), c.at(b)
	if !finite(fa) || !finite(fb) || !finite(fm) {
		return 0, errOnZero
	}
	near := closeness * cmplx.Abs(fm)
	if cmplx.Abs(fa-fm) < near && cmplx.Abs(fb-fm) < near {
		return cmplx.Phase(fm/fa) + cmplx.Phase(fb/fm), nil
	}
	if length < c.least {
		return 0, errOnZero
	}
	return c.halves(a, m, b)
}

func (c *contour) halves(a, m, b complex128) (float64, error) {
	left, err := c.turn(a, m)
	if err != nil {
		return 0, err
	}
	right, err := c.turn(m, b)
	return left + right, err
}

// cell is a rectangle of the ω plane.
type cell struct{ left, right, bottom, top float64 }

func (r cell) holds(z complex128) bool {
	return real(z) >= r.left && real(z) < r.right && imag(z) >= r.bottom && imag(z) < r.top
}

func (r cell) centre() complex128 { return complex((r.left+r.right)/2, (r.bottom+r.top)/2) }

func (r cell) size() float64 { return math.Max(r.right-r.left, r.top-r.bottom) }

// split cuts the cell across its longer side at a share of it.
func (r cell) split(share float64) (cell, cell) {
	a, b := r, r
	if r.right-r.left >= r.top-r.bottom {
		a.right = r.left + share*(r.right-r.left)
		b.left = a.right
	} else {
		a.top = r.bottom + share*(r.top-r.bottom)
		b.bottom = a.top
	}
	return a, b
}

// count returns the number of zeros in the cell, by the argument principle.
func (c *contour) count(r cell) (int, error) {
	corners := [5]complex128{complex(r.left, r.bottom), complex(r.right, r.bottom), complex(r.right, r.top), complex(r.left, r.top)}
	corners[4] = corners[0]
	total := 0.0
	for i := range 4 {
		a, b := corners[i], corners[i+1]
		forward := i < 2
		if !forward { // shared sides are walked the same way
			a, b = b, a
		}
		t, err := c.turn(a, b)
		if err != nil {
			return 0, err
		}
		if !forward {
			t = -t
		}
		total += t
	}
	return int(math.Round(total / (2 * math.Pi))), nil
}
