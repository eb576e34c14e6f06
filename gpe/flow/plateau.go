package flow

import (
	"math"

	"tailrace/gpe/fluid"
)

// plateau is the flow seen from one of its uniform ends: the amplitude A = √n
// is written A₀ + a, and everything is arranged so that a keeps its relative
// accuracy when it is exponentially small.
type plateau struct {
	law      fluid.Expansion
	density  float64 // n₀
	speed2   float64 // v₀²
	amp      float64 // A₀
	depth    float64
	width    float64
	upstream bool
	// rate is the decay rate of small departures upstream,
	// 2√(c² − v²), or their wave number downstream, 2√(v² − c²).
	rate float64
}

func newPlateau(law fluid.Law, s State, depth, width float64, upstream bool) *plateau {
	return &plateau{
		law:      law.About(s.Density),
		density:  s.Density,
		speed2:   s.Velocity * s.Velocity,
		amp:      math.Sqrt(s.Density),
		depth:    depth,
		width:    width,
		upstream: upstream,
		rate:     2 * math.Sqrt(math.Abs((s.SoundSpeed-s.Velocity)*(s.SoundSpeed+s.Velocity))),
	}
}

// potential is V(x) less its value at this end.
func (p *plateau) potential(x float64) float64 {
	if p.width == 0 {
		switch {
		case p.upstream && x > 0:
			return -p.depth
		case !p.upstream && x < 0:
			return p.depth
		}
		return 0
	}
	z := 2 * x / p.width
	if p.upstream {
		return -p.depth * logistic(z)
	}
	return p.depth * logistic(-z)
}

// force is a″ from the stationary equation A″ = 2(V + f(A²) − μ)A + j²/A³,
// with μ and j those of the plateau:
//
//	a″ = A [2 δV + 2(f(n) − f(n₀)) − v₀²(n² − n₀²)/n²].
func (p *plateau) force(x, a float64) float64 {
	A := p.amp + a
	n := A * A
	dn := a * (p.amp + A)
	return A * (2*(p.potential(x)+p.law.Rise(dn)) - p.speed2*dn*(n+p.density)/(n*n))
}

// slope2 is a′² on the separatrix of the flat region, where the first
// integral has its plateau value: ½a′² = e(n) − e(n₀) − f(n₀)δn − ½v₀²δn²/n.
// It is negative where no separatrix passes.
func (p *plateau) slope2(a float64) float64 {
	A := p.amp + a
	dn := a * (p.amp + A)
	return 2*p.law.Excess(dn) - p.speed2*dn*dn/(A*A)
}

// response is the departure and its slope that the exponential tail of the
// step forces on the downstream plateau at x, to first order.
func (p *plateau) response(x float64) (a, slope float64) {
	if p.width == 0 {
		return 0, 0
	}
	k := 2 / p.width
	a = 2 * p.amp * p.potential(x) / (k*k + p.rate*p.rate)
	return a, -k * a
}
