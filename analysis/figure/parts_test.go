package figure

import (
	"image/color"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
)

func blankCanvas() draw.Canvas { return draw.New(vgimg.New(vg.Inch, vg.Inch)) }

func TestTicks(t *testing.T) {
	for _, c := range []struct {
		r     Range
		n     int
		want  string
		marks int
	}{
		{Range{0, 10}, 5, "0 2 4 6 8 10", 21},
		{Range{-1, 1}, 4, "−1.0 −0.5 0.0 0.5 1.0", 21},
		{Range{-25, 45}, 7, "−20 −10 0 10 20 30 40", 35},
		{Range{0.0011, 0.0029}, 4, "0.0015 0.0020 0.0025", 19},
		{Range{29.8, 48.9}, 4, "30 35 40 45", 19},
		{Range{0, 123456}, 3, "0 50000 100000", 13},
	} {
		var labels []string
		marks := ticks(c.r, c.n)
		for _, m := range marks {
			if m.at < c.r.Min-1e-9 || m.at > c.r.Max+1e-9 {
				t.Errorf("%v: a mark at %v", c.r, m.at)
			}
			if m.label != "" {
				labels = append(labels, m.label)
			}
		}
		if got := strings.Join(labels, " "); got != c.want || len(marks) != c.marks {
			t.Errorf("%v: %q with %d marks, want %q with %d", c.r, got, len(marks), c.want, c.marks)
		}
	}
}

func TestExponent(t *testing.T) {
	for _, c := range []struct {
		limit float64
		e     int
		unit  string
	}{
		{0, 0, ""}, {1, 0, ""}, {0.1, 0, ""}, {9999, 0, ""}, {0.09, -3, "×10^{−3}"}, {2.4e-3, -3, "×10^{−3}"},
		{1e-3, -3, "×10^{−3}"}, {9.9e-4, -6, "×10^{−6}"}, {4.5e7, 6, "×10^{6}"}, {math.NaN(), 0, ""},
	} {
		if e, unit := exponent(c.limit); e != c.e || unit != c.unit {
			t.Errorf("exponent(%v) = %d, %q; want %d, %q", c.limit, e, unit, c.e, c.unit)
		}
	}
}

func TestLabel(t *testing.T) {
	got := ""
	for _, p := range parse("*g*_{2} − 1 (×10^{−3}) {a}", 10) {
		got += "[" + p.text
		if p.face.Font.Style != upright.Style {
			got += "/"
		}
		got += map[bool]string{true: "^"}[p.raise > 0] + map[bool]string{true: "_"}[p.raise < 0] + "]"
	}
	if want := "[g/][2_][ − 1 (×10][−3^][) {a}]"; got != want {
		t.Errorf("parsed %s, want %s", got, want)
	}
}

func TestHistogram(t *testing.T) {
	values := make([]float64, 1000)
	for i := range values {
		values[i] = float64(i)
	}
	// quartiles 249 and 749: width 2·500/10 = 100, so 999/100 → 10 bins
	edges, counts := histogram(append(values, math.NaN(), math.Inf(1)))
	if len(counts) != 10 || len(edges) != 11 || edges[0] != 0 || edges[10] != 999 {
		t.Fatalf("%d bins from %v to %v", len(counts), edges[0], edges[len(edges)-1])
	}
	sum := 0.0
	for _, n := range counts {
		sum += n
		if math.Abs(n-100) > 1 { // an edge may fall on a value
			t.Errorf("counts %v", counts)
		}
	}
	if sum != 1000 {
		t.Errorf("%v of 1000 are counted", sum)
	}
}

func TestOffDiagonalLimit(t *testing.T) {
	const n = 20
	value := make([]float64, n*n)
	for i := range n {
		for j := range n {
			value[i*n+j] = -0.001 * float64(j)
			if max(i-j, j-i) <= 2 {
				value[i*n+j] = 50
			}
		}
	}
	value[n-1] = math.NaN()
	if got := OffDiagonalLimit(value, n, 2, 1); got != 0.019 {
		t.Errorf("largest off the diagonal %v, want 0.019", got)
	}
	if got := OffDiagonalLimit(value, n, 1, 1); got != 50 {
		t.Errorf("with part of the diagonal %v, want 50", got)
	}
	if got := OffDiagonalLimit(value, n, n, 0.9); got != 0 {
		t.Errorf("of no cells %v, want 0", got)
	}
}

// lightness is that of CIE L*a*b*, 0 to 100.
func lightness(c color.Color) float64 {
	r, g, b, _ := c.RGBA()
	linear := func(v uint32) float64 {
		s := float64(v) / 65535
		if s <= 0.04045 {
			return s / 12.92
		}
		return math.Pow((s+0.055)/1.055, 2.4)
	}
	y := 0.2126*linear(r) + 0.7152*linear(g) + 0.0722*linear(b)
	if y <= 216.0/24389 {
		return y * 24389 / 27
	}
	return 116*math.Cbrt(y) - 16
}

// even requires lightness to change at one rate, to the rounding of 8 bits,
// which is coarsest in the dark.
func even(t *testing.T, what string, c []color.Color) {
	t.Helper()
	first, last := lightness(c[0]), lightness(c[len(c)-1])
	for i := range c {
		want := first + (last-first)*float64(i)/float64(len(c)-1)
		if d := math.Abs(lightness(c[i]) - want); d > 1 {
			t.Errorf("%s: colour %d has lightness %.1f, want %.1f", what, i, lightness(c[i]), want)
		}
	}
}

func TestColorsAreEven(t *testing.T) {
	even(t, "sequential", sequential())
	d := diverging()
	zero := len(d) / 2
	even(t, "negative", d[:zero+1])
	even(t, "positive", d[zero:])
	if len(d) != shades || len(d)%2 != 1 {
		t.Errorf("%d colours", len(d))
	}
	r, g, b, _ := d[zero].RGBA()
	if r != g || g != b {
		t.Errorf("zero is %v, not neutral", d[zero])
	}
	// In grey the ends must be told apart.
	if a, b := lightness(d[0]), lightness(d[len(d)-1]); b-a < 25 {
		t.Errorf("the ends have lightness %.0f and %.0f", a, b)
	}
}
