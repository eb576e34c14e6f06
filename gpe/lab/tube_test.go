package lab

import (
	"encoding/json"
	"errors"
	"math"
	"strings"
	"testing"
)

// For a ≪ a⊥ the coupling is 2ħω⊥a, and the first correction C a/a⊥ above it.
func TestCouplingOfWideTrap(t *testing.T) {
	atom := rubidium(t)
	for _, hertz := range []float64{1e-6, 1e-3, 1, 1e3} {
		omega := 2 * math.Pi * hertz
		g, err := Coupling(atom, hertz)
		if err != nil {
			t.Fatal(err)
		}
		small := OlshaniiC * atom.ScatteringLength / math.Sqrt(2*HBar/(atom.Mass*omega))
		excess := g/(2*HBar*omega*atom.ScatteringLength) - 1
		// Next order of the geometric series, plus rounding.
		if math.Abs(excess-small) > 1.1*small*small+1e-15 {
			t.Errorf("%g Hz: coupling exceeds 2ħω⊥a by %g, want %g", hertz, excess, small)
		}
	}
}

// The coupling grows without bound towards the resonance and is refused past
// it: at a⊥ = C a.
func TestCouplingResonance(t *testing.T) {
	atom := rubidium(t)
	aPerp := OlshaniiC * atom.ScatteringLength
	hertz := 2 * HBar / (atom.Mass * aPerp * aPerp) / (2 * math.Pi)
	if g, err := Coupling(atom, hertz*0.9999); err != nil || !(g > 1e4*2*HBar*2*math.Pi*hertz*atom.ScatteringLength) {
		t.Errorf("just below the resonance: %g, %v", g, err)
	}
	var bad *RangeError
	if _, err := Coupling(atom, hertz*1.0001); !errors.As(err, &bad) {
		t.Errorf("past the resonance: error %v, want a *RangeError", err)
	}
}

// c² = (n/m) dμ/dn, with the derivative taken numerically from
// μ = ħω⊥(1+3an)/√(1+2an): L. Salasnich, A. Parola, L. Reatto, Phys. Rev. A 65,
// 043614 (2002).
func TestSwollenSound(t *testing.T) {
	u := tube(t, 100, Swollen)
	a, quantum := u.Atom.ScatteringLength, HBar*u.Omega()
	mu := func(n float64) float64 { return quantum * (1 + 3*a*n) / math.Sqrt(1+2*a*n) }
	for _, eta := range []float64{0.02, 0.2, 1, 5, 50} {
		n := eta / a
		s, law, err := u.Scale(n)
		if err != nil {
			t.Fatal(err)
		}
		h := 1e-3 * n
		slope := (8*(mu(n+h)-mu(n-h)) - (mu(n+2*h) - mu(n-2*h))) / (12 * h)
		// Fourth-order differences: (1e-3)⁴ and rounding 1e-16/1e-3/η.
		if c2 := n / u.Atom.Mass * slope; relative(s.SoundSpeed*s.SoundSpeed, c2) > 1e-10 {
			t.Errorf("η = %g: c² = %g, want %g", eta, s.SoundSpeed*s.SoundSpeed, c2)
		}
		if got := u.ChemicalPotential(n); relative(got, mu(n)-quantum) > 1e-13 { // cancellation in the right-hand side
			t.Errorf("η = %g: μ = %g, want %g", eta, got, mu(n)-quantum)
		}
		// The law in condensate units is the same function: μ in m c².
		if got := s.Joules(law.Mu(1)); relative(got, mu(n)-quantum) > 1e-13 {
			t.Errorf("η = %g: law gives μ = %g, want %g", eta, got, mu(n)-quantum)
		}
		if got := u.density(u.ChemicalPotential(n)); relative(got, n) > 1e-14 {
			t.Errorf("η = %g: density of μ is %g, want %g", eta, got, n)
		}
	}
}

// A thin swollen cloud is a frozen one without the resonance correction; in a
// thick one c² = (3/(2√2)) (ħω⊥/m) √(an).
func TestSwollenLimits(t *testing.T) {
	u := tube(t, 100, Swollen)
	a, omega, m := u.Atom.ScatteringLength, u.Omega(), u.Atom.Mass
	thin, _, err := u.Scale(1e-9 / a)
	if err != nil {
		t.Fatal(err)
	}
	if want := 2 * HBar * omega * 1e-9 / m; relative(thin.SoundSpeed*thin.SoundSpeed, want) > 3e-9 { // 3η/2
		t.Errorf("thin: c² = %g, want %g", thin.SoundSpeed*thin.SoundSpeed, want)
	}
	thick, _, err := u.Scale(1e9 / a)
	if err != nil {
		t.Fatal(err)
	}
	if want := 3 / (2 * math.Sqrt2) * HBar * omega / m * math.Sqrt(1e9); relative(thick.SoundSpeed*thick.SoundSpeed, want) > 1e-9 { // 1/η
		t.Errorf("thick: c² = %g, want %g", thick.SoundSpeed*thick.SoundSpeed, want)
	}
}

// Classical phonons with energy ħ²n(∂θ)²/2m give each wave on a ring of length
// L ⟨|θ_k|²⟩ = m k_B T/(ħ²n k² L), so that the coherence at distance r is
// exp(−½ Σ 2(1−cos kr)⟨|θ_k|²⟩).
func TestCoherenceLength(t *testing.T) {
	const m, n, temperature, ring, r = 1.443e-25, 3.75e7, 1e-8, 1.0, 1e-3
	sum := 0.0
	for j := 1; j < 2_000_000; j++ {
		k := 2 * math.Pi * float64(j) / ring
		sum += 2 * (1 - math.Cos(k*r)) * m * 1.380649e-23 * temperature / (HBar * HBar * n * k * k * ring) * 2 // ±k
	}
	// The ring is finite, r/L = 1e-3, and the sum stops at 2e6: 1e-7.
	if got, want := r/CoherenceLength(m, n, temperature), sum/2; relative(got, want) > 2e-3 {
		t.Errorf("r/l = %g, want %g", got, want)
	}
	if !math.IsInf(CoherenceLength(m, n, 0), 1) {
		t.Error("at T = 0 the coherence length is not infinite")
	}
}

func TestChecks(t *testing.T) {
	for _, c := range []struct {
		name        string
		hertz       float64
		radial      Radial
		n0          float64
		temperature float64
		length      float64
		broken      string // names of the checks that fail
	}{
		{"sound", 260, Frozen, 3.75e7, 1e-10, 150e-6, ""},
		{"no temperature", 260, Frozen, 3.75e7, 0, 150e-6, ""},
		{"fat", 260, Frozen, 1e8, 1e-10, 150e-6, "quasi-1D"},
		{"fat but swollen", 260, Swollen, 1e8, 1e-10, 150e-6, ""},
		{"very fat", 260, Swollen, 2e9, 1e-10, 150e-6, "quasi-1D"},
		{"sparse", 260, Frozen, 1e6, 0, 150e-6, "weak interaction"},
		{"hot", 260, Frozen, 3.75e7, 1e-8, 10e-6, "radial temperature"},
		{"long", 260, Frozen, 3.75e7, 4e-9, 200e-6, "phase coherence"},
	} {
		t.Run(c.name, func(t *testing.T) {
			r, err := tube(t, c.hertz, c.radial).Regime(c.n0, c.temperature)
			if err != nil {
				t.Fatal(err)
			}
			checks := r.Checks(c.length)
			var broken []string
			for _, k := range checks {
				if k.OK != (k.Value <= k.Limit) || k.Why == "" {
					t.Errorf("%+v", k)
				}
				if !k.OK {
					broken = append(broken, k.Name)
				}
			}
			if got := strings.Join(broken, ", "); got != c.broken {
				t.Errorf("broken: %q, want %q (%+v)", got, c.broken, checks)
			}
			if _, err := json.Marshal(checks); err != nil { // no infinities
				t.Error(err)
			}
		})
	}
	b, err := json.Marshal(Check{Name: "n", Value: 1, Limit: 2, OK: true, Why: "w"})
	if want := `{"name":"n","value":1,"limit":2,"ok":true,"why":"w"}`; err != nil || string(b) != want {
		t.Errorf("a check is %s, want %s", b, want)
	}
}
