package npz

import (
	"math"
	"os/exec"
	"path/filepath"
	"reflect"
	"testing"
)

// numpy runs a Python program in a new folder, or skips the test.
func numpy(t *testing.T, folder, program string) {
	t.Helper()
	const python = "/usr/bin/python3"
	if err := exec.Command(python, "-c", "import numpy").Run(); err != nil {
		t.Skipf("%s with numpy is not there (Debian's python3-numpy): %v", python, err)
	}
	c := exec.Command(python, "-W", "error::DeprecationWarning", "-c", "import numpy as np\n"+program)
	c.Dir = folder
	if out, err := c.CombinedOutput(); err != nil {
		t.Fatalf("python: %v\n%s", err, out)
	}
}

func TestNumpyReadsOurs(t *testing.T) {
	folder := t.TempDir()
	if err := WriteFile(filepath.Join(folder, "ours.npz"), writtenArrays()...); err != nil {
		t.Fatal(err)
	}
	numpy(t, folder, `
import zipfile
assert zipfile.ZipFile("ours.npz").testzip() is None
f = np.load("ours.npz", allow_pickle=False)
want = {
 "vector": np.array([1.5, -np.inf, -0.25]), "matrix": np.arange(6.).reshape(2, 3),
 "cube": np.arange(24.).reshape(2, 3, 4), "six": np.arange(12.).reshape(1, 2, 1, 3, 2, 1),
 "single": np.array([[0.5, 1], [-2, 1e-30]], np.float32), "whole": np.array([-1, 0, 2**53, -2**53]),
 "flag": np.array([True, False, True]), "scalar": np.array(42.), "empty": np.zeros(0),
 "emptyrows": np.zeros((0, 7)), "emptycolumns": np.zeros((7, 0, 2), bool),
 "zeros": np.zeros((300, 300)), "folder/name": np.array([7.]),
}
assert set(f.files) == set(want) | {"noise"}, f.files
for name, w in want.items():
    a = f[name]
    assert a.dtype == w.dtype and a.shape == w.shape and (a == w).all(), (name, a.dtype, a.shape)
n = f["noise"]
assert n.shape == (2**15,) and abs(n.mean()) < 0.05 and abs(n.std() - 1) < 0.05
`)
}

func TestWeReadNumpys(t *testing.T) {
	folder := t.TempDir()
	numpy(t, folder, `
a = np.arange(24).reshape(2, 3, 4)
arrays = {}
for kind in "<f8 >f8 <f4 >f4 <f2 >f2 <i8 >i8 <i4 >i4 <i2 >i2 i1 u1 <u2 >u2 <u4 >u4 <u8 >u8".split():
    name = kind.replace("<", "little ").replace(">", "big ")
    arrays["C " + name] = a.astype(kind)
    arrays["F " + name] = np.asfortranarray(a.astype(kind))
arrays["transposed"] = np.arange(6.).reshape(3, 2).T
arrays["strided"] = np.arange(12.)[::2]
arrays["bool"] = np.array([True, False])
arrays["scalar"] = np.float64(2.5)
arrays["scalar int"] = np.array(-7)
arrays["empty"] = np.zeros(0)
arrays["empty rows"] = np.asfortranarray(np.zeros((0, 5), ">f4"))
arrays["special"] = np.array([np.inf, -np.inf, -0.0, 5e-324, 1.7976931348623157e308])
arrays["text"] = np.array("hello")
arrays["negative"] = np.array([-128], np.int8)
np.savez("stored.npz", **arrays)
np.savez_compressed("packed.npz", **arrays)
for version in (1, 0), (2, 0), (3, 0):
    import zipfile, io
    with zipfile.ZipFile("version%d.npz" % version[0], "w") as z, z.open("x.npy", "w") as m:
        np.lib.format.write_array(m, np.arange(3.), version=version)
`)
	for _, file := range []string{"stored.npz", "packed.npz"} {
		f, err := ReadFile(filepath.Join(folder, file))
		if err != nil {
			t.Fatal(err)
		}
		if n := len(f.Names()); n != 50 {
			t.Errorf("%s: %d arrays, want 50", file, n)
		}
		want := map[string]struct {
			data  []float64
			shape []int
		}{
			"transposed": {[]float64{0, 2, 4, 1, 3, 5}, []int{2, 3}},
			"strided":    {[]float64{0, 2, 4, 6, 8, 10}, []int{6}},
			"bool":       {[]float64{1, 0}, []int{2}},
			"scalar":     {[]float64{2.5}, []int{}},
			"scalar int": {[]float64{-7}, []int{}},
			"empty":      {[]float64{}, []int{0}},
			"empty rows": {[]float64{}, []int{0, 5}},
			"special":    {[]float64{math.Inf(1), math.Inf(-1), math.Copysign(0, -1), 5e-324, math.MaxFloat64}, []int{5}},
			"negative":   {[]float64{-128}, []int{1}},
		}
		for _, name := range f.Names() {
			if name == "text" {
				continue
			}
			w, ok := want[name]
			if !ok {
				w.data, w.shape = ramp(24), []int{2, 3, 4}
			}
			data, shape, err := f.Float64(name)
			if err != nil || !reflect.DeepEqual(data, w.data) || !reflect.DeepEqual(shape, w.shape) {
				t.Errorf("%s: %q: %v %v %v, want %v %v", file, name, data, shape, err, w.data, w.shape)
			}
		}
	}
	for _, file := range []string{"version1.npz", "version2.npz", "version3.npz"} {
		path := filepath.Join(folder, file)
		f, err := ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if data, _, err := f.Float64("x"); err != nil || !reflect.DeepEqual(data, ramp(3)) {
			t.Errorf("%s: %v %v", file, data, err)
		}
	}
}
