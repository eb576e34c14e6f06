package moments

import (
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"tailrace/gpe"
)

// draw returns shots as an ensemble records them: multiples of gpe.Quantum, of
// order one, with noise of the size of a thin cloud's.
func draw(count, pixels int, seed uint64) Shots {
	r := rand.New(rand.NewPCG(seed, 1))
	s := Shots{Pixels: pixels, Data: make([]float32, count*pixels)}
	for i := range s.Data {
		s.Data[i] = float32(gpe.Quantise(math.Abs(1 + 0.4*r.NormFloat64())))
	}
	return s
}

// pick returns the given shots in the given order.
func pick(s Shots, order []int) Shots {
	out := Shots{Pixels: s.Pixels}
	for _, i := range order {
		out.Data = append(out.Data, s.Shot(i)...)
	}
	return out
}

// sum adds shots in one go.
func sum(t testing.TB, shots Shots) *Sums {
	t.Helper()
	s := NewSums(shots.Pixels)
	if err := s.Add(shots); err != nil {
		t.Fatal(err)
	}
	return s
}

// same demands equal sums, bit by bit.
func same(t testing.TB, got, want *Sums) {
	t.Helper()
	if got.Count != want.Count {
		t.Fatalf("%d trajectories, want %d", got.Count, want.Count)
	}
	if len(got.Density) != len(want.Density) {
		t.Fatalf("%d points, want %d", len(got.Density), len(want.Density))
	}
	for j := range want.Density {
		if math.Float64bits(got.Density[j]) != math.Float64bits(want.Density[j]) {
			t.Fatalf("density at %d is %v, want %v", j, got.Density[j], want.Density[j])
		}
		for k := range want.Density {
			if g, w := got.Products.At(j, k), want.Products.At(j, k); math.Float64bits(g) != math.Float64bits(w) {
				t.Fatalf("product at %d, %d is %v, want %v", j, k, g, w)
			}
		}
	}
}

// Sums are those of whole numbers of quanta, which integers add without
// rounding.
func TestSumsExact(t *testing.T) {
	shots := draw(777, 19, 1)
	got := sum(t, shots)
	if got.Count != 777 {
		t.Fatalf("%d trajectories", got.Count)
	}
	quanta := func(v float32) int64 { return int64(float64(v) / gpe.Quantum) }
	for j := range shots.Pixels {
		density := int64(0)
		for i := range shots.Count() {
			density += quanta(shots.Shot(i)[j])
		}
		if want := float64(density) * gpe.Quantum; got.Density[j] != want {
			t.Errorf("density at %d is %v, want %v", j, got.Density[j], want)
		}
		for k := range shots.Pixels {
			product := int64(0)
			for i := range shots.Count() {
				product += quanta(shots.Shot(i)[j]) * quanta(shots.Shot(i)[k])
			}
			if want := float64(product) * gpe.Quantum * gpe.Quantum; got.Products.At(j, k) != want {
				t.Errorf("product at %d, %d is %v, want %v", j, k, got.Products.At(j, k), want)
			}
		}
	}
}

func TestSumsOrderAndParts(t *testing.T) {
	shots := draw(300, 37, 2)
	want := sum(t, shots)
	r := rand.New(rand.NewPCG(3, 1))

	for _, c := range []struct {
		name  string
		parts []int // sizes, in the order in which they are merged
	}{
		{"whole, shuffled", []int{300}},
		{"single trajectories first", []int{1, 1, 1, 297}},
		{"a block and one more", []int{128, 129, 43}},
		{"halves", []int{150, 150}},
		{"many", slices.Repeat([]int{20}, 15)},
		{"with an empty part", []int{0, 299, 0, 1}},
	} {
		t.Run(c.name, func(t *testing.T) {
			for range 3 {
				order, got := r.Perm(300), NewSums(37)
				for _, n := range c.parts {
					if err := got.Merge(sum(t, pick(shots, order[:n]))); err != nil {
						t.Fatal(err)
					}
					order = order[n:]
				}
				same(t, got, want)
			}
		})
	}

	t.Run("added in pieces", func(t *testing.T) {
		got := NewSums(37)
		for _, part := range [][2]int{{200, 300}, {0, 7}, {7, 200}} {
			if err := got.Add(Shots{37, shots.Data[part[0]*37 : part[1]*37]}); err != nil {
				t.Fatal(err)
			}
		}
		same(t, got, want)
	})
	t.Run("merged as a tree", func(t *testing.T) {
		a, b := sum(t, pick(shots, span(0, 100))), sum(t, pick(shots, span(100, 150)))
		c, d := sum(t, pick(shots, span(150, 151))), sum(t, pick(shots, span(151, 300)))
		for _, pair := range [][2]*Sums{{d, b}, {c, a}, {c, d}} {
			if err := pair[0].Merge(pair[1]); err != nil {
				t.Fatal(err)
			}
		}
		same(t, c, want)
	})
}

func span(from, to int) []int {
	var s []int
	for i := from; i < to; i++ {
		s = append(s, i)
	}
	return s
}

func TestMeanAndCovariance(t *testing.T) {
	shots := draw(50, 5, 4)
	s := sum(t, shots)
	mean := s.Mean()
	for j := range 5 {
		for k := range 5 {
			want := 0.0
			for i := range 50 {
				want += (float64(shots.Shot(i)[j]) - mean[j]) * (float64(shots.Shot(i)[k]) - mean[k]) / 49
			}
			if got := s.Covariance(j, k); math.Abs(got-want) > 1e-14 { // rounding of a sum of 50 terms
				t.Errorf("covariance of %d and %d is %v, want %v", j, k, got, want)
			}
		}
	}
	if c := sum(t, draw(1, 5, 4)).Covariance(0, 0); !math.IsNaN(c) {
		t.Errorf("covariance of one trajectory is %v, want NaN", c)
	}
}

func TestMismatch(t *testing.T) {
	s := NewSums(5)
	if err := s.Add(draw(3, 6, 5)); !errors.Is(err, ErrMismatch) {
		t.Errorf("Add: %v", err)
	}
	if err := s.Merge(NewSums(6)); !errors.Is(err, ErrMismatch) {
		t.Errorf("Merge: %v", err)
	}
	if s.Count != 0 {
		t.Errorf("%d trajectories were counted", s.Count)
	}
}

// Sums of products of multiples of Quantum are exact up to 2⁵³ Quantum².
func TestErrInexact(t *testing.T) {
	const dense = 32.0 // n₀: 1024 n₀² a shot, of which 128 reach the limit
	shots := Shots{Pixels: 1, Data: slices.Repeat([]float32{dense}, 128)}
	s := NewSums(1)
	if err := s.Add(shots); err != nil {
		t.Fatalf("at the limit: %v", err)
	}
	if s.Products.At(0, 0) != exactLimit {
		t.Fatalf("the sum is %v, want %v", s.Products.At(0, 0), exactLimit)
	}
	err := s.Add(Shots{1, []float32{1}})
	if !errors.Is(err, ErrInexact) {
		t.Errorf("Add: %v", err)
	}
	const want = "too many trajectories for exact sums: a sum of squares is 1.31e+05 n₀², at most 1.31e+05 are exact; cut the ensemble into parts"
	if err == nil || err.Error() != want {
		t.Errorf("message %q, want %q", err, want)
	}
	if err := sum(t, shots).Merge(sum(t, Shots{1, []float32{1}})); !errors.Is(err, ErrInexact) {
		t.Errorf("Merge: %v", err)
	}
}

func BenchmarkMoments(b *testing.B) {
	const points = 1024
	shots := draw(128, points, 6)
	s := NewSums(points)
	b.SetBytes(int64(4 * len(shots.Data)))
	for b.Loop() {
		s.Count = 0
		clear(s.Density)
		s.Products.Zero() // or the sums would leave the exact range
		if err := s.Add(shots); err != nil {
			b.Fatal(err)
		}
	}
}
