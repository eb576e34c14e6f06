package gpe

import (
	"errors"
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

// In the limit of few atoms the ground state of a harmonic trap is a Gaussian
// with μ = ω/2 + g N/√(2π)·√ω to first order. L. Pitaevskii, S. Stringari,
// Bose–Einstein Condensation and Superfluidity, OUP 2016.
func TestGroundOfTheOscillator(t *testing.T) {
	const omega, mu = 0.5, 0.2505
	g := NewGrid(128, 30, -15)
	ground, err := FindGround(g, fluid.Cubic(), harmonicOn(g, omega), mu)
	if err != nil {
		t.Fatal(err)
	}
	want := (mu - omega/2) * math.Sqrt(2*math.Pi/omega)
	if math.Abs(ground.Atoms/want-1) > 2e-3 { // second order: a share of (μ−ω/2)/ω
		t.Errorf("holds %.6g, want %.6g", ground.Atoms, want)
	}
	for j, f := range ground.Field {
		x := g.X(j)
		gauss := math.Sqrt(want) * math.Pow(omega/math.Pi, 0.25) * math.Exp(-omega*x*x/2)
		if math.Abs(f-gauss) > 2e-3*math.Sqrt(want) {
			t.Fatalf("field at %.3g is %.6g, Gaussian %.6g", x, f, gauss)
		}
	}
}

// In the limit of many atoms it is Thomas and Fermi's: n = (μ−V), with
// N = 4√2 μ^{3/2}/(3ω).
func TestGroundIsThomasFermi(t *testing.T) {
	const omega = 0.02
	g := NewGrid(512, 260, -130)
	ground, err := FindGround(g, fluid.Cubic(), harmonicOn(g, omega), 1)
	if err != nil {
		t.Fatal(err)
	}
	if want := 4 * math.Sqrt2 / (3 * omega); math.Abs(ground.Atoms/want-1) > 1e-3 { // a share of (ω/μ)²·ln
		t.Errorf("holds %.6g, Thomas–Fermi %.6g", ground.Atoms, want)
	}
	middle := g.Index(0)
	if n := ground.Field[middle] * ground.Field[middle]; math.Abs(n-1) > omega*omega {
		t.Errorf("peak density %.8f, want 1", n)
	}
}

// At a wall much steeper and higher than the healing length the field rises as
// tanh x.
func TestGroundAtAWall(t *testing.T) {
	g := NewGrid(4096, 40, -20)
	box := Box{Length: 20, WallWidth: 0.05, WallHeight: 4000}
	v := trapOn(g, box)
	ground, err := FindGround(g, fluid.Cubic(), v, 1)
	if err != nil {
		t.Fatal(err)
	}
	// The wall's place is where tanh(x−x₀) fits; the shape is the test.
	slopeAt := func(f float64) float64 { return 1 - f*f }
	for j := g.N / 2; j+1 < g.N && ground.Field[j] > 0.3; j++ {
		f := (ground.Field[j] + ground.Field[j+1]) / 2
		slope := (ground.Field[j] - ground.Field[j+1]) / g.Dx
		if math.Abs(slope-slopeAt(f)) > 2e-3 { // second order in dx
			t.Fatalf("at %.3g the slope is %.5f, tanh has %.5f", g.X(j), slope, slopeAt(f))
		}
	}
}

func TestGroundResidualAndRefusal(t *testing.T) {
	g := NewGrid(256, 60, -30)
	box := Box{Length: 40, WallWidth: 1, WallHeight: 6}
	v := trapOn(g, box)
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.4)} {
		ground, err := FindGround(g, law, v, law.Mu(1))
		if err != nil {
			t.Fatal(err)
		}
		if ground.Residual > 1e-10 {
			t.Errorf("η = %g: residual %.2g", law.Swelling(), ground.Residual)
		}
	}
	if _, err := FindGround(g, fluid.Cubic(), harmonicOn(g, 0.5), 0.2); !errors.Is(err, ErrNoGroundState) {
		t.Errorf("below the lowest level: error %v, want ErrNoGroundState", err)
	}
}
