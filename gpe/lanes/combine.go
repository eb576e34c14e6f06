package lanes

import "fmt"

// Combine sets each of dst's points, in all lanes, to a sum of coefficients
// that the lanes have each their own with weights that they share:
//
//	dst[j·Width+l] = Σ_m f[j·count+m] beta[m·Width+l],  0 ≤ m < count.
//
// It is how a trajectory's initial noise is put together from its modes. The
// length of beta is count·Width, that of f points·count. It does not allocate.
func Combine(dst, f, beta []float64) {
	points, count := len(dst)/Width, len(beta)/Width
	if len(dst) != points*Width || len(beta) != count*Width || len(f) != points*count || count == 0 {
		panic(fmt.Sprintf("lanes: %d sums of %d coefficients with %d weights", len(dst), len(beta), len(f)))
	}
	if points > 0 {
		active.combine(dst, f, beta)
	}
}

func combine(dst, f, beta []float64) {
	rows, coefficients := rows(dst), rows(beta)
	for j := range rows {
		var a0, a1, a2, a3, a4, a5, a6, a7 float64
		weights := f[j*len(coefficients):][:len(coefficients)]
		for m, w := range weights {
			x := &coefficients[m]
			a0 += w * x[0]
			a1 += w * x[1]
			a2 += w * x[2]
			a3 += w * x[3]
			a4 += w * x[4]
			a5 += w * x[5]
			a6 += w * x[6]
			a7 += w * x[7]
		}
		rows[j] = [Width]float64{a0, a1, a2, a3, a4, a5, a6, a7}
	}
}
