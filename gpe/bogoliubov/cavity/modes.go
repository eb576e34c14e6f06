package cavity

import (
	"cmp"
	"fmt"
	"math"
	"math/cmplx"
	"slices"
)

// Mode is a growing mode, e^{−iωt} with ω = Frequency + i GrowthRate. Modes come
// in pairs ω and −ω*, which describe the same real disturbance: Frequency ≥ 0
// stands for both, and is exactly 0 for a mode that grows without oscillating
// and is its own partner.
type Mode struct{ Frequency, GrowthRate float64 }

// Omega returns ω.
func (m Mode) Omega() complex128 { return complex(m.Frequency, m.GrowthRate) }

// CountError means that fewer modes were found than the argument principle
// counts.
type CountError struct {
	Cavity         Cavity
	Found, Counted int // both of a pair
}

func (e *CountError) Error() string {
	return fmt.Sprintf("of %d growing modes of a cavity of length %.6g only %d were found", e.Counted, e.Cavity.Length, e.Found)
}

// Modes returns the growing modes, fastest first; none for a cavity shorter
// than its first threshold. Growth slower than 1e-6 ω_max is not told
// from none. The modes are complete: their number is that which the argument
// principle counts in the rectangle of all growth rates below GrowthBound and
// frequencies up to well beyond ω_max; otherwise the error is a *CountError.
//
// Guesses, such as the modes of a slightly different cavity, save time and
// change nothing else.
func (c Cavity) Modes(guesses ...Mode) ([]Mode, error) {
	if c.Length <= c.shortest() {
		return nil, nil
	}
	return newSearch(c).modes(guesses)
}

// modes counts the zeros and finds as many.
func (s *search) modes(guesses []Mode) ([]Mode, error) {
	want, err := s.total()
	if err != nil {
		return nil, err
	}
	for _, g := range guesses {
		s.try(g.Omega(), s.all)
	}
	if s.found() != want {
		s.roots = nil
		cell := s.all
		cell.left = -cell.right / 37 // so that zeros on the axis are inside
		if err := s.divide(cell, 0); err != nil {
			return nil, err
		}
	}
	if n := s.found(); n != want {
		return nil, &CountError{s.condition.cavity, n, want}
	}
	modes := make([]Mode, len(s.roots))
	for i, w := range s.roots {
		modes[i] = Mode{real(w), imag(w)}
	}
	slices.SortFunc(modes, func(a, b Mode) int {
		return cmp.Or(cmp.Compare(b.GrowthRate, a.GrowthRate), cmp.Compare(a.Frequency, b.Frequency))
	})
	return modes, nil
}

// search looks for the zeros of E in the quarter-plane Re ω ≥ 0, Im ω > 0.
type search struct {
	contour
	condition *condition
	all       cell
	unit      float64      // ω_max inside, by which frequencies are called small
	roots     []complex128 // Re ≥ 0; a double root is there twice
}

func newSearch(c Cavity) *search {
	s := &search{condition: newCondition(c), unit: c.topFrequency()}
	s.all = cell{0, c.widest(), still * s.unit, 1.01 * c.GrowthBound()}
	// E follows waves to and fro. Each threshold below the length is another
	// turn of their phase, and towards ω_max, where they come to rest, phases go
	// as √(ω_max − ω). Beyond it one of them is evanescent; and high above the
	// real axis the echo of a wave is too weak to count where it turns fast.
	pieces := 6 + 4*c.Length*c.ZeroWave()/math.Pi
	top := s.unit
	step := func(z complex128) float64 {
		x := math.Abs(real(z)) - top
		off := math.Hypot(x, imag(z)) / top
		return math.Max(math.Max(imag(z), x)/2, top/pieces*math.Max(math.Min(2*math.Sqrt(off), 2), 1/pieces))
	}
	s.contour = contour{f: s.condition.at, known: map[complex128]complex128{}, step: step, least: 1e-8 * s.unit}
	return s
}

// axial is the frequency, over ω_max, below which a mode counts as one that does
// not oscillate: where two such modes merge to become a pair, neither is known
// better than to the root of the machine's precision.
const axial = 3e-7

// found is the number of zeros on both sides of the imaginary axis.
func (s *search) found() (n int) {
	for _, w := range s.roots {
		if real(w) > 0 {
			n++
		}
		n++
	}
	return n
}

// total counts the zeros on both sides of the imaginary axis. Because
// E(−ω*) = E(ω)*, the right-hand half of the contour does.
func (s *search) total() (int, error) {
	r := s.all
	for range 4 {
		corners := [4]complex128{complex(0, r.bottom), complex(r.right, r.bottom), complex(r.right, r.top), complex(0, r.top)}
		total, err := 0.0, error(nil)
		for i := range 3 {
			var t float64
			if t, err = s.turn(corners[i], corners[i+1]); err != nil {
				break
			}
			total += t
		}
		if err == nil {
			s.all = r
			return int(math.Round(total / math.Pi)), nil
		}
		// A zero on the lower side: a cavity at a threshold to ten digits.
		r.bottom *= 3
	}
	return 0, fmt.Errorf("the modes of a cavity of length %.6g cannot be counted: %w", s.condition.cavity.Length, errOnZero)
}

// shares are where a cell is cut; the next is taken where a zero lies on the
// cut.
var shares = []float64{0.5, 0.46, 0.57, 0.41, 0.62}

// divide finds the zeros in a cell by dividing it until each part holds one.
func (s *search) divide(r cell, depth int) error {
	n, err := s.count(r)
	if err != nil || n == 0 {
		return err
	}
	if n == 1 && s.try(r.centre(), r) {
		return nil
	}
	if r.size() < axial*s.unit || depth > 60 {
		// Two modes about to merge: they are where the cell is.
		for range n {
			s.keep(r.centre())
		}
		return nil
	}
	for _, share := range shares {
		var inner []complex128
		inner = append(inner, s.roots...)
		a, b := r.split(share)
		if err = s.divide(a, depth+1); err == nil {
			err = s.divide(b, depth+1)
		}
		if err == nil {
			return nil
		}
		s.roots = inner
	}
	return err
}

// keep notes a zero; those left of the axis are partners of others.
func (s *search) keep(w complex128) {
	switch {
	case math.Abs(real(w)) < axial*s.unit:
		w = complex(0, imag(w))
	case real(w) < 0:
		return
	}
	s.roots = append(s.roots, w)
}

// try looks for a zero in the cell from a guess and keeps it if it is new.
func (s *search) try(guess complex128, r cell) bool {
	w, ok := s.polish(guess, r.size())
	if !ok {
		return false
	}
	inside := r
	if r.left == 0 { // the axis is no border
		inside.left = -axial * s.unit
	}
	if !inside.holds(w) {
		return false
	}
	for _, old := range s.roots {
		if cmplx.Abs(old-w) < axial*s.unit {
			return false
		}
	}
	s.keep(w)
	return true
}

// polish improves a zero by D. E. Muller's method, Math. Tables Aids Comput.
// 10, 208 (1956): a parabola through the last three points.
func (s *search) polish(w complex128, scale float64) (complex128, bool) {
	bottom := s.all.bottom / 2
	f := s.f
	h := complex(0.02*math.Min(scale, math.Max(cmplx.Abs(w), 1e-2*s.unit)), 0)
	x0, x1, x2 := w-h, w+h, w
	f0, f1, f2 := f(x0), f(x1), f(x2)
	for range 40 {
		d1, d2 := (f1-f0)/(x1-x0), (f2-f1)/(x2-x1)
		a := (d2 - d1) / (x2 - x0)
		b := d2 + a*(x2-x1)
		root := cmplx.Sqrt(b*b - 4*a*f2)
		q := b + root
		if size(b-root) > size(q) {
			q = b - root
		}
		step := -2 * f2 / q
		if !finite(step) {
			return 0, false
		}
		if limit := 0.3 * scale; cmplx.Abs(step) > limit {
			step *= complex(limit/cmplx.Abs(step), 0)
		}
		next := x2 + step
		if imag(next) < bottom { // E is known above the axis only
			next = complex(real(next), math.Max(bottom, imag(x2)/4))
			if next == x2 {
				return 0, false
			}
		}
		x0, x1, x2 = x1, x2, next
		f0, f1, f2 = f1, f2, f(next)
		if f2 == 0 || cmplx.Abs(x2-x1) < 1e-12*s.unit {
			return x2, true
		}
	}
	return 0, false
}
