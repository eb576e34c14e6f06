package lanes

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strings"
	"testing"
	"unsafe"

	"tailrace/gpe/fluid"
)

// roundoffSingle is the relative L2 error allowed to one transform in single
// precision: each pass adds an error of order 5e-8 of the norm.
func roundoffSingle(n int) float64 { return 0x1p-25 * math.Log2(float64(n)) }

// eachSingle runs a test for all kernels and lengths, with the plans of both
// precisions.
func eachSingle(t *testing.T, lengths []int, test func(t *testing.T, p *SinglePlan, d *Plan)) {
	for _, k := range tested {
		for _, n := range lengths {
			t.Run(fmt.Sprintf("%s/%d", k.name, n), func(t *testing.T) {
				defer use(k)()
				p, err := newPlan[float32](n, k)
				if err != nil {
					t.Fatal(err)
				}
				d, err := newPlan[float64](n, k)
				if err != nil {
					t.Fatal(err)
				}
				test(t, p, d)
			})
		}
	}
}

// randomPair returns two random batches and the single one that holds them.
func randomPair(n int, seed uint64) (*Single, [2]*Batch) {
	s := NewSingle(n)
	var pair [2]*Batch
	for h := range pair {
		pair[h], _ = randomBatch(n, seed+uint64(h*Width))
		Load(s, h, pair[h])
	}
	return s, pair
}

// places moves the places of a plan's field to another plan's.
func places(x []complex128, from, to []int) []complex128 {
	natural := make([]complex128, len(x))
	for place, k := range from {
		natural[k] = x[place]
	}
	moved := make([]complex128, len(x))
	for place, k := range to {
		moved[place] = natural[k]
	}
	return moved
}

var someLanes = []int{0, 7, 8, 15}

func TestSingleTransformsAgainstDouble(t *testing.T) {
	eachSingle(t, testLengths[:20], func(t *testing.T, p *SinglePlan, d *Plan) {
		n, limit := p.Len(), roundoffSingle(p.Len())
		s, pair := randomPair(n, 1)
		norms := map[int]float64{}
		for _, l := range someLanes {
			norms[l] = norm(s.Lane(nil, l))
		}
		p.Forward(s)
		for _, l := range someLanes {
			if got := norm(s.Lane(nil, l)) / float64(n); math.Abs(got/norms[l]-1) > limit {
				t.Errorf("lane %d: Σ|X|²/N = %g, Σ|x|² = %g", l, got, norms[l])
			}
		}
		for h, b := range pair {
			d.Forward(b)
			for _, l := range []int{0, 7} {
				if e := relative(s.Lane(nil, h*Width+l), places(b.Lane(nil, l), d.order, p.order)); e > limit {
					t.Errorf("lane %d: forward off by %.2g", h*Width+l, e)
				}
			}
		}
		p.Backward(s)
		for h := range pair {
			b, _ := randomBatch(n, 1+uint64(h*Width))
			for _, l := range []int{0, 7} {
				got := s.Lane(nil, h*Width+l)
				for j := range got {
					got[j] /= complex(float64(n), 0)
				}
				if e := relative(got, b.Lane(nil, l)); e > 2*limit {
					t.Errorf("lane %d: there and back differs by %.2g", h*Width+l, e)
				}
			}
		}
	})
}

func TestSinglePropagateAgainstDouble(t *testing.T) {
	eachSingle(t, testLengths[:20], func(t *testing.T, p *SinglePlan, d *Plan) {
		r := rand.New(rand.NewPCG(8, 8))
		angle := make([]float64, p.Len())
		for k := range angle {
			angle[k] = 10 * r.NormFloat64()
		}
		s, pair := randomPair(p.Len(), 8)
		p.Propagate(s, p.Kinetic(angle))
		kin := d.Kinetic(angle)
		for h, b := range pair {
			d.Propagate(b, kin)
			for _, l := range []int{0, 7} {
				if e := relative(s.Lane(nil, h*Width+l), b.Lane(nil, l)); e > 2*roundoffSingle(p.Len()) {
					t.Errorf("lane %d: off by %.2g", h*Width+l, e)
				}
			}
		}
	})
}

// A shifted field has the waves of the field, turned; a sum has the sum.
func TestSingleShiftAndSum(t *testing.T) {
	eachSingle(t, testLengths[:16], func(t *testing.T, p *SinglePlan, _ *Plan) {
		n := p.Len()
		s, _ := randomPair(n, 7)
		x, y := s.Lane(nil, 0), s.Lane(nil, 9)
		const by = 5
		s.SetLane(10, append(append([]complex128(nil), x[n-by:]...), x[:n-by]...))
		sum := make([]complex128, n)
		for j := range sum {
			sum[j] = 0.3i*x[j] + 2*y[j]
		}
		s.SetLane(15, sum)
		p.Forward(s)
		x, y = s.Lane(x, 0), s.Lane(y, 9)
		for j := range sum {
			sum[j] = 0.3i*x[j] + 2*y[j]
		}
		if d := relative(s.Lane(nil, 15), sum); d > 2*roundoffSingle(n) {
			t.Errorf("transform of a sum differs from the sum by %.2g", d)
		}
		for place, k := range p.Order() {
			x[place] *= cmplx.Rect(1, -2*math.Pi*float64(by*k%n)/float64(n))
		}
		if d := relative(s.Lane(nil, 10), x); d > 2*roundoffSingle(n) {
			t.Errorf("shift by %d: differs by %.2g", by, d)
		}
	})
}

// The phase factor, against the library's sine and cosine of the reduced phase.
func TestSinglePhaseFactorAccuracy(t *testing.T) {
	each(t, func(t *testing.T) {
		for _, c := range []struct {
			name  string
			phase func(i int, r *rand.Rand) float64
			limit float64
		}{
			// The turned 1 is rounded to 3e-8 twice, the sine's product once.
			{"one turn", func(i int, _ *rand.Rand) float64 { return -1 + float64(i)/50000 }, 1.5e-7},
			{"near half-integers", func(i int, r *rand.Rand) float64 { return float64(i%41) - 20.5 + 1e-5*r.NormFloat64() }, 1.5e-7},
			{"near integers", func(i int, r *rand.Rand) float64 { return float64(i%41) - 20 + 1e-5*r.NormFloat64() }, 1.5e-7},
			{"up to 1e6", func(_ int, r *rand.Rand) float64 { return 2e6 * (r.Float64() - 0.5) }, 1.5e-7},
			// Small phases turn to the rounding of the result alone.
			{"small", func(_ int, r *rand.Rand) float64 { return 1e-4 * r.NormFloat64() }, 4e-8},
		} {
			t.Run(c.name, func(t *testing.T) {
				const n = 100000
				r := rand.New(rand.NewPCG(1, 2))
				b, v, g := NewSingle(n), make([]float32, n), make([]float32, n)
				for j := range v {
					v[j] = float32(c.phase(j, r))
					for l := range SingleWidth {
						b.Re[j*SingleWidth+l] = 1
					}
				}
				Phase(b, v, g)
				worst := 0.0
				for j, z := range b.Lane(nil, 13) {
					sin, cos := math.Sincos(math.Pi * math.Remainder(float64(v[j]), 2))
					worst = max(worst, math.Abs(real(z)-cos), math.Abs(imag(z)+sin))
				}
				t.Logf("largest error %.2g", worst)
				if worst > c.limit {
					t.Errorf("largest error %.2g", worst)
				}
			})
		}
	})
}

// The polynomials alone, in double precision, on a fine grid.
func TestSinglePolynomials(t *testing.T) {
	sineOff, cosineOff := 0.0, 0.0
	for i := range 200001 {
		f := float64(i) / 400000
		z := f * f
		c := func(x float64) float64 { return float64(float32(x)) }
		sin := f * (c(singleS0) + z*(c(singleS1)+z*(c(singleS2)+z*(c(singleS3)+z*c(singleS4)))))
		cos := 1 + z*(c(singleC1)+z*(c(singleC2)+z*(c(singleC3)+z*(c(singleC4)+z*c(singleC5)))))
		s, k := math.Sincos(math.Pi * f)
		sineOff, cosineOff = max(sineOff, math.Abs(sin-s)), max(cosineOff, math.Abs(cos-k))
	}
	t.Logf("sine within %.3g, cosine within %.3g", sineOff, cosineOff)
	if sineOff > 8e-9 || cosineOff > 1.1e-9 { // as rotate_single.go says
		t.Errorf("sine off by %.3g, cosine by %.3g", sineOff, cosineOff)
	}
}

func TestSinglePhaseLaws(t *testing.T) {
	each(t, func(t *testing.T) {
		const n = 64
		r := rand.New(rand.NewPCG(3, 4))
		v, g, s := make([]float32, n), make([]float32, n), make([]float32, n)
		for j := range v {
			v[j], g[j], s[j] = r.Float32(), 0.1*r.Float32(), 0.2*r.Float32()
		}
		zero := make([]float32, n)
		for _, c := range []struct {
			name string
			do   func(b *Single)
			law  fluid.Law
			s    []float32
		}{
			{"cubic", func(b *Single) { Phase(b, v, g) }, fluid.Cubic(), zero},
			{"cubic, shifted", func(b *Single) { PhaseLaw(b, v, g, s, fluid.Cubic()) }, fluid.Cubic(), s},
			{"swollen", func(b *Single) { PhaseLaw(b, v, g, s, fluid.Swollen(0.5)) }, fluid.Swollen(0.5), s},
		} {
			t.Run(c.name, func(t *testing.T) {
				b, _ := randomPair(n, 9)
				before := NewSingle(n)
				copy(before.Re, b.Re)
				copy(before.Im, b.Im)
				c.do(b)
				for l := range SingleWidth {
					x := before.Lane(nil, l)
					for j, got := range b.Lane(nil, l) {
						z := x[j]
						phase := float64(v[j]) + float64(g[j])*c.law.Mu(real(z)*real(z)+imag(z)*imag(z)-float64(c.s[j]))
						// Phases of order 1 are rounded a few times to 6e-8, times π.
						if want := z * cmplx.Rect(1, -math.Pi*phase); cmplx.Abs(got-want) > 1.5e-6*cmplx.Abs(z) {
							t.Fatalf("lane %d, point %d: %g; want %g", l, j, got, want)
						}
					}
				}
			})
		}
	})
}

// A hundred steps of a real problem come out as in double precision to 1e-5,
// for every law, lead and kernel, and so the kernels agree.
func TestSingleHundredSteps(t *testing.T) {
	for _, n := range []int{64, 96, 160, 512, 1024, 1280, 2048} {
		for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.4)} {
			d := newSplitStep(t, n)
			for range 100 {
				d.advance()
				PhaseLaw(d.batch, d.v, d.g, d.s, law)
			}
			want := d.batch.Lane(nil, 3)
			for _, k := range tested {
				func() {
					defer use(k)()
					p := newSingleStep(t, n)
					for range 100 {
						p.advance()
						PhaseLaw(p.batch, p.v, p.g, p.s, law)
					}
					off := relative(p.batch.Lane(nil, 11), want)
					t.Logf("%s, n = %d, η = %g: off by %.2g", k.name, n, law.Swelling(), off)
					if !(off < 1e-5) { // some 3e-8 a step, systematic at worst, and their square root
						t.Errorf("%s, n = %d, η = %g: off by %.2g", k.name, n, law.Swelling(), off)
					}
				}()
			}
		}
	}
}

// everythingSingle puts a batch through all that the package does to one.
func everythingSingle(p *SinglePlan, kin *SingleKinetic, b *Single) {
	n := p.Len()
	v, g, s := make([]float32, n), make([]float32, n), make([]float32, n)
	for j := range v {
		v[j], g[j], s[j] = 0.01*float32(j), 0.1, 0.05
	}
	p.Propagate(b, kin)
	Phase(b, v, g)
	PhaseLaw(b, v, g, s, fluid.Cubic())
	PhaseLaw(b, v, g, s, fluid.Swollen(0.5))
	Damp(b, v)
	p.Forward(b)
	p.Backward(b)
}

// FuzzSingleLanes: however many lanes are filled, and whatever is beside them,
// a lane comes out the same to the last bit, and empty ones stay empty.
func FuzzSingleLanes(f *testing.F) {
	for _, c := range []struct{ count, length uint8 }{{0, 0}, {1, 1}, {7, 2}, {8, 3}, {9, 4}, {15, 5}, {16, 1}} {
		f.Add(c.count, c.length, uint64(c.count))
	}
	lengths := []int{16, 32, 48, 64, 80, 128, 256}
	f.Fuzz(func(t *testing.T, count, length uint8, seed uint64) {
		n, filled := lengths[int(length)%len(lengths)], int(count)%(SingleWidth+1)
		for _, k := range tested {
			func() {
				defer use(k)()
				p, err := newPlan[float32](n, k)
				if err != nil {
					t.Fatal(err)
				}
				kin := p.Kinetic(make([]float64, n))
				full, part := NewSingle(n), NewSingle(n)
				for l := range SingleWidth {
					x := random(n, seed+uint64(l))
					full.SetLane(SingleWidth-1-l, x)
					if l < filled {
						part.SetLane(l, x)
					}
				}
				everythingSingle(p, kin, full)
				everythingSingle(p, kin, part)
				for l := range SingleWidth {
					got := part.Lane(nil, l)
					if l >= filled && norm(got) != 0 {
						t.Errorf("%s, n = %d: lane %d was empty", k.name, n, l)
					}
					if l < filled && relative(got, full.Lane(nil, SingleWidth-1-l)) != 0 {
						t.Errorf("%s, n = %d: lane %d of %d depends on the others", k.name, n, l, filled)
					}
				}
			}()
		}
	})
}

func TestSingleLayout(t *testing.T) {
	for _, n := range []int{1, 3, 17, 64, 1000} {
		s, pair := randomPair(n, 2)
		if len(s.Re) != n*SingleWidth || len(s.Im) != n*SingleWidth {
			t.Errorf("%d points: %d and %d values", n, len(s.Re), len(s.Im))
		}
		for _, x := range [][]float32{s.Re, s.Im} {
			if uintptr(unsafe.Pointer(&x[0]))%64 != 0 {
				t.Errorf("%d points: not on a cache line", n)
			}
		}
		x := pair[1].Lane(nil, 3)
		if s.Re[(n-1)*SingleWidth+11] != float32(real(x[n-1])) || s.Im[(n-1)*SingleWidth+11] != float32(imag(x[n-1])) {
			t.Errorf("%d points: the last point of lane 11 is not where it should be", n)
		}
		back := NewBatch(n)
		Store(back, s, 1)
		for i, v := range back.Re {
			if v != float64(float32(pair[1].Re[i])) || back.Im[i] != float64(float32(pair[1].Im[i])) {
				t.Fatalf("%d points: value %d comes out different", n, i)
			}
		}
		Clear(s, 1)
		for l := range SingleWidth {
			if empty := norm(s.Lane(nil, l)) == 0; empty != (l >= Width) {
				t.Errorf("%d points: with half 1 cleared lane %d is empty: %v", n, l, empty)
			}
		}
	}
}

func TestSingleNoAllocation(t *testing.T) {
	each(t, func(t *testing.T) {
		p := newSingleStep(t, 96)
		d := make([]float32, 96)
		for name, do := range map[string]func(){
			"split step":  p.do,
			"transforms":  func() { p.plan.Forward(p.batch); p.plan.Backward(p.batch) },
			"shifted law": func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Cubic()) },
			"swollen law": func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Swollen(0.5)) },
			"damp":        func() { Damp(p.batch, d) },
			"halves": func() {
				Load(p.batch, 1, p.splitStep.batch)
				Store(p.splitStep.batch, p.batch, 1)
				Clear(p.batch, 1)
			},
		} {
			if n := testing.AllocsPerRun(10, do); n != 0 {
				t.Errorf("%s: %g allocations", name, n)
			}
		}
	})
}

func TestSingleMisuse(t *testing.T) {
	p, err := NewSinglePlan(64)
	if err != nil {
		t.Fatal(err)
	}
	other, _ := NewSinglePlan(64)
	s := NewSingle(64)
	for _, c := range []struct {
		name, says string
		do         func()
	}{
		{"empty batch", "at least 1", func() { NewSingle(0) }},
		{"lane too high", "lanes are 0 to 15", func() { s.Lane(nil, 16) }},
		{"half too high", "halves are 0 and 1", func() { Load(s, 2, NewBatch(64)) }},
		{"batch of another length", "batch of 32 points", func() { Store(NewBatch(32), s, 0) }},
		{"batch not made here", "NewSingle", func() { p.Backward(&Single{N: 64}) }},
		{"table of another plan", "another plan", func() { p.Propagate(s, other.Kinetic(make([]float64, 64))) }},
		{"short table", "rounded table has 63", func() { Round(make([]float32, 63), make([]float64, 64)) }},
		{"half of nothing", "half 2", func() { Clear(s, 2) }},
	} {
		t.Run(c.name, func(t *testing.T) {
			defer func() {
				m, _ := recover().(string)
				if !strings.HasPrefix(m, "lanes: ") || !strings.Contains(m, c.says) {
					t.Errorf("panic %q; want lanes: … %s …", m, c.says)
				}
			}()
			c.do()
		})
	}
}
