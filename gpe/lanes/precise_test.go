package lanes

import (
	"math"
	"math/big"
)

// References in 128-bit arithmetic, by the most naive methods there are.

const precision = 128

var bigPi, _ = new(big.Float).SetPrec(precision).SetString("3.14159265358979323846264338327950288419716939937510582097494459")

func number(x float64) *big.Float { return new(big.Float).SetPrec(precision).SetFloat64(x) }
func add(x, y *big.Float) *big.Float {
	return new(big.Float).SetPrec(precision).Add(x, y)
}
func sub(x, y *big.Float) *big.Float {
	return new(big.Float).SetPrec(precision).Sub(x, y)
}
func mul(x, y *big.Float) *big.Float {
	return new(big.Float).SetPrec(precision).Mul(x, y)
}
func quo(x, y *big.Float) *big.Float {
	return new(big.Float).SetPrec(precision).Quo(x, y)
}
func float(x *big.Float) float64 { f, _ := x.Float64(); return f }

// bigCosSin sums the Taylor series of cos x and sin x, for |x| of order 10.
func bigCosSin(x *big.Float) (c, s *big.Float) {
	c, s = number(1), number(0)
	term := number(1)
	for n := 1; n < 200; n++ {
		term = quo(mul(term, x), number(float64(n)))
		signed := term
		if n%4 >= 2 {
			signed = new(big.Float).Neg(term)
		}
		if n%2 == 0 {
			c = add(c, signed)
		} else {
			s = add(s, signed)
		}
		if term.Sign() == 0 || term.MantExp(nil) < -precision {
			break
		}
	}
	return c, s
}

// bigCosSinPi returns cos πt and sin πt.
func bigCosSinPi(t *big.Float) (c, s *big.Float) {
	turns, _ := quo(t, number(2)).Int(nil)
	rest := sub(t, mul(number(2), new(big.Float).SetPrec(precision).SetInt(turns)))
	return bigCosSin(mul(bigPi, rest))
}

// bigExp sums the Taylor series of exp x after halving x ten times.
func bigExp(x *big.Float) *big.Float {
	const halvings = 10
	x = quo(x, number(1<<halvings))
	sum, term := number(1), number(1)
	for n := 1; n < 100; n++ {
		term = quo(mul(term, x), number(float64(n)))
		sum = add(sum, term)
	}
	for range halvings {
		sum = mul(sum, sum)
	}
	return sum
}

// A bigField is a complex field.
type bigField struct{ re, im []*big.Float }

func newBigField(psi []complex128) bigField {
	f := bigField{make([]*big.Float, len(psi)), make([]*big.Float, len(psi))}
	for j, z := range psi {
		f.re[j], f.im[j] = number(real(z)), number(imag(z))
	}
	return f
}

// turn multiplies value j by c + i·s.
func (f bigField) turn(j int, c, s *big.Float) {
	x, y := f.re[j], f.im[j]
	f.re[j], f.im[j] = sub(mul(x, c), mul(y, s)), add(mul(x, s), mul(y, c))
}

// dft returns Σ_j x_j exp(sign·2πi jk/N) by the definition.
func (f bigField) dft(sign float64) bigField {
	n := len(f.re)
	c, s := make([]*big.Float, n), make([]*big.Float, n)
	for k := range n {
		c[k], s[k] = bigCosSinPi(quo(number(sign*2*float64(k)), number(float64(n))))
	}
	out := newBigField(make([]complex128, n))
	re, im, t := new(big.Float).SetPrec(precision), new(big.Float).SetPrec(precision), new(big.Float).SetPrec(precision)
	for k := range n {
		re.SetFloat64(0)
		im.SetFloat64(0)
		for j := range n {
			w := j * k % n
			re.Add(re, t.Mul(f.re[j], c[w]))
			re.Sub(re, t.Mul(f.im[j], s[w]))
			im.Add(im, t.Mul(f.re[j], s[w]))
			im.Add(im, t.Mul(f.im[j], c[w]))
		}
		out.re[k].Set(re)
		out.im[k].Set(im)
	}
	return out
}

// relative returns the relative L2 difference of a field from the reference.
func (f bigField) relative(psi []complex128) float64 {
	var difference, norm float64
	for j, z := range psi {
		a, b := float(sub(number(real(z)), f.re[j])), float(sub(number(imag(z)), f.im[j]))
		difference += a*a + b*b
		a, b = float(f.re[j]), float(f.im[j])
		norm += a*a + b*b
	}
	return math.Sqrt(difference / norm)
}

// relative returns the relative L2 difference of got from want.
func relative(got, want []complex128) float64 {
	var difference, norm float64
	for j, z := range want {
		d := got[j] - z
		difference += real(d)*real(d) + imag(d)*imag(d)
		norm += real(z)*real(z) + imag(z)*imag(z)
	}
	return math.Sqrt(difference / norm)
}
