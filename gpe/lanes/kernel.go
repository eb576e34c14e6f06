package lanes

// A kernel is the set of inner loops behind this package. Everything above it
// (lengths, order, tables) is the same for all kernels, except for the radices
// that it likes. An entry gets whole arrays and does one sweep over them.
type kernel struct {
	name string
	// radices factors a length 2^a, a ≥ minPower, into radices for which
	// passes are present, first forward pass first. The last one must have a
	// middle sweep.
	radices func(a int) []int
	// forward and backward hold the twiddled passes by radix. Radices 3 and 5
	// must be there, too: they lead the plans of lengths 3·2^a and 5·2^a.
	forward, backward [maxRadix + 1]passFunc
	// middle holds by radix the last forward pass, the multiplication by the
	// kinetic table and the first backward pass, as one sweep.
	middle [maxRadix + 1]middleFunc

	phaseCubic   func(re, im, v, g []float64)
	phaseShifted func(re, im, v, g, s []float64)
	phaseSwollen func(re, im, v, g, s []float64, swelling, scale float64)
	damp         func(re, im, d []float64)
	mix          func(re, im, matrix []float64)
	combine      func(dst, f, beta []float64)
	// tiles makes tilesAtOnce neighbouring tiles of an Updater's product.
	tiles       func(dst, a, b []float64, rows int)
	tilesAtOnce int
}

const (
	maxRadix = 8
	minPower = 4  // the shortest plan is 2^minPower
	maxPower = 24 // and the longest 2^maxPower; a batch of it fills 2 GiB
)

type (
	passFunc   func(re, im []float64, p *pass)
	middleFunc func(re, im, kinRe, kinIm []float64)
)

// portable is the kernel in plain Go. Its radices are those that were fastest
// with the 16 floating-point registers that the compiler has at hand.
var portable = kernel{
	name:         "portable",
	radices:      portableRadices,
	forward:      [maxRadix + 1]passFunc{3: forward3, 4: forward4, 5: forward5, 8: forward8},
	backward:     [maxRadix + 1]passFunc{3: backward3, 4: backward4, 5: backward5, 8: backward8},
	middle:       [maxRadix + 1]middleFunc{4: middle4, 8: middle8},
	phaseCubic:   phaseCubic,
	phaseShifted: phaseShifted,
	phaseSwollen: phaseSwollen,
	damp:         damp,
	mix:          mix,
	combine:      combine,
	tiles:        tile,
	tilesAtOnce:  1,
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
