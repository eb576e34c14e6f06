package flow_test

import (
	"errors"
	"math"
	"testing"

	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s = %.10g, want %.10g ± %g", what, got, want, tolerance)
	}
}

func over(t testing.TB, law fluid.Law, n, depth, width float64) *flow.Transonic {
	t.Helper()
	f, err := flow.OverStep(law, n, depth, width)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func sweep(t testing.TB, law fluid.Law, speed, depth, width float64) *flow.Transonic {
	t.Helper()
	f, err := flow.Sweep(law, speed, depth, width)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// Computed independently of this code from the stationary equation, by
// shooting at fixed step size; five digits given.
func TestOverStepMach(t *testing.T) {
	for _, row := range []struct {
		name        string
		width, mach float64
	}{
		{"nearly sharp", 0.01, 0.50009},
		{"tenth", 0.1, 0.50906},
		{"third", 0.3, 0.57043},
		{"half", 0.5, 0.65693},
		{"healing length", 1, 0.84383},
	} {
		t.Run(row.name, func(t *testing.T) {
			f := over(t, fluid.Cubic(), 1, 1.125, row.width)
			near(t, "m_u", f.Upstream.Mach(), row.mach, 0.6e-5) // last digit given
			near(t, "j downstream", f.Downstream.Density*f.Downstream.Velocity, f.Current, 1e-14)
			near(t, "j upstream", f.Upstream.Density*f.Upstream.Velocity, f.Current, 1e-14)
		})
	}
}

// Computed independently; direct integration of the time-dependent equation
// agrees to 1e-4.
func TestSweep(t *testing.T) {
	f := sweep(t, fluid.Cubic(), 0.5, 1, 0.5)
	near(t, "n_u", f.Upstream.Density, 0.89330, 0.6e-5)
	near(t, "v_u", f.Upstream.Velocity, 0.60971, 0.6e-5)
	near(t, "m_u", f.Upstream.Mach(), 0.6451, 0.6e-4)
	near(t, "n_d/n_u", f.Downstream.Density/f.Upstream.Density, 0.3221, 0.6e-4)
	// Published once as 0.0724 and once, in units of c_u², as 0.0811, which
	// is 0.0811 n_u = 0.07245: the first is cut off, not rounded.
	near(t, "T/c_u²", f.Horizon.Temperature/f.Upstream.Density, 0.0811, 0.6e-4)
	near(t, "T", f.Horizon.Temperature, 0.0724, 1e-4)
	near(t, "κ/2πT", f.Horizon.SurfaceGravity/(2*math.Pi*f.Horizon.Temperature), 1, 1e-15)

	f = sweep(t, fluid.Cubic(), 0.5, 1, 0.1)
	near(t, "n_u, w = 0.1", f.Upstream.Density, 0.98171, 0.6e-5)
	near(t, "v_u, w = 0.1", f.Upstream.Velocity, 0.51837, 0.6e-5)
}

// The simple wave carries v + ∫c dn/n unchanged, for every law.
func TestSweepInvariant(t *testing.T) {
	for _, eta := range []float64{0, 0.02, 0.3, 5, 100} {
		law := fluid.Swollen(eta)
		f := sweep(t, law, 0.4, 1.2, 0.4)
		near(t, "invariant", f.Upstream.Velocity+law.Riemann(f.Upstream.Density), 0.4+law.Riemann(1), 1e-13)
	}
}

// Half-soliton: closed form of Larré et al., PRA 85, 013621 (2012).
func TestHalfSoliton(t *testing.T) {
	f, err := flow.HalfSoliton(0.5)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "V₀", f.Depth, 1.125, 1e-15)
	near(t, "κ/2π", f.Horizon.Temperature, 0.137215, 0.6e-6)
	near(t, "m_d", f.Downstream.Mach(), 4, 1e-14)
	for _, m := range []float64{0.02, 0.3, 0.5, 0.7, 0.8, 0.97} {
		closed, err := flow.HalfSoliton(m)
		if err != nil {
			t.Fatal(err)
		}
		found := over(t, fluid.Cubic(), 1, closed.Depth, 0)
		near(t, "m_u", found.Upstream.Mach(), m, 1e-12)
		near(t, "n_d/n_u", found.Downstream.Density, m*m, 1e-12)
		near(t, "κ", found.Horizon.SurfaceGravity, closed.Horizon.SurfaceGravity, 1e-10)
		near(t, "x_h", found.Horizon.Position, closed.Horizon.Position, 1e-10/(1-m))
		q := math.Sqrt(1 - m*m)
		for x := -15.0; x < 1; x += 0.0137 {
			want := m * m
			if x < 0 {
				want += q * q * math.Pow(math.Tanh(q*x), 2)
			}
			for name, g := range map[string]*flow.Transonic{"solved": found, "closed": closed} {
				n, v := g.At(x)
				near(t, name+" n", n, want, 2e-11) // interpolation
				near(t, name+" j", n*v, m, 1e-12)  // as well as m_u is found
			}
		}
		// The horizon found on the profile is where v = c.
		n, v := closed.At(closed.Horizon.Position)
		near(t, "Mach number at the horizon", v/math.Sqrt(n), 1, 1e-10)
	}
}

// A narrow step approaches the sharp one; with the tanh profile the first
// correction is of second order in the width.
func TestSharpLimit(t *testing.T) {
	gap := func(width float64) float64 { return over(t, fluid.Cubic(), 1, 1.125, width).Upstream.Mach() - 0.5 }
	order := math.Log2(gap(0.01) / gap(0.005))
	near(t, "order in w", order, 2, 0.01)
}

var laws = []struct {
	name string
	eta  float64
}{{"cubic", 0}, {"barely swollen", 1e-5}, {"swollen", 0.3}, {"fully swollen", 20}}

var steps = []struct {
	name                  string
	density, depth, width float64
}{
	{"sharp", 1, 1, 0},
	{"narrow", 1, 1.125, 0.01},
	{"half", 0.7, 1, 0.5},
	{"deep", 1, 30, 0.3},
	{"healing length", 1.3, 0.6, 1},
	{"wide", 1, 0.5, 4},
	{"very wide", 1, 1, 15},
	{"shallow", 1, 0.01, 0.5},
}

// On every profile: A″ = 2(V + f − μ)A + j²/A³ with the second derivative
// differenced from At, the derivative of At against Gradient, and the first
// integral where the step is flat.
func TestProfile(t *testing.T) {
	for _, l := range laws {
		for _, s := range steps {
			t.Run(l.name+"/"+s.name, func(t *testing.T) {
				law := fluid.Swollen(l.eta)
				f := over(t, law, s.density, s.depth, s.width)
				if m := f.Upstream.Mach(); !(m > 0 && m < 1) || f.Downstream.Mach() <= 1 {
					t.Fatalf("Mach numbers %g, %g", m, f.Downstream.Mach())
				}
				u := f.Upstream
				mu := law.Mu(u.Density) + u.Velocity*u.Velocity/2
				near(t, "μ downstream", law.Mu(f.Downstream.Density)+math.Pow(f.Downstream.Velocity, 2)/2-s.depth, mu, 1e-12*(1+mu+s.depth))
				A := func(x float64) float64 { n, _ := f.At(x); return math.Sqrt(n) }
				V := func(x float64) float64 {
					if s.width == 0 {
						if x > 0 {
							return -s.depth
						}
						return 0
					}
					return -s.depth * (1 + math.Tanh(x/s.width)) / 2
				}
				// The difference quotient's step is a small part of every length
				// there is, which leaves 2e-9; an error of 1e-12 in A, which At
				// claims, becomes 3e-12/h² in A″.
				h := 0.02 * math.Min(1, 1/math.Sqrt(2*s.depth))
				if s.width > 0 {
					h = math.Min(h, 0.05*s.width)
				}
				tolerance := (2e-9 + 3e-12/(h*h)) * (1 + s.depth)
				left, right := f.Span()
				left = math.Max(left, f.Horizon.Position-60)
				right = math.Min(right, 40)
				for i := range 700 {
					x := left + (right-left)*(float64(i)+0.37)/700
					if i%2 == 0 && s.width > 0 { // crowd into the step
						x = s.width * 6 * (float64(i)/350 - 1)
					}
					if s.width == 0 && x > -4*h {
						continue
					}
					a := A(x)
					second := (2*(A(x-3*h)+A(x+3*h)) - 27*(A(x-2*h)+A(x+2*h)) + 270*(A(x-h)+A(x+h)) - 490*a) / (180 * h * h)
					want := 2*(V(x)+law.Mu(a*a)-mu)*a + f.Current*f.Current/(a*a*a)
					near(t, "A″", second, want, tolerance)
					n, v := f.At(x)
					near(t, "j", n*v, f.Current, 1e-14*(1+f.Current))
					slope := (A(x+3*h) - A(x-3*h) - 9*(A(x+2*h)-A(x-2*h)) + 45*(A(x+h)-A(x-h))) / (60 * h)
					dn, dv := f.Gradient(x)
					near(t, "dn/dx", dn, 2*a*slope, (1e-9+3e-12/h)*(1+s.depth))
					near(t, "dv/dx", dv*n, -v*dn, 1e-12*(1+s.depth))
					near(t, "c", f.SoundSpeed(x), law.SoundSpeed(n), 1e-14)
					if x < -18*s.width {
						p := dn / (2 * a)
						d := n - u.Density
						e := law.About(u.Density)
						near(t, "first integral", p*p/2-e.Excess(d)+u.Velocity*u.Velocity*d*d/(2*n), 0, 3e-11) // 1e-12 in A over a node spacing
					}
				}
				// κ against the differenced Mach condition.
				flux := func(x float64) float64 { _, v := f.At(x); return v - f.SoundSpeed(x) }
				xh := f.Horizon.Position
				near(t, "v − c at the horizon", flux(xh), 0, 1e-11)
				k := (flux(xh+h) - flux(xh-h)) / (2 * h)
				near(t, "κ", f.Horizon.SurfaceGravity, k, 5e-3*k) // second-order quotient
				// Falling all the way: no undulation anywhere.
				for i := 1; i < len(f.X); i++ {
					if f.X[i] <= f.X[i-1] {
						t.Fatalf("grid not ordered at %d", i)
					}
					if f.Density[i] > f.Density[i-1]+1e-12 {
						t.Fatalf("density rises at x = %g by %g", f.X[i], f.Density[i]-f.Density[i-1])
					}
				}
			})
		}
	}
}

// The cubic law is the limit η → 0 of the swollen one, approached linearly.
func TestSwollenLimit(t *testing.T) {
	cubic := over(t, fluid.Cubic(), 1, 1, 0.5).Upstream.Mach()
	gap := func(eta float64) float64 {
		return over(t, fluid.Swollen(eta), 1, 1, 0.5).Upstream.Mach() - cubic
	}
	near(t, "order in η", math.Log2(gap(2e-4)/gap(1e-4)), 1, 0.01)
	near(t, "gap", gap(1e-9), 0, 1e-9)
}

// The condition is scale-free for the cubic law: density n_u, depth V₀n_u and
// width w/√n_u give the same Mach number.
func TestScaling(t *testing.T) {
	a := over(t, fluid.Cubic(), 1, 0.8, 0.6)
	b := over(t, fluid.Cubic(), 0.25, 0.2, 1.2)
	near(t, "m_u", b.Upstream.Mach(), a.Upstream.Mach(), 1e-11)
	near(t, "κ", b.Horizon.SurfaceGravity, a.Horizon.SurfaceGravity/4, 1e-11)
}

func TestUniformSwitch(t *testing.T) {
	// Published κ/2π for v = 0.75, c_u = 1, c_d = 0.5: four decimals.
	for _, row := range []struct{ width, temperature float64 }{{0.5, 0.0774}, {1, 0.0387}, {2, 0.0193}} {
		u, err := flow.UniformSwitch(0.75, 1, 0.5, row.width)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "κ/2π", u.Horizon.Temperature, row.temperature, 0.6e-4)
		x, h := u.Horizon.Position, 1e-4
		near(t, "c at the horizon", u.SoundSpeed(x), 0.75, 1e-14)
		near(t, "κ", u.Horizon.SurfaceGravity, (u.SoundSpeed(x-h)-u.SoundSpeed(x+h))/(2*h), 1e-6)
		near(t, "c upstream", u.SoundSpeed(-30*row.width), 1, 1e-15)
		near(t, "c downstream", u.SoundSpeed(30*row.width), 0.5, 1e-15)
	}
}

func TestNoFlow(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	step := func(n, d, w float64) func() error {
		return func() error { _, err := flow.OverStep(fluid.Cubic(), n, d, w); return err }
	}
	swept := func(eta, s, d, w float64) func() error {
		return func() error { _, err := flow.Sweep(fluid.Swollen(eta), s, d, w); return err }
	}
	uniform := func(v, cu, cd, w float64) func() error {
		return func() error { _, err := flow.UniformSwitch(v, cu, cd, w); return err }
	}
	half := func(m float64) func() error {
		return func() error { _, err := flow.HalfSoliton(m); return err }
	}
	for _, row := range []struct {
		name string
		make func() error
		want flow.Condition
	}{
		{"no depth", step(1, 0, 0.5), flow.TooShallow},
		{"step up", step(1, -1, 0.5), flow.TooShallow},
		{"hardly a step", step(1, 1e-9, 0.5), flow.TooShallow},
		{"depth NaN", step(1, nan, 0.5), flow.BadNumber},
		{"width negative", step(1, 1, -0.5), flow.BadNumber},
		{"width infinite", step(1, 1, inf), flow.BadNumber},
		{"width beyond everything", step(1, 1, 1e4), flow.SonicEverywhere},
		{"density zero", step(0, 1, 0.5), flow.BadNumber},
		{"density infinite", step(inf, 1, 0.5), flow.BadNumber},
		{"speed zero", swept(0, 0, 1, 0.5), flow.TooSlow},
		{"speed backwards", swept(0, -0.2, 1, 0.5), flow.TooSlow},
		{"speed of sound", swept(0, 1, 1, 0.5), flow.TooFast},
		{"speed NaN", swept(0, nan, 1, 0.5), flow.BadNumber},
		{"too fast for its depth", swept(0, 0.6, 1, 0.1), flow.DenserThanCloud},
		{"too fast, swollen", swept(1, 0.65, 1, 0.1), flow.DenserThanCloud},
		{"sweep of no depth", swept(0, 0.5, 0, 0.1), flow.TooShallow},
		{"uniform subsonic", uniform(0.4, 1, 0.5, 1), flow.SonicEverywhere},
		{"uniform supersonic", uniform(1.2, 1, 0.5, 1), flow.NoSubsonicPlateau},
		{"uniform without switch", uniform(0.5, 0.5, 0.5, 1), flow.NoSubsonicPlateau},
		{"uniform of no width", uniform(0.75, 1, 0.5, 0), flow.BadNumber},
		{"half-soliton at rest", half(0), flow.BadNumber},
		{"half-soliton sonic", half(1), flow.NoSubsonicPlateau},
	} {
		t.Run(row.name, func(t *testing.T) {
			var no *flow.NoFlow
			if err := row.make(); !errors.As(err, &no) {
				t.Fatalf("error %v, want a NoFlow", err)
			} else if no.Condition != row.want {
				t.Errorf("%q, want the condition %q", err, row.want)
			} else if no.Turn == "" || no.Found == "" {
				t.Errorf("%q says too little", err)
			}
		})
	}
}

// Widths and depths over the whole dial are solved, or refused for a reason.
func TestDials(t *testing.T) {
	for _, eta := range []float64{0, 0.5} {
		law := fluid.Swollen(eta)
		for depth := 0.01; depth < 60; depth *= 3.1 {
			before := 0.0
			for width := 0.02; width < 25; width *= 2.3 {
				f, err := flow.OverStep(law, 1, depth, width)
				if err != nil {
					t.Errorf("η = %g, depth %.3g, width %.3g: %v", eta, depth, width, err)
					continue
				}
				if m := f.Upstream.Mach(); m <= before {
					t.Errorf("η = %g, depth %.3g, width %.3g: m_u = %g does not rise with the width", eta, depth, width, m)
				} else {
					before = m
				}
			}
		}
	}
}

func BenchmarkOverStep(b *testing.B) {
	for _, l := range laws {
		for _, s := range steps {
			law := fluid.Swollen(l.eta)
			b.Run(l.name+"/"+s.name, func(b *testing.B) {
				for b.Loop() {
					if _, err := flow.OverStep(law, s.density, s.depth, s.width); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}

func BenchmarkSweep(b *testing.B) {
	for b.Loop() {
		if _, err := flow.Sweep(fluid.Swollen(0.2), 0.5, 1, 0.5); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkAt(b *testing.B) {
	f := sweep(b, fluid.Cubic(), 0.5, 1, 0.5)
	x := -5.0
	for b.Loop() {
		f.At(x)
		x += 0.01
		if x > 3 {
			x = -5
		}
	}
}
