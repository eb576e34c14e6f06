package lab

import (
	"errors"
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

func relative(got, want float64) float64 { return math.Abs(got/want - 1) }

func rubidium(t *testing.T) Atom {
	t.Helper()
	s, err := SpeciesByName("Rb-87")
	if err != nil {
		t.Fatal(err)
	}
	a, err := s.Atom()
	if err != nil {
		t.Fatal(err)
	}
	return a
}

func tube(t *testing.T, hertz float64, radial Radial) *Tube {
	t.Helper()
	u, err := NewTube(rubidium(t), hertz, radial)
	if err != nil {
		t.Fatal(err)
	}
	return u
}

// The example is Rb-87 (86.9091805 u, 100.4 a₀) at 260 Hz and 37.5 atoms per µm
// and 0.1 nK, worked out apart from this package with 40 decimal digits and
// CODATA 2018: h = 6.62607015e-34 J s, k_B = 1.380649e-23 J/K,
// u = 1.66053906660e-27 kg, a₀ = 5.29177210903e-11 m.
func TestWorkedExample(t *testing.T) {
	const n0, temperature = 3.75e7, 1e-10
	frozen, swollen := tube(t, 260, Frozen), tube(t, 260, Swollen)
	s, law, err := frozen.Scale(n0)
	if err != nil {
		t.Fatal(err)
	}
	if law != fluid.Cubic() {
		t.Error("a frozen profile has the cubic law")
	}
	r, err := frozen.Regime(n0, temperature)
	if err != nil {
		t.Fatal(err)
	}
	ss, law, err := swollen.Scale(n0)
	if err != nil {
		t.Fatal(err)
	}
	if want := fluid.Swollen(rubidium(t).ScatteringLength * n0); law != want {
		t.Errorf("swollen law %v, want %v", law, want)
	}
	// The constants in double precision are good to 1e-11; 1e-9 leaves room.
	for _, c := range []struct {
		name      string
		got, want float64
	}{
		{"mass", s.Mass, 1.443160894664e-25},
		{"coupling", frozen.Coupling(), 1.845743890617e-39},
		{"line density", s.LineDensity, n0},
		{"sound speed", s.SoundSpeed, 6.925385886010e-04},
		{"healing length", s.HealingLength, 1.055157842694e-06},
		{"time", s.Time, 1.523608734678e-03},
		{"energy", s.Energy, 6.921539589814e-32},
		{"temperature", s.Temperature, 5.013250717463e-09},
		{"atoms per healing length", s.AtomsPerHealingLength, 39.56841910103},
		{"γ", r.Gamma, 6.387083619878e-04},
		{"μ/ħω⊥", r.ChemicalPotential, 0.4017661375751},
		{"a n", r.Swelling, 0.1992352199050},
		{"radial size", r.RadialSize, 6.688120608413e-07},
		{"coherence length", r.CoherenceLength, 4.186157368691e-03},
		{"k_B T/ħω⊥", r.RadialTemperature, 8.014084278203e-03},
		{"sound deficit", r.SoundDeficit, 0.1174254623},
		{"sound speed, swollen", ss.SoundSpeed, 6.112169247057e-04},
	} {
		if relative(c.got, c.want) > 1e-9 {
			t.Errorf("%s = %.12e, want %.12e", c.name, c.got, c.want)
		}
	}
}

// Each unit is made of the others as its dimension says: in one unit of time
// sound covers one healing length.
func TestScaleBothWays(t *testing.T) {
	s, _, err := tube(t, 260, Frozen).Scale(3.75e7)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name      string
		there     func(float64) float64
		back      func(float64) float64
		one, unit float64 // there(1), in SI
	}{
		{"length", s.Metres, s.FromMetres, s.Metres(1), s.HealingLength},
		{"time", s.Seconds, s.FromSeconds, s.Seconds(1), s.HealingLength / s.SoundSpeed},
		{"speed", s.MetresPerSecond, s.FromMetresPerSecond, s.MetresPerSecond(1), s.SoundSpeed},
		{"energy", s.Joules, s.FromJoules, s.Joules(1), s.Mass * s.SoundSpeed * s.SoundSpeed},
		{"temperature", s.Kelvin, s.FromKelvin, s.Kelvin(1), s.Mass * s.SoundSpeed * s.SoundSpeed / 1.380649e-23},
		{"frequency", s.Hertz, s.FromHertz, s.Hertz(1), s.Energy / 6.62607015e-34},
		{"rate", s.PerSecond, s.FromPerSecond, s.PerSecond(1), s.SoundSpeed / s.HealingLength},
		{"density", s.AtomsPerMetre, s.FromAtomsPerMetre, s.AtomsPerMetre(1), 3.75e7},
	} {
		t.Run(c.name, func(t *testing.T) {
			if relative(c.one, c.unit) > 1e-14 {
				t.Errorf("unit %g, want %g", c.one, c.unit)
			}
			for _, x := range []float64{-2.5, 0.3, 7} {
				if got := c.back(c.there(x)); relative(got, x) > 1e-15 { // two roundings
					t.Errorf("there and back: %g from %g", got, x)
				}
				if relative(c.there(x), x*c.unit) > 1e-14 {
					t.Errorf("not proportional at %g", x)
				}
			}
		})
	}
}

// Every species with a scattering length makes a tube; the others ask for one.
func TestSpecies(t *testing.T) {
	want := []string{"Rb-87", "Na-23", "K-39", "K-41", "Cs-133", "Li-7", "Yb-174"}
	got := SpeciesNames()
	for i := range want {
		if got[i] != want[i] {
			t.Fatalf("species %v, want %v", got, want)
		}
	}
	for _, s := range AllSpecies() {
		t.Run(s.Name, func(t *testing.T) {
			// The mass number is the relative mass to 0.1 %, or 0.3 % for lithium:
			// binding energies.
			var digits float64
			for _, r := range s.Name {
				if r >= '0' && r <= '9' {
					digits = 10*digits + float64(r-'0')
				}
			}
			if relative(s.RelativeMass, digits) > 3e-3 {
				t.Errorf("relative mass %g", s.RelativeMass)
			}
			a, err := s.Atom()
			if s.NeedsField {
				var field *FieldError
				if !errors.As(err, &field) || field.Species != s.Name {
					t.Fatalf("error %v, want a *FieldError", err)
				}
				a = s.AtomAt(150 * BohrRadius)
			} else if err != nil {
				t.Fatal(err)
			} else if s.Source == "" {
				t.Error("a scattering length without a source")
			}
			if relative(a.Mass, digits*1.66053906660e-27) > 3e-3 {
				t.Errorf("mass %g kg", a.Mass)
			}
			if _, err := NewTube(a, 200, Frozen); err != nil {
				t.Error(err)
			}
		})
	}
	AllSpecies()[0].RelativeMass = 1
	if species[0].RelativeMass == 1 {
		t.Error("AllSpecies lends out the table")
	}
}

// C = −ζ(1/2) by the accelerated alternating series of H. Cohen, F. Rodriguez
// Villegas, D. Zagier, Exp. Math. 9, 3 (2000): error (3+√8)⁻ⁿ.
func TestOlshaniiC(t *testing.T) {
	const n = 20
	d := math.Pow(3+math.Sqrt(8), n)
	d = (d + 1/d) / 2
	b, c, sum := -1.0, -d, 0.0
	for k := range n {
		c = b - c
		sum += c / math.Sqrt(float64(k+1))
		b *= float64((k+n)*(k-n)) / ((float64(k) + 0.5) * float64(k+1))
	}
	if got := -sum / d / (1 - math.Sqrt2); relative(got, OlshaniiC) > 1e-14 { // rounding of 20 terms
		t.Errorf("−ζ(1/2) = %.16g, have %.16g", got, OlshaniiC)
	}
}
