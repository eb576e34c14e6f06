package horizon

import (
	"errors"
	"math"
	"testing"

	"tailrace/gpe"
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

// sampled puts a stationary flow on a periodic grid, as a run would record it:
// around a step at place in the grid's frame that moves to the left at speed.
// Half a ring away the flow goes back to what it was upstream over some ξ, so
// that it is smooth where the grid joins.
func sampled(f flow.Profile, n int, length, place, speed float64) (p *gpe.Problem, frame Frame, density, current []float64) {
	g := gpe.NewGrid(n, length, -length/2)
	p = &gpe.Problem{Grid: g, Law: fluid.Cubic(), Landscape: gpe.NewSweep(g, gpe.Sweep{Trap: gpe.Box{Length: length}, Start: place, Width: 1, Speed: speed})}
	up, _, _ := f.Ends()
	for _, x := range g.Positions() {
		n, v := f.At(x - place)
		back := (1 + math.Tanh((x-0.35*length)/(0.02*length))) / 2
		n, v = n+back*(up.Density-n), v+back*(up.Velocity-v)
		density, current = append(density, n), append(current, n*(v-speed))
	}
	return p, Frame{Position: place, Speed: speed}, density, current
}

func TestNewProfile(t *testing.T) {
	half := func(m float64) flow.Profile {
		f, err := flow.HalfSoliton(m)
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
	sweep := func(speed, depth, width float64) flow.Profile {
		f, err := flow.Sweep(fluid.Cubic(), speed, depth, width)
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
	for _, c := range []struct {
		name         string
		f            flow.Profile
		n            int
		place, speed float64
		position     float64 // tolerance in ξ
		kappa        float64 // relative tolerance
	}{
		// The flow and its join are smooth on the scale of ξ, and Fourier series
		// converge fast.
		{"sweep", sweep(0.5, 1, 0.5), 1024, 0, 0, 1e-6, 1e-5},
		{"sweep, moving", sweep(0.5, 1, 0.5), 1024, -17.3, 0.5, 1e-6, 1e-5},
		{"sweep over a wide step", sweep(0.5, 1, 2), 1024, 3.1, 0.5, 1e-6, 1e-5},
		{"shallow sweep", sweep(0.6, 0.4, 1), 1024, 0, 0.6, 1e-6, 1e-5},
		// A half-soliton has a kink at its bottom, where the series of waves
		// converges slowly: a finer grid.
		{"half-soliton", half(0.6), 4096, 0, 0, 1e-6, 1e-5},
		{"slow half-soliton", half(0.3), 4096, 5.03, 0.2, 1e-6, 1e-5},
	} {
		t.Run(c.name, func(t *testing.T) {
			p, frame, density, current := sampled(c.f, c.n, 200, c.place, c.speed)
			pr, err := NewProfile(p, frame, density, current, 1)
			if err != nil {
				t.Fatal(err)
			}
			up, down, want := c.f.Ends()
			if off := pr.Horizon.Position - want.Position; math.Abs(off) > c.position {
				t.Errorf("the horizon is at %.5f, want %.5f", pr.Horizon.Position, want.Position)
			}
			if r := pr.Horizon.SurfaceGravity / want.SurfaceGravity; math.Abs(r-1) > c.kappa {
				t.Errorf("κ is %.6f, want %.6f", pr.Horizon.SurfaceGravity, want.SurfaceGravity)
			}
			if pr.Horizon.Temperature != pr.Horizon.SurfaceGravity/(2*math.Pi) {
				t.Errorf("temperature %v of κ = %v", pr.Horizon.Temperature, pr.Horizon.SurfaceGravity)
			}
			t.Logf("position off by %.1e, κ by %.1e", pr.Horizon.Position-want.Position, pr.Horizon.SurfaceGravity/want.SurfaceGravity-1)
			for _, side := range []struct {
				name   string
				lo, hi float64
				want   flow.State
			}{{"upstream", -40, -25, up}, {"downstream", 10, 30, down}} {
				s := pr.state(side.lo, side.hi)
				for _, q := range [][2]float64{{s.Density, side.want.Density}, {s.Velocity, side.want.Velocity}, {s.SoundSpeed, side.want.SoundSpeed}} {
					if math.Abs(q[0]/q[1]-1) > 1e-6 { // what is left of the flow's tail
						t.Errorf("%s is %+v, want %+v", side.name, s, side.want)
						break
					}
				}
			}
		})
	}
}

// The crossing is found on a Fourier series, so that its error falls faster
// than any power of the spacing; a straight line between two points would give
// order 2.
func TestNewProfileOrder(t *testing.T) {
	f, err := flow.Sweep(fluid.Cubic(), 0.5, 1, 0.5)
	if err != nil {
		t.Fatal(err)
	}
	_, _, want := f.Ends()
	worst := func(n int) float64 {
		w := 0.0
		for k := range 16 { // wherever the horizon lies between points
			p, frame, density, current := sampled(f, n, 200, float64(k)/16*200/float64(n), 0)
			pr, err := NewProfile(p, frame, density, current, 1)
			if err != nil {
				t.Fatal(err)
			}
			w = math.Max(w, math.Abs(pr.Horizon.Position-want.Position))
		}
		return w
	}
	coarse, fine := worst(512), worst(2048)
	t.Logf("dx = 0.39: off by up to %.1e, dx = 0.098: %.1e", coarse, fine)
	if order := math.Log(coarse/fine) / math.Log(4); order < 6 {
		t.Errorf("order %.2f, want 6 at least", order)
	}
}

// The coupling may change along the flow instead of the density.
func TestNewProfileUniform(t *testing.T) {
	f, err := flow.UniformSwitch(0.75, 1, 0.5, 1)
	if err != nil {
		t.Fatal(err)
	}
	g := gpe.NewGrid(1024, 256, -128)
	p := &gpe.Problem{Grid: g, Law: fluid.Cubic(), Landscape: gpe.NewSwitch(g, gpe.Switch{Velocity: 0.75, SoundUp: 1, SoundDown: 0.5, Width: 1})}
	density, current := make([]float64, g.N), make([]float64, g.N)
	for j := range density {
		density[j], current[j] = 1, 0.75
	}
	pr, err := NewProfile(p, Frame{}, density, current, 100)
	if err != nil {
		t.Fatal(err)
	}
	_, _, want := f.Ends()
	if math.Abs(pr.Horizon.Position-want.Position) > 1e-6 || math.Abs(pr.Horizon.SurfaceGravity/want.SurfaceGravity-1) > 1e-6 {
		t.Errorf("horizon %+v, want %+v", pr.Horizon, want)
	}
	t.Logf("position off by %.1e, κ by %.1e", pr.Horizon.Position-want.Position, pr.Horizon.SurfaceGravity/want.SurfaceGravity-1)
}

func TestNoHorizon(t *testing.T) {
	uniform := func(v float64) (*gpe.Problem, []float64, []float64) {
		g := gpe.NewGrid(256, 128, -64)
		p := &gpe.Problem{Grid: g, Law: fluid.Cubic(), Landscape: gpe.NewSweep(g, gpe.Sweep{Trap: gpe.Box{Length: 100}, Width: 1})}
		density, current := make([]float64, g.N), make([]float64, g.N)
		for j := range density {
			density[j], current[j] = 1, v
		}
		return p, density, current
	}
	for _, c := range []struct {
		name     string
		velocity func(x float64) float64
		mach     float64
		want     string
	}{
		{"at rest", func(float64) float64 { return 0 }, 0,
			"the flow near the step reaches Mach 0 but does not pass from below to above 1: a deeper or a faster step makes a horizon"},
		{"subsonic", func(x float64) float64 { return 0.8 * math.Exp(-x*x/50) }, 0.8,
			"the flow near the step reaches Mach 0.8 but does not pass from below to above 1: a deeper or a faster step makes a horizon"},
		{"supersonic throughout", func(float64) float64 { return 1.5 }, 1.5,
			"the flow near the step reaches Mach 1.5 but does not pass from below to above 1: a deeper or a faster step makes a horizon"},
		{"only from above to below", func(x float64) float64 { return 1 - 0.5*math.Tanh((x-0.25)/3) }, 1.5,
			"the flow near the step reaches Mach 1.5 but does not pass from below to above 1: a deeper or a faster step makes a horizon"},
		{"a horizon far away", func(x float64) float64 { return 1 + 0.5*math.Tanh((x-30)/3) }, 0.5,
			"the flow near the step reaches Mach 0.5 but does not pass from below to above 1: a deeper or a faster step makes a horizon"},
	} {
		t.Run(c.name, func(t *testing.T) {
			p, density, current := uniform(0)
			for j, x := range p.Grid.Positions() {
				current[j] = c.velocity(x)
			}
			_, err := NewProfile(p, Frame{}, density, current, 1)
			var none *NoHorizonError
			if !errors.As(err, &none) || err.Error() != c.want || math.Abs(none.Mach-c.mach) > 1e-3 {
				t.Errorf("error %v, want %s", err, c.want)
			}
		})
	}
}

// Of several crossings the one nearest to the step counts.
func TestNearestHorizon(t *testing.T) {
	g := gpe.NewGrid(1024, 128, -64)
	p := &gpe.Problem{Grid: g, Law: fluid.Cubic(), Landscape: gpe.NewSweep(g, gpe.Sweep{Trap: gpe.Box{Length: 100}, Width: 1})}
	density, current := make([]float64, g.N), make([]float64, g.N)
	for j, x := range g.Positions() {
		density[j], current[j] = 1, 1+0.5*math.Sin(math.Pi*(x-2)/6) // up through 1 at −10, 2, 14
	}
	pr, err := NewProfile(p, Frame{}, density, current, 1)
	if err != nil || math.Abs(pr.Horizon.Position-2) > 1e-3 {
		t.Errorf("%+v, %v, want a horizon at 2", pr, err)
	}
}
