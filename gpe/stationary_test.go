package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

func stationary(t testing.TB, n int, law fluid.Law, p flow.Profile, err error) *Stationary {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
	s, err := NewStationary(NewGrid(n, 192, -50), law, p, 4)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// departure is the largest |δn| after t = 50.
func (s *Stationary) departure(t testing.TB) float64 {
	_, off := follow(t, s.Grid, s.Law, s, s.Field, Quartic(), 0.9*s.Grid.MaxTimeStep(), 50, 1, func(rho []float64) float64 {
		worst := 0.0
		for j, r := range rho {
			z := s.Field[j]
			worst = math.Max(worst, math.Abs(r-real(z)*real(z)-imag(z)*imag(z)))
		}
		return worst
	})
	return off[1]
}

// A flow on a ring stays as it is, seam and all, as well as the grid resolves
// it: the uniform one exactly, a smooth step's to 10⁻⁸, and a sharp edge's, whose
// short waves are cut off, the better the finer the grid.
func TestStationaryStays(t *testing.T) {
	uniform, err := flow.UniformSwitch(0.75, 1, 0.5, 1)
	if off := stationary(t, 512, fluid.Cubic(), uniform, err).departure(t); off > 1e-13 { // rounding
		t.Errorf("the uniform flow moves by %.1g", off)
	}
	law := fluid.Swollen(0.4)
	for _, c := range []struct {
		name string
		law  fluid.Law
	}{{"cubic", fluid.Cubic()}, {"swollen", law}} {
		sweep, err := flow.Sweep(c.law, 0.5, 1, 0.5)
		if off := stationary(t, 1024, c.law, sweep, err).departure(t); off > 1e-8 {
			t.Errorf("the sweep's flow (%s) moves by %.1g", c.name, off)
		}
	}
	half, err := flow.HalfSoliton(0.5)
	coarse := stationary(t, 512, fluid.Cubic(), half, err)
	fine := stationary(t, 1024, fluid.Cubic(), half, err)
	a, b := coarse.departure(t), fine.departure(t)
	t.Logf("half-soliton moves by %.2g and %.2g, residuals %.2g and %.2g", a, b, coarse.Residual, fine.Residual)
	if b > 1e-5 || b > a/30 { // better than the fourth power of the spacing
		t.Errorf("the half-soliton moves by %.1g, and by %.1g on a grid twice as fine", a, b)
	}
}

// The potential of a flow over a step is that step, and its coupling 1: what
// the flow was computed from.
func TestStationaryPotentialIsTheStep(t *testing.T) {
	for _, c := range []struct {
		name  string
		law   fluid.Law
		width float64
	}{{"cubic", fluid.Cubic(), 0.5}, {"swollen", fluid.Swollen(0.4), 0.8}} {
		const depth = 1.0
		p, err := flow.Sweep(c.law, 0.5, depth, c.width)
		s := stationary(t, 4096, c.law, p, err)
		first, worst := s.v[0], 0.0
		for j, v := range s.v {
			x := s.Grid.X(j)
			if x > s.Seam-SeamReach*s.SeamWidth {
				break
			}
			want := first - depth*(1+math.Tanh(x/c.width))/2
			worst = math.Max(worst, math.Abs(v-want))
			if math.Abs(v-want) > 1e-9 { // the profile is good to 1e-12, and k_max² is 4e3
				t.Errorf("%s: V(%.3g) = %.8f, want %.8f", c.name, x, v, want)
				break
			}
			if math.Abs(s.g[j]-1) > 1e-10 {
				t.Errorf("%s: g(%.3g) = %.12f, want 1", c.name, x, s.g[j])
				break
			}
		}
		t.Logf("%s: to %.2g", c.name, worst)
	}
}

// The field carries the flow's current everywhere, through the seam and across
// the ring's join, which needs a phase that closes.
func TestStationaryCurrent(t *testing.T) {
	p, err := flow.Sweep(fluid.Cubic(), 0.5, 1, 0.5)
	s := stationary(t, 1024, fluid.Cubic(), p, err)
	prop, err := NewPropagator(s.Grid, s.Law, s, nil, Strang(), 0.01, []float64{1})
	if err != nil {
		t.Fatal(err)
	}
	b := lanes.NewBatch(s.Grid.N)
	b.SetLane(0, s.Field)
	flows := make([]float64, s.Grid.N*lanes.Width)
	prop.NewWalker(false).Currents(flows, b)
	for j := range s.Grid.N {
		if off := math.Abs(flows[j*lanes.Width] - p.Current); off > 1e-6 { // as the grid resolves the phase
			t.Fatalf("the current at x = %.3g is %.9f, want %.9f", s.Grid.X(j), flows[j*lanes.Width], p.Current)
		}
	}
	// Nearest to the downstream velocity: within half a turn around the ring.
	if off := math.Abs(s.Drift() - p.Downstream.Velocity); off > math.Pi/s.Grid.Length() {
		t.Errorf("the frame drifts at %.4f, downstream the fluid at %.4f", s.Drift(), p.Downstream.Velocity)
	}
}

func TestStationaryNeedsRoom(t *testing.T) {
	p, err := flow.UniformSwitch(0.75, 1, 0.5, 1)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := NewStationary(NewGrid(256, 80, -30), fluid.Cubic(), p, 4); err == nil {
		t.Error("a seam that reaches into the flow is taken")
	}
	if _, err := NewStationary(NewGrid(256, 200, -10), fluid.Cubic(), p, 4); err == nil {
		t.Error("a flow that begins left of the grid is taken")
	}
}
