//go:build !purego

package lanes

import "golang.org/x/sys/cpu"

//go:generate go run -C generate . -out ../kernels_amd64.s -stubs ../kernels_amd64.go -pkg lanes

// vectorKernels returns the assembly kernels that this processor can run.
func vectorKernels() (k []*kernel) {
	if cpu.X86.HasAVX512F && cpu.X86.HasAVX512DQ {
		k = append(k, &wide)
	}
	if cpu.X86.HasAVX2 && cpu.X86.HasFMA {
		k = append(k, &narrow)
	}
	return k
}

// wide holds a point of all lanes in one register of AVX-512; narrow in two of
// AVX2.
var wide = kernel{
	name: "avx512",
	double: sweeps[float64]{
		radices:      wideRadices,
		forward:      [maxRadix + 1]passFunc[float64]{2: twiddled(forward2AVX512), 3: twiddled(forward3AVX512), 4: twiddled(forward4AVX512), 5: twiddled(forward5AVX512), 8: twiddled(forward8AVX512)},
		backward:     [maxRadix + 1]passFunc[float64]{2: twiddled(backward2AVX512), 3: twiddled(backward3AVX512), 4: twiddled(backward4AVX512), 5: twiddled(backward5AVX512), 8: twiddled(backward8AVX512)},
		rows:         1,
		middle:       [maxRadix + 1]middleFunc[float64]{4: grouped(middle4AVX512, 4), 8: grouped(middle8AVX512, 8)},
		phaseCubic:   cubicPhase(phaseCubicAVX512),
		phaseShifted: shiftedPhase(phaseShiftedAVX512),
		phaseSwollen: swollenPhase(phaseSwollenAVX512),
		damp:         damping(dampAVX512),
	},
	single: sweeps[float32]{
		radices:      wideRadices,
		forward:      [maxRadix + 1]passFunc[float32]{2: twiddled(forward2SingleAVX512), 3: twiddled(forward3SingleAVX512), 4: twiddled(forward4SingleAVX512), 5: twiddled(forward5SingleAVX512), 8: twiddled(forward8SingleAVX512)},
		backward:     [maxRadix + 1]passFunc[float32]{2: twiddled(backward2SingleAVX512), 3: twiddled(backward3SingleAVX512), 4: twiddled(backward4SingleAVX512), 5: twiddled(backward5SingleAVX512), 8: twiddled(backward8SingleAVX512)},
		rows:         1,
		middle:       [maxRadix + 1]middleFunc[float32]{4: grouped(middle4SingleAVX512, 4), 8: grouped(middle8SingleAVX512, 8)},
		phaseCubic:   cubicPhase(phaseCubicSingleAVX512),
		phaseShifted: shiftedPhase(phaseShiftedSingleAVX512),
		phaseSwollen: swollenPhase(phaseSwollenSingleAVX512),
		damp:         damping(dampSingleAVX512),
	},
	mix:         mixing(mixAVX512),
	combine:     combining(combineAVX512),
	tiles:       tiling(tileAVX512),
	tilesAtOnce: 2,
}

var narrow = kernel{
	name: "avx2",
	double: sweeps[float64]{
		radices:      narrowRadices,
		forward:      [maxRadix + 1]passFunc[float64]{2: twiddled(forward2AVX2), 3: twiddled(forward3AVX2), 4: twiddled(forward4AVX2), 5: twiddled(forward5AVX2)},
		backward:     [maxRadix + 1]passFunc[float64]{2: twiddled(backward2AVX2), 3: twiddled(backward3AVX2), 4: twiddled(backward4AVX2), 5: twiddled(backward5AVX2)},
		rows:         1,
		middle:       [maxRadix + 1]middleFunc[float64]{4: grouped(middle4AVX2, 4)},
		phaseCubic:   cubicPhase(phaseCubicAVX2),
		phaseShifted: shiftedPhase(phaseShiftedAVX2),
		phaseSwollen: swollenPhase(phaseSwollenAVX2),
		damp:         damping(dampAVX2),
	},
	single: sweeps[float32]{
		radices:      narrowRadices,
		forward:      [maxRadix + 1]passFunc[float32]{2: twiddled(forward2SingleAVX2), 3: twiddled(forward3SingleAVX2), 4: twiddled(forward4SingleAVX2), 5: twiddled(forward5SingleAVX2)},
		backward:     [maxRadix + 1]passFunc[float32]{2: twiddled(backward2SingleAVX2), 3: twiddled(backward3SingleAVX2), 4: twiddled(backward4SingleAVX2), 5: twiddled(backward5SingleAVX2)},
		rows:         1,
		middle:       [maxRadix + 1]middleFunc[float32]{4: grouped(middle4SingleAVX2, 4)},
		phaseCubic:   cubicPhase(phaseCubicSingleAVX2),
		phaseShifted: shiftedPhase(phaseShiftedSingleAVX2),
		phaseSwollen: swollenPhase(phaseSwollenSingleAVX2),
		damp:         damping(dampSingleAVX2),
	},
	mix:         mixing(mixAVX2),
	combine:     combining(combineAVX2),
	tiles:       tiling(tileAVX2),
	tilesAtOnce: 1,
}

// wideRadices uses as many 8 as there are, with the 4 in between.
func wideRadices(a int) []int {
	var r []int
	for ; a%3 != 0; a -= 2 {
		r = append(r, 4)
	}
	eights := a / 3
	if eights == 0 {
		return r
	}
	out := []int{}
	for range eights - 1 {
		out = append(out, 8)
	}
	return append(append(out, r...), 8)
}

// narrowRadices uses 4 throughout, led by a 2 for odd powers of two.
func narrowRadices(a int) []int {
	var r []int
	if a%2 == 1 {
		r = append(r, 2)
		a--
	}
	for ; a > 0; a -= 2 {
		r = append(r, 4)
	}
	return r
}

func twiddled[T Float](f func(re, im, twiddle *T, blocks, span int)) passFunc[T] {
	return func(re, im []T, p *pass[T]) {
		f(&re[0], &im[0], &p.twiddle[0], len(re)/(width[T]()*p.radix*p.span), p.span)
	}
}

func grouped[T Float](f func(re, im, kinRe, kinIm *T, groups int), radix int) middleFunc[T] {
	return func(re, im, kinRe, kinIm []T) {
		f(&re[0], &im[0], &kinRe[0], &kinIm[0], len(kinRe)/radix)
	}
}

func cubicPhase[T Float](f func(re, im, v, g *T, points int)) func(re, im, v, g []T) {
	return func(re, im, v, g []T) { f(&re[0], &im[0], &v[0], &g[0], len(v)) }
}

func shiftedPhase[T Float](f func(re, im, v, g, s *T, points int)) func(re, im, v, g, s []T) {
	return func(re, im, v, g, s []T) { f(&re[0], &im[0], &v[0], &g[0], &s[0], len(v)) }
}

func swollenPhase[T Float](f func(re, im, v, g, s *T, swelling, scale T, points int)) func(re, im, v, g, s []T, swelling, scale T) {
	return func(re, im, v, g, s []T, swelling, scale T) {
		f(&re[0], &im[0], &v[0], &g[0], &s[0], swelling, scale, len(v))
	}
}

func damping[T Float](f func(re, im, d *T, points int)) func(re, im, d []T) {
	return func(re, im, d []T) { f(&re[0], &im[0], &d[0], len(d)) }
}

func mixing(f func(re, im, matrix *float64, points int)) func(re, im, matrix []float64) {
	return func(re, im, matrix []float64) { f(&re[0], &im[0], &matrix[0], len(matrix)/4) }
}

// together is how many points the assembly combines at a time.
const together = 4

func combining(f func(dst, f, beta *float64, groups, count int)) func(dst, f, beta []float64) {
	return func(dst, weights, beta []float64) {
		count := len(beta) / Width
		groups := len(dst) / (Width * together)
		if groups > 0 {
			f(&dst[0], &weights[0], &beta[0], groups, count)
		}
		if done := groups * together; done*Width < len(dst) {
			combine(dst[done*Width:], weights[done*count:], beta)
		}
	}
}

func tiling(f func(dst, a, b *float64, rows, next int)) func(dst, a, b []float64, rows int) {
	return func(dst, a, b []float64, rows int) { f(&dst[0], &a[0], &b[0], rows, rows*side) }
}
