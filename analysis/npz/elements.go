package npz

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
)

// decoder turns the bytes of one element into a float64; exact is false for an
// integer that a float64 cannot hold.
type decoder func(b []byte) (value float64, exact bool)

// elementType returns how to decode numpy's type string, such as "<f8" or
// "|b1", and the bytes an element takes. Its errors are *Error.
func elementType(descr string) (decoder, int, error) {
	unsupported := func(found string) (decoder, int, error) {
		return nil, 0, &Error{ErrType, "", found, "booleans, integers of 1 to 8 bytes and floats of 2, 4 or 8 are read"}
	}
	if descr == "" {
		return unsupported("a structured array")
	}
	if len(descr) > 1 && descr[1] == 'O' {
		return unsupported("Python objects (a pickle, which could run any program)")
	}
	if len(descr) != 3 {
		return unsupported(fmt.Sprintf("%q", clip(descr)))
	}
	var order binary.ByteOrder = binary.LittleEndian
	kind, size := descr[1], int(descr[2]-'0')
	switch descr[0] {
	case '<':
	case '>':
		order = binary.BigEndian
	case '|':
		if size != 1 {
			return unsupported(fmt.Sprintf("%q, which has no byte order,", descr))
		}
	default:
		return unsupported(fmt.Sprintf("%q", descr))
	}
	switch descr[1:] {
	case "b1":
		return func(b []byte) (float64, bool) { return float64(min(b[0], 1)), true }, size, nil
	case "f2":
		return func(b []byte) (float64, bool) { return half(order.Uint16(b)), true }, size, nil
	case "f4":
		return func(b []byte) (float64, bool) { return float64(math.Float32frombits(order.Uint32(b))), true }, size, nil
	case "f8":
		return func(b []byte) (float64, bool) { return math.Float64frombits(order.Uint64(b)), true }, size, nil
	case "i1", "i2", "i4", "i8", "u1", "u2", "u4", "u8":
		return integer(order, kind == 'i', size), size, nil
	}
	return unsupported(fmt.Sprintf("%q", descr))
}

func integer(order binary.ByteOrder, signed bool, size int) decoder {
	bits := func(b []byte) uint64 { return uint64(b[0]) }
	switch size {
	case 2:
		bits = func(b []byte) uint64 { return uint64(order.Uint16(b)) }
	case 4:
		bits = func(b []byte) uint64 { return uint64(order.Uint32(b)) }
	case 8:
		bits = order.Uint64
	}
	shift := 64 - 8*size
	const exactBelow = 1 << 53
	if signed {
		return func(b []byte) (float64, bool) {
			v := int64(bits(b)<<shift) >> shift
			return float64(v), -exactBelow <= v && v <= exactBelow
		}
	}
	return func(b []byte) (float64, bool) {
		v := bits(b)
		return float64(v), v <= exactBelow
	}
}

// half decodes an IEEE 754 binary16: sign, 5 bits of exponent with bias 15, 10
// of fraction.
func half(h uint16) float64 {
	sign := 1.0
	if h>>15 == 1 {
		sign = -1
	}
	exponent, fraction := int(h>>10&31), float64(h&1023)
	switch exponent {
	case 0:
		return math.Copysign(math.Ldexp(fraction, -24), sign)
	case 31:
		if fraction != 0 {
			return math.NaN()
		}
		return math.Inf(int(sign))
	}
	return sign * math.Ldexp(1024+fraction, exponent-25)
}

// readElements fills dst, in C order, with the elements in r and then requires
// its end, at which archive/zip compares the check sum. An integer that has no
// exact float64 is an *Error; the others are those of r.
func readElements(r io.Reader, dst []float64, h header, size int, decode decoder) error {
	place := order(h)
	block := make([]byte, 1<<16/size*size)
	var inexact error
	for i := 0; i < len(dst); {
		b := block[:min(len(block), (len(dst)-i)*size)]
		if _, err := io.ReadFull(r, b); err != nil {
			return err
		}
		for ; len(b) > 0; b = b[size:] {
			v, exact := decode(b)
			if !exact && inexact == nil {
				inexact = &Error{ErrInexact, "", fmt.Sprintf("element %d in the file's order is near %.17g", i, v), "integers up to ±2⁵³ are read"}
			}
			if place == nil {
				dst[i] = v
			} else {
				dst[place()] = v
			}
			i++
		}
	}
	var end [1]byte
	switch n, err := io.ReadFull(r, end[:]); {
	case n != 0:
		return errors.New("more bytes than its directory entry says")
	case err != io.EOF:
		return err
	}
	return inexact
}

// order returns a function that, called once per element of a Fortran array in
// the file's order (first index fastest), gives the element's place in C order;
// nil when the two are the same.
func order(h header) func() int {
	d := len(h.shape)
	if !h.fortran || d < 2 {
		return nil
	}
	stride := make([]int, d) // in C order
	step := 1
	for k := d - 1; k >= 0; k-- {
		stride[k] = step
		step *= h.shape[k]
	}
	index := make([]int, d)
	next := 0
	return func() int {
		here := next
		for k := range index {
			index[k]++
			next += stride[k]
			if index[k] < h.shape[k] {
				break
			}
			next -= index[k] * stride[k]
			index[k] = 0
		}
		return here
	}
}
