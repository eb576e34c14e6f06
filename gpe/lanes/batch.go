package lanes

import (
	"fmt"
	"unsafe"
)

// Width is the number of trajectories that a batch holds side by side: the
// float64 values in one 64-byte cache line, which is also one register of the
// widest vector units in use.
const Width = 8

// align is the alignment of a batch's arrays in bytes: one cache line.
const align = 64

// Batch holds Width complex fields ψ on the same grid of N points as a
// structure of arrays: point j of lane l is Re[j*Width+l] + i·Im[j*Width+l].
// Both slices have length N*Width and start on a 64-byte boundary, so that one
// point of all lanes is one cache line of each. A fresh batch is zero. Lanes
// that carry no trajectory may stay zero; they cost time but disturb nothing.
type Batch struct {
	N      int
	Re, Im []float64
}

// NewBatch returns a zero batch of n points. It panics if n is not positive.
func NewBatch(n int) *Batch {
	if n <= 0 {
		panic(fmt.Sprintf("lanes: a batch of %d points; at least 1 is needed", n))
	}
	// Both arrays come from one block, with a few lines between them: for n a
	// power of two they would otherwise fall into the same cache sets, and
	// the legs of a butterfly, which share a set already, would evict each
	// other.
	const apart = 8 * Width
	block := aligned(2*n*Width + apart)
	im := n*Width + apart
	return &Batch{
		N:  n,
		Re: block[: n*Width : n*Width],
		Im: block[im : im+n*Width : im+n*Width],
	}
}

// SetLane copies the field psi of length N into lane l.
func (b *Batch) SetLane(l int, psi []complex128) {
	b.checkLane(l)
	checkLength("field", len(psi), b.N)
	for j, z := range psi {
		b.Re[j*Width+l] = real(z)
		b.Im[j*Width+l] = imag(z)
	}
}

// Lane copies lane l into dst, which has length N, and returns it; a nil dst
// is allocated.
func (b *Batch) Lane(dst []complex128, l int) []complex128 {
	b.checkLane(l)
	if dst == nil {
		dst = make([]complex128, b.N)
	}
	checkLength("destination", len(dst), b.N)
	for j := range dst {
		dst[j] = complex(b.Re[j*Width+l], b.Im[j*Width+l])
	}
	return dst
}

func (b *Batch) checkLane(l int) {
	if l < 0 || l >= Width {
		panic(fmt.Sprintf("lanes: lane %d; lanes are 0 to %d", l, Width-1))
	}
}

// check panics unless both arrays hold N points: the kernels count on it.
func (b *Batch) check() {
	if len(b.Re) != b.N*Width || len(b.Im) != b.N*Width {
		panic(fmt.Sprintf("lanes: batch of %d points with arrays of %d and %d values; both need %d (use NewBatch)",
			b.N, len(b.Re), len(b.Im), b.N*Width))
	}
}

// checkLength panics unless an array that goes with a grid of n points has n
// values.
func checkLength(what string, got, n int) {
	if got != n {
		panic(fmt.Sprintf("lanes: %s has %d values on a grid of %d points", what, got, n))
	}
}

// aligned returns a zero slice of n values that starts on a cache line. Go's
// collector does not move what it has allocated, so that the start stays
// aligned.
func aligned(n int) []float64 {
	const size = int(unsafe.Sizeof(float64(0)))
	s := make([]float64, n+align/size-1)
	skip := 0
	if r := int(uintptr(unsafe.Pointer(unsafe.SliceData(s))) % align); r != 0 {
		skip = (align - r) / size
	}
	return s[skip : skip+n : skip+n]
}

// rows returns the same memory point by point. A row of known length needs no
// bounds checks in the loop over its lanes, and taking one is an addition.
func rows(x []float64) [][Width]float64 {
	return unsafe.Slice((*[Width]float64)(unsafe.Pointer(unsafe.SliceData(x))), len(x)/Width)
}
