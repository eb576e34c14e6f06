package configs

import (
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"tailrace/gpe/lab"
)

func TestExamplesDecode(t *testing.T) {
	if want := []string{"basin", "harbour", "lock", "quay", "sluice", "uniform", "weir"}; !slices.Equal(Examples(), want) {
		t.Errorf("examples %v, want %v", Examples(), want)
	}
	for _, name := range Examples() {
		t.Run(name, func(t *testing.T) {
			c, err := Load(name)
			if err != nil {
				t.Fatal(err)
			}
			if c.Title == "" || c.Flow.Kind == "" && len(c.Record.Times) == 0 || c.Source != name {
				t.Errorf("%+v", c)
			}
			finite(t, c)
		})
	}
}

// The comments of the examples state these: as many atoms in a healing length,
// as deep, wide and fast a step, and as late a picture as the demonstration
// wants, in a cloud whose checks all hold.
func TestExamplesScale(t *testing.T) {
	for _, e := range []struct {
		name                      string
		atoms, mu                 float64 // nξ, μ/ħω⊥
		depth, width, speed, late float64 // in condensate units
		temperature               float64
	}{
		{"quay", 49.3, 0.41, 1, 0.5, 0.5, 110, 0.03},
		{"harbour", 43.6, 0.49, 1, 0.52, 0.80, 112, 0.0165},
		{"basin", 97, 0.60, 0.97, 0.5, 0.49, 114, 0.0172},
	} {
		t.Run(e.name, func(t *testing.T) {
			c, err := Load(e.name)
			if err != nil {
				t.Fatal(err)
			}
			tube, err := lab.NewTube(lab.Atom{Mass: c.Atom.Mass, ScatteringLength: c.Atom.ScatteringLength}, c.Trap.RadialFrequency, c.Cloud.Radial)
			if err != nil {
				t.Fatal(err)
			}
			n0, err := c.densityGuess(tube)
			if err != nil {
				t.Fatal(err)
			}
			s, _, err := tube.Scale(n0)
			if err != nil {
				t.Fatal(err)
			}
			r, err := tube.Regime(n0, c.Cloud.Temperature)
			if err != nil {
				t.Fatal(err)
			}
			for _, k := range r.Checks(c.Trap.Length + 2*tube.HarmonicRadius(n0, max(c.Trap.AxialFrequency, 1))) {
				if !k.OK {
					t.Errorf("%+v", k)
				}
			}
			for _, v := range []struct {
				name      string
				got, want float64
			}{
				{"nξ", s.AtomsPerHealingLength, e.atoms},
				{"μ/ħω⊥", r.ChemicalPotential, e.mu},
				{"depth", s.FromJoules(c.Step.Depth), e.depth},
				{"width", s.FromMetres(c.Step.Width), e.width},
				{"speed", s.FromMetresPerSecond(c.Step.Speed), e.speed},
				{"last time", s.FromSeconds(c.Record.Times[len(c.Record.Times)-1]), e.late},
				{"temperature", s.FromKelvin(c.Cloud.Temperature), e.temperature},
			} {
				// Round numbers, and a Thomas–Fermi density without healing at the walls.
				if math.Abs(v.got/v.want-1) > 0.02 {
					t.Errorf("%s = %g, want %g", v.name, v.got, v.want)
				}
			}
		})
	}
}

func TestLoad(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	good := write("good.toml", sound)
	c, err := Load(good)
	if err != nil {
		t.Fatal(err)
	}
	if c.Source != good || c.Name() != "good" || string(c.Text) != sound {
		t.Errorf("source %q, name %q", c.Source, c.Name())
	}
	for _, b := range []struct {
		name, path, want string
		missing          bool
	}{
		{"no such example", "key", `key: there is no example of this name, the examples are basin, harbour, lock, quay, sluice, uniform, weir; a file is given by its path, such as ./scenario.toml`, true},
		{"near an example", "quai", `quai: there is no example of this name, perhaps quay is meant; the examples are basin, harbour, lock, quay, sluice, uniform, weir; a file is given by its path, such as ./scenario.toml`, true},
		{"no name", "", `"": there is no example of this name, the examples are basin, harbour, lock, quay, sluice, uniform, weir; a file is given by its path, such as ./scenario.toml`, true},
		{"no such file", filepath.Join(dir, "none.toml"), `none.toml: there is no such file, the examples, which need no file, are basin, harbour, lock, quay, sluice, uniform, weir`, true},
		{"a folder", dir, `: this is a folder, give the scenario file in it`, false},
		{"too long", write("long.toml", strings.Repeat("#", maxSize+1)), `long.toml: the file has 65537 bytes, at most 65536 are read, a scenario is a page of text`, false},
		{"a fault inside", write("bad.toml", replace(t, sound, `5500`, `0`)), `bad.toml:11: cloud.atoms = 0: it must be at least 1 and at most 1e10, for example 5500`, false},
	} {
		t.Run(b.name, func(t *testing.T) {
			_, err := Load(b.path)
			var e *Error
			if !errors.As(err, &e) {
				t.Fatalf("error %v, want an *Error", err)
			}
			if !strings.HasSuffix(err.Error(), b.want) {
				t.Errorf("got %q, want an end %q", err, b.want)
			}
			if errors.Is(err, fs.ErrNotExist) != b.missing {
				t.Errorf("is fs.ErrNotExist: %v", !b.missing)
			}
		})
	}
}

// finite fails unless every number of the config is finite.
func finite(t *testing.T, c *Config) {
	t.Helper()
	check := func(name string, x float64) {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			t.Errorf("%s = %g", name, x)
		}
	}
	for _, k := range keys {
		switch f := k.field(c).(type) {
		case *float64:
			check(k.name, *f)
		case *[]float64:
			for _, x := range *f {
				check(k.name, x)
			}
		}
	}
}

// FuzzDecode: nothing makes the decoder panic, what it accepts has only finite
// numbers, and what it refuses it refuses with an *Error of that file.
func FuzzDecode(f *testing.F) {
	for _, name := range Examples() {
		text, err := examples.ReadFile("examples/" + name + ".toml")
		if err != nil {
			f.Fatal(err)
		}
		f.Add(text)
	}
	for _, s := range []string{sound, ring, "", "a.b.c = [{}, [1e400]]", "[step]\n[step.x]\n", "step = {depth.x = 1}", "\ufeff[[units]]", "\"\" = 1", "[\"step.depth\"]\n",
		"units = \"lab\"\n[record]\ntimes = [nan, \"1 ms\"]", "units=\"condensate\"\nflow.kind = \"step\"\nflow.width=1e-308"} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		c, err := Decode("q.toml", text)
		if err != nil {
			var all Errors
			if !errors.As(err, &all) || len(all) == 0 {
				t.Fatalf("error %#v", err)
			}
			for _, e := range all {
				if e.File != "q.toml" || e.Allowed == "" || e.Error() == "" {
					t.Errorf("%#v", e)
				}
			}
			return
		}
		finite(t, c)
	})
}
