package lab

import (
	"errors"
	"math"
)

// errNoRoot is what a bracket that cannot be found becomes.
var errNoRoot = errors.New("no line density within the range of floating-point numbers fits it")

// increasingRoot returns x > 0 with f(x) = target to a few parts in 1e15, for f
// increasing from 0 at 0 without bound, starting from a guess. The bracket
// doubles until it holds the root and then shrinks by regula falsi in its
// Illinois form (M. Dowell, P. Jarratt, BIT 11, 168 (1971)), which keeps the
// root between its ends; both coordinates are logarithmic, in which the laws
// used here are nearly straight.
func increasingRoot(f func(x float64) float64, target, guess float64) (float64, error) {
	if !(guess > 0) || math.IsInf(guess, 0) {
		return 0, errNoRoot
	}
	g := func(s float64) float64 { return math.Log(f(math.Exp(s)) / target) }
	const widest = 700 // exp of more overflows
	a := math.Log(guess)
	b := a
	ga := g(a)
	gb := ga
	for step := math.Ln2; ga > 0; step *= 2 {
		b, gb = a, ga
		a -= step
		if ga = g(a); math.Abs(a) > widest || math.IsNaN(ga) {
			return 0, errNoRoot
		}
	}
	for step := math.Ln2; gb < 0; step *= 2 {
		a, ga = b, gb
		b += step
		if gb = g(b); math.Abs(b) > widest || math.IsNaN(gb) {
			return 0, errNoRoot
		}
	}
	const rounding = 4e-16
	side := 0
	for range 200 {
		switch {
		case ga == 0:
			return math.Exp(a), nil
		case gb == 0:
			return math.Exp(b), nil
		case b-a <= rounding*(1+math.Abs(b)):
			return math.Exp((a + b) / 2), nil
		}
		c := (a*gb - b*ga) / (gb - ga)
		if !(c > a && c < b) { // rounding has pushed it onto an end
			c = a + (b-a)/2
		}
		gc := g(c)
		if math.IsNaN(gc) {
			return 0, errNoRoot
		}
		if gc < 0 {
			a, ga = c, gc
			if side == -1 {
				gb /= 2
			}
			side = -1
		} else {
			b, gb = c, gc
			if side == 1 {
				ga /= 2
			}
			side = 1
		}
	}
	return math.Exp((a + b) / 2), nil
}
