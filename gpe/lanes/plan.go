package lanes

import (
	"fmt"
	"math"
)

// LengthError reports a length for which there is no plan.
type LengthError struct {
	N            int // the length asked for
	Below, Above int // the nearest allowed lengths; 0 where there is none
}

func (e *LengthError) Error() string {
	const allowed = "allowed are 2^a, 3·2^a and 5·2^a"
	switch {
	case e.Below == 0:
		return fmt.Sprintf("lanes: no transform of length %d: %s from %d on", e.N, allowed, e.Above)
	case e.Above == 0:
		return fmt.Sprintf("lanes: no transform of length %d: %s up to %d", e.N, allowed, e.Below)
	}
	return fmt.Sprintf("lanes: no transform of length %d: %s; the nearest are %d and %d", e.N, allowed, e.Below, e.Above)
}

// PlanOf is the in-place transform of one length for all lanes of a batch. It is
// read-only after NewPlan and may be used from any number of goroutines.
//
// The forward transform decimates in frequency and leaves its result where it
// arises, in scrambled order; the backward transform decimates in time, takes
// the scrambled order and ends in natural order. What happens between them in
// a split step is a multiplication by a table, for which any order is as good
// as another: nothing is ever reordered.
type PlanOf[T Float] struct {
	n      int
	sweeps *sweeps[T]
	passes []pass[T] // forward order; backward runs from the last to the first
	order  []int
}

// Plan transforms batches in double precision, SinglePlan in single.
type (
	Plan       = PlanOf[float64]
	SinglePlan = PlanOf[float32]
)

// A pass is one sweep of butterflies. It works on blocks of radix·span points;
// leg q of butterfly j in a block is point q·span + j.
type pass[T Float] struct {
	radix, span int
	// twiddle holds for each j < span the radix−1 factors exp(−2πi jq/(radix·span)),
	// q = 1, …, radix−1, as pairs re, im. The backward pass conjugates them.
	twiddle []T
}

// NewPlan returns the plan of length n = 2^a, 3·2^a or 5·2^a with a ≥ 4 and
// n ≤ 2^24. For any other length it returns a *LengthError that names the
// nearest allowed ones.
func NewPlan(n int) (*Plan, error) { return newPlan[float64](n, active) }

// NewSinglePlan is NewPlan for single precision, in which twiddles are float64
// rounded to float32.
func NewSinglePlan(n int) (*SinglePlan, error) { return newPlan[float32](n, active) }

func newPlan[T Float](n int, k *kernel) (*PlanOf[T], error) {
	lead, power, ok := factor(n)
	if !ok {
		return nil, nearest(n)
	}
	s := of[T](k)
	radices := s.radices(power)
	if lead > 1 {
		radices = append([]int{lead}, radices...)
	}
	p := &PlanOf[T]{n: n, sweeps: s, order: scrambled(radices)}
	span := n
	for _, r := range radices {
		span /= r
		p.passes = append(p.passes, newPass[T](r, span, s.rows))
	}
	return p, nil
}

// Len returns the length N of the transform.
func (p *PlanOf[T]) Len() int { return p.n }

// Order returns a new slice that tells the wave index k in 0, …, N−1 that each
// scrambled place holds after Forward.
func (p *PlanOf[T]) Order() []int { return append([]int(nil), p.order...) }

// Forward replaces each lane x by X_k = Σ_j x_j exp(−2πi jk/N), in scrambled
// order: place s holds k = Order()[s].
func (p *PlanOf[T]) Forward(b *BatchOf[T]) {
	p.check(b)
	for i := range p.passes {
		q := &p.passes[i]
		p.sweeps.forward[q.radix](b.Re, b.Im, q)
	}
}

// Backward replaces each lane X, in scrambled order, by
// x_j = Σ_k X_k exp(+2πi jk/N) in natural order. It is not normalised:
// Backward after Forward multiplies by N.
func (p *PlanOf[T]) Backward(b *BatchOf[T]) {
	p.check(b)
	for i := len(p.passes) - 1; i >= 0; i-- {
		q := &p.passes[i]
		p.sweeps.backward[q.radix](b.Re, b.Im, q)
	}
}

func (p *PlanOf[T]) check(b *BatchOf[T]) {
	b.check()
	if b.N != p.n {
		panic(fmt.Sprintf("lanes: plan of length %d used on a batch of %d points", p.n, b.N))
	}
}

// factor writes n as lead·2^power with lead 1, 3 or 5.
func factor(n int) (lead, power int, ok bool) {
	if n < 1<<minPower || n > 1<<maxPower {
		return 0, 0, false
	}
	for n%2 == 0 {
		n /= 2
		power++
	}
	return n, power, power >= minPower && (n == 1 || n == 3 || n == 5)
}

// nearest returns the error for a length that has no plan.
func nearest(n int) *LengthError {
	e := &LengthError{N: n}
	for a := minPower; a <= maxPower; a++ {
		for _, lead := range []int{1, 3, 5} {
			m := lead << a
			switch {
			case m > 1<<maxPower:
			case m < n && m > e.Below:
				e.Below = m
			case m > n && (m < e.Above || e.Above == 0):
				e.Above = m
			}
		}
	}
	return e
}

// scrambled returns the wave index at each place after forward passes with
// these radices. A pass of radix r sends the indices k = q + r·k′ to its block
// q, where the passes that follow sort out k′.
func scrambled(radices []int) []int {
	order := []int{0}
	for i := len(radices) - 1; i >= 0; i-- {
		r, sub := radices[i], order
		order = make([]int, 0, r*len(sub))
		for q := 0; q < r; q++ {
			for _, k := range sub {
				order = append(order, q+r*k)
			}
		}
	}
	return order
}

// newPass returns the pass of a radix on blocks of radix·span points, each so
// many rows.
func newPass[T Float](radix, span, rows int) pass[T] {
	p := pass[T]{radix: radix, span: span * rows, twiddle: aligned[T](2 * (radix - 1) * span * rows)}
	i := 0
	for j := 0; j < span*rows; j++ {
		for q := 1; q < radix; q++ {
			c, s := circle(j/rows*q, radix*span)
			p.twiddle[i], p.twiddle[i+1] = T(c), T(-s)
			i += 2
		}
	}
	return p
}

// circle returns cos and sin of 2πk/n. The angle is folded into the first
// octant in whole numbers, so that the rounding of the argument costs no more
// than one unit in the last place.
func circle(k, n int) (c, s float64) {
	k %= n
	if k < 0 {
		k += n
	}
	// In eighths of a turn: 8k/n = octant + rest/n.
	octant, rest := 8*k/n, 8*k%n
	if octant%2 == 1 {
		rest = n - rest
	}
	s, c = math.Sincos(math.Pi / 4 * float64(rest) / float64(n))
	switch octant {
	case 0:
		return c, s
	case 1:
		return s, c
	case 2:
		return -s, c
	case 3:
		return -c, s
	case 4:
		return -c, -s
	case 5:
		return -s, -c
	case 6:
		return s, -c
	}
	return c, -s
}
