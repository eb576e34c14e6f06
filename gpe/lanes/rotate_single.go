package lanes

import "math"

// The phase in single precision, reduced as in rotate.go by its nearest whole
// number n to f, |f| ≤ ½. sin πf = f·(s0 + s1 z + … + s4 z⁴), z = f², and
// cos πf = 1 + c1 z + … + c5 z⁵ are minimax in the same way: the exchange
// algorithm in 60-digit arithmetic for the absolute error on 0 ≤ f ≤ ½; the
// lowest coefficient is rounded to float32, the rest fitted anew, and so on
// upwards. That leaves 8e-9 for the sine and 1.1e-9 for the cosine, below half
// a unit in the last place of 1, 3e-8.
const (
	singleMagic = 3 << 22
	singleOne   = 0x3f800000 // the bits of float32 1

	singleS0 = 3.14159250259
	singleS1 = -5.16770219803
	singleS2 = 2.54995775223
	singleS3 = -0.597625374794
	singleS4 = 0.0764338076115

	singleC1 = -4.93480205536
	singleC2 = 4.0587053299
	singleC3 = -1.33516156673
	singleC4 = 0.234683766961
	singleC5 = -0.0239638742059
)

// singleTurn multiplies r + i·m by exp(−iπt). It adds what the turn changes:
// with cos − 1 a small phase turns to the full precision of r and m, where the
// rounding of a cosine near 1 would be the same at every step and pile up.
func singleTurn(r, m, t float32) (float32, float32) {
	n := t + singleMagic
	f := t - (n - singleMagic)
	sign := math.Float32frombits(math.Float32bits(n)<<31 | singleOne)
	z := f * f
	sin := (singleS0 + z*(singleS1+z*(singleS2+z*(singleS3+z*singleS4)))) * f
	less := z * (singleC1 + z*(singleC2+z*(singleC3+z*(singleC4+z*singleC5)))) // cos πf − 1
	return (r + m*sin + r*less) * sign, (m - r*sin + m*less) * sign
}

// singlePoint returns point j of all lanes.
func singlePoint(x []float32, j int) *[SingleWidth]float32 {
	return (*[SingleWidth]float32)(x[j*SingleWidth:])
}

// singleCubic is Phase, singleShifted and singleSwollen are PhaseLaw.
func singleCubic(re, im, v, g []float32) {
	for j, vj := range v {
		r, m, gj := singlePoint(re, j), singlePoint(im, j), g[j]
		for l := range r {
			r[l], m[l] = singleTurn(r[l], m[l], vj+gj*(r[l]*r[l]+m[l]*m[l]))
		}
	}
}

func singleShifted(re, im, v, g, s []float32) {
	for j, vj := range v {
		r, m, gj, sj := singlePoint(re, j), singlePoint(im, j), g[j], s[j]
		for l := range r {
			r[l], m[l] = singleTurn(r[l], m[l], vj+gj*(r[l]*r[l]+m[l]*m[l]-sj))
		}
	}
}

func singleSwollen(re, im, v, g, s []float32, swelling, scale float32) {
	for j, vj := range v {
		r, m, gj, sj := singlePoint(re, j), singlePoint(im, j), scale*g[j], s[j]
		for l := range r {
			y := swelling * (r[l]*r[l] + m[l]*m[l] - sj)
			root := float32(math.Sqrt(float64(1 + 2*y)))
			r[l], m[l] = singleTurn(r[l], m[l], vj+gj*(y*(4+9*y)/(root*(1+3*y+root))))
		}
	}
}

func singleDamp(re, im, d []float32) {
	for j, dj := range d {
		r, m := singlePoint(re, j), singlePoint(im, j)
		for l := range r {
			r[l] *= dj
			m[l] *= dj
		}
	}
}
