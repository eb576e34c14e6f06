package lanes

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Every kernel mixes as the definition says.
func TestMix(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for _, k := range available {
		t.Run(k.name, func(t *testing.T) {
			for _, n := range []int{1, 3, 64} {
				b := NewBatch(n)
				matrix := make([]float64, 4*n)
				for i := range b.Re {
					b.Re[i], b.Im[i] = r.NormFloat64(), r.NormFloat64()
				}
				for i := range matrix {
					matrix[i] = r.NormFloat64()
				}
				re, im := append([]float64(nil), b.Re...), append([]float64(nil), b.Im...)
				k.mix(b.Re, b.Im, matrix)
				for i := range re {
					m := matrix[4*(i/Width):]
					for _, c := range [][2]float64{{b.Re[i], m[0]*re[i] + m[1]*im[i]}, {b.Im[i], m[2]*re[i] + m[3]*im[i]}} {
						if math.Abs(c[0]-c[1]) > 1e-14 { // one rounding more or less
							t.Fatalf("n = %d, value %d: %v, want %v", n, i, c[0], c[1])
						}
					}
				}
			}
		})
	}
	b, matrix := NewBatch(64), make([]float64, 4*64)
	if n := testing.AllocsPerRun(10, func() { Mix(b, matrix) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
