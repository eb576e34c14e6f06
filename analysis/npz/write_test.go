package npz

import (
	"archive/zip"
	"bytes"
	"errors"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
)

// pack writes the arrays to memory.
func pack(t testing.TB, arrays ...Array) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := Write(&b, arrays...); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func unpack(data []byte) (*File, error) {
	return Read(bytes.NewReader(data), int64(len(data)))
}

func ramp(n int) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = float64(i)
	}
	return v
}

func noise(n int) []float64 {
	r := rand.New(rand.NewPCG(1, 2))
	v := make([]float64, n)
	for i := range v {
		v[i] = r.NormFloat64()
	}
	return v
}

var written = []struct {
	array Array
	want  []float64
}{
	{Array{"vector", []int{3}, []float64{1.5, math.Inf(-1), -0.25}}, []float64{1.5, math.Inf(-1), -0.25}},
	{Array{"matrix", []int{2, 3}, ramp(6)}, ramp(6)},
	{Array{"cube", []int{2, 3, 4}, ramp(24)}, ramp(24)},
	{Array{"six", []int{1, 2, 1, 3, 2, 1}, ramp(12)}, ramp(12)},
	{Array{"single", []int{2, 2}, []float32{0.5, 1, -2, 1e-30}}, []float64{0.5, 1, -2, float64(float32(1e-30))}},
	{Array{"whole", []int{4}, []int64{-1, 0, 1 << 53, -(1 << 53)}}, []float64{-1, 0, 1 << 53, -(1 << 53)}},
	{Array{"flag", []int{3}, []bool{true, false, true}}, []float64{1, 0, 1}},
	{Scalar("scalar", 42), []float64{42}},
	{Vector("empty", nil), []float64{}},
	{Array{"emptyrows", []int{0, 7}, []float64{}}, []float64{}},
	{Array{"emptycolumns", []int{7, 0, 2}, []bool{}}, []float64{}},
	{Vector("noise", noise(1<<15)), noise(1 << 15)},
	{Array{"zeros", []int{300, 300}, make([]float64, 90000)}, make([]float64, 90000)},
	{Array{"folder/name", []int{1}, []float64{7}}, []float64{7}},
}

func writtenArrays() (arrays []Array) {
	for _, w := range written {
		arrays = append(arrays, w.array)
	}
	return arrays
}

func TestWriteThenRead(t *testing.T) {
	f, err := unpack(pack(t, writtenArrays()...))
	if err != nil {
		t.Fatal(err)
	}
	for i, w := range written {
		if f.Names()[i] != w.array.Name {
			t.Errorf("name %d is %q, want %q", i, f.Names()[i], w.array.Name)
		}
		data, shape, err := f.Float64(w.array.Name)
		if err != nil || !reflect.DeepEqual(data, w.want) || len(shape) != len(w.array.Shape) ||
			(len(shape) > 0 && !reflect.DeepEqual(shape, w.array.Shape)) {
			t.Errorf("%s: shape %v, error %v, or other elements; want shape %v", w.array.Name, shape, err, w.array.Shape)
		}
	}
}

func TestWriteIsDeterministicAndPlain(t *testing.T) {
	first := pack(t, writtenArrays()...)
	if !bytes.Equal(first, pack(t, writtenArrays()...)) {
		t.Error("two writings differ")
	}
	z, err := zip.NewReader(bytes.NewReader(first), int64(len(first)))
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range z.File {
		if m.ModifiedDate != 0 || m.ModifiedTime != 0 {
			t.Errorf("%s carries a time", m.Name)
		}
		want := zip.Store
		if m.Name == "zeros.npy" { // the only large one that shrinks
			want = zip.Deflate
		}
		if m.Method != want {
			t.Errorf("%s: method %d, want %d", m.Name, m.Method, want)
		}
	}
}

func TestHeaderIsAligned(t *testing.T) {
	for d := range 33 { // passes every remainder of the padding
		shape := make([]int, d)
		for i := range shape {
			shape[i] = 1
		}
		h := encodeHeader("<f8", shape)
		n := int(h[8]) + int(h[9])<<8
		if len(h)%64 != 0 || n != len(h)-10 || h[len(h)-1] != '\n' {
			t.Errorf("%d dimensions: header of %d bytes that says %d and ends in %q", d, len(h), n, h[len(h)-1])
		}
	}
}

func TestWritePanics(t *testing.T) {
	cases := []struct {
		name   string
		arrays []Array
	}{
		{"no name", []Array{Scalar("", 1)}},
		{"a path upwards", []Array{Scalar("../x", 1)}},
		{"name taken", []Array{Scalar("x", 1), Scalar("x", 2)}},
		{"shape too large", []Array{{"x", []int{3}, ramp(2)}}},
		{"shape negative", []Array{{"x", []int{-1, -2}, ramp(2)}}},
		{"shape overflows", []Array{{"x", []int{1 << 62, 8}, ramp(0)}}},
		{"complex elements", []Array{{"x", []int{1}, []complex128{1}}}},
		{"no data", []Array{{"x", []int{0}, nil}}},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			defer func() {
				if s, ok := recover().(string); !ok || !strings.HasPrefix(s, "npz: ") {
					t.Errorf("recovered %v, want a panic of npz", s)
				}
			}()
			Write(&bytes.Buffer{}, c.arrays...)
		})
	}
}

// full refuses to take more than n bytes.
type full int

var errFull = errors.New("no space left")

func (f *full) Write(p []byte) (int, error) {
	if *f -= full(len(p)); *f < 0 {
		return 0, errFull
	}
	return len(p), nil
}

func TestWriteReportsAFullDisk(t *testing.T) {
	arrays := []Array{Vector("a", noise(3000)), Vector("b", make([]float64, 3000))}
	size := len(pack(t, arrays...))
	for n := 0; n < size; n += 97 {
		f := full(n)
		if err := Write(&f, arrays...); !errors.Is(err, errFull) {
			t.Fatalf("room for %d of %d bytes: error %v, want %v", n, size, err, errFull)
		}
	}
}

func TestWriteFile(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "a.npz")
	if err := WriteFile(path, Vector("x", ramp(5))); err != nil {
		t.Fatal(err)
	}
	f, err := ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if data, _, _ := f.Float64("x"); !reflect.DeepEqual(data, ramp(5)) {
		t.Errorf("read %v", data)
	}
	if err := WriteFile(filepath.Join(folder, "none", "a.npz"), Vector("x", nil)); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("missing folder: %v", err)
	}
	if entries, _ := os.ReadDir(folder); len(entries) != 1 {
		t.Errorf("left behind: %v", entries)
	}
}

func BenchmarkWrite(b *testing.B) {
	a := Array{"g2", []int{1024, 1024}, noise(1 << 20)}
	b.SetBytes(8 << 20)
	for b.Loop() {
		var w bytes.Buffer
		Write(&w, a)
	}
}

func BenchmarkRead(b *testing.B) {
	data := pack(b, Array{"g2", []int{1024, 1024}, noise(1 << 20)})
	b.SetBytes(8 << 20)
	for b.Loop() {
		if _, err := unpack(data); err != nil {
			b.Fatal(err)
		}
	}
}
