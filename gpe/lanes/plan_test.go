package lanes

import (
	"errors"
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/mjibson/go-dsp/fft"
	"gonum.org/v1/gonum/dsp/fourier"
)

// eights is the portable kernel made to use radix 8 wherever it can, so that
// every pass is exercised with twiddles.
var eights = func() kernel {
	k := portable
	k.name = "portable, radix 8"
	k.double.radices = func(a int) []int {
		var r []int
		for a > 3 && a != 4 {
			r = append(r, 8)
			a -= 3
		}
		switch a {
		case 4:
			return append(r, 4, 4)
		case 2:
			return append(r, 4)
		}
		return append(r, 8)
	}
	k.single.radices = k.double.radices
	return k
}()

// testLengths are all lengths to 1024 and some of each kind beyond.
var testLengths = []int{
	16, 32, 48, 64, 80, 96, 128, 160, 192, 256, 320, 384, 512, 640, 768, 1024,
	2048, 3 * 1024, 4096, 5 * 1024, 8192, 16384, 3 * 16384, 65536,
}

// roundoff is the relative L2 error allowed to one transform: each pass adds
// an error of order 1e-16 of the norm.
func roundoff(n int) float64 { return 2e-16 * math.Log2(float64(n)) }

func random(n int, seed uint64) []complex128 {
	r := rand.New(rand.NewPCG(seed, 1))
	x := make([]complex128, n)
	for j := range x {
		x[j] = complex(r.NormFloat64(), r.NormFloat64())
	}
	return x
}

// randomBatch returns a batch and what each lane holds.
func randomBatch(n int, seed uint64) (*Batch, [Width][]complex128) {
	b := NewBatch(n)
	var x [Width][]complex128
	for l := range x {
		x[l] = random(n, seed+uint64(l))
		b.SetLane(l, x[l])
	}
	return b, x
}

// natural returns lane l of a scrambled batch in natural order.
func natural(p *Plan, b *Batch, l int) []complex128 {
	x := make([]complex128, b.N)
	for place, z := range b.Lane(nil, l) {
		x[p.order[place]] = z
	}
	return x
}

// tested is all kernels of this machine and the portable one's radix 8, which
// its plans do not use throughout.
var tested = append(slices.Clone(available), &eights)

// eachPlan runs a test for all kernels and the given lengths.
func eachPlan(t *testing.T, lengths []int, test func(*testing.T, *Plan)) {
	for _, k := range tested {
		for _, n := range lengths {
			t.Run(fmt.Sprintf("%s/%d", k.name, n), func(t *testing.T) {
				defer use(k)()
				p, err := newPlan[float64](n, k)
				if err != nil {
					t.Fatal(err)
				}
				test(t, p)
			})
		}
	}
}

func TestForwardAgainstLibraries(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 1)
		p.Forward(b)
		oracle := fourier.NewCmplxFFT(n)
		for l := range Width {
			got := natural(p, b, l)
			// The libraries have rounding errors, too, gonum a few times ours.
			if d := relative(got, oracle.Coefficients(nil, x[l])); d > 5*roundoff(n) {
				t.Errorf("lane %d: %.2g from gonum", l, d)
			}
			if l > 0 {
				continue // one lane is enough for the slow one
			}
			// For lengths that are no power of two it makes a convolution with
			// exp(iπj²/N), whose argument is as large as πN when rounded.
			limit := 5 * roundoff(n)
			if n&(n-1) != 0 {
				limit += math.Pi * float64(n) * 0x1p-53
			}
			if d := relative(got, fft.FFT(x[l])); d > limit {
				t.Errorf("lane %d: %.2g from go-dsp", l, d)
			}
		}
	})
}

func TestBackwardAgainstLibrary(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 2)
		y := make([]complex128, n) // lane 5 in natural order
		for place, k := range p.Order() {
			y[k] = x[5][place]
		}
		p.Backward(b)
		if d := relative(b.Lane(nil, 5), fourier.NewCmplxFFT(n).Sequence(nil, y)); d > 5*roundoff(n) {
			t.Errorf("%.2g from gonum", d)
		}
	})
}

func TestAccuracyAgainstDefinition(t *testing.T) {
	eachPlan(t, []int{16, 32, 48, 64, 80, 96, 128, 160, 256}, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 3)
		p.Forward(b)
		if d := newBigField(x[2]).dft(-1).relative(natural(p, b, 2)); d > roundoff(n)/2 {
			t.Errorf("forward: relative error %.2g", d)
		}
	})
}

func TestInverse(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 4)
		p.Forward(b)
		p.Backward(b)
		for l := range Width {
			want := x[l]
			for j := range want {
				want[j] *= complex(float64(n), 0)
			}
			if d := relative(b.Lane(nil, l), want); d > roundoff(n) {
				t.Errorf("lane %d: there and back differs by %.2g", l, d)
			}
		}
	})
}

func TestParseval(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 5)
		p.Forward(b)
		want, got := norm(x[7])*float64(n), norm(b.Lane(nil, 7))
		if math.Abs(got/want-1) > roundoff(n) {
			t.Errorf("Σ|X|² = %g, N Σ|x|² = %g", got, want)
		}
	})
}

// norm returns Σ|x|², summed with compensation, so that what is seen is the
// rounding of the transform and not that of the sum.
func norm(x []complex128) float64 {
	sum, carry := 0.0, 0.0
	for _, z := range x {
		term := real(z)*real(z) + imag(z)*imag(z) - carry
		next := sum + term
		carry = (next - sum) - term
		sum = next
	}
	return sum
}

func TestLinearity(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 6)
		const alpha, beta = complex(0.3, -1.7), complex(2.1, 0.4)
		z := make([]complex128, n)
		for j := range z {
			z[j] = alpha*x[0][j] + beta*x[1][j]
		}
		b.SetLane(2, z)
		p.Forward(b)
		u, v := b.Lane(nil, 0), b.Lane(nil, 1)
		for j := range z {
			z[j] = alpha*u[j] + beta*v[j]
		}
		if d := relative(b.Lane(nil, 2), z); d > roundoff(n) {
			t.Errorf("transform of a sum differs from the sum by %.2g", d)
		}
	})
}

func TestShift(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		b, x := randomBatch(n, 7)
		const by = 5
		shifted := append(append([]complex128(nil), x[0][n-by:]...), x[0][:n-by]...)
		b.SetLane(1, shifted)
		p.Forward(b)
		want := b.Lane(nil, 0)
		for place, k := range p.Order() {
			want[place] *= cmplx.Rect(1, -2*math.Pi*float64(by*k%n)/float64(n))
		}
		if d := relative(b.Lane(nil, 1), want); d > roundoff(n) {
			t.Errorf("shift by %d: differs by %.2g", by, d)
		}
	})
}

func TestOrderIsPermutation(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		seen := make([]bool, p.Len())
		for place, k := range p.Order() {
			if k < 0 || k >= p.Len() || seen[k] {
				t.Fatalf("place %d holds wave %d, out of range or for the second time", place, k)
			}
			seen[k] = true
		}
	})
}

func TestPropagateIsItsParts(t *testing.T) {
	eachPlan(t, testLengths, func(t *testing.T, p *Plan) {
		n := p.Len()
		r := rand.New(rand.NewPCG(8, 8))
		angle := make([]float64, n)
		for k := range angle {
			angle[k] = 10 * r.NormFloat64()
		}
		fused, _ := randomBatch(n, 8)
		p.Propagate(fused, p.Kinetic(angle))
		parts, _ := randomBatch(n, 8)
		p.Forward(parts)
		x := make([]complex128, n)
		for _, l := range []int{0, 5} { // two lanes are enough for slow code
			parts.Lane(x, l)
			for place, k := range p.Order() {
				x[place] *= cmplx.Rect(1/float64(n), -angle[k])
			}
			parts.SetLane(l, x)
		}
		p.Backward(parts)
		for _, l := range []int{0, 5} {
			if d := relative(fused.Lane(nil, l), parts.Lane(nil, l)); d > roundoff(n) {
				t.Errorf("lane %d: differs by %.2g", l, d)
			}
		}
	})
}

func TestPlanLength(t *testing.T) {
	for _, c := range []struct {
		name            string
		n, below, above int
	}{
		{"negative", -8, 0, 16},
		{"zero", 0, 0, 16},
		{"too short", 8, 0, 16},
		{"short multiple of three", 24, 16, 32},
		{"prime", 1009, 768, 1024},
		{"odd factor 7", 7 * 64, 384, 512},
		{"odd factor 15", 15 * 64, 768, 1024},
		{"between 5·2^a and 3·2^a", 2600, 2560, 3072},
		{"too long", 1<<24 + 1, 1 << 24, 0},
		{"too long power", 1 << 25, 1 << 24, 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := NewPlan(c.n)
			var e *LengthError
			if !errors.As(err, &e) {
				t.Fatalf("error %v; want a *LengthError", err)
			}
			if *e != (LengthError{c.n, c.below, c.above}) {
				t.Errorf("nearest lengths %d and %d; want %d and %d", e.Below, e.Above, c.below, c.above)
			}
		})
	}
}

func FuzzPlanLength(f *testing.F) {
	for _, n := range []int{-1, 0, 16, 1000, 1 << 20} {
		f.Add(n)
	}
	f.Fuzz(func(t *testing.T, n int) {
		if n > 1<<16 && n <= 1<<24 {
			n %= 1 << 16 // long plans are slow to make
		}
		p, err := NewPlan(n)
		if err == nil {
			if p.Len() != n || len(p.Order()) != n {
				t.Fatalf("plan of length %d for %d", p.Len(), n)
			}
			return
		}
		e := err.(*LengthError)
		if e.Below == 0 && e.Above == 0 || e.Below >= n && e.Below > 0 || e.Above <= n && e.Above > 0 {
			t.Fatalf("length %d: nearest %d and %d", n, e.Below, e.Above)
		}
		for _, m := range []int{e.Below, e.Above} {
			if _, _, ok := factor(m); m > 0 && !ok {
				t.Fatalf("length %d: offered %d is not allowed either", n, m)
			}
		}
	})
}
