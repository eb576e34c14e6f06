package npz

import (
	"archive/zip"
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// npy is an array member with any header and any bytes after it.
func npy(dict string, data []byte) []byte {
	b := append([]byte(magic), 1, 0)
	b = binary.LittleEndian.AppendUint16(b, uint16(len(dict)+1))
	return append(append(b, dict+"\n"...), data...)
}

func dict(descr, shape string) string {
	return "{'descr': " + descr + ", 'fortran_order': False, 'shape': " + shape + ", }"
}

type entry struct {
	name string
	data []byte
}

// zipped is an archive of stored members with any names and bytes.
func zipped(t testing.TB, entries ...entry) []byte {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, e := range entries {
		w, err := z.CreateHeader(&zip.FileHeader{Name: e.name, Method: zip.Store})
		if err != nil {
			t.Fatal(err)
		}
		w.Write(e.data)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// raw is an archive with one member whose directory entry says what h says.
func raw(t testing.TB, h zip.FileHeader, data []byte) []byte {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	w, err := z.CreateRaw(&h)
	if err != nil {
		t.Fatal(err)
	}
	w.Write(data)
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func one(t testing.TB, dict string, data []byte) []byte {
	return zipped(t, entry{"x.npy", npy(dict, data)})
}

type broken struct {
	name string
	data []byte
	kind error
	says string
}

func brokenArchives(t testing.TB) []broken {
	good := pack(t, Vector("x", noise(100)))
	flipped := bytes.Clone(good)
	flipped[200] ^= 1
	cutMember := bytes.Clone(npy(dict("'<f8'", "(3,)"), make([]byte, 24)))
	v9 := npy(dict("'<f8'", "(1,)"), make([]byte, 8))
	v9[6] = 9
	long := npy("", nil)
	long[6] = 2
	long = append(long[:8], 0xff, 0xff, 0xff, 0x7f)
	f8 := func(shape string) string { return dict("'<f8'", shape) }
	return []broken{
		{"empty file", nil, ErrNotArchive, "the file is empty"},
		{"text", []byte("pixel,density\n"), ErrNotArchive, `starts with "pixel,"`},
		{"a bare .npy", npy(f8("(1,)"), make([]byte, 8)), ErrNotArchive, "save it with numpy.savez"},
		{"cut short by a byte", good[:len(good)-1], ErrTruncated, "directory at its end"},
		{"cut in half", good[:len(good)/2], ErrTruncated, "directory at its end"},
		{"only the first letters", []byte("PK\x03\x04"), ErrTruncated, "directory at its end"},
		{"a bit flipped", flipped, ErrTruncated, `array "x": cut short or damaged: its check sum`},
		{"fewer elements than claimed", one(t, f8("(4,)"), make([]byte, 24)), ErrTruncated, "shape [4] of <f8 needs 32 bytes, 24 are there"},
		{"more elements than claimed", one(t, f8("(2,)"), make([]byte, 24)), ErrTruncated, "needs 16 bytes, 24 are there"},
		{"0-d without its element", one(t, f8("()"), nil), ErrTruncated, "needs 8 bytes, 0 are there"},
		{"claims a petabyte", one(t, f8("(1000000000000000,)"), make([]byte, 24)), ErrTooLarge, "are left of the limit"},
		{"length overflows", one(t, f8("(4611686018427387904, 4611686018427387904)"), nil), ErrHeader, "product is under"},
		{"overflow hidden by a zero", one(t, f8("(0, 4611686018427387904, 4)"), nil), ErrHeader, "product is under"},
		{"negative length", one(t, f8("(-1,)"), nil), ErrHeader, "shape has -1 as a length"},
		{"length over int64", one(t, f8("(99999999999999999999,)"), nil), ErrHeader, "no literal"},
		{"length a fraction", one(t, f8("(1.5,)"), nil), ErrHeader, `".5,)`},
		{"shape no tuple", one(t, f8("3"), nil), ErrHeader, "shape is no tuple"},
		{"65 dimensions", one(t, f8("("+strings.Repeat("1,", 65)+")"), make([]byte, 8)), ErrHeader, "65 dimensions, at most 64"},
		{"header no dictionary", one(t, "'<f8'", nil), ErrHeader, "no dictionary"},
		{"header a program", one(t, "__import__('os').system('true')", nil), ErrHeader, "no literal"},
		{"header not closed", one(t, "{'descr': '<f8'", nil), ErrHeader, "a comma or }"},
		{"header ends in a string", one(t, "{'descr': '<f8", nil), ErrHeader, "not closed"},
		{"header lacks a key", one(t, "{'descr': '<f8', 'shape': (1,)}", nil), ErrHeader, `"fortran_order" is missing`},
		{"header has a key more", one(t, "{'descr': '<f8', 'fortran_order': False, 'shape': (1,), 'a': 1}", nil), ErrHeader, "4 keys"},
		{"header has a key twice", one(t, "{'descr': '<f8', 'descr': '<f8'}", nil), ErrHeader, "twice"},
		{"header followed by more", one(t, f8("(1,)")+" or 1", make([]byte, 8)), ErrHeader, "follows the dictionary"},
		{"header nested deep", one(t, strings.Repeat("(", 1000), nil), ErrHeader, "nested deeper"},
		{"fortran_order a number", one(t, "{'descr': '<f8', 'fortran_order': 1, 'shape': (1,)}", nil), ErrHeader, "neither True nor False"},
		{"header of 2 GiB", zipped(t, entry{"x.npy", long}), ErrHeader, "at most 65536 are allowed"},
		{"header cut short", zipped(t, entry{"x.npy", cutMember[:40]}), ErrTruncated, `array "x": cut short or damaged: it ends too early`},
		{"version 9", zipped(t, entry{"x.npy", v9}), ErrHeader, "format version 9.0; versions 1.0 to 3.0"},
		{"member is no array", zipped(t, entry{"x.npy", []byte("hello, world")}), ErrHeader, "an array starts with"},
		{"member is empty", zipped(t, entry{"x.npy", nil}), ErrTruncated, "ends too early"},
		{"path upwards", zipped(t, entry{"../../etc/x.npy", v9}), ErrName, "not allowed"},
		{"absolute path", zipped(t, entry{"/etc/x.npy", v9}), ErrName, "not allowed"},
		{"path with backslash", zipped(t, entry{`..\x.npy`, v9}), ErrName, "not allowed"},
		{"name with NUL", zipped(t, entry{"x\x00.npy", v9}), ErrName, "control character"},
		{"path upwards, no array", zipped(t, entry{"../notes.txt", v9}), ErrName, "not allowed"},
		{"name twice", zipped(t, entry{"x.npy", npy(f8("()"), make([]byte, 8))}, entry{"x.npy", v9}), ErrName, "occurs twice"},
		{"bomb: 100 bytes claim 1 GiB", raw(t, zip.FileHeader{Name: "x.npy", Method: zip.Deflate, CompressedSize64: 100, UncompressedSize64: 1 << 30}, make([]byte, 100)),
			ErrTruncated, "it claims 1073741824 bytes packed into 100"},
		{"stored smaller than claimed", raw(t, zip.FileHeader{Name: "x.npy", Method: zip.Store, CompressedSize64: 100, UncompressedSize64: 200}, make([]byte, 100)),
			ErrTruncated, "it claims 200 bytes packed into 100"},
		{"packed larger than the file", raw(t, zip.FileHeader{Name: "x.npy", Method: zip.Deflate, CompressedSize64: 1 << 40, UncompressedSize64: 1 << 40}, make([]byte, 100)),
			ErrTruncated, "the archive has"},
		{"deflated rubbish", raw(t, zip.FileHeader{Name: "x.npy", Method: zip.Deflate, CompressedSize64: 100, UncompressedSize64: 200}, bytes.Repeat([]byte{0xff}, 100)),
			ErrTruncated, "corrupt"},
		{"unknown packing", raw(t, zip.FileHeader{Name: "x.npy", Method: 12, CompressedSize64: 100, UncompressedSize64: 200}, make([]byte, 100)),
			ErrNotArchive, "zip method 12"},
		{"encrypted", raw(t, zip.FileHeader{Name: "x.npy", Flags: 1, CompressedSize64: 100, UncompressedSize64: 100}, make([]byte, 100)),
			ErrNotArchive, "encrypted"},
		{"pickled objects", one(t, dict("'|O'", "(1,)"), []byte("\x80\x04K\x01.")), ErrType, "Python objects"},
		{"objects inside fields", one(t, dict("[('a', '|O'), ('b', '<f8')]", "(1,)"), nil), ErrType, "a structured array"},
		{"text elements", one(t, dict("'<U3'", "(1,)"), make([]byte, 12)), ErrType, `"<U3"`},
		{"complex elements", one(t, dict("'<c16'", "(1,)"), make([]byte, 16)), ErrType, `"<c16"`},
		{"extended floats", one(t, dict("'<f16'", "(1,)"), make([]byte, 16)), ErrType, `"<f16"; booleans, integers`},
		{"dates", one(t, dict("'<M8[ns]'", "(1,)"), make([]byte, 8)), ErrType, "<M8[ns]"},
		{"floats of no byte order", one(t, dict("'|f8'", "(1,)"), make([]byte, 8)), ErrType, "no byte order"},
		{"empty element type", one(t, dict("''", "(1,)"), make([]byte, 8)), ErrHeader, "descr is empty"},
		{"integer beyond float64", one(t, dict("'<i8'", "(1,)"), []byte{1, 0, 0, 0, 0, 0, 0x20, 0}), ErrInexact, "element 0"},
		{"unsigned beyond float64", one(t, dict("'>u8'", "(1,)"), bytes.Repeat([]byte{255}, 8)), ErrInexact, "1.8446744073709552e+19"},
		{"name missing", pack(t, Vector("a", nil), Vector("b", nil)), ErrMissing, `array "x": no such array: the archive holds a, b`},
		{"nothing in it", pack(t), ErrMissing, "holds no arrays"},
	}
}

func TestReadRefuses(t *testing.T) {
	for _, c := range brokenArchives(t) {
		t.Run(c.name, func(t *testing.T) {
			f, err := unpack(c.data)
			if err == nil {
				_, _, err = f.Float64("x")
			}
			var e *Error
			if !errors.Is(err, c.kind) || !errors.As(err, &e) || !strings.Contains(err.Error(), c.says) {
				t.Errorf("error %v\nwant one that wraps %q and says %q", err, c.kind, c.says)
			}
		})
	}
}

func TestReadCutAnywhere(t *testing.T) {
	good := pack(t, Vector("x", noise(40)), Array{"y", []int{40, 8}, make([]float64, 320)})
	for n := range good {
		if _, err := unpack(good[:n]); err == nil {
			t.Fatalf("the first %d of %d bytes were taken for an archive", n, len(good))
		}
	}
}

func TestReadFileRefuses(t *testing.T) {
	folder := t.TempDir()
	if _, err := ReadFile(filepath.Join(folder, "none.npz")); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("missing file: %v", err)
	}
	if _, err := ReadFile(folder); !errors.Is(err, ErrNotArchive) {
		t.Errorf("a folder: %v", err)
	}
	path := filepath.Join(folder, "bad.npz")
	os.WriteFile(path, []byte("PK"), 0o666)
	if _, err := ReadFile(path); !errors.Is(err, ErrTruncated) || !strings.HasPrefix(err.Error(), path) {
		t.Errorf("a stump: %v", err)
	}
}

// A foreign array does no harm to its neighbours.
func TestReadBesideUnsupported(t *testing.T) {
	f, err := unpack(zipped(t,
		entry{"notes.npy", npy(dict("'<U5'", "()"), make([]byte, 20))},
		entry{"readme.txt", []byte("hello")},
		entry{"folder/", nil},
		entry{"x.npy", npy(dict("'|b1'", "(2,)"), []byte{0, 1})},
	))
	if err != nil {
		t.Fatal(err)
	}
	if names := strings.Join(f.Names(), " "); names != "notes x" {
		t.Errorf("names %q", names)
	}
	if data, _, err := f.Float64("x"); err != nil || len(data) != 2 || data[0] != 0 || data[1] != 1 {
		t.Errorf("x: %v, %v", data, err)
	}
	if _, _, err := f.Float64("notes"); !errors.Is(err, ErrType) {
		t.Errorf("notes: %v", err)
	}
}

func TestLimit(t *testing.T) {
	data := pack(t, Vector("x", ramp(100)), Array{"y", []int{100}, make([]bool, 100)})
	read := func(l Limit) error { _, err := l.Read(bytes.NewReader(data), int64(len(data))); return err }
	if err := read(1600); err != nil { // 100 elements each, 8 bytes once decoded
		t.Errorf("limit just met: %v", err)
	}
	if err := read(1599); !errors.Is(err, ErrTooLarge) || !strings.Contains(err.Error(), `array "y"`) {
		t.Errorf("limit just missed: %v", err)
	}
}

func TestHalf(t *testing.T) {
	// IEEE 754-2008, binary16.
	for bits, want := range map[uint16]float64{
		0x0000: 0, 0x3c00: 1, 0xc000: -2, 0x7bff: 65504, 0x0400: 0x1p-14, 0x0001: 0x1p-24,
		0x03ff: 1023 * 0x1p-24, 0x3555: 0.333251953125, 0x7c00: math.Inf(1), 0xfc00: math.Inf(-1),
	} {
		if got := half(bits); got != want {
			t.Errorf("half(%#04x) = %v, want %v", bits, got, want)
		}
	}
	if !math.IsNaN(half(0x7e00)) || !math.Signbit(half(0x8000)) {
		t.Error("NaN or −0 is lost")
	}
}

func FuzzRead(f *testing.F) {
	for _, c := range brokenArchives(f) {
		f.Add(c.data)
	}
	f.Add(pack(f, writtenArrays()[:9]...))
	f.Fuzz(func(t *testing.T, data []byte) {
		const limit = 1 << 24
		file, err := Limit(limit).Read(bytes.NewReader(data), int64(len(data)))
		if err != nil {
			var e *Error
			if !errors.As(err, &e) {
				t.Errorf("error %v is no *Error", err)
			}
			return
		}
		total := 0
		for _, name := range file.Names() {
			data, shape, err := file.Float64(name)
			if count, ok := product(shape); err == nil && (!ok || count != int64(len(data))) {
				t.Errorf("%q: shape %v with %d elements", name, shape, len(data))
			}
			total += 8 * len(data)
		}
		if total > limit {
			t.Errorf("%d bytes decoded, the limit is %d", total, limit)
		}
	})
}
