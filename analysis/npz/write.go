package npz

import (
	"archive/zip"
	"compress/flate"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"tailrace/analysis/npz/whole"
)

// Array is one named array to be written. Data holds its elements in C order
// (the last index runs fastest); their number is the product of Shape, which is
// 1 for the empty shape of a 0-dimensional array.
type Array struct {
	Name  string // as numpy shows it, without ".npy"
	Shape []int
	Data  any // []float64, []float32, []int64 or []bool
}

// Vector is a one-dimensional array.
func Vector(name string, data []float64) Array {
	return Array{Name: name, Shape: []int{len(data)}, Data: data}
}

// Scalar is a 0-dimensional array.
func Scalar(name string, value float64) Array {
	return Array{Name: name, Data: []float64{value}}
}

// Write writes the arrays as one archive: little-endian, C order, format 1.0.
// A member is deflated where a trial shows that it pays and stored otherwise.
// The bytes depend on the arrays alone: there are no time stamps.
//
// It panics if an array has no name, a name that occurs twice or that could be
// a path, a shape that does not fit its data, or elements of another type:
// those are mistakes of the program. Errors are those of w.
func Write(w io.Writer, arrays ...Array) error {
	seen := map[string]bool{}
	archive := zip.NewWriter(w)
	archive.RegisterCompressor(zip.Deflate, func(w io.Writer) (io.WriteCloser, error) {
		return flate.NewWriter(w, flate.BestSpeed)
	})
	for _, a := range arrays {
		if err := checkName(a.Name); err != nil || seen[a.Name] {
			panic(fmt.Sprintf("npz: array name %q is taken or not allowed", a.Name))
		}
		seen[a.Name] = true
		header, elements := encode(a)
		member, err := archive.CreateHeader(&zip.FileHeader{Name: a.Name + ".npy", Method: method(elements)})
		if err != nil {
			return err
		}
		if _, err := member.Write(header); err != nil {
			return err
		}
		if err := elements.write(member, 0, elements.count); err != nil {
			return err
		}
	}
	return archive.Close()
}

// WriteFile writes the arrays to a file that appears under its name only when
// it is whole; on any failure, a full disk included, nothing is left behind and
// what path held before stays.
func WriteFile(path string, arrays ...Array) error {
	return whole.WriteFile(path, func(w io.Writer) error { return Write(w, arrays...) })
}

// elements is a typed slice seen as little-endian bytes.
type elements struct {
	count, size int
	put         func(dst []byte, i int)
}

// write sends the elements from ≤ i < to, a block at a time.
func (e elements) write(w io.Writer, from, to int) error {
	block := make([]byte, 0, 1<<16)
	for i := from; i < to; {
		block = block[:0]
		for ; i < to && len(block)+e.size <= cap(block); i++ {
			block = block[:len(block)+e.size]
			e.put(block[len(block)-e.size:], i)
		}
		if _, err := w.Write(block); err != nil {
			return err
		}
	}
	return nil
}

func encode(a Array) (header []byte, e elements) {
	descr := ""
	switch data := a.Data.(type) {
	case []float64:
		descr, e = "<f8", elements{len(data), 8, func(b []byte, i int) {
			binary.LittleEndian.PutUint64(b, math.Float64bits(data[i]))
		}}
	case []float32:
		descr, e = "<f4", elements{len(data), 4, func(b []byte, i int) {
			binary.LittleEndian.PutUint32(b, math.Float32bits(data[i]))
		}}
	case []int64:
		descr, e = "<i8", elements{len(data), 8, func(b []byte, i int) {
			binary.LittleEndian.PutUint64(b, uint64(data[i]))
		}}
	case []bool:
		descr, e = "|b1", elements{len(data), 1, func(b []byte, i int) {
			b[0] = 0
			if data[i] {
				b[0] = 1
			}
		}}
	default:
		panic(fmt.Sprintf("npz: array %q holds %T; []float64, []float32, []int64 and []bool can be written", a.Name, a.Data))
	}
	if count, ok := product(a.Shape); !ok || count != int64(e.count) || len(a.Shape) > maxDimensions {
		panic(fmt.Sprintf("npz: array %q has shape %v and %d elements", a.Name, a.Shape, e.count))
	}
	return encodeHeader(descr, a.Shape), e
}

// encodeHeader is everything before the elements, a multiple of 64 bytes so
// that they are aligned when the file is mapped into memory.
func encodeHeader(descr string, shape []int) []byte {
	var tuple strings.Builder
	for i, n := range shape {
		if i > 0 {
			tuple.WriteByte(' ')
		}
		tuple.WriteString(strconv.Itoa(n) + ",") // (3,) needs its comma, (3, 4,) allows it
	}
	dict := fmt.Sprintf("{'descr': '%s', 'fortran_order': False, 'shape': (%s), }", descr, tuple.String())
	const prefix = 10 // magic, version, length
	padded := (prefix + len(dict) + 1 + 63) / 64 * 64
	header := append([]byte(magic), 1, 0)
	header = binary.LittleEndian.AppendUint16(header, uint16(padded-prefix))
	header = append(header, dict...)
	for len(header) < padded-1 {
		header = append(header, ' ')
	}
	return append(header, '\n')
}

// method deflates an array of some size if three samples of it, from its start,
// middle and end, shrink by a fifth: noise in float64 does not, and deflating
// it would cost more time than the few per cent are worth.
func method(e elements) uint16 {
	const small, sample = 1 << 10, 1 << 14
	if e.count*e.size <= small {
		return zip.Store
	}
	n := min(sample/e.size, e.count)
	var packed counter
	deflater, err := flate.NewWriter(&packed, flate.BestSpeed)
	if err != nil {
		panic("npz: " + err.Error()) // only an unknown level fails
	}
	for _, from := range []int{0, (e.count - n) / 2, e.count - n} {
		e.write(deflater, from, from+n) // a counter does not fail
		deflater.Close()
		deflater.Reset(&packed)
	}
	if 5*int(packed) > 4*3*n*e.size {
		return zip.Store
	}
	return zip.Deflate
}

// counter counts the bytes written to it.
type counter int

func (c *counter) Write(p []byte) (int, error) {
	*c += counter(len(p))
	return len(p), nil
}
