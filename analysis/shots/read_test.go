package shots

import (
	"archive/zip"
	"bytes"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"tailrace/analysis/npz"
)

// sample is a sound campaign in SI units.
func sample(count, pixels int) *Set {
	r := rand.New(rand.NewPCG(1, 1))
	s := &Set{Count: count, Pixels: pixels, Pixel: 0.6e-6, Time: 0.12}
	for range count {
		s.StepPosition = append(s.StepPosition, float64(pixels)/2*s.Pixel+0.3e-6*r.NormFloat64())
		for range pixels {
			s.Density = append(s.Density, 3e7*(1+0.1*r.NormFloat64()))
		}
	}
	return s
}

// What is written is read back, by us and by numpy.
func TestRoundTrip(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "shots.npz")
	s := sample(40, 50)
	s.Density[7] = math.NaN()
	s.Kept = make([]bool, 40)
	for i := range s.Kept {
		s.Kept[i] = i != 3
	}
	if err := Write(path, s); err != nil {
		t.Fatal(err)
	}
	for _, from := range []string{path, folder} {
		got, err := Read(from, Lab)
		if err != nil {
			t.Fatal(err)
		}
		if got.Count != 40 || got.Pixels != 50 || got.Pixel != s.Pixel || got.Time != s.Time || got.Missing != 1 || got.Kept[3] || !got.Kept[4] {
			t.Errorf("%+v", got.Describe())
		}
		for i, v := range s.Density {
			if got.Density[i] != v && !(i == 7 && math.IsNaN(got.Density[i])) {
				t.Fatalf("value %d is %v, want %v", i, got.Density[i], v)
			}
		}
	}
	const python = "/usr/bin/python3"
	if exec.Command(python, "-c", "import numpy").Run() != nil {
		t.Log("no numpy")
		return
	}
	out, err := exec.Command(python, "-c", `
import numpy as np, sys
f = sys.argv[1]
z = dict(np.load(f))
assert z["density"].shape == (40, 50) and z["kept"].dtype == bool
n = z["density"]; n[np.isnan(n)] = 3e7
np.savez(f + "16.npz", density=np.asfortranarray(n.astype(">f4")), pixel=z["pixel"], step_position=z["step_position"].astype("f4"))
np.savez_compressed(f + "int.npz", density=n.astype("i8"), pixel=z["pixel"], step_position=z["step_position"])
np.savez(f + "half.npz", density=(n/1e6).astype("f2"), pixel=np.float64(0.5), step_position=np.full(40, 10.0))
`, path).CombinedOutput()
	if err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	for name, units := range map[string]Units{"16": Lab, "int": Lab, "half": Condensate} {
		got, err := Read(path+name+".npz", units)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		unit := 1.0
		if name == "half" {
			unit = 1e6
		}
		for i := range got.Density {
			if i != 7 && math.Abs(got.Density[i]*unit/s.Density[i]-1) > 1e-3 {
				t.Fatalf("%s: value %d is %v, want %v", name, i, got.Density[i]*unit, s.Density[i])
			}
		}
	}
}

func TestText(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.csv")
	var b strings.Builder
	b.WriteString("# by hand\n# pixel = 0.5 µm\n# step_position = 6 um\n# time = 90 ms\n")
	for i := range 4 {
		for k := range 20 {
			fmt.Fprintf(&b, "%d, ", 20000000+100000*((i*7+k*3)%5))
		}
		b.WriteString("\n")
	}
	if err := os.WriteFile(path, []byte(b.String()), 0o666); err != nil {
		t.Fatal(err)
	}
	s, err := Read(path, Lab)
	if err != nil {
		t.Fatal(err)
	}
	if s.Count != 4 || s.Pixels != 20 || math.Abs(s.Pixel-0.5e-6) > 1e-15 || math.Abs(s.StepPosition[3]-6e-6) > 1e-15 || math.Abs(s.Time-0.09) > 1e-12 {
		t.Errorf("%s, step %v", s.Describe(), s.StepPosition)
	}
}

// Faults: what is said of each.
func TestFaults(t *testing.T) {
	folder := t.TempDir()
	archive := func(change func(*Set)) func(string) error {
		return func(path string) error {
			s := sample(40, 50)
			change(s)
			return Write(path, s)
		}
	}
	arrays := func(a ...npz.Array) func(string) error {
		return func(path string) error { return npz.WriteFile(path, a...) }
	}
	raw := func(text string) func(string) error {
		return func(path string) error { return os.WriteFile(path, []byte(text), 0o666) }
	}
	zipped := func(name, content string) func(string) error {
		return func(path string) error {
			var b bytes.Buffer
			z := zip.NewWriter(&b)
			w, err := z.Create(name)
			if err == nil {
				_, err = w.Write([]byte(content))
			}
			return errors.Join(err, z.Close(), os.WriteFile(path, b.Bytes(), 0o666))
		}
	}
	const claim = "{'descr': '<f8', 'fortran_order': False, 'shape': (1000000000, 1000), }\n"
	const head = "# pixel = 0.5 um\n# step_position = 6 um\n"
	row := strings.Repeat("20000000,", 20) + "\n"
	s := sample(40, 50)
	density := npz.Array{Name: "density", Shape: []int{40, 50}, Data: s.Density}
	for _, c := range []struct {
		name, file string
		make       func(path string) error
		units      Units
		want       string
	}{
		{"no file", "none.npz", nil, Lab, "there is no such file"},
		{"empty", "a.npz", raw(""), Lab, "empty"},
		{"not an archive", "a.npz", raw("hello"), Lab, `starts with "PK"`},
		{"truncated", "a.npz", func(path string) error {
			if err := archive(func(*Set) {})(path); err != nil {
				return err
			}
			return os.Truncate(path, 5000)
		}, Lab, "missing or damaged"},
		{"huge header", "a.npz", zipped("density.npy", "\x93NUMPY\x02\x00\xff\xff\xff\x7f"), Lab, "at most 65536 are allowed"},
		{"a billion shots claimed", "a.npz", zipped("density.npy", "\x93NUMPY\x01\x00"+string(rune(len(claim)))+"\x00"+claim), Lab, "takes"},
		{"path traversal", "a.npz", zipped("../density.npy", "x"), Lab, "density"},
		{"no density", "a.npz", arrays(npz.Scalar("pixel", 1)), Lab, "density: it is missing; the archive holds pixel"},
		{"no pixel", "a.npz", arrays(density, npz.Vector("step_position", s.StepPosition)), Lab, "pixel: it is missing"},
		{"no step", "a.npz", arrays(density, npz.Scalar("pixel", s.Pixel)), Lab, "step_position: it is missing"},
		{"one dimension", "a.npz", arrays(npz.Vector("density", s.Density), npz.Scalar("pixel", s.Pixel), npz.Vector("step_position", s.StepPosition)), Lab, "[shots, pixels] is expected"},
		{"two pixels", "a.npz", arrays(density, npz.Vector("pixel", []float64{1, 2}), npz.Vector("step_position", s.StepPosition)), Lab, "one is expected"},
		{"steps too few", "a.npz", archive(func(s *Set) { s.StepPosition = s.StepPosition[:9] }), Lab, "9 values for 40 shots"},
		{"step outside", "a.npz", archive(func(s *Set) { s.StepPosition[5] = 1 }), Lab, "in shot 5 it is 1; the step must be inside the picture"},
		{"step NaN", "a.npz", archive(func(s *Set) { s.StepPosition[5] = math.NaN() }), Lab, "in shot 5 it is NaN"},
		{"kept too few", "a.npz", archive(func(s *Set) { s.Kept = []bool{true} }), Lab, "kept: it has 1 values for 40 shots"},
		{"pixel in µm", "a.npz", archive(func(s *Set) { s.Pixel = 0.6 }), Lab, "looks like a number in µm"},
		{"pixel negative", "a.npz", archive(func(s *Set) { s.Pixel = -1 }), Lab, "above zero, is expected"},
		{"density per µm", "a.npz", archive(func(s *Set) {
			for i := range s.Density {
				s.Density[i] *= 1e-6
			}
		}), Lab, "it looks like atoms per µm"},
		{"density per m³", "a.npz", archive(func(s *Set) {
			for i := range s.Density {
				s.Density[i] *= 1e12
			}
		}), Lab, "between 1e4 and 1e11 atoms per m"},
		{"infinite", "a.npz", archive(func(s *Set) { s.Density[123] = math.Inf(1) }), Lab, "shot 2, pixel 23 is +Inf"},
		{"all missing", "a.npz", archive(func(s *Set) {
			for i := range s.Density {
				s.Density[i] = math.NaN()
			}
		}), Lab, "every pixel is missing"},
		{"negative", "a.npz", archive(func(s *Set) {
			for i := range s.Density {
				s.Density[i] -= 3e7
			}
		}), Lab, "densities are expected"},
		{"equal", "a.npz", archive(func(s *Set) {
			for i := range s.Density {
				s.Density[i] = 3e7
			}
		}), Lab, "all shots are equal"},
		{"one shot", "a.npz", func(path string) error { return Write(path, sample(1, 50)) }, Lab, "there are 1 shots"},
		{"two shots", "a.npz", func(path string) error { return Write(path, sample(2, 50)) }, Lab, "there are 2 shots"},
		{"transposed", "a.npz", func(path string) error { return Write(path, sample(400, 5)) }, Lab, "a shot has 5 pixels"},
		{"times differ", "a.npz", arrays(density, npz.Scalar("pixel", s.Pixel), npz.Vector("step_position", s.StepPosition), npz.Vector("time", append(make([]float64, 39), 1))), Lab, "one file for each time"},
		{"condensate too large", "a.npz", archive(func(*Set) {}), Condensate, "atoms per healing length"},
		{"folder", "", func(string) error { return os.Mkdir(filepath.Join(folder, "empty"), 0o777) }, Lab, "holds no shots.npz"},
		{"text: ragged", "a.csv", raw(head + row + "1,2,3\n"), Lab, "line 4: 3 pixels; the shots above have 20"},
		{"text: no pixel", "a.csv", raw(row + row + row), Lab, "pixel: it is missing"},
		{"text: no step", "a.csv", raw("# pixel = 1 um\n" + row), Lab, "step_position: it is missing"},
		{"text: unit", "a.csv", raw("# pixel = 1 yard\n" + row), Lab, "line 1: pixel = 1 yard; a number and its unit are expected"},
		{"text: words", "a.csv", raw(head + "1,two,3\n"), Lab, `line 3: "two"; a number is expected`},
		{"text: empty", "a.csv", raw(head), Lab, "there are no shots in it"},
		{"text: one line", "a.csv", raw(head + row), Lab, "there are 1 shots"},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := filepath.Join(folder, c.file)
			if c.file == "" {
				path = filepath.Join(folder, "empty")
			}
			if c.make != nil {
				if err := c.make(path); err != nil {
					t.Fatal(err)
				}
			}
			_, err := Read(path, c.units)
			var fault *Error
			if !errors.As(err, &fault) || !strings.Contains(err.Error(), c.want) {
				t.Errorf("said: %v\nwant: %s", err, c.want)
			}
		})
	}
}

func FuzzText(f *testing.F) {
	f.Add([]byte("# pixel = 0.5 um\n# step_position = 6 um\n1,2,3\n"))
	f.Add([]byte("# step_position = first column\n# pixel=1\n1 2;3\t4\n"))
	f.Fuzz(func(t *testing.T, text []byte) {
		path := filepath.Join(t.TempDir(), "a.csv")
		if err := os.WriteFile(path, text, 0o666); err != nil {
			t.Fatal(err)
		}
		s, err := Read(path, Condensate)
		if err == nil && (len(s.Density) != s.Count*s.Pixels || len(s.StepPosition) != s.Count) {
			t.Fatalf("%d values, %d steps in %d shots of %d pixels", len(s.Density), len(s.StepPosition), s.Count, s.Pixels)
		}
	})
}

func BenchmarkRead(b *testing.B) {
	path := filepath.Join(b.TempDir(), "a.npz")
	s := sample(5000, 1000)
	if err := Write(path, s); err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(8 * len(s.Density)))
	for b.Loop() {
		got, err := Read(path, Lab)
		if err != nil {
			b.Fatal(err)
		}
		if _, err := got.Align(got.Odd(), Rescale, 3e7, 0, 0); err != nil {
			b.Fatal(err)
		}
	}
}
