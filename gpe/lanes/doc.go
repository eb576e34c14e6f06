// Package lanes is the inner loop of the split-step propagator: a Fourier
// transform, a kinetic factor and a local phase, for eight trajectories at
// once.
//
// # Layout
//
// A Batch holds Width trajectories on the same grid side by side: point j of
// lane l is Re[j*Width+l] and Im[j*Width+l]. One point of all lanes is one
// cache line of each array. Whatever is done to a lane is done to all, with
// the same factors, so that a butterfly of the transform acts on whole lines,
// a factor is loaded once for eight lanes, and no value ever changes its lane.
// Lanes do not see each other, and a field comes out the same to the last bit
// whichever lane it is in. A batch that is not full keeps zeros in the rest.
//
// # Plan
//
// A length N = 2^a, 3·2^a or 5·2^a is factored into passes, each a sweep over
// the batch in place. The forward transform decimates in frequency: a pass of
// radix r combines points N/r apart, multiplies by twiddles and leaves r
// independent transforms of length N/r in r consecutive blocks. Block q holds
// the waves k = q, q+r, q+2r, …, so that the result ends in the order in which
// the digits of k are reversed. Usual transforms then sort it. A split step
// has no need to: the kinetic factor is a table, which is made in the
// scrambled order (Order tells it), and the backward transform undoes the
// passes from the last to the first, decimating in time, and so arrives in
// natural order. Nothing is ever reordered.
//
// The last forward pass has no twiddles, nor has the first backward one, and
// both work on the same few neighbouring places. Propagate does both and the
// multiplication between them in one sweep.
//
// The portable plan is radix 4 throughout and ends in one 8 for odd powers of
// two. Radix 8 saves sweeps but not additions, and additions are what the
// scalar code waits for: at N = 2048 all plans of radices 4 and 8 lie within
// 4 % of each other, at 4096 4·4·4·4·4·4 is a tenth faster than 8·8·8·8.
//
// # Phase
//
// Phases are in units of π, so that their reduction is one rounding and one
// exact subtraction; sine and cosine are polynomials, without table or branch,
// within 5e-16 of the truth for the phase as given (3.1e-16 was the largest
// error seen).
//
// # Kernels
//
// All sweeps are entries in a table of functions (kernel.go), which get whole
// arrays and the description of a pass. A kernel for a vector unit replaces
// entries and brings the radices that suit it; layout, twiddles, order and
// kinetic tables follow from the radices and need no change. Kernel names the
// one in use.
//
// # Measured
//
// In ns per grid point, trajectory and step, one core of a server processor of
// the AMD Zen 5 family at 3.4 GHz, Go 1.26, N = 1024 / 2048 / 4096:
//
//	Strang step, half phases merged, moving step     14.5 / 14.9 / 16.1
//	the same, built with GOAMD64=v3                  12.9 / 13.8 / 14.5
//	transform there and back (lanes)                  9.5 / 10.5 / 11.5
//	transform there and back (gonum CmplxFFT)        49.9 / 57.8 / 59.2
//	transform there and back (go-dsp)                99.6 / 99.0 / 86.0
//
// and at N = 2048: Propagate 9.7, Phase 5.2, PhaseLaw 5.3 (cubic) and 8.4
// (swollen), StepTable.Fill 0.11 when the batch shares it. Propagate does 59
// additions a point, of which this processor can start two a cycle: 29.5 of
// the 32.5 cycles that it takes.
//
// To repeat:
//
//	go test ./gpe/lanes -run '^$' -bench 'SplitStep|Parts|Transform'
//
// Accuracy: relative L2 error 3e-15 to 1.3e-14 after 100 steps at N = 64
// against 128-bit arithmetic, norm drift 8e-14 in 1000 steps at N = 512
// (go test -v prints both).
package lanes
