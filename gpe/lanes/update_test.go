package lanes

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
)

// An update is BLAS's rank-k update of the upper triangle, bit by bit where all
// is exact, and leaves the rest alone; gonum is the oracle.
func TestUpdater(t *testing.T) {
	each(t, func(t *testing.T) {
		for _, c := range [][2]int{{1, 1}, {3, 2}, {8, 5}, {13, 9}, {16, 1}, {23, 40}, {64, 17}, {100, 33}} {
			n, rows := c[0], c[1]
			a := make([]float64, n*rows)
			for i := range a {
				a[i] = math.Round(1e4*math.Sin(float64(i*i+1))) * 0x1p-18
			}
			got, want := make([]float64, n*n), make([]float64, n*n)
			for i := range got {
				got[i] = float64(i % 7)
				want[i] = got[i]
			}
			u := NewUpdater(n)
			u.Add(got, n, a)
			u.Add(got, n, a[:n*(rows/2)])
			for _, part := range [][]float64{a, a[:n*(rows/2)]} {
				if len(part) > 0 {
					blas64.Syrk(blas.Trans, 1, blas64.General{Rows: len(part) / n, Cols: n, Stride: n, Data: part}, 1,
						blas64.Symmetric{N: n, Stride: n, Data: want, Uplo: blas.Upper})
				}
			}
			for i := range got {
				if got[i] != want[i] {
					t.Fatalf("n = %d, %d rows: entry (%d, %d) is %v, want %v", n, rows, i/n, i%n, got[i], want[i])
				}
			}
		}
	})
}

func BenchmarkUpdater(b *testing.B) {
	const n, rows = 1024, 128
	a, c := make([]float64, n*rows), make([]float64, n*n)
	for i := range a {
		a[i] = 1 + float64(i%5) // gonum leaves zeros out
	}
	speed := func(b *testing.B) {
		b.ReportMetric(float64(n*(n+1)*rows)/float64(b.Elapsed().Nanoseconds())*float64(b.N), "GFLOP/s")
	}
	for _, k := range available {
		b.Run(k.name, func(b *testing.B) {
			defer use(k)()
			u := NewUpdater(n)
			for b.Loop() {
				u.Add(c, n, a)
			}
			speed(b)
		})
	}
	b.Run("gonum", func(b *testing.B) {
		for b.Loop() {
			blas64.Syrk(blas.Trans, 1, blas64.General{Rows: rows, Cols: n, Stride: n, Data: a}, 1,
				blas64.Symmetric{N: n, Stride: n, Data: c, Uplo: blas.Upper})
		}
		speed(b)
	})
}
