package lanes

import (
	"fmt"
	"unsafe"
)

// Float is the number that a field is made of.
type Float interface{ float32 | float64 }

// Width is the number of trajectories that a batch in double precision holds
// side by side: the float64 values in one 64-byte cache line, which is also one
// register of the widest vector units in use. SingleWidth is that of a batch in
// single precision, twice as many.
const (
	Width       = 8
	SingleWidth = 2 * Width
)

// align is the alignment of a batch's arrays in bytes: one cache line.
const align = 64

// width returns the number of lanes of a batch of T.
func width[T Float]() int {
	var x T
	return align / int(unsafe.Sizeof(x))
}

// BatchOf holds complex fields ψ on the same grid of N points, one a lane, as a
// structure of arrays: point j of lane l is Re[j*W+l] + i·Im[j*W+l], W = Width
// for float64 and SingleWidth for float32. Both slices have length N*W and start
// on a 64-byte boundary, so that one point of all lanes is one cache line of
// each. A fresh batch is zero. Lanes that carry no trajectory may stay zero;
// they cost time but disturb nothing.
type BatchOf[T Float] struct {
	N      int
	Re, Im []T
}

// Batch holds Width fields in double precision, Single SingleWidth in single.
type (
	Batch  = BatchOf[float64]
	Single = BatchOf[float32]
)

// NewBatch returns a zero batch of n points. It panics if n is not positive.
func NewBatch(n int) *Batch { return newBatch[float64](n) }

// NewSingle returns a zero batch of n points in single precision. It panics if
// n is not positive.
func NewSingle(n int) *Single { return newBatch[float32](n) }

func newBatch[T Float](n int) *BatchOf[T] {
	if n <= 0 {
		panic(fmt.Sprintf("lanes: a batch of %d points; at least 1 is needed", n))
	}
	// Both arrays come from one block, with a few lines between them: for n a
	// power of two they would otherwise fall into the same cache sets, and
	// the legs of a butterfly, which share a set already, would evict each
	// other.
	w := width[T]()
	apart := 8 * w
	block := aligned[T](2*n*w + apart)
	im := n*w + apart
	return &BatchOf[T]{
		N:  n,
		Re: block[: n*w : n*w],
		Im: block[im : im+n*w : im+n*w],
	}
}

// SetLane copies the field psi of length N into lane l.
func (b *BatchOf[T]) SetLane(l int, psi []complex128) {
	b.checkLane(l)
	checkLength("field", len(psi), b.N)
	w := width[T]()
	for j, z := range psi {
		b.Re[j*w+l] = T(real(z))
		b.Im[j*w+l] = T(imag(z))
	}
}

// Lane copies lane l into dst, which has length N, and returns it; a nil dst
// is allocated.
func (b *BatchOf[T]) Lane(dst []complex128, l int) []complex128 {
	b.checkLane(l)
	if dst == nil {
		dst = make([]complex128, b.N)
	}
	checkLength("destination", len(dst), b.N)
	w := width[T]()
	for j := range dst {
		dst[j] = complex(float64(b.Re[j*w+l]), float64(b.Im[j*w+l]))
	}
	return dst
}

func (b *BatchOf[T]) checkLane(l int) {
	if w := width[T](); l < 0 || l >= w {
		panic(fmt.Sprintf("lanes: lane %d; lanes are 0 to %d", l, w-1))
	}
}

// check panics unless both arrays hold N points: the kernels count on it.
func (b *BatchOf[T]) check() {
	if n := b.N * width[T](); len(b.Re) != n || len(b.Im) != n {
		panic(fmt.Sprintf("lanes: batch of %d points with arrays of %d and %d values; both need %d (use NewBatch or NewSingle)",
			b.N, len(b.Re), len(b.Im), n))
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
func aligned[T Float](n int) []T {
	size := align / width[T]()
	s := make([]T, n+align/size-1)
	skip := 0
	if r := int(uintptr(unsafe.Pointer(unsafe.SliceData(s))) % align); r != 0 {
		skip = (align - r) / size
	}
	return s[skip : skip+n : skip+n]
}

// rows returns the same memory by rows of Width numbers: one a point in double
// precision, two in single. A row of known length needs no bounds checks in the
// loop over its lanes, and taking one is an addition.
func rows[T Float](x []T) [][Width]T {
	return unsafe.Slice((*[Width]T)(unsafe.Pointer(unsafe.SliceData(x))), len(x)/Width)
}
