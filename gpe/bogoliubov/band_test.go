package bogoliubov

import (
	"math"
	"testing"

	"tailrace/gpe/flow"
)

var (
	uniformUp   = flow.State{Density: 1, Velocity: 0.75, SoundSpeed: 1}
	uniformDown = flow.State{Density: 1, Velocity: 0.75, SoundSpeed: 0.5}
	sweptUp     = flow.State{Density: 0.8933, Velocity: 0.6097, SoundSpeed: 0.9451}
	sweptDown   = flow.State{Density: 0.2877, Velocity: 1.8930, SoundSpeed: 0.5364}
)

// integral is the band's formula by a plain midpoint rule in θ with
// ω = ω_max sin²θ, which tames both ends.
func integral(up, down flow.State, atoms, x, xp, T, t0 float64, points int) float64 {
	top := MaxFrequency(down.Velocity, down.SoundSpeed)
	var sum float64
	h := math.Pi / 2 / float64(points)
	for i := range points {
		sin, cos := math.Sincos((float64(i) + 0.5) * h)
		w := top * sin * sin
		ku, wu := OutgoingUp(w, up.Velocity, up.SoundSpeed)
		kd, wd := OutgoingDown(w, down.Velocity, down.SoundSpeed)
		su := ku * ku / 2 / math.Abs(w-up.Velocity*ku)
		sd := kd * kd / 2 / math.Abs(w-down.Velocity*kd)
		sum += math.Sqrt(su*sd/(wu*wd)) / (2 * math.Sinh(w/(2*T))) * math.Cos(ku*x-kd*xp+w*t0) * 2 * top * sin * cos * h
	}
	return -sum / (math.Pi * atoms * math.Sqrt(up.Density*down.Density))
}

func TestBandIntegral(t *testing.T) {
	for _, row := range []struct {
		name     string
		up, down flow.State
		T, t0    float64
	}{
		{"uniform", uniformUp, uniformDown, 0.0357, 2},
		{"uniform, hot", uniformUp, uniformDown, 0.5, -1},
		{"swept", sweptUp, sweptDown, 0.07, 0.5},
		{"swept, cold", sweptUp, sweptDown, 0.01, 0},
	} {
		t.Run(row.name, func(t *testing.T) {
			b := NewBand(row.up, row.down, 40)
			height := math.Abs(b.At(0, 0, row.T, 0))
			for _, p := range [][2]float64{{0, 0}, {-4, 4}, {-16, 5}, {-6, 90}, {-60, 60}} {
				want := integral(row.up, row.down, 40, p[0], p[1], row.T, row.t0, 40000)
				// The midpoint rule's error, from the fourth root at ω_max.
				near(t, "band/height", b.At(p[0], p[1], row.T, row.t0)/height, want/height, 1e-5)
			}
		})
	}
}

// Every rule gives the same: the number of points is enough.
func TestBandConverged(t *testing.T) {
	b := NewBand(sweptUp, sweptDown, 40)
	height := math.Abs(b.At(0, 0, 0.05, 0))
	for _, p := range [][2]float64{{-1, 1}, {-30, 40}, {-100, 150}, {-300, 400}, {-2000, 3000}} {
		for _, T := range []float64{0.002, 0.05, 3} {
			got := b.At(p[0], p[1], T, 3)
			r := b.makeRule(2 * b.points(b.phase(p[0], p[1], 3), T))
			var want float64
			for i, w := range r.omega {
				want -= r.weight[i] * thermal(w, T) * math.Cos(r.up[i]*p[0]-r.down[i]*p[1]+w*3)
			}
			near(t, "band/height", got/height, want/height, 1e-10)
		}
	}
}

// For T ≪ ω_max only waves without dispersion are left and the band is the
// sech² one, in height and in shape, up to corrections of order (T/ω_max)^{2/3}
// that fall with T.
func TestBandWithoutDispersion(t *testing.T) {
	for _, f := range [][2]flow.State{{uniformUp, uniformDown}, {sweptUp, sweptDown}} {
		up, down := f[0], f[1]
		b := NewBand(up, down, 55)
		T := 1e-3 * b.limit
		A := SechAmplitude(2*math.Pi*T, up, down, 55)
		near(t, "height/A", b.At(0, 0, T, 0)/A, -1, 0.001)
		for s := -1.5; s <= 1.5; s += 0.25 {
			// A few healing lengths away, where dispersion has had no time to
			// act.
			delay := s / (math.Pi * T)
			xp := 2.0
			x := (delay - Delay(0, xp, up, down)) * (up.SoundSpeed - up.Velocity)
			near(t, "delay", Delay(x, xp, up, down), delay, 1e-9*(1+math.Abs(delay)))
			want := -1 / math.Pow(math.Cosh(s), 2)
			near(t, "band/A", b.At(x, xp, T, 0)/A, want, 0.01)
			near(t, "band/A by its delay", b.At(x-delay*(up.SoundSpeed-up.Velocity), xp, T, -delay)/A, want, 0.01)
		}
	}
}

// The band lies on the line through the horizon with the slope given.
func TestSlope(t *testing.T) {
	near(t, "slope", Slope(uniformUp, uniformDown), -1, 1e-15)
	near(t, "delay on the line", Delay(-3, -3*Slope(sweptUp, sweptDown), sweptUp, sweptDown), 0, 1e-13)
	b := NewBand(uniformUp, uniformDown, 40)
	best, at := 0.0, 0.0
	for xp := 5.0; xp < 25; xp += 0.1 {
		if v := b.At(-12, xp, 0.004, 0); v < best {
			best, at = v, xp
		}
	}
	near(t, "bottom at x = −12", at, 12, 1) // dispersion moves it a little
}

// Published for v = 0.75, c_u = 1, c_d = 0.5, tanh width 2: amplitude 0.00665
// at n ξ = 1, with κ/2π = 0.01934.
func TestSechAmplitude(t *testing.T) {
	near(t, "A", SechAmplitude(2*math.Pi*0.019342, uniformUp, uniformDown, 1), 0.00665, 0.6e-5)
	near(t, "A ∝ 1/n", SechAmplitude(0.1, sweptUp, sweptDown, 40)*40, SechAmplitude(0.1, sweptUp, sweptDown, 1), 1e-15)
}

func TestWindow(t *testing.T) {
	b := NewBand(sweptUp, sweptDown, 40)
	x, xp := span(-20, -4, 33), span(3, 70, 48)
	w := b.Over(x, xp, 0.01, 5)
	dst := make([]float64, len(x)*len(xp))
	for _, p := range [][2]float64{{0.07, 0}, {0.01, 5}, {0.3, -2}} {
		w.Map(dst, p[0], p[1])
		height := math.Abs(b.At(0, 0, p[0], 0))
		for i := range x {
			for j := range xp {
				near(t, "band/height", dst[i*len(xp)+j]/height, b.At(x[i], xp[j], p[0], p[1])/height, 1e-10)
			}
		}
	}
	if n := len(w.Map(nil, 0.07, 0)); n != len(dst) {
		t.Errorf("map has %d points", n)
	}
}

func TestBandPanics(t *testing.T) {
	b := NewBand(sweptUp, sweptDown, 40)
	for name, f := range map[string]func(){
		"no atoms":            func() { NewBand(sweptUp, sweptDown, 0) },
		"subsonic downstream": func() { NewBand(sweptUp, sweptUp, 40) },
		"supersonic upstream": func() { NewBand(sweptDown, sweptDown, 40) },
		"no temperature":      func() { b.At(-1, 1, 0, 0) },
		"empty window":        func() { b.Over(nil, []float64{1}, 0.1, 0) },
		"wrong map":           func() { b.Over([]float64{-1}, []float64{1}, 0.1, 0).Map(make([]float64, 2), 0.1, 0) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			f()
		})
	}
}

func TestAtAllocates(t *testing.T) {
	b := NewBand(sweptUp, sweptDown, 40)
	b.At(-10, 20, 0.07, 0)
	if n := testing.AllocsPerRun(100, func() { b.At(-10, 20, 0.07, 0) }); n != 0 {
		t.Errorf("%g allocations", n)
	}
}

func span(from, to float64, n int) []float64 {
	s := make([]float64, n)
	for i := range s {
		s[i] = from + (to-from)*float64(i)/float64(n-1)
	}
	return s
}

func BenchmarkBandAt(b *testing.B) {
	band := NewBand(sweptUp, sweptDown, 40)
	for b.Loop() {
		band.At(-10, 20, 0.07, 0)
	}
}

func BenchmarkWindow(b *testing.B) {
	band := NewBand(sweptUp, sweptDown, 40)
	x, xp := span(-24, -4, 200), span(4, 90, 400)
	b.Run("set up", func(b *testing.B) {
		for b.Loop() {
			band.Over(x, xp, 0.02, 5)
		}
	})
	w := band.Over(x, xp, 0.02, 5)
	dst := make([]float64, len(x)*len(xp))
	b.Run("map", func(b *testing.B) {
		for b.Loop() {
			w.Map(dst, 0.07, 1)
		}
	})
}
