package gpe

import (
	"math"

	"tailrace/gpe/lanes"
)

// Landscape is what the atoms move in: a potential and a coupling that may
// change in time, and the velocity of the frame in which the field is
// written.
type Landscape interface {
	// Potential fills dst[j] = scale·V(x_j, t).
	Potential(dst []float64, t, scale float64)
	// Coupling fills dst[j] = scale·g(x_j, t).
	Coupling(dst []float64, t, scale float64)
	// Steady reports that V, or g, does not change after time t, so that its
	// table can be kept.
	Steady(t float64) (potential, coupling bool)
	// Power fills dv and dg with ∂V/∂t and ∂g/∂t at time t for points lo to
	// hi−1 and returns that range; outside it both vanish.
	Power(dv, dg []float64, t float64) (lo, hi int)
	// Drift is the velocity v of the frame: the field carries exp(ivx) that
	// is not stored, and the kinetic energy of wave k is k²/2 + vk.
	Drift() float64
}

// Confinement is the trap along the cloud.
type Confinement interface {
	// At returns the trapping potential at x, before anything is opened.
	At(x float64) float64
	// Opened returns what is left of it when the right-hand end is open.
	Opened(x float64) float64
	// RightEdge is where a swept step starts by default: the middle of the
	// right-hand wall, or the edge of the cloud.
	RightEdge() float64
}

// Box is a box trap with smooth walls: V = H(1 + tanh((|x| − Length/2)/WallWidth))/2.
type Box struct {
	Length     float64 // between the middles of the walls, in ξ
	WallWidth  float64 // in ξ
	WallHeight float64 // H, in m c₀²
}

func (b Box) wall(d float64) float64 { return b.WallHeight * (1 + math.Tanh(d/b.WallWidth)) / 2 }

// At returns the potential of both walls.
func (b Box) At(x float64) float64 { return b.wall(x-b.Length/2) + b.wall(-x-b.Length/2) }

// Opened returns the potential of the left wall alone.
func (b Box) Opened(x float64) float64 { return b.wall(-x - b.Length/2) }

// RightEdge returns Length/2.
func (b Box) RightEdge() float64 { return b.Length / 2 }

// Harmonic is the trap V = ω²x²/2. Nothing of it opens.
type Harmonic struct {
	Frequency float64 // ω, in m c₀²/ħ
	Edge      float64 // where the cloud ends: the Thomas–Fermi radius, in ξ
}

// At returns ω²x²/2.
func (h Harmonic) At(x float64) float64 { return h.Frequency * h.Frequency * x * x / 2 }

// Opened returns ω²x²/2.
func (h Harmonic) Opened(x float64) float64 { return h.At(x) }

// RightEdge returns the Thomas–Fermi radius.
func (h Harmonic) RightEdge() float64 { return h.Edge }

// Sweep is a step V = −Depth(1 + tanh((x−x_s(t))/Width))/2 that starts at
// x_s = Start at t = 0 and moves to the left at Speed through a trap whose
// right end opens. With Ramp = 0 the trap is open and the step there at full
// depth from t = 0 on; else the depth rises and the wall falls together as
// sin²(πt/2·Ramp).
type Sweep struct {
	Trap                Confinement
	Depth, Width, Speed float64
	Start               float64 // absolute, in ξ from the middle of the cloud
	Ramp                float64

	grid           Grid
	closed, opened []float64
	table          *lanes.StepTable
}

// NewSweep prepares the tables of s on grid g.
func NewSweep(g Grid, s Sweep) *Sweep {
	s.grid = g
	s.closed, s.opened = make([]float64, g.N), make([]float64, g.N)
	for j := range g.N {
		s.closed[j], s.opened[j] = s.Trap.At(g.X(j)), s.Trap.Opened(g.X(j))
	}
	s.table = lanes.NewStepTable(g.Origin, g.Dx, g.N, s.Width)
	return &s
}

// Position returns the middle of the step at time t.
func (s *Sweep) Position(t float64) float64 { return s.Start - s.Speed*t }

// opening returns how far the sweep has been switched on, and its rate.
func (s *Sweep) opening(t float64) (f, rate float64) {
	if s.Ramp <= 0 || t >= s.Ramp {
		return 1, 0
	}
	if t <= 0 {
		return 0, 0
	}
	phase := math.Pi * t / (2 * s.Ramp)
	return math.Sin(phase) * math.Sin(phase), math.Pi / (2 * s.Ramp) * math.Sin(2*phase)
}

// Potential implements Landscape.
func (s *Sweep) Potential(dst []float64, t, scale float64) {
	f, _ := s.opening(t)
	if f == 1 {
		s.table.Fill(dst, s.opened, s.Depth, s.Position(t), scale)
		return
	}
	s.table.Fill(dst, s.opened, f*s.Depth, s.Position(t), scale)
	for j := range dst {
		dst[j] += scale * (1 - f) * (s.closed[j] - s.opened[j])
	}
}

// Coupling implements Landscape: g = 1.
func (s *Sweep) Coupling(dst []float64, t, scale float64) { fill(dst, scale) }

// Steady implements Landscape.
func (s *Sweep) Steady(t float64) (potential, coupling bool) {
	return s.Speed == 0 && (s.Ramp <= 0 || t >= s.Ramp), true
}

// reach is how many step widths from its middle a tanh counts as flat:
// sech²(20) = 2·10⁻¹⁷.
const reach = 20

// Power implements Landscape.
func (s *Sweep) Power(dv, dg []float64, t float64) (lo, hi int) {
	f, rate := s.opening(t)
	xs := s.Position(t)
	lo, hi = 0, s.grid.N
	if rate == 0 {
		lo = max(0, int(math.Floor((xs-reach*s.Width-s.grid.Origin)/s.grid.Dx)))
		hi = min(s.grid.N, int(math.Ceil((xs+reach*s.Width-s.grid.Origin)/s.grid.Dx))+1)
		if lo >= hi || s.Depth == 0 {
			return 0, 0
		}
	}
	if rate == 0 {
		// e^{2(x−x_s)/w} is a geometric series: one exponential for them all.
		e, factor := math.Exp(2*(s.grid.X(lo)-xs)/s.Width), math.Exp(2*s.grid.Dx/s.Width)
		scale := -2 * s.Depth * s.Speed / s.Width
		for j := lo; j < hi; j++ {
			// sech²y = 4e/(1+e)² with e = e^{2y}
			dv[j], dg[j] = scale*e/((1+e)*(1+e)), 0
			e *= factor
		}
		return lo, hi
	}
	for j := lo; j < hi; j++ {
		th := math.Tanh((s.grid.X(j) - xs) / s.Width)
		dv[j] = -f*s.Depth*s.Speed*(1-th*th)/(2*s.Width) -
			rate*(s.Depth*(1+th)/2+s.closed[j]-s.opened[j])
		dg[j] = 0
	}
	return lo, hi
}

// Drift implements Landscape: the field is written in the laboratory.
func (s *Sweep) Drift() float64 { return 0 }

// Switch is a uniform flow on a ring whose sound speed downstream is switched
// on: density 1 and velocity Velocity everywhere and always, and
//
//	c²(x,t) = c_u² + (c_d² − c_u²) F(x) S(t),
//	F = (1 + tanh(x/Width))/2 near x = 0, back to nought half a ring away,
//	S = (1 + tanh((t − 4 Ramp)/Ramp))/2, or 1 at once when Ramp = 0,
//
// with the potential V = c_u² − c² that keeps the density uniform. Lengths are
// in units of 1/c for c = 1; SoundUp need not be 1.
//
// A ring needs a way back from d to u. It lies half a ring away and is wide
// (Seam), so that waves of the branch that could scatter there follow it
// adiabatically and whatever it sends out arrives late.
type Switch struct {
	Velocity, SoundUp, SoundDown float64
	Width, Ramp                  float64
	Seam                         float64 // position of the way back, in ξ

	grid  Grid
	shape []float64 // F
}

// NewSwitch prepares the tables of s on grid g. Unless it is given, the way
// back is at seven tenths of the space right of the horizon; it is wide, and
// at the ring's join F has fallen to 2·10⁻⁹.
func NewSwitch(g Grid, s Switch) *Switch {
	s.grid = g
	right := g.Origin + g.Length()
	if s.Seam == 0 {
		s.Seam = 0.7 * right
	}
	width := (right - s.Seam) / 10
	s.shape = make([]float64, g.N)
	for j := range s.shape {
		x := g.X(j)
		front, back := logistic(2*x/s.Width), logistic(-2*(x-s.Seam)/width)
		if s.Width == 0 {
			front = 0.5 * (1 + sign(x))
		}
		s.shape[j] = front * back
	}
	return &s
}

func sign(x float64) float64 {
	if x == 0 {
		return 0
	}
	return math.Copysign(1, x)
}

// logistic returns (1+tanh(y/2))/2.
func logistic(y float64) float64 { return 1 / (1 + math.Exp(-y)) }

func (s *Switch) on(t float64) (f, rate float64) {
	if s.Ramp <= 0 {
		return 1, 0
	}
	y := (t - 4*s.Ramp) / s.Ramp
	if y > reach {
		return 1, 0
	}
	f = logistic(2 * y)
	return f, 2 * f * (1 - f) / s.Ramp
}

// contrast returns c_d² − c_u².
func (s *Switch) contrast() float64 { return s.SoundDown*s.SoundDown - s.SoundUp*s.SoundUp }

// Potential implements Landscape.
func (s *Switch) Potential(dst []float64, t, scale float64) {
	f, _ := s.on(t)
	a := -scale * s.contrast() * f
	for j, F := range s.shape {
		dst[j] = a * F
	}
}

// Coupling implements Landscape.
func (s *Switch) Coupling(dst []float64, t, scale float64) {
	f, _ := s.on(t)
	a, b := scale*s.SoundUp*s.SoundUp, scale*s.contrast()*f
	for j, F := range s.shape {
		dst[j] = a + b*F
	}
}

// Steady implements Landscape.
func (s *Switch) Steady(t float64) (potential, coupling bool) {
	_, rate := s.on(t)
	return rate == 0, rate == 0
}

// Power implements Landscape.
func (s *Switch) Power(dv, dg []float64, t float64) (lo, hi int) {
	_, rate := s.on(t)
	if rate == 0 {
		return 0, 0
	}
	a := s.contrast() * rate
	for j, F := range s.shape {
		dv[j], dg[j] = -a*F, a*F
	}
	return 0, s.grid.N
}

// Drift implements Landscape: the field is written in the flow's own frame.
func (s *Switch) Drift() float64 { return s.Velocity }

func fill(dst []float64, v float64) {
	for j := range dst {
		dst[j] = v
	}
}
