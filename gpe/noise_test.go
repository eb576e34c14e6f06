package gpe

import (
	"math"
	"path/filepath"
	"testing"

	"tailrace/gpe/fluid"
)

// In a uniform cloud the modes of the eigenproblem are plane waves with
// Bogoliubov's energies ε = √(E(E+2)), each twice but the Nyquist wave.
func TestModesOfAUniformCloud(t *testing.T) {
	g := NewGrid(64, 40, -20)
	ground := UniformGround(g, fluid.Cubic())
	modes, err := FindModes(ground, 0)
	if err != nil {
		t.Fatal(err)
	}
	if modes.Count != g.N-1 {
		t.Fatalf("%d modes, want %d: all but the condensate", modes.Count, g.N-1)
	}
	for m, got := range modes.Energies {
		k := 2 * math.Pi * float64(m/2+1) / g.Length()
		e := k * k / 2
		if want := math.Sqrt(e * (e + 2)); math.Abs(got/want-1) > 1e-10 { // rounding of an eigenproblem of norm k_max⁴
			t.Errorf("mode %d: energy %.12g, want %.12g", m, got, want)
		}
	}
}

// The modes of a box obey A f₋ = ε f₊ and B f₊ = ε f₋ (f₋ up to the
// condensate's share), are orthonormal, and, with the condensate, complete:
// Σ f₊(x) f₋(x′) = δ − φ₀φ₀′/N.
func TestModesOfABox(t *testing.T) {
	g := NewGrid(128, 60, -30)
	for _, c := range []struct {
		name   string
		centre float64
		law    fluid.Law
	}{{"symmetric", 0, fluid.Cubic()}, {"off centre", 0.3, fluid.Cubic()}, {"swollen", 0, fluid.Swollen(0.8)}} {
		t.Run(c.name, func(t *testing.T) {
			box := Box{Length: 40, WallWidth: 1, WallHeight: 6}
			v := make([]float64, g.N)
			for j := range v {
				v[j] = box.At(g.X(j) - c.centre)
			}
			ground, err := FindGround(g, c.law, v, c.law.Mu(1))
			if err != nil {
				t.Fatal(err)
			}
			m, err := FindModes(ground, 0)
			if err != nil {
				t.Fatal(err)
			}
			if m.Count != g.N-1 {
				t.Fatalf("%d modes, want %d", m.Count, g.N-1)
			}
			norm := ground.Atoms / g.Dx
			worst := 0.0
			for i := range g.N {
				for j := range g.N {
					sum := ground.Field[i] * ground.Field[j] / norm
					for k := range m.Count {
						sum += g.Dx * m.Plus[i*m.Count+k] * m.Minus[j*m.Count+k]
					}
					if i == j {
						sum--
					}
					worst = math.Max(worst, math.Abs(sum))
				}
			}
			if worst > 1e-9 { // rounding
				t.Errorf("modes are not complete: off by %.2g", worst)
			}
			h := newHessian(g)
			for j, p := range ground.Field {
				h.diag[j] = v[j] - ground.Mu + c.law.Mu(p*p) + 2*p*p*c.law.Slope(p*p)
			}
			plus, b := make([]float64, g.N), make([]float64, g.N)
			for k := range m.Count {
				for j := range plus {
					plus[j] = m.Plus[j*m.Count+k]
				}
				h.apply(b, plus)
				// B f₊ − ε f₋ may only have a share of φ₀, taken out of f₋.
				share := 0.0
				for j, p := range ground.Field {
					b[j] -= m.Energies[k] * m.Minus[j*m.Count+k]
					share += b[j] * p / norm
				}
				for j, p := range ground.Field {
					if d := math.Abs(b[j] - share*p); d > 1e-8*(1+m.Energies[k]) {
						t.Fatalf("mode %d: B f₊ ≠ ε f₋ by %.2g at x = %.3g", k, d, g.X(j))
					}
				}
			}
		})
	}
}

func TestModeCache(t *testing.T) {
	g := NewGrid(64, 40, -20)
	ground := UniformGround(g, fluid.Cubic())
	cache := ModeCache{Folder: filepath.Join(t.TempDir(), "a", "b")}
	first, cached, err := cache.Modes(ground, 0)
	if err != nil || cached {
		t.Fatalf("first look: cached %v, error %v", cached, err)
	}
	second, cached, err := cache.Modes(ground, 0)
	if err != nil || !cached {
		t.Fatalf("second look: cached %v, error %v", cached, err)
	}
	for i := range first.Plus {
		if first.Plus[i] != second.Plus[i] || first.Minus[i] != second.Minus[i] {
			t.Fatal("the cache changed a mode")
		}
	}
	if _, cached, _ = cache.Modes(ground, 1); cached {
		t.Error("another cut-off took the modes of the first")
	}
}
