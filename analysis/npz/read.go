package npz

import (
	"archive/zip"
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
)

// Limit is the most memory, in bytes, that the arrays of one archive may take
// once decoded to float64.
type Limit int64

// DefaultLimit is the limit of Read and ReadFile, 2 GiB.
const DefaultLimit Limit = 2 << 30

// maxMembers bounds the directory; an archive of shots has about five.
const maxMembers = 4096

// File holds the arrays of an archive, decoded.
type File struct {
	names  []string
	arrays map[string]array
}

type array struct {
	data  []float64
	shape []int
	err   error // why it cannot be had as float64
}

// ReadFile reads the archive at path; see Read.
func ReadFile(path string) (*File, error) { return DefaultLimit.ReadFile(path) }

// Read reads the archive of size bytes in r with the default limit.
//
// It fails if anything in the archive is damaged, dishonest about its size or
// too large. An array of a type that has no float64 form (strings, complex
// numbers, structures, Python objects) is not read and does no harm to the
// others: Float64 says what it is. Members that are not arrays are passed over.
func Read(r io.ReaderAt, size int64) (*File, error) { return DefaultLimit.Read(r, size) }

// ReadFile reads the archive at path within the limit.
func (l Limit) ReadFile(path string) (*File, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, err
	}
	if !info.Mode().IsRegular() {
		return nil, fmt.Errorf("%s: %w", path, &Error{ErrNotArchive, "", "a folder or a device", "give the name of an .npz file"})
	}
	file, err := l.Read(f, info.Size())
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return file, nil
}

// Read reads the archive of size bytes in r within the limit.
func (l Limit) Read(r io.ReaderAt, size int64) (*File, error) {
	if err := sniff(r, size); err != nil {
		return nil, err
	}
	archive, err := zip.NewReader(r, size)
	if err != nil {
		return nil, zipError("", err)
	}
	if len(archive.File) > maxMembers {
		return nil, &Error{ErrTooLarge, "", fmt.Sprintf("%d members", len(archive.File)), fmt.Sprintf("at most %d are allowed", maxMembers)}
	}
	file := &File{arrays: map[string]array{}}
	for _, member := range archive.File {
		name, isArray := strings.CutSuffix(member.Name, ".npy")
		if err := checkName(strings.TrimSuffix(name, "/")); err != nil {
			return nil, err
		}
		if !isArray {
			continue
		}
		if _, taken := file.arrays[name]; taken {
			return nil, &Error{ErrName, name, "it occurs twice", "names differ in an archive"}
		}
		a, err := l.member(name, member, size)
		if err != nil {
			return nil, err
		}
		l -= Limit(8 * len(a.data))
		file.names = append(file.names, name)
		file.arrays[name] = a
	}
	return file, nil
}

// Names lists the arrays in the order of the archive.
func (f *File) Names() []string { return append([]string(nil), f.names...) }

// Float64 returns the array's elements in C order (the last index runs
// fastest) and its shape, which is empty for a 0-dimensional array of one
// element. float16, float32, integers and booleans (as 0 and 1) are converted
// exactly; an integer beyond ±2⁵³, which may have no exact float64, is an error that
// wraps ErrInexact. The slices belong to the file: a caller who changes them
// changes what the next call returns.
func (f *File) Float64(name string) (data []float64, shape []int, err error) {
	a, ok := f.arrays[name]
	if !ok {
		found := "the archive holds no arrays"
		if len(f.names) > 0 {
			found = "the archive holds " + strings.Join(f.names, ", ")
		}
		return nil, nil, &Error{ErrMissing, name, found, ""}
	}
	return a.data, a.shape, a.err
}

// sniff says what else the file is, if it is no archive.
func sniff(r io.ReaderAt, size int64) error {
	start := make([]byte, min(size, int64(len(magic))))
	if _, err := r.ReadAt(start, 0); err != nil && err != io.EOF {
		return err
	}
	switch {
	case size == 0:
		return &Error{ErrNotArchive, "", "the file is empty", "give an archive written by numpy.savez"}
	case string(start) == magic:
		return &Error{ErrNotArchive, "", "a single array (.npy)", "save it with numpy.savez, so that it has a name"}
	case !bytes.HasPrefix(start, []byte("PK")):
		return &Error{ErrNotArchive, "", fmt.Sprintf("it starts with %q", start), "an .npz file starts with \"PK\""}
	}
	return nil
}

// member decodes one array; size is that of the archive.
func (l Limit) member(name string, z *zip.File, size int64) (array, error) {
	fail := func(kind error, want, format string, args ...any) (array, error) {
		return array{}, &Error{kind, name, fmt.Sprintf(format, args...), want}
	}
	if z.Flags&1 != 0 {
		return fail(ErrNotArchive, "save it without a password", "it is encrypted")
	}
	// What the archive can hold at most: itself when stored, and 1032 times
	// itself when deflated (the format's greatest ratio, from memory of zlib's
	// technical notes; a small constant covers the block header).
	var most uint64
	switch z.Method {
	case zip.Store:
		most = z.CompressedSize64
	case zip.Deflate:
		most = 1032*min(z.CompressedSize64, uint64(size)) + 1024
	default:
		return fail(ErrNotArchive, "members are stored (0) or deflated (8)", "zip method %d", z.Method)
	}
	if z.CompressedSize64 > uint64(size) || z.UncompressedSize64 > most {
		return fail(ErrTruncated, "copy or save it again", "it claims %d bytes packed into %d, the archive has %d",
			z.UncompressedSize64, z.CompressedSize64, size)
	}
	r, err := z.Open()
	if err != nil {
		return array{}, zipError(name, err)
	}
	defer r.Close()
	h, length, err := readHeader(r)
	if err != nil {
		var e *Error
		if errors.As(err, &e) {
			e.Member = name
			return array{}, e
		}
		return array{}, zipError(name, err)
	}
	count, ok := product(h.shape)
	if !ok {
		return fail(ErrHeader, "lengths are from 0 and their product is under 2⁶³", "its shape is %v", h.shape)
	}
	decode, bytesEach, err := elementType(h.descr)
	if err != nil {
		err.(*Error).Member = name
		return array{shape: h.shape, err: err}, nil
	}
	if count > int64(l)/8 {
		return fail(ErrTooLarge, "a smaller array or a higher limit is needed", "shape %v takes %.4g MiB as float64, %.4g MiB are left of the limit",
			h.shape, float64(count)*8/(1<<20), float64(l)/(1<<20))
	}
	there := int64(z.UncompressedSize64) - length // most < 2⁶³ as size is an int64 far below 2⁵³
	if there != count*int64(bytesEach) {
		return fail(ErrTruncated, "copy or save it again", "shape %v of %s needs %d bytes, %d are there", h.shape, h.descr, count*int64(bytesEach), there)
	}
	a := array{data: make([]float64, count), shape: h.shape}
	if err := readElements(r, a.data, h, bytesEach, decode); err != nil {
		var e *Error
		if errors.As(err, &e) { // the bytes are sound, the values are not
			e.Member = name
			return array{shape: h.shape, err: e}, nil
		}
		return array{}, zipError(name, err)
	}
	return a, nil
}

// readHeader reads up to the first element; length is the bytes it took.
func readHeader(r io.Reader) (h header, length int64, err error) {
	fail := func(want, format string, args ...any) (header, int64, error) {
		return header{}, 0, &Error{ErrHeader, "", fmt.Sprintf(format, args...), want}
	}
	start := make([]byte, 12)
	if _, err := io.ReadFull(r, start[:10]); err != nil {
		return header{}, 0, err
	}
	if string(start[:6]) != magic {
		return fail(fmt.Sprintf("an array starts with %q", magic), "it starts with %q", start[:6])
	}
	n, prefix := uint32(binary.LittleEndian.Uint16(start[8:])), int64(10)
	switch start[6] {
	case 1:
	case 2, 3:
		if _, err := io.ReadFull(r, start[10:]); err != nil {
			return header{}, 0, err
		}
		n, prefix = binary.LittleEndian.Uint32(start[8:]), 12
	default:
		return fail("versions 1.0 to 3.0 are read", "format version %d.%d", start[6], start[7])
	}
	if n > maxHeader {
		return fail(fmt.Sprintf("at most %d are allowed", maxHeader), "a header of %d bytes", n)
	}
	text := make([]byte, n)
	if _, err := io.ReadFull(r, text); err != nil {
		return header{}, 0, err
	}
	h, err = parseHeader(string(text))
	if err != nil {
		return fail("save it again with numpy", "%v", err)
	}
	return h, prefix + int64(n), nil
}

// zipError turns what archive/zip and compress/flate say into an Error, and
// lets an error of the disk pass.
func zipError(member string, err error) error {
	var pathError *os.PathError
	if errors.As(err, &pathError) {
		return err
	}
	found := err.Error()
	switch {
	case errors.Is(err, zip.ErrFormat) && member == "":
		found = "it starts like an archive, and the directory at its end is missing or damaged"
	case errors.Is(err, io.EOF), errors.Is(err, io.ErrUnexpectedEOF):
		found = "it ends too early"
	case errors.Is(err, zip.ErrChecksum):
		found = "its check sum does not match its bytes"
	case errors.Is(err, zip.ErrInsecurePath):
		return &Error{ErrName, member, found, "no absolute paths and no .."}
	}
	return &Error{ErrTruncated, member, found, "copy or save it again"}
}
