package lab

import (
	"errors"
	"math"
	"testing"
)

// With a frozen profile the box's atom number is elementary:
//
//	N = 2n₀[(1−h/2)(y+L/2) − (hw/2) ln(cosh(y/w)/cosh(L/2w))],  y = −(w/2) ln(h−1).
func TestBoxClosedForm(t *testing.T) {
	u := tube(t, 260, Frozen)
	lnCosh := func(x float64) float64 { return math.Abs(x) + math.Log1p(math.Exp(-2*math.Abs(x))) - math.Ln2 }
	for _, c := range []struct {
		name  string
		walls Walls
	}{
		{"usual", Walls{150e-6, 1e-6, 6}},
		{"sharp", Walls{150e-6, 1e-8, 6}},
		{"soft", Walls{40e-6, 6e-6, 3}},
		{"high", Walls{150e-6, 1e-6, 1000}},
		{"barely holding", Walls{150e-6, 1e-6, 1.01}},
	} {
		t.Run(c.name, func(t *testing.T) {
			l, w, h := c.walls.Length, c.walls.Width, c.walls.Height
			y := -w / 2 * math.Log(h-1)
			extent := 2 * ((1-h/2)*(y+l/2) - h*w/2*(lnCosh(y/w)-lnCosh(l/2/w)))
			n0, err := u.BoxDensity(5500, c.walls)
			if err != nil {
				t.Fatal(err)
			}
			if relative(n0, 5500/extent) > 1e-12 { // cancellation in the closed form
				t.Errorf("n₀ = %g, want %g", n0, 5500/extent)
			}
		})
	}
}

// Atoms put into a swollen box come out again, and a thin swollen box is a
// frozen one.
func TestSwollenBox(t *testing.T) {
	walls := Walls{190e-6, 1.35e-6, 6}
	u, frozen := tube(t, 120, Swollen), tube(t, 120, Frozen)
	for _, atoms := range []float64{1e-3, 1, 13000, 1e7} {
		n0, err := u.BoxDensity(atoms, walls)
		if err != nil {
			t.Fatal(err)
		}
		back, err := u.BoxAtoms(n0, walls)
		if err != nil {
			t.Fatal(err)
		}
		if relative(back, atoms) > 1e-13 {
			t.Errorf("%g atoms come out as %g", atoms, back)
		}
	}
	thin, err := u.BoxDensity(1e-3, walls)
	if err != nil {
		t.Fatal(err)
	}
	want, err := frozen.BoxDensity(1e-3, walls)
	if err != nil {
		t.Fatal(err)
	}
	if relative(thin, want) > 1e-7 { // η = 3e-8
		t.Errorf("thin: n₀ = %g, want %g", thin, want)
	}
	// Twice the density at the wall's foot changes the profile there only:
	// n₀(L + O(w)) = N.
	n0, err := u.BoxDensity(13000, walls)
	if err != nil {
		t.Fatal(err)
	}
	if r := n0 * walls.Length / 13000; r < 1 || r > 1+4*walls.Width/walls.Length {
		t.Errorf("n₀L/N = %g", r)
	}
}

// N = (4/3)n₀R for the frozen profile and (16/15)n₀R for the fully swollen one,
// n = n₀(1−x²/R²)².
func TestHarmonicClosedForms(t *testing.T) {
	frozen := tube(t, 260, Frozen)
	n0, err := frozen.HarmonicDensity(5200, 2)
	if err != nil {
		t.Fatal(err)
	}
	if got := 4.0 / 3 * n0 * frozen.HarmonicRadius(n0, 2); relative(got, 5200) > 1e-14 {
		t.Errorf("frozen: N = %g", got)
	}
	// μ at the peak is the trap's potential at the edge.
	edge := 2 * math.Pi * 2 * frozen.HarmonicRadius(n0, 2)
	if got := frozen.Atom.Mass * edge * edge / 2; relative(got, frozen.Coupling()*n0) > 1e-14 {
		t.Errorf("frozen: potential at the edge %g, want %g", got, frozen.Coupling()*n0)
	}
	swollen := tube(t, 260, Swollen)
	if n0, err = swollen.HarmonicDensity(1e20, 2); err != nil {
		t.Fatal(err)
	}
	eta := n0 * swollen.Atom.ScatteringLength
	if got := 16.0 / 15 * n0 * swollen.HarmonicRadius(n0, 2); relative(got, 1e20) > 3/math.Sqrt(eta) { // the zero point left out
		t.Errorf("swollen: N = %g at η = %g", got, eta)
	}
}

// The swollen harmonic cloud, integrated along n instead of x: with
// n = n₀(1−s²), N = 2∫x dn and the law is used the other way round.
func TestSwollenHarmonic(t *testing.T) {
	u := tube(t, 120, Swollen)
	const axial = 1.5
	for _, atoms := range []float64{100, 8000, 1e6} {
		n0, err := u.HarmonicDensity(atoms, axial)
		if err != nil {
			t.Fatal(err)
		}
		omega := 2 * math.Pi * axial
		x := func(s float64) float64 {
			n := n0 * (1 - s*s)
			return math.Sqrt(2*math.Max(0, u.ChemicalPotential(n0)-u.ChemicalPotential(n))/u.Atom.Mass) / omega
		}
		const steps = 2000 // Simpson
		sum := 0.0
		for i := 0; i <= steps; i++ {
			s := float64(i) / steps
			weight := 2.0
			switch {
			case i == 0 || i == steps:
				weight = 1
			case i%2 == 1:
				weight = 4
			}
			sum += weight * x(s) * 2 * n0 * s
		}
		if got := 2 * sum / (3 * steps); relative(got, atoms) > 1e-9 { // rounding under the root near s = 0
			t.Errorf("%g atoms come out as %g", atoms, got)
		}
	}
}

func TestBadNumbers(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	atom := rubidium(t)
	frozen, swollen := tube(t, 260, Frozen), tube(t, 260, Swollen)
	walls := Walls{150e-6, 1e-6, 6}
	newTube := func(a Atom, hertz float64) error { _, err := NewTube(a, hertz, Frozen); return err }
	scale := func(n float64) error { _, _, err := frozen.Scale(n); return err }
	regime := func(n, temperature float64) error { _, err := swollen.Regime(n, temperature); return err }
	box := func(n float64, w Walls) error { _, err := frozen.BoxDensity(n, w); return err }
	harmonic := func(u *Tube, n, hertz float64) error { _, err := u.HarmonicDensity(n, hertz); return err }
	for _, c := range []struct {
		name     string
		err      error
		quantity string
	}{
		{"no mass", newTube(Atom{ScatteringLength: 5e-9}, 260), "mass"},
		{"attractive", newTube(Atom{Mass: atom.Mass, ScatteringLength: -1e-9}, 260), "scattering length"},
		{"NaN scattering length", newTube(Atom{Mass: atom.Mass, ScatteringLength: nan}, 260), "scattering length"},
		{"no radial trap", newTube(atom, 0), "radial frequency"},
		{"infinite radial trap", newTube(atom, inf), "radial frequency"},
		{"past the resonance", newTube(atom, 1e9), "scattering length"},
		{"no density", scale(0), "line density"},
		{"negative density", scale(-1), "line density"},
		{"NaN density", scale(nan), "line density"},
		{"negative temperature", regime(1e7, -1e-9), "temperature"},
		{"NaN temperature", regime(1e7, nan), "temperature"},
		{"no atoms", box(0, walls), "atom number"},
		{"infinitely many atoms", box(inf, walls), "atom number"},
		{"no length", box(1, Walls{0, 1e-6, 6}), "box length"},
		{"no wall", box(1, Walls{150e-6, 0, 6}), "wall width"},
		{"low wall", box(1, Walls{150e-6, 1e-6, 1}), "wall height"},
		{"walls leave no room", box(1, Walls{1e-6, 10e-6, 1000}), "wall width"},
		{"no axial trap", harmonic(frozen, 1, 0), "axial frequency"},
		{"negative atoms", harmonic(swollen, -1, 1), "atom number"},
		{"too many atoms for floating point", harmonic(swollen, 1e308, 1e-300), "atom number"},
	} {
		t.Run(c.name, func(t *testing.T) {
			var bad *RangeError
			if !errors.As(c.err, &bad) {
				t.Fatalf("error %v, want a *RangeError", c.err)
			}
			if bad.Quantity != c.quantity {
				t.Errorf("error about %q, want %q: %v", bad.Quantity, c.quantity, bad)
			}
		})
	}
	var kind *RadialError
	if _, err := NewTube(atom, 260, "square"); !errors.As(err, &kind) {
		t.Errorf("error %v, want a *RadialError", err)
	}
	var name *SpeciesError
	if _, err := SpeciesByName("Rb87"); !errors.As(err, &name) || len(name.Known) != len(species) {
		t.Errorf("error %v, want a *SpeciesError", err)
	}
}
