// Package lanes is the inner loop of the split-step propagator: a Fourier
// transform, a kinetic factor and a local phase, for eight trajectories at
// once in double precision or sixteen in single.
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
// BatchOf, PlanOf and KineticOf are generic over their numbers; Batch, Plan and
// Kinetic are those of float64, Single, SinglePlan and SingleKinetic those of
// float32.
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
// 4 % of each other, at 4096 4·4·4·4·4·4 is a tenth faster than 8·8·8·8. AVX-512
// has the registers for radix 8: its plans are 8·…·8 with fours in between
// (1024 = 8·4·4·8, 2048 = 8·8·4·8, 4096 = 8·8·8·8). AVX2 has not: radix 4, led
// by a 2 for odd powers of two. Lengths 3·2^a and 5·2^a are led by one pass of
// radix 3 or 5.
//
// # Phase
//
// Phases are in units of π, so that their reduction is one rounding and one
// exact subtraction; sine and cosine are polynomials, without table or branch,
// within 5e-16 of the truth for the phase as given (3.1e-16 was the largest
// error seen).
//
// # Single precision
//
// A batch of float32 has SingleWidth = 16 lanes: a point of all lanes is still
// one cache line of each array, and every sweep the same with twice the lanes a
// register. It is two batches of float64 side by side: Load rounds one into a
// half, Store writes it back, Clear empties the half that has none. Twiddles and
// kinetic tables are made in double precision and rounded; potentials are made
// in double precision and rounded once a step (Round), which the phase in units
// of π, small as it is, bears well. Reduction adds and subtracts 3·2^22, the
// sign comes from the lowest bit of a float32, and the polynomials have five
// terms each; they were fitted as those of double precision are (rotate.go,
// rotate_single.go), within 8e-9 for the sine and 1.1e-9 for the cosine. The
// field takes up what a turn changes, with cos − 1 in place of the cosine: a
// small phase turns to the full precision of the field (1.2e-8 seen below 1e-3;
// 1.5e-7 for any phase).
//
// Portable Go does it as well, with the passes of double precision: to them a
// point is two rows of eight lanes, neighbours with the same twiddles. It gains
// nothing, and is there so that a scenario runs on every machine.
//
// A transform is within 7e-8 to 1.4e-7 of the one in double precision, a hundred
// steps within 6e-6. The norm falls by 3e-8 to 1e-7 a step, always in the same
// direction: √½ and other twiddles are the same rounded number at every step.
// The phase that goes with it is common to all points of a uniform cloud, so
// that densities keep longer than fields.
//
// # Kernels
//
// All sweeps are entries in a table of functions (kernel.go), which get whole
// arrays and the description of a pass. A kernel for a vector unit replaces
// entries and brings the radices that suit it; layout, twiddles, order and
// kinetic tables follow from the radices and need no change.
//
// There are three: avx512 (needs AVX-512 F and DQ; one register is one point of
// all lanes), avx2 (needs AVX2 and FMA; two registers are a point) and portable,
// in plain Go, for everything else. The fastest that the processor can run is
// chosen when the program starts; the environment variable TAILRACE_KERNEL
// forces one by name, the build tag purego leaves only the portable one. Kernel
// names the one in use.
//
// The assembly is written by the generator in the folder generate, a module of
// its own so that nobody who builds the program needs what it needs; go generate
// writes kernels_amd64.s and its stubs anew, byte for byte. The generator keeps
// one description of every sweep for both vector units: a complex number is two
// registers, a backward butterfly is the forward one with real and imaginary
// parts exchanged, which costs nothing, and the factor √½ of a radix-8 butterfly
// is multiplied in by the fused additions that end it. AVX-512 takes twiddles
// and polynomial coefficients from memory as it multiplies. Either precision is
// the same description with other instructions.
//
// Beside the split step there are kernels for the other two loops that a run
// spends time in: Combine puts noise together from its modes, Updater adds
// products of densities to their moments.
//
// # Measured
//
// In ns per grid point, trajectory and step, one core of a server processor of
// the AMD Zen 5 family at 3.4 GHz, Go 1.26, N = 1024 / 2048 / 4096:
//
//	Strang step with a moving step, avx512           2.0 / 2.1 / 2.1
//	the same, avx2                                   3.3 / 3.6 / 3.6
//	the same, portable                               14.2 / 14.9 / 16.0
//	the same in C with FFTW 3 (Debian, patient
//	plans, eight at a time, polynomial sincos)       4.0 / 4.5 / 4.9
//	transform there and back, portable               9.5 / 10.5 / 11.5
//	transform there and back, gonum CmplxFFT         49.9 / 57.8 / 59.2
//	transform there and back, go-dsp                 99.6 / 99.0 / 86.0
//
// and at N = 2048, avx512 / avx2 / portable: Propagate 1.25 / 2.24 / 9.7, Phase
// 0.69 / 1.38 / 5.1, swollen law 1.53 / 3.08 / 7.7, StepTable.Fill 0.11 when the
// batch shares it. Combine does 51 / 44 / 4.6 GFLOP/s, Updater 60 / 36 / 4.5
// (gonum's Syrk 10). Two workers on two cores carry 1.98 times the trajectories
// of one.
//
// Double and single precision in one run, on the same processor with less else
// to do, N = 1024 / 2048 / 4096:
//
//	               double               single               ratio
//	avx512     1.57 / 1.66 / 1.68   0.75 / 0.75 / 0.78   2.1 / 2.2 / 2.2
//	avx2       2.64 / 2.88 / 2.94   1.17 / 1.26 / 1.27   2.2 / 2.3 / 2.3
//	portable   11.1 / 11.4 / 12.2   12.8 / 13.3 / 13.8   0.9
//
// and N = 1280 / 3072, avx512 1.73 / 1.90 and 0.77 / 0.86, avx2 2.91 / 2.97 and
// 1.28 / 1.34. At N = 2048, avx512, single precision: Propagate 0.50, Phase 0.19,
// swollen law 0.44, Round 0.015, Load with Store 0.6, once for each stretch
// between recorded times.
//
// The bound: at N = 2048 Propagate does 71 vector additions, multiplications and
// fused ones a point on AVX-512 (10 for each pass of radix 8, 7 of radix 4, each
// way, and 17 for the middle), Phase 28; counted in the assembly. This processor
// can start two a cycle: 1.8 ns at 3.4 GHz for eight lanes, of the 2.05 that a
// step takes.
//
// To repeat:
//
//	go test ./gpe/lanes -run '^$' -bench 'SplitStep|Parts|Transform|Combine|Updater'
//	TAILRACE_KERNEL=avx2 go test ./gpe/lanes -run '^$' -bench SplitStep
//
// Accuracy, all kernels: relative L2 error 3e-15 to 1.3e-14 after 100 steps at
// N = 64 against 128-bit arithmetic, norm drift 1.7e-13 in 1000 steps at N = 512,
// phases within 3.1e-16 (go test -v prints them); kernels agree with each other
// to 1e-13 after 100 steps.
package lanes
