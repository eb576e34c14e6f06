package fluid_test

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/diff/fd"
	"gonum.org/v1/gonum/integrate/quad"

	"tailrace/gpe/fluid"
)

var swellings = []float64{0, 1e-8, 1e-3, 0.2, 1, 7, 300}

var densities = []float64{1e-4, 0.03, 0.5, 1, 1.7, 40}

func near(t *testing.T, what string, eta, n, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*(math.Abs(want)+1e-300)) {
		t.Errorf("η = %g, n = %g: %s = %.15g, want %.15g within %g", eta, n, what, got, want, relative)
	}
}

// The law as published, L. Salasnich, A. Parola, L. Reatto, PRA 65, 043614
// (2002): μ/ħω⊥ = (1+3an)/√(1+2an), less its zero point and with c(1) = 1.
func TestPublishedForm(t *testing.T) {
	for _, eta := range swellings[2:] { // below, the formula as printed cancels
		law := fluid.Swollen(eta)
		for _, n := range densities {
			y := eta * n
			want := law.Scale() * ((1+3*y)/math.Sqrt(1+2*y) - 1)
			near(t, "f", eta, n, law.Mu(n), want, 1e-15/(y*y)+1e-14)
		}
	}
}

func TestUnits(t *testing.T) {
	for _, eta := range swellings {
		law := fluid.Swollen(eta)
		near(t, "c(1)", eta, 1, law.SoundSpeed(1), 1, 1e-14)
		near(t, "f(0)", eta, 0, law.Mu(0)+1, 1, 0)
		near(t, "e(0)", eta, 0, law.Energy(0)+1, 1, 0)
	}
}

// f′, f″, dc/dn and f = e′ against difference quotients.
func TestDerivatives(t *testing.T) {
	for _, eta := range swellings {
		law := fluid.Swollen(eta)
		for _, n := range densities {
			settings := &fd.Settings{Formula: fd.Central, Step: 1e-5 * n}
			// Second-order quotient: h² of the relative step plus rounding
			// over it, 1e-10 and 1e-11.
			near(t, "f′", eta, n, law.Slope(n), fd.Derivative(law.Mu, n, settings), 1e-9)
			near(t, "e′", eta, n, law.Mu(n), fd.Derivative(law.Energy, n, settings), 1e-9)
			near(t, "dc/dn", eta, n, law.SoundSlope(n), fd.Derivative(law.SoundSpeed, n, settings), 1e-9)
			// f″ is small beside f′/n, on which the rounding stands.
			got, want := law.Curvature(n), fd.Derivative(law.Slope, n, settings)
			if math.Abs(got-want) > 1e-9*(math.Abs(want)+law.Slope(n)/n) {
				t.Errorf("η = %g, n = %g: f″ = %g, want %g", eta, n, got, want)
			}
		}
	}
}

// Limits: η → 0 is f = n, η → ∞ has c² ∝ √n.
func TestLimits(t *testing.T) {
	for _, n := range densities {
		near(t, "f", 1e-9, n, fluid.Swollen(1e-9).Mu(n), n, 1e-7)
		near(t, "c²", 1e9, n, math.Pow(fluid.Swollen(1e9).SoundSpeed(n), 2), math.Sqrt(n), 1e-4)
		// Below n = 1/η the law is cubic still, which leaves about 2η^{-¼}.
		near(t, "∫c dn/n", 1e16, n, fluid.Swollen(1e16).Riemann(n), 4*math.Pow(n, 0.25), 1e-3)
		near(t, "∫c dn/n", 0, n, fluid.Cubic().Riemann(n), 2*math.Sqrt(n), 1e-15)
		near(t, "∫c dn/n", 1e-9, n, fluid.Swollen(1e-9).Riemann(n), 2*math.Sqrt(n), 1e-7)
	}
}

// Rise and Excess are differences of Mu and Energy where those do not cancel,
// and keep their leading orders where they do.
func TestExpansion(t *testing.T) {
	for _, eta := range swellings {
		law := fluid.Swollen(eta)
		for _, n := range densities {
			e := law.About(n)
			for _, part := range []float64{-0.9, -0.3, 0.4, 5} {
				dn := part * n
				rise := law.Mu(n+dn) - law.Mu(n)
				near(t, "rise", eta, n, e.Rise(dn), rise, 1e-13)
				// The plain difference loses up to e/excess of its digits.
				plain := law.Energy(n+dn) - law.Energy(n) - law.Mu(n)*dn
				lost := math.Abs(law.Energy(n+dn)/plain) + math.Abs(law.Mu(n)*dn/plain)
				near(t, "excess", eta, n, e.Excess(dn), plain, 1e-14*(1+lost))
			}
			for _, dn := range []float64{1e-9 * n, -1e-9 * n, 1e-60 * n} {
				near(t, "small rise", eta, n, e.Rise(dn)/dn, law.Slope(n), 1e-8)
				near(t, "small excess", eta, n, e.Excess(dn)/dn/dn, law.Slope(n)/2, 1e-8)
			}
		}
	}
}

// The integral against a plain quadrature in √n, between two densities, where
// nothing is singular.
func TestRiemann(t *testing.T) {
	for _, eta := range swellings {
		law := fluid.Swollen(eta)
		for _, n := range densities {
			want := quad.Fixed(func(z float64) float64 { return 2 * law.SoundSpeed(z*z) / z },
				math.Sqrt(n), math.Sqrt(2*n), 40, nil, 0)
			near(t, "∫c dn/n", eta, n, law.Riemann(2*n)-law.Riemann(n), want, 1e-12)
		}
		if law.Riemann(0) != 0 {
			t.Errorf("η = %g: nothing in empty space, not %g", eta, law.Riemann(0))
		}
	}
}

func TestPanics(t *testing.T) {
	for name, f := range map[string]func(){
		"negative swelling": func() { fluid.Swollen(-1) },
		"NaN swelling":      func() { fluid.Swollen(math.NaN()) },
		"infinite swelling": func() { fluid.Swollen(math.Inf(1)) },
		"negative density":  func() { fluid.Cubic().Riemann(-1) },
		"NaN reference":     func() { fluid.Swollen(1).About(math.NaN()) },
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
