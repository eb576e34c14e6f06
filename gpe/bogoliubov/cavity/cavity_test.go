package cavity

import (
	"errors"
	"math"
	"testing"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s = %.10g, want %.10g ± %g", what, got, want, tolerance)
	}
}

func must(t testing.TB, v, outside, inside, length, width float64) Cavity {
	t.Helper()
	c, err := New(v, outside, inside, length, width)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func TestNew(t *testing.T) {
	for _, row := range []struct {
		name                               string
		v, outside, inside, length, widths float64
		want                               error
	}{
		{"sharp", 0.75, 1, 0.5, 12, 0, nil},
		{"smooth", 0.75, 1, 0.5, 12, 1, nil},
		{"subsonic inside", 0.4, 1, 0.5, 12, 0, ErrSubsonicInside},
		{"sonic inside", 0.5, 1, 0.5, 12, 0, ErrSubsonicInside},
		{"supersonic outside", 1.2, 1, 0.5, 12, 0, ErrSupersonicOutside},
		{"too long", 0.75, 1, 0.5, 1200, 0, ErrTooLong},
		{"too wide", 0.75, 1, 0.5, 12, 40, ErrTooLong},
	} {
		t.Run(row.name, func(t *testing.T) {
			if _, err := New(row.v, row.outside, row.inside, row.length, row.widths); !errors.Is(err, row.want) {
				t.Errorf("%v, want %v", err, row.want)
			}
		})
	}
	for _, bad := range [][5]float64{{0, 1, 0.5, 12, 0}, {0.75, math.Inf(1), 0.5, 12, 0}, {0.75, 1, -0.5, 12, 0},
		{0.75, 1, 0.5, math.NaN(), 0}, {0.75, 1, 0.5, 0, 0}, {0.75, 1, 0.5, 12, -1}} {
		if _, err := New(bad[0], bad[1], bad[2], bad[3], bad[4]); err == nil {
			t.Errorf("%v is taken for a cavity", bad)
		}
	}
}

func TestSoundSpeed(t *testing.T) {
	sharp, smooth := must(t, 0.75, 1, 0.5, 12, 0), must(t, 0.75, 1, 0.5, 12, 0.7)
	for _, x := range []float64{-50, -9, 6, 21, 80} { // 8 widths away e^{−16} is left
		near(t, "far from the edges", smooth.SoundSpeed(x), sharp.SoundSpeed(x), 1e-6)
	}
	half := math.Sqrt((1 + 0.25) / 2)
	near(t, "left edge", smooth.SoundSpeed(0), half, 1e-12)
	near(t, "right edge", smooth.SoundSpeed(12), half, 1e-12)
	for _, s := range smooth.paces() {
		if s.share < 0 || s.share > 1 {
			t.Errorf("share %g", s.share)
		}
	}
	// The series of the steps are c²(x).
	x := -reach * smooth.Width
	for _, s := range smooth.paces() {
		for _, part := range []float64{0, 0.4, 1} {
			sum := 0.0
			for k := len(s.series) - 1; k >= 0; k-- {
				sum = sum*part*s.length + s.series[k]
			}
			c := smooth.SoundSpeed(x + part*s.length)
			near(t, "2c²", sum, 2*c*c, 2e-13) // e^{−32} where the walk takes c for constant
		}
		x += s.length
	}
	near(t, "end of the walk", x, 12+reach*0.7, 1e-12)
}

// The two waves that grow, from their sum and product, against what defines
// them: four roots of the dispersion, two on either side of the real axis.
func TestGrowing(t *testing.T) {
	for _, c := range []float64{1, 0.5} {
		const v = 0.75
		for _, omega := range []complex128{1e-8i, complex(1e-7, 1e-9), complex(0.03, 0.02), complex(0.100253, 1e-7), 0.133i, 0.871i, complex(-0.4, 0.1), complex(3, 5), 40i} {
			w := growing(omega, v, c)
			a, b := quadratic(-w.sum, w.product)
			d, e := quadratic(w.sum, -4*omega*omega/w.product)
			for i, k := range []complex128{a, b, d, e} {
				off := omega - complex(v, 0)*k
				left, right := off*off, k*k*(complex(c*c, 0)+k*k/4)
				// Where two roots are one, each alone is known to the root of the
				// machine's precision only.
				near(t, "dispersion", size(left-right)/(size(left)+size(right)), 0, 1e-9)
				if grows := imag(k) < 0; grows != (i < 2) {
					t.Errorf("ω = %v, c = %g: wave %d has k = %v", omega, c, i, k)
				}
			}
		}
	}
}

// Where two waves coincide, sum and product stay exact: they solve the two
// conditions that dividing the quartic by a quadratic leaves.
func TestGrowingAtABranchPoint(t *testing.T) {
	// The branch points of the outer waves for v = 0.75, c = 1 are imaginary;
	// v = (2s² − c²)/s with s = (v ± √(v² + 8c²))/4, k² = 4(s² − c²), ω = k(v − s).
	s := (0.75 + math.Sqrt(0.75*0.75+8)) / 4
	q := 2 * math.Sqrt(1-s*s)
	w := growing(complex(0, q*(s-0.75)), 0.75, 1)
	near(t, "sum", imag(w.sum), -2*q, 1e-13)
	near(t, "product", real(w.product), -q*q, 1e-13)
}

func TestSharpThreshold(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 12, 0)
	for n, want := range []float64{1.5547, 4.3647, 7.1746, 9.9845} { // computed independently of this code
		near(t, "D_n", c.SharpThreshold(n), want, 0.5001e-4)
	}
	if got := c.Thresholds(12); len(got) != 5 || got[3] != c.SharpThreshold(3) {
		t.Errorf("thresholds %v", got)
	}
	// The condition itself vanishes there.
	for n := range 12 {
		d := c.SharpThreshold(n)
		near(t, "E at a threshold", newCondition(c.With(d)).standing(), 0, 3e-6) // ω = 1e-6 ω_max
		if a, b := newCondition(c.With(d-0.1)).standing(), newCondition(c.With(d+0.1)).standing(); a*b >= 0 {
			t.Errorf("n = %d: E = %g and %g on its sides", n, a, b)
		}
	}
}

func TestSmoothThresholds(t *testing.T) {
	// The narrower the edges, the closer to the law of sharp ones, as w².
	sharp := must(t, 0.75, 1, 0.5, 12, 0).Thresholds(12)
	last := 0.0
	for i, w := range []float64{0.05, 0.025, 0.0125} {
		got := must(t, 0.75, 1, 0.5, 12, w).Thresholds(12)
		if len(got) != len(sharp) {
			t.Fatalf("w = %g: %v", w, got)
		}
		off := got[2] - sharp[2]
		if i > 0 {
			near(t, "order", math.Log2(last/off), 2, 0.04)
		}
		last = off
	}
	// Wide edges have thresholds of their own, and as many modes as thresholds.
	c := must(t, 0.75, 1, 0.5, 14, 2)
	below := c.Thresholds(14)
	modes, err := c.Modes()
	if err != nil {
		t.Fatal(err)
	}
	if n := both(modes); n != len(below)-1 {
		t.Errorf("%d modes, thresholds %v", n, below)
	}
}

// Edges that overlap so much that the flow is nowhere supersonic make no mode,
// and the search agrees that there is none.
func TestNowhereSupersonic(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 1, 2)
	d := c.shortest()
	c = c.With(d)
	near(t, "sound speed in the middle", c.SoundSpeed(d/2), c.Velocity, 1e-12)
	if n, err := newSearch(c).total(); n != 0 || err != nil {
		t.Errorf("%d modes, %v", n, err)
	}
	if first := c.Thresholds(0)[0]; !(first > d) {
		t.Errorf("first threshold %g, supersonic from %g", first, d)
	}
}

// both counts modes with their partners.
func both(modes []Mode) int {
	n := len(modes)
	for _, m := range modes {
		if m.Frequency > 0 {
			n++
		}
	}
	return n
}
