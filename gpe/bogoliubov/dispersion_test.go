package bogoliubov

import (
	"math"
	"testing"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s = %.10g, want %.10g ± %g", what, got, want, tolerance)
	}
}

func TestEnergy(t *testing.T) {
	for _, c := range []float64{0, 0.3, 1, 2} {
		for _, k := range []float64{-3, 1e-3, 0.5, 1, 20} {
			e := k * k / 2
			near(t, "ε", Energy(k, c), math.Sqrt(e*(e+2*c*c)), 1e-14*(1+e))
		}
	}
	near(t, "sound", Energy(1e-9, 0.7)/1e-9, 0.7, 1e-15)
	near(t, "sound speed", groupSpeed(0, 0.7), 0.7, 0)
	for _, k := range []float64{0.1, 1, 5} {
		h := 1e-5
		near(t, "dε/dk", groupSpeed(k, 0.7), (Energy(k+h, 0.7)-Energy(k-h, 0.7))/(2*h), 1e-9) // h² of the quotient
	}
}

// S(k) = E/ε at T = 0; S → T/c² as k → 0 and S → 1 as k → ∞ at any T.
// Pitaevskii and Stringari, section 7 (from memory).
func TestStructureFactor(t *testing.T) {
	for _, k := range []float64{0.01, 0.4, 3, 50} {
		near(t, "S, T = 0", StructureFactor(k, 0.8, 0), k*k/2/Energy(k, 0.8), 1e-15)
		near(t, "S, k < 0", StructureFactor(-k, 0.8, 0.3), StructureFactor(k, 0.8, 0.3), 0)
		near(t, "S, thermal", StructureFactor(k, 0.8, 0.3), k*k/2/Energy(k, 0.8)/math.Tanh(Energy(k, 0.8)/0.6), 1e-14)
	}
	near(t, "S(0), T = 0", StructureFactor(0, 1, 0), 0, 0)
	near(t, "S(0)", StructureFactor(0, 0.5, 0.1), 0.4, 1e-15)
	near(t, "S just above 0", StructureFactor(1e-9, 0.5, 0.1), 0.4, 1e-12)
	near(t, "S(∞)", StructureFactor(1e4, 0.5, 0.1), 1, 1e-8)
	near(t, "ideal gas", StructureFactor(0, 0, 0), 1, 0)
	near(t, "classical ideal gas", StructureFactor(0.1, 0, 50), 2*50/(0.005), 50) // 2n(k)+1 with n = T/E
}

func TestAmplitudes(t *testing.T) {
	for _, k := range []float64{1e-6, -0.1, 1, 30, 1e5} {
		u, v := Amplitudes(k, 0.9)
		s := StructureFactor(k, 0.9, 0)
		near(t, "(u+v)²/S", (u+v)*(u+v)/s, 1, 1e-9) // u and v cancel to √S at small k
		near(t, "(u−v)²S", (u-v)*(u-v)*s, 1, 1e-14)
		near(t, "(u²−v²)", (u-v)*(u+v), 1, 1e-9)
		if u <= 0 || v >= 0 {
			t.Errorf("k = %g: u = %g, v = %g", k, u, v)
		}
	}
	// v → −c²/k² for free particles.
	_, v := Amplitudes(1e5, 0.9)
	near(t, "v k²/c²", v*1e10/0.81, -1, 1e-9)
}

// ω_max computed independently of this code, from the flow's published
// downstream state; the half-soliton's is v_d = 1/m_u, c_d = m_u for n_u = 1.
func TestMaxFrequency(t *testing.T) {
	for _, row := range []struct {
		name          string
		v, c, w, last float64
	}{
		{"uniform", 0.75, 0.5, 0.10025, 0.6e-5},
		{"half-soliton 0.5", 2, 0.5, 1.7640, 0.6e-4},
		{"half-soliton 0.7", 1 / 0.7, 0.7, 0.61588, 0.6e-5},
		{"half-soliton 0.8", 1 / 0.8, 0.8, 0.30779, 0.6e-5},
	} {
		t.Run(row.name, func(t *testing.T) {
			w := MaxFrequency(row.v, row.c)
			near(t, "ω_max", w, row.w, row.last)
			// By brute force.
			best := 0.0
			for k := 0.0; k < 5; k += 1e-4 {
				best = math.Max(best, row.v*k-Energy(k, row.c))
			}
			near(t, "highest", w, best, 1e-7) // flat top
		})
	}
	near(t, "subsonic", MaxFrequency(0.4, 0.5), 0, 0)
	near(t, "sonic", MaxFrequency(0.5, 0.5), 0, 0)
	// Just supersonic, δ = v − c: ω_max → k(δ − k²/8c) at its top,
	// k² = 8cδ/3, so (2/3)δ√(8cδ/3).
	d := 1e-10
	near(t, "hardly supersonic", MaxFrequency(0.5+d, 0.5)/(2./3*d*math.Sqrt(4*d/3)), 1, 1e-6) // d known to 1e-6
	// Free particles: ω = vk − k²/2, top v²/2.
	near(t, "free", MaxFrequency(3, 0), 4.5, 1e-14)
}

func TestOutgoing(t *testing.T) {
	const vu, cu, vd, cd = 0.6, 0.95, 1.9, 0.5
	top := MaxFrequency(vd, cd)
	for _, part := range []float64{1e-12, 1e-4, 0.1, 0.5, 0.9, 0.999, 1 - 1e-9} {
		w := part * top
		k, s := OutgoingUp(w, vu, cu)
		if k >= 0 {
			t.Errorf("k_u = %g is not negative", k)
		}
		near(t, "upstream dispersion", (vu*k+Energy(k, cu))/w, 1, 1e-14)
		near(t, "upstream group speed", s, groupSpeed(-k, cu)-vu, 0)
		k, s = OutgoingDown(w, vd, cd)
		if k <= 0 || s <= 0 {
			t.Errorf("k_d = %g, w_d = %g", k, s)
		}
		near(t, "downstream dispersion", (vd*k-Energy(k, cd))/w, 1, 1e-14)
		near(t, "downstream group speed", s, vd-groupSpeed(k, cd), 0)
	}
	k, s := OutgoingUp(1e-9, vu, cu)
	near(t, "sound upstream", -k*(cu-vu)/1e-9, 1, 1e-12)
	near(t, "sound speed upstream", s, cu-vu, 1e-12)
	k, s = OutgoingDown(1e-9, vd, cd)
	near(t, "sound downstream", k*(vd-cd)/1e-9, 1, 1e-12)
	near(t, "sound speed downstream", s, vd-cd, 1e-12)
	if k, s := OutgoingDown(top*1.0001, vd, cd); !math.IsNaN(k) || !math.IsNaN(s) {
		t.Errorf("above ω_max: %g, %g", k, s)
	}
	_, s = OutgoingDown(top, vd, cd)
	near(t, "group speed at the top", s, 0, 0)
	k, _ = OutgoingUp(0, vu, cu)
	near(t, "k_u(0)", k, 0, 0)
	k, _ = OutgoingDown(0, vd, cd)
	near(t, "k_d(0)", k, 0, 0)
}

func TestOutgoingPanics(t *testing.T) {
	for name, f := range map[string]func(){
		"supersonic upstream": func() { OutgoingUp(0.1, 1.1, 1) },
		"subsonic downstream": func() { OutgoingDown(0.1, 0.9, 1) },
		"negative frequency":  func() { OutgoingUp(-0.1, 0.5, 1) },
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
