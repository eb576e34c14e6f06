package lanes

// A kernel is the set of inner loops behind this package.
type kernel struct {
	name    string
	double  sweeps[float64]
	single  sweeps[float32]
	mix     func(re, im, matrix []float64)
	combine func(dst, f, beta []float64)
	// tiles makes tilesAtOnce neighbouring tiles of an Updater's product.
	tiles       func(dst, a, b []float64, rows int)
	tilesAtOnce int
}

// sweeps are a kernel's inner loops over a batch. Everything above it (lengths,
// order, tables) is the same for all kernels, except for the radices that it
// likes. An entry gets whole arrays and does one sweep over them.
type sweeps[T Float] struct {
	// radices factors a length 2^a, a ≥ minPower, into radices for which
	// passes are present, first forward pass first. The last one must have a
	// middle sweep.
	radices func(a int) []int
	// forward and backward hold the twiddled passes by radix. Radices 3 and 5
	// must be there, too: they lead the plans of lengths 3·2^a and 5·2^a.
	forward, backward [maxRadix + 1]passFunc[T]
	// rows is how many rows a pass takes a point for: to a pass that works on
	// rows of half a point, a batch of N points is one of 2N in which
	// neighbours have the same twiddles.
	rows int
	// middle holds by radix the last forward pass, the multiplication by the
	// kinetic table and the first backward pass, as one sweep.
	middle [maxRadix + 1]middleFunc[T]

	phaseCubic   func(re, im, v, g []T)
	phaseShifted func(re, im, v, g, s []T)
	phaseSwollen func(re, im, v, g, s []T, swelling, scale T)
	damp         func(re, im, d []T)
}

// of returns the sweeps of k over batches of T.
func of[T Float](k *kernel) *sweeps[T] {
	if s, ok := any(&k.double).(*sweeps[T]); ok {
		return s
	}
	return any(&k.single).(*sweeps[T])
}

const (
	maxRadix = 8
	minPower = 4  // the shortest plan is 2^minPower
	maxPower = 24 // and the longest 2^maxPower; a batch of it fills 2 GiB
)

type (
	passFunc[T Float]   func(re, im []T, p *pass[T])
	middleFunc[T Float] func(re, im, kinRe, kinIm []T)
)

// portable is the kernel in plain Go. Its radices are those that were fastest
// with the 16 floating-point registers that the compiler has at hand. In single
// precision it takes a point for two rows of Width lanes, so that the passes
// are the same, and makes the middle of its parts: it need not be fast.
var portable = kernel{
	name: "portable",
	double: sweeps[float64]{
		radices:      portableRadices,
		forward:      [maxRadix + 1]passFunc[float64]{3: forward3[float64], 4: forward4[float64], 5: forward5[float64], 8: forward8[float64]},
		backward:     [maxRadix + 1]passFunc[float64]{3: backward3[float64], 4: backward4[float64], 5: backward5[float64], 8: backward8[float64]},
		rows:         1,
		middle:       [maxRadix + 1]middleFunc[float64]{4: middle4, 8: middle8},
		phaseCubic:   phaseCubic,
		phaseShifted: phaseShifted,
		phaseSwollen: phaseSwollen,
		damp:         damp,
	},
	single: sweeps[float32]{
		radices:      portableRadices,
		forward:      [maxRadix + 1]passFunc[float32]{3: forward3[float32], 4: forward4[float32], 5: forward5[float32], 8: forward8[float32]},
		backward:     [maxRadix + 1]passFunc[float32]{3: backward3[float32], 4: backward4[float32], 5: backward5[float32], 8: backward8[float32]},
		rows:         SingleWidth / Width,
		middle:       [maxRadix + 1]middleFunc[float32]{4: inParts(4, forward4, backward4), 8: inParts(8, forward8, backward8)},
		phaseCubic:   singleCubic,
		phaseShifted: singleShifted,
		phaseSwollen: singleSwollen,
		damp:         singleDamp,
	},
	mix:         mix,
	combine:     combine,
	tiles:       tile,
	tilesAtOnce: 1,
}

// portableRadices uses radix 4 throughout, with one 8 at the end for odd powers
// of two.
func portableRadices(a int) []int {
	var r []int
	for ; a > 3; a -= 2 {
		r = append(r, 4)
	}
	return append(r, 1<<a)
}

// inParts is the middle of a radix as two passes, whose twiddles are all 1, and
// the multiplication between them, for points of SingleWidth lanes.
func inParts(radix int, forward, backward passFunc[float32]) middleFunc[float32] {
	flat := newPass[float32](radix, 1, SingleWidth/Width)
	return func(re, im, kinRe, kinIm []float32) {
		forward(re, im, &flat)
		for k, wr := range kinRe {
			wi := kinIm[k]
			r, m := re[k*SingleWidth:][:SingleWidth], im[k*SingleWidth:][:SingleWidth]
			for l, x := range r {
				r[l], m[l] = turn(x, m[l], wr, wi)
			}
		}
		backward(re, im, &flat)
	}
}
