package lanes

import (
	"errors"
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

// each runs a test with every kernel that this machine has.
func each(t *testing.T, test func(t *testing.T)) {
	t.Helper()
	for _, k := range available {
		t.Run(k.name, func(t *testing.T) {
			defer use(k)()
			test(t)
		})
	}
}

// use makes k the active kernel and returns what undoes that.
func use(k *kernel) (undo func()) {
	before := active
	active = k
	return func() { active = before }
}

// All kernels do the same to 1e-13 in a hundred steps of a real problem, for
// every law and for lengths with all leads.
func TestKernelsAgree(t *testing.T) {
	for _, n := range []int{64, 96, 128, 160, 256, 512, 1024, 1280, 2048, 4096} {
		for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.4)} {
			run := func(k *kernel) *Batch {
				defer use(k)()
				p := newSplitStep(t, n)
				damping := make([]float64, n)
				for j := range damping {
					damping[j] = 1 - 1e-6*float64(j%3)
				}
				for range 100 {
					p.do()
					PhaseLaw(p.batch, p.v, p.g, p.s, law)
					Damp(p.batch, damping)
				}
				return p.batch
			}
			want := run(&portable)
			for _, k := range available {
				got := run(k)
				off, norm := 0.0, 0.0
				for i := range want.Re {
					off += math.Pow(got.Re[i]-want.Re[i], 2) + math.Pow(got.Im[i]-want.Im[i], 2)
					norm += want.Re[i]*want.Re[i] + want.Im[i]*want.Im[i]
				}
				if r := math.Sqrt(off / norm); r > 1e-13 {
					t.Errorf("%s, n = %d, η = %g: off by %.2g", k.name, n, law.Swelling(), r)
				}
			}
		}
	}
}

func TestCombine(t *testing.T) {
	each(t, func(t *testing.T) {
		for _, c := range [][2]int{{1, 1}, {3, 5}, {4, 7}, {8, 16}, {13, 9}} {
			points, count := c[0], c[1]
			f, beta, dst := make([]float64, points*count), make([]float64, count*Width), make([]float64, points*Width)
			for i := range f {
				f[i] = math.Sin(float64(3*i + 1))
			}
			for i := range beta {
				beta[i] = math.Cos(float64(2*i + 1))
			}
			Combine(dst, f, beta)
			for j := range points {
				for l := range Width {
					want := 0.0
					for m := range count {
						want += f[j*count+m] * beta[m*Width+l]
					}
					if d := math.Abs(dst[j*Width+l] - want); d > 1e-14*float64(count) { // rounding
						t.Fatalf("%d points, %d coefficients: off by %.2g", points, count, d)
					}
				}
			}
		}
	})
}

func TestCheckKernel(t *testing.T) {
	t.Setenv(Variable, Kernel())
	if err := CheckKernel(); err != nil {
		t.Error(err)
	}
	t.Setenv(Variable, "abacus")
	var unknown *KernelError
	if err := CheckKernel(); !errors.As(err, &unknown) || unknown.Name != "abacus" {
		t.Errorf("error %v, want a KernelError", err)
	}
}

func BenchmarkCombine(b *testing.B) {
	const points, count = 1024, 1023
	f, beta, dst := make([]float64, points*count), make([]float64, count*Width), make([]float64, points*Width)
	for _, k := range available {
		b.Run(k.name, func(b *testing.B) {
			for b.Loop() {
				k.combine(dst, f, beta)
			}
			b.ReportMetric(float64(2*points*count*Width)/float64(b.Elapsed().Nanoseconds())*float64(b.N), "GFLOP/s")
		})
	}
}
