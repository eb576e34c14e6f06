package cavity

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// Computed independently of this code, to the digits given.
func TestModes(t *testing.T) {
	for _, row := range []struct {
		length float64
		modes  []Mode
		digits []Mode
	}{
		{1.5, nil, nil},
		{3, []Mode{{0, 0.04184}}, []Mode{{0, 0.6e-5}}},
		{5, []Mode{{0.03791, 0.01507}}, []Mode{{0.6e-5, 0.6e-5}}},
		{12, []Mode{{0.02438, 0.01601}, {0.08205, 0.003443}}, []Mode{{0.6e-5, 0.6e-5}, {0.6e-5, 0.6e-6}}},
	} {
		t.Run(fmt.Sprint(row.length), func(t *testing.T) {
			modes, err := must(t, 0.75, 1, 0.5, row.length, 0).Modes()
			if err != nil {
				t.Fatal(err)
			}
			if len(modes) != len(row.modes) {
				t.Fatalf("%v, want %v", modes, row.modes)
			}
			for i, m := range modes {
				near(t, "frequency", m.Frequency, row.modes[i].Frequency, row.digits[i].Frequency)
				near(t, "growth rate", m.GrowthRate, row.modes[i].GrowthRate, row.digits[i].GrowthRate)
			}
		})
	}
}

// A mode more at every threshold, neither spurious nor missed: in flows of all
// kinds the count is that of the law of F. Michel, R. Parentani (2013).
func TestCount(t *testing.T) {
	flows := 60
	if testing.Short() {
		flows = 10
	}
	r := rand.New(rand.NewPCG(1, 2))
	for range flows {
		outside := math.Exp(4 * (r.Float64() - 0.5))
		inside := outside * 0.95 * math.Exp(-2*r.Float64())
		v := inside + (outside-inside)*(0.05+0.9*r.Float64())
		c := must(t, v, outside, inside, 1e-6, 0)
		want := r.IntN(9)
		part := 0.05 + 0.9*r.Float64()
		length := part * c.SharpThreshold(0)
		if want > 0 {
			length = (1-part)*c.SharpThreshold(want-1) + part*c.SharpThreshold(want)
		}
		c = c.With(length)
		modes, err := c.Modes()
		if err != nil {
			t.Errorf("%+v: %v", c, err)
			continue
		}
		if both(modes) != want {
			t.Errorf("%+v: %d modes, want %d: %v", c, both(modes), want, modes)
		}
		f := newCondition(c)
		for i, m := range modes {
			near(t, "bound", math.Max(m.GrowthRate/c.GrowthBound(), 0.5), 0.5, 0.5)
			if i > 0 && m.GrowthRate > modes[i-1].GrowthRate {
				t.Errorf("%+v: not in order: %v", c, modes)
			}
			h := complex(1e-5*c.topFrequency(), 0)
			w := m.Omega()
			slope := (f.at(w+h) - f.at(w-h)) / (2 * h)
			near(t, "E/E′", size(f.at(w)/slope)/c.topFrequency(), 0, 1e-8) // nearly sonic flows cost E half its digits
		}
	}
}

// Beyond the rectangle there is nothing, however far one looks: E tends to 1.
func TestNothingBeyond(t *testing.T) {
	for _, c := range []Cavity{must(t, 0.75, 1, 0.5, 12, 0), must(t, 0.75, 1, 0.5, 12, 1), must(t, 0.55, 1, 0.5, 30, 0), must(t, 0.95, 1, 0.1, 9, 0)} {
		want, err := newSearch(c).total()
		if err != nil {
			t.Fatal(err)
		}
		wide := newSearch(c)
		wide.all.right, wide.all.top = 3, 3
		got, err := wide.total()
		if err != nil {
			t.Fatal(err)
		}
		if got != want {
			t.Errorf("%+v: %d modes in a rectangle ten times as large, %d in the usual one", c, got, want)
		}
	}
	for _, w := range []complex128{60i, complex(60, 60), complex(200, 1e-4)} { // the first two waves that differ go as 1/√ω
		near(t, "E far away", size(newCondition(must(t, 0.75, 1, 0.5, 12, 0)).at(w)-1), 0, 1e-3)
	}
}

// E is the conjugate of itself across the imaginary axis, and analytic: also
// where two waves inside or outside are one, its mean over a circle is its
// value in the middle.
func TestConditionIsAnalytic(t *testing.T) {
	for _, c := range []Cavity{must(t, 0.75, 1, 0.5, 5, 0), must(t, 0.75, 1, 0.5, 5, 0.5)} {
		f := newCondition(c)
		a, b := f.at(complex(0.03, 0.04)), f.at(complex(-0.03, 0.04))
		near(t, "E(−ω*)*", size(a-complex(real(b), -imag(b))), 0, 1e-12)
		// The branch points are at 0.133i and 2.17i outside, 0.871i inside.
		for _, w := range []complex128{0.13304i, 0.8713i, 2.1711i, complex(0.05, 0.03)} {
			var mean complex128
			const n = 32
			for k := range n {
				sin, cos := math.Sincos(2 * math.Pi * float64(k) / n)
				mean += f.at(w+complex(0.02*cos, 0.02*sin)) / n
			}
			near(t, fmt.Sprintf("mean around %v", w), size(mean/f.at(w)-1), 0, 1e-12)
		}
	}
}

// Guesses, good or bad, change nothing but the time.
func TestGuesses(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 12, 0)
	want, err := c.Modes()
	if err != nil {
		t.Fatal(err)
	}
	for _, guesses := range [][]Mode{want, {{0.02, 0.02}}, {{0.5, 0.3}, {0, 1e-9}, {3, 8}}, {want[0], want[0], want[0]}} {
		got, err := c.Modes(guesses...)
		if err != nil {
			t.Fatal(err)
		}
		if len(got) != len(want) {
			t.Fatalf("%v with the guesses %v", got, guesses)
		}
		for i := range got {
			near(t, "ω", size(got[i].Omega()-want[i].Omega()), 0, 1e-12)
		}
	}
}

// At a threshold to the last digit nothing is missed, though the new mode does
// not grow yet. At every other one the mode that does not oscillate comes back
// to rest just then, before both leave as a pair.
func TestAtThresholds(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 12, 0)
	for n := range 4 {
		modes, err := c.With(c.SharpThreshold(n)).Modes()
		if err != nil || both(modes) != n/2*2 {
			t.Errorf("at threshold %d: %v, %v", n, modes, err)
		}
		for _, step := range []float64{-1e-3, 1e-3} {
			modes, err := c.With(c.SharpThreshold(n) + step).Modes()
			if want := n + (1+int(math.Copysign(1, step)))/2; err != nil || both(modes) != want {
				t.Errorf("beside threshold %d: %v, %v", n, modes, err)
			}
		}
	}
}

// The search by itself, on polynomials whose zeros are known: on cuts, close to
// each other and double.
func TestSearch(t *testing.T) {
	for _, row := range []struct {
		name  string
		zeros []complex128 // Re ≥ 0
	}{
		{"none", nil},
		{"on the axis", []complex128{0.02i, 0.3i}},
		{"on cuts", []complex128{complex(0.25, 0.19), complex(0.125, 0.095), 0.19i}},
		{"close", []complex128{complex(0.05, 0.01), complex(0.05, 0.0101), complex(0.0501, 0.01)}},
		{"double", []complex128{0.04i, 0.04i}},
		{"low", []complex128{complex(0.1, 1e-6), complex(0.09, 3e-7), 4e-7i}},
		{"many", []complex128{complex(0.01, 0.01), complex(0.02, 0.012), complex(0.03, 0.011), complex(0.04, 0.002), complex(0.05, 0.02), 0.1i, complex(0.3, 0.2)}},
	} {
		t.Run(row.name, func(t *testing.T) {
			s := newSearch(must(t, 0.75, 1, 0.5, 12, 0))
			s.f = func(z complex128) complex128 {
				p := complex(1, 0)
				for _, a := range row.zeros {
					p *= z - a
					if real(a) > 0 {
						p *= z + complex(real(a), -imag(a))
					}
				}
				return p
			}
			modes, err := s.modes(nil)
			if err != nil {
				t.Fatal(err)
			}
			if len(modes) != len(row.zeros) {
				t.Fatalf("%v, want %v", modes, row.zeros)
			}
			for _, a := range row.zeros {
				off := math.Inf(1)
				for _, m := range modes {
					off = math.Min(off, size(m.Omega()-a))
				}
				tolerance := 1e-11
				if row.name == "double" {
					tolerance = 1e-7 // the size of the last cell
				}
				near(t, fmt.Sprintf("%v", a), off, 0, tolerance)
			}
		})
	}
}

func TestScan(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 12, 0.3)
	var lengths []float64
	for d := 1.0; d < 14; d += 0.61 {
		lengths = append(lengths, d)
	}
	calls := 0
	points, err := c.Scan(context.Background(), lengths, func(done int) {
		calls++
		if done != calls {
			t.Errorf("%d done after %d calls", done, calls)
		}
	})
	if err != nil || len(points) != len(lengths) {
		t.Fatal(points, err)
	}
	thresholds := c.Thresholds(14)
	for i, p := range points {
		want, err := c.With(lengths[i]).Modes()
		if err != nil {
			t.Fatal(err)
		}
		if len(p.Modes) != len(want) {
			t.Fatalf("D = %g: %v, alone %v", p.Length, p.Modes, want)
		}
		for j := range want {
			near(t, "ω", size(p.Modes[j].Omega()-want[j].Omega()), 0, 1e-11)
		}
		n := 0
		for _, d := range thresholds {
			if d < p.Length {
				n++
			}
		}
		if both(p.Modes) != n {
			t.Errorf("D = %g: %d modes, %d thresholds", p.Length, both(p.Modes), n)
		}
	}
	stopped, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := c.Scan(stopped, lengths, nil); !errors.Is(err, context.Canceled) {
		t.Error(err)
	}
	if _, err := c.Scan(context.Background(), []float64{-1}, nil); err == nil {
		t.Error("a negative length was taken")
	}
}

func TestConditionAllocates(t *testing.T) {
	for _, w := range []float64{0, 1} {
		f := newCondition(must(t, 0.75, 1, 0.5, 12, w))
		if n := testing.AllocsPerRun(20, func() { f.at(complex(0.03, 0.01)) }); n != 0 {
			t.Errorf("width %g: %g allocations", w, n)
		}
	}
}

func BenchmarkCondition(b *testing.B) {
	for _, w := range []float64{0, 1} {
		b.Run(fmt.Sprintf("width %g", w), func(b *testing.B) {
			f := newCondition(must(b, 0.75, 1, 0.5, 12, w))
			for b.Loop() {
				f.at(complex(0.03, 0.01))
			}
		})
	}
}

func BenchmarkModes(b *testing.B) {
	for _, w := range []float64{0, 1} {
		for _, d := range []float64{3, 12, 40} {
			b.Run(fmt.Sprintf("width %g, length %g", w, d), func(b *testing.B) {
				c := must(b, 0.75, 1, 0.5, d, w)
				for b.Loop() {
					if _, err := c.Modes(); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}

// One length of a scan of 60.
func BenchmarkScan(b *testing.B) {
	for _, w := range []float64{0, 1} {
		b.Run(fmt.Sprintf("width %g", w), func(b *testing.B) {
			c := must(b, 0.75, 1, 0.5, 12, w)
			lengths := make([]float64, b.N)
			for i := range lengths {
				lengths[i] = 1 + 13*float64(i%60)/60
			}
			if _, err := c.Scan(context.Background(), lengths, nil); err != nil {
				b.Fatal(err)
			}
		})
	}
}
