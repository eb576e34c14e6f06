package bogoliubov

import (
	"math"
	"sync"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/integrate/quad"

	"tailrace/gpe/flow"
)

// Band is the negative band that pairs from the horizon draw across the map of
// density correlations, for a thermal horizon and with the dispersion of the
// waves kept:
//
//	g₂ − 1 = −1/(π√(n_u n_d)) ∫₀^{ω_max} dω √(S₀(k_u)S₀(k_d)/(w_u w_d))
//	         · cos(k_u x − k_d x' + ωt₀) / (2 sinh(ω/2T)),
//
// with x < 0 upstream and x' > 0 downstream of the horizon, the outgoing waves
// of OutgoingUp and OutgoingDown, their group speeds w and S₀ = E/ε. Where
// k = ω/w it is the sech² band of SechAmplitude with κ = 2πT. The thermal
// weight is that of the coherence |⟨b_u b_d⟩| = 1/(2 sinh(ω/2T)) of
// A. Recati, N. Pavloff, I. Carusotto, Phys. Rev. A 80, 043603 (2009).
//
// A Band may be used by several goroutines at once.
type Band struct {
	up, down flow.State
	atoms    float64 // √(n_u n_d) in atoms per healing length
	top      float64 // k_d at ω_max
	limit    float64 // ω_max
	upTop    float64 // |k_u| at ω_max
	response Response

	rules [bandLevels]struct {
		once sync.Once
		rule bandRule
	}
}

// bandRule is a quadrature in ω, with everything that depends on neither
// temperature nor place.
type bandRule struct {
	omega, up, down []float64 // ω, k_u, k_d
	weight          []float64 // √(S₀S₀/(w_u w_d)) dω /(π√(n_u n_d))
}

const (
	bandLevels   = 7  // rules of 64, 128, … 4096 points are kept once made
	bandShortest = 64 // points
)

// NewBand returns the band of a horizon between the two states, for
// atomsPerLength atoms per healing length at density 1. It panics unless
// 0 ≤ v < c upstream, v > c downstream and atomsPerLength > 0.
func NewBand(up, down flow.State, atomsPerLength float64) *Band {
	if !(atomsPerLength > 0) {
		panic("bogoliubov: atoms per length must be positive")
	}
	if !(down.Velocity > down.SoundSpeed) {
		panic("bogoliubov: the flow downstream must be supersonic")
	}
	b := &Band{
		up:    up,
		down:  down,
		atoms: atomsPerLength * math.Sqrt(up.Density*down.Density),
		limit: MaxFrequency(down.Velocity, down.SoundSpeed),
	}
	b.top, _ = topWave(down.Velocity, down.SoundSpeed)
	k, _ := OutgoingUp(b.limit, up.Velocity, up.SoundSpeed)
	b.upTop = -k
	return b
}

// Response is the factor with which the product of a density wave ku upstream
// and one kd downstream appears in pictures: that of imaging and pixels for each
// of them, and that of a position which is not known for the two together.
type Response func(ku, kd float64) float64

// SetResponse makes the band that of such pictures. It is called before the
// band is used.
func (b *Band) SetResponse(r Response) { b.response = r }

// makeRule returns the Gauss–Legendre rule of n points in y, where
// k_d = k_top(1 − y²): at the top of the branch the group speed vanishes in
// proportion to y², and √w_d dk is smooth in y.
func (b *Band) makeRule(n int) bandRule {
	r := bandRule{
		omega:  make([]float64, n),
		up:     make([]float64, n),
		down:   make([]float64, n),
		weight: make([]float64, n),
	}
	y, w := make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(y, w, 0, 1)
	vd, cd := b.down.Velocity, b.down.SoundSpeed
	for i, yi := range y {
		kd := b.top * (1 - yi) * (1 + yi)
		omega := kd * (vd - phaseSpeed(kd, cd))
		ku, wu := OutgoingUp(omega, b.up.Velocity, b.up.SoundSpeed)
		wd := vd - groupSpeed(kd, cd)
		su := StructureFactor(ku, b.up.SoundSpeed, 0)
		sd := StructureFactor(kd, cd, 0)
		r.omega[i], r.up[i], r.down[i] = omega, ku, kd
		// dω = w_d dk_d = w_d · 2 k_top y dy.
		r.weight[i] = math.Sqrt(su*sd*math.Max(wd, 0)/wu) * 2 * b.top * yi * w[i] / (math.Pi * b.atoms)
		if b.response != nil {
			r.weight[i] *= b.response(ku, kd)
		}
	}
	return r
}

// points returns how many points resolve the given reach in phase and the
// temperature: half a point a radian because y runs at most twice as fast as
// its mean, and some for the poles of 1/sinh at ω = 2πiT.
func (b *Band) points(phase, T float64) int {
	return int(40 + 0.55*phase + 12*math.Sqrt(math.Min(b.limit/T, 1e6)))
}

func (b *Band) phase(x, xp, t0 float64) float64 {
	return b.upTop*math.Abs(x) + b.top*math.Abs(xp) + b.limit*math.Abs(t0)
}

func (b *Band) rule(n int) *bandRule {
	for level := range b.rules {
		if size := bandShortest << level; size >= n {
			l := &b.rules[level]
			l.once.Do(func() { l.rule = b.makeRule(size) })
			return &l.rule
		}
	}
	r := b.makeRule(n)
	return &r
}

// thermal is the weight 1/(2 sinh(ω/2T)).
func thermal(omega, T float64) float64 { return 1 / (2 * math.Sinh(omega/(2*T))) }

// At returns g₂ − 1 at x upstream and xp downstream of the horizon, for a
// horizon of temperature T > 0 and a delay t0. It panics if T is not positive.
func (b *Band) At(x, xp, T, t0 float64) float64 {
	mustBeWarm(T)
	r := b.rule(b.points(b.phase(x, xp, t0), T))
	var sum float64
	for i, omega := range r.omega {
		sum += r.weight[i] * thermal(omega, T) * math.Cos(r.up[i]*x-r.down[i]*xp+omega*t0)
	}
	return -sum
}

func mustBeWarm(T float64) {
	if !(T > 0) {
		panic("bogoliubov: the horizon's temperature must be positive")
	}
}

// Window is the band over a rectangle of points. The waves at the points are
// kept, so that a new temperature or delay costs one matrix product: the
// cosine of the sum is separable in x and x'.
type Window struct {
	rule *bandRule
	x    blas64.General // points upstream × 2 waves: cos(k_u x), sin(k_u x)
	xp   blas64.General // points downstream × 2 waves: cos(k_d x'), sin(k_d x')
	work blas64.General // x with the weights of the pairing and t0
}

// Over returns the band over the points x × xp, for temperatures down to
// coldest > 0 and delays up to longest in size.
func (b *Band) Over(x, xp []float64, coldest, longest float64) *Window {
	mustBeWarm(coldest)
	if len(x) == 0 || len(xp) == 0 {
		panic("bogoliubov: the window of a band needs points on both sides")
	}
	var reachX, reachXp float64
	for _, p := range x {
		reachX = math.Max(reachX, math.Abs(p))
	}
	for _, p := range xp {
		reachXp = math.Max(reachXp, math.Abs(p))
	}
	// Few sizes, so that windows that differ little have the same frequencies.
	n := bandShortest
	for need := b.points(b.phase(reachX, reachXp, longest), coldest); n < need; {
		if n&(n-1) == 0 {
			n += n / 2
		} else {
			n += n / 3
		}
	}
	rule := b.makeRule(n)
	return &Window{
		rule: &rule,
		x:    waves(x, rule.up),
		xp:   waves(xp, rule.down),
		work: blas64.General{Rows: len(x), Cols: 2 * n, Stride: 2 * n, Data: make([]float64, 2*n*len(x))},
	}
}

func waves(x, k []float64) blas64.General {
	n := len(k)
	m := blas64.General{Rows: len(x), Cols: 2 * n, Stride: 2 * n, Data: make([]float64, 2*n*len(x))}
	for i, p := range x {
		row := m.Data[i*2*n:]
		for q, kq := range k {
			row[2*q+1], row[2*q] = math.Sincos(kq * p)
		}
	}
	return m
}

// Map stores g₂ − 1 at every point in dst, row by row of x with xp running
// fastest, and returns it; a nil dst is allocated. T and t0 must lie in the
// range given to Over. A Window may not be used by two goroutines at once.
func (w *Window) Map(dst []float64, T, t0 float64) []float64 {
	return w.Paired(dst, thermalPairing(w.rule.omega, T), t0)
}

// Paired is Map for a given pairing ⟨b_u b_d2⟩ at the window's frequencies.
func (w *Window) Paired(dst []float64, pairing []complex128, t0 float64) []float64 {
	rows, cols := w.x.Rows, w.xp.Rows
	if dst == nil {
		dst = make([]float64, rows*cols)
	}
	if len(dst) != rows*cols || len(pairing) != len(w.rule.omega) {
		panic("bogoliubov: the map or the pairing has the wrong length")
	}
	// Re[p e^{i(α − β)}] = (a cos α − b sin α) cos β + (a sin α + b cos α) sin β
	// with p e^{iωt₀} = a + ib, α = k_u x, β = k_d x'.
	n := w.x.Stride
	for q, omega := range w.rule.omega {
		sin, cos := math.Sincos(omega * t0)
		p := complex(w.rule.weight[q], 0) * pairing[q] * complex(cos, sin)
		a, b := real(p), imag(p)
		for at := 2 * q; at < len(w.x.Data); at += n {
			c, s := w.x.Data[at], w.x.Data[at+1]
			w.work.Data[at] = a*c - b*s
			w.work.Data[at+1] = a*s + b*c
		}
	}
	blas64.Gemm(blas.NoTrans, blas.Trans, 1, w.work, w.xp, 0,
		blas64.General{Rows: rows, Cols: cols, Stride: cols, Data: dst})
	return dst
}

// The band in the limit of sound without dispersion, where it is
// g₂ − 1 = −A sech²(κs/2): R. Balbinot, A. Fabbri, S. Fagnocchi, A. Recati,
// I. Carusotto, Phys. Rev. A 78, 021603(R) (2008).

// SechAmplitude returns A = κ²/(16π √(c_u c_d)(c_u − v_u)(v_d − c_d)√(n_u n_d))
// for surface gravity kappa and atomsPerLength atoms per healing length at
// density 1.
func SechAmplitude(kappa float64, up, down flow.State, atomsPerLength float64) float64 {
	return kappa * kappa / (16 * math.Pi *
		math.Sqrt(up.SoundSpeed*down.SoundSpeed) *
		(up.SoundSpeed - up.Velocity) * (down.Velocity - down.SoundSpeed) *
		atomsPerLength * math.Sqrt(up.Density*down.Density))
}

// Delay returns s = x/(c_u − v_u) + x'/(v_d − c_d), the difference of the times
// at which sound that is at x' and x left the horizon; the band lies at s = 0.
func Delay(x, xp float64, up, down flow.State) float64 {
	return x/(up.SoundSpeed-up.Velocity) + xp/(down.Velocity-down.SoundSpeed)
}

// Slope returns dx'/dx = −(v_d − c_d)/(c_u − v_u) along the line s = 0 of the
// map.
func Slope(up, down flow.State) float64 {
	return -(down.Velocity - down.SoundSpeed) / (up.SoundSpeed - up.Velocity)
}
