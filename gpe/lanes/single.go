package lanes

import "fmt"

// A batch in single precision holds two in double precision side by side: half
// h is lanes h·Width to h·Width + Width − 1. Aliases of an instantiated type
// cannot have methods of their own, hence functions.

// Load copies b, rounded, into half h of s. It panics if they differ in length
// or h is neither 0 nor 1.
func Load(s *Single, h int, b *Batch) {
	checkHalf(s, h, b)
	load(rows(s.Re), h, rows(b.Re))
	load(rows(s.Im), h, rows(b.Im))
}

// Store copies half h of s into b, which is exact. It panics as Load does.
func Store(b *Batch, s *Single, h int) {
	checkHalf(s, h, b)
	store(rows(b.Re), rows(s.Re), h)
	store(rows(b.Im), rows(s.Im), h)
}

// Clear sets half h of s to zero. It panics if h is neither 0 nor 1.
func Clear(s *Single, h int) {
	s.check()
	if h != 0 && h != 1 {
		panic(fmt.Sprintf("lanes: half %d; halves are 0 and 1", h))
	}
	for _, half := range [][][Width]float32{rows(s.Re), rows(s.Im)} {
		for j := h; j < len(half); j += SingleWidth / Width {
			half[j] = [Width]float32{}
		}
	}
}

func load(to [][Width]float32, h int, from [][Width]float64) {
	for j := range from {
		x, y := &from[j], &to[2*j+h]
		for l := range x {
			y[l] = float32(x[l])
		}
	}
}

func store(to [][Width]float64, from [][Width]float32, h int) {
	for j := range to {
		x, y := &from[2*j+h], &to[j]
		for l := range x {
			y[l] = float64(x[l])
		}
	}
}

func checkHalf(s *Single, h int, b *Batch) {
	s.check()
	b.check()
	if h != 0 && h != 1 || s.N != b.N {
		panic(fmt.Sprintf("lanes: half %d of a single batch of %d points and a batch of %d points; halves are 0 and 1", h, s.N, b.N))
	}
}

// Round rounds a table to single precision. Both slices have the same length.
func Round(dst []float32, src []float64) {
	checkLength("rounded table", len(dst), len(src))
	for j, x := range src {
		dst[j] = float32(x)
	}
}
