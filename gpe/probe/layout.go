package probe

import (
	"fmt"
	"math"
	"slices"

	"tailrace/gpe"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// layout says where and when: all packets are at the horizon at the same time,
// and each outgoing wave is read when it is clear of the horizon and of the
// others on its side.
type layout struct {
	up, down flow.State
	horizon  float64
	left     float64 // outside left and right, relative to the horizon, the flow is uniform
	right    float64
	top      float64 // end of the packets' band
	shape    float64 // Concentration
	duration float64 // from their middle in time to their ends

	arrival float64 // when the packets are at the horizon
	// Where they are at first, and where and when the outgoing waves are read:
	// distances from the horizon, all positive.
	start, end [3]extent
	read       [3]float64

	length, reach float64 // of the ring, and upstream of the horizon
	points        int
	grid          gpe.Grid
	step          float64    // in time
	shortest      [3]float64 // wavenumbers of the shortest ingoing waves
}

// flat is how far a flow may be from its ends, relatively, where waves are told
// apart.
const flat = 1e-6

// crowd is how many frequencies stand for the band when room is made for it.
const crowd = 64

// newLayout makes room for the scattering.
func newLayout(p flow.Profile, o Options) *layout {
	l := &layout{shape: o.Concentration}
	var h flow.Horizon
	l.up, l.down, h = p.Ends()
	l.horizon = h.Position
	l.left, l.right = uniformBeyond(p)
	l.top = o.Top * bogoliubov.MaxFrequency(l.down.Velocity, l.down.SoundSpeed)
	l.duration = 2 * math.Hypot(l.shape, math.Pi) / l.top

	// Fastest and slowest of every channel over the part of the band that
	// carries more than a thousandth of the peak.
	var in, out [3]extent
	for i := 1; i < crowd; i++ {
		omega := l.top * float64(i) / crowd
		if l.spectrum(omega) < 1e-3 {
			continue
		}
		a, b := bogoliubov.Channels(omega, l.up, l.down)
		for c := range 3 {
			in[c].add(math.Abs(a[c].Speed))
			out[c].add(math.Abs(b[c].Speed))
			l.shortest[c] = math.Max(l.shortest[c], math.Abs(a[c].K))
		}
	}
	margin := [3]float64{-l.left, l.right, l.right}
	for c := range 3 {
		l.arrival = math.Max(l.arrival, l.duration+margin[c]/in[c].least)
	}
	var reach [2]float64 // upstream and downstream
	side := func(c int) *float64 { return &reach[min(c, 1)] }
	for c := range 3 {
		l.start[c] = extent{in[c].least * (l.arrival - l.duration), in[c].most * (l.arrival + l.duration)}
		*side(c) = math.Max(*side(c), l.start[c].most)
		// Twice the way, as waves are slower within.
		l.read[c] = l.arrival + l.duration + 2*margin[c]/out[c].least
	}
	// The fast wave downstream has left the slow one behind when they are read.
	fast, slow := out[bogoliubov.D1].least, out[bogoliubov.D2].most
	apart := l.arrival + (l.duration*(fast+slow)+l.gap())/(fast-slow)
	l.read[bogoliubov.D1] = math.Max(l.read[bogoliubov.D1], apart)
	l.read[bogoliubov.D2] = math.Max(l.read[bogoliubov.D2], apart)
	last := 0.0
	for c := range 3 {
		since := l.read[c] - l.arrival
		l.end[c] = extent{out[c].least * (since - l.duration), out[c].most * (since + l.duration)}
		*side(c) = math.Max(*side(c), l.end[c].most)
		last = math.Max(last, since)
	}
	// The fast wave must not come round to the horizon before the end.
	room := 2 * l.gap() // for the windows' edges
	seam := 2.0 * gpe.SeamReach * seamWidth
	reach[0] += room
	reach[1] += room
	if round := out[bogoliubov.D1].most * (last + l.duration); round > reach[0]+reach[1]+seam {
		reach[1] = round - reach[0] - seam
	}
	shortest := slices.Max(l.shortest[:])
	l.length, l.reach = reach[0]+reach[1]+seam, reach[0]
	l.points = points(l.length / math.Pi * o.Resolution * (finest*shortest + math.Abs(l.down.Velocity-l.up.Velocity)))
	return l
}

// finest is the grid's k_max over that of the shortest waves, beyond what the
// phase of the flow takes. With it the grid's error is below 10⁻³ of the
// amplitudes (see the tests).
const finest = 3.5

// rounding is how well the grid must resolve the flow: at 6·10⁻³ (a tanh of
// width 1 at dx = 0.52) amplitudes are right to 10⁻³, at 0.12 (the same of width
// 0.5 at dx = 0.66) to 5·10⁻².
const rounding = 0.01

// maxStep is the longest time step that does not resonate. In a fluid that moves
// at v−d in the field's frame the grid carries waves up to k_max + |v−d| seen from
// the fluid, and repulsion adds c² to their k²/2:
//
//	dt ((k_max + |v−d|)²/2 + c²) < π.
func (l *layout) maxStep() float64 {
	k := l.grid.MaxWavenumber() + math.Abs(l.down.Velocity-l.up.Velocity)
	c := math.Max(l.up.SoundSpeed, l.down.SoundSpeed)
	return math.Pi / (k*k/2 + c*c)
}

// timeStep sets the longest time step that does not resonate and with which the
// ingoing waves' phases are right to steadiness over the duration.
func (l *layout) timeStep() {
	l.step = 0.95 * l.maxStep()
	for {
		worst := 0.0
		for c, k := range l.shortest {
			worst = math.Max(worst, math.Abs(l.shift(k, l.side(c).SoundSpeed))*l.duration)
		}
		if worst <= steadiness {
			return
		}
		l.step *= 0.9
	}
}

// shift returns by how much the time step shifts the frequency of the wave k in
// a fluid at rest. Strang's splitting turns it by ε′dt in a step,
//
//	cos ε′dt = cos(k²dt/2) − c²dt sin(k²dt/2).
func (l *layout) shift(k, speed float64) float64 {
	sin, cos := math.Sincos(k * k * l.step / 2)
	return math.Acos(cos-speed*speed*l.step*sin)/l.step - bogoliubov.Energy(k, speed)
}

// steadiness is how far a packet's phase may be off after its duration because
// of the time step. Amplitudes are read at the wavenumbers that waves of their
// frequency then have, so that in a uniform flow nothing is left of it; but the
// flow at the horizon is off in proportion, and with it |α|² and |β|²: by
// 10⁻³ and 5·10⁻³ for half-solitons of Mach numbers 0.7 and 0.9 upstream.
const steadiness = 0.03

// most is how many points times steps a probe may take: a minute or two on one
// processor with vector units.
const most = 5e9

// WorkError reports a flow that would take too long to probe: one hardly beyond
// the speed of sound, whose waves are slow and long, or a very sharp one.
type WorkError struct {
	Points int
	Steps  float64
}

func (e *WorkError) Error() string {
	return fmt.Sprintf("probing this flow would take %d points times %.2g steps, at most %.0e together are allowed; take a flow with a larger Mach number downstream, a smoother step, or a longer time step", e.Points, e.Steps, most)
}

// ground returns the flow on the first grid that resolves it.
func (l *layout) ground(p flow.Profile, o Options) (*gpe.Stationary, error) {
	for {
		l.grid = gpe.NewGrid(l.points, l.length, l.horizon-l.reach)
		if l.step = o.TimeStep; l.step == 0 {
			l.timeStep()
		}
		if limit := l.maxStep(); l.step > limit {
			return nil, &gpe.TimeStepError{Step: l.step, Limit: limit}
		}
		if steps := slices.Max(l.read[:]) / l.step; steps*float64(l.points) > most {
			return nil, &WorkError{l.points, steps}
		}
		s, err := gpe.NewStationary(l.grid, o.Law, p, seamWidth)
		if err != nil || s.Rounding <= rounding {
			return s, err
		}
		l.points = points(1.2 * float64(l.points))
	}
}

// seamWidth is that of the way back, in ξ. Nothing that happens there is seen.
const seamWidth = 4

// gap is the width of the windows' edges where there is room for it.
func (l *layout) gap() float64 { return 3 * math.Max(-l.left, l.right) }

// extent is a range of speeds or distances.
type extent struct{ least, most float64 }

func (e *extent) add(v float64) {
	if e.most == 0 {
		e.least = v
	}
	e.least, e.most = math.Min(e.least, v), math.Max(e.most, v)
}

// points returns the least number of points that the propagator takes.
func points(least float64) int {
	best := 0
	for _, odd := range []int{1, 3, 5} {
		n := 16 * odd
		for float64(n) < least {
			n *= 2
		}
		if best == 0 || n < best {
			best = n
		}
	}
	return best
}

// uniformBeyond returns the places, relative to the horizon, outside which the
// flow is flat.
func uniformBeyond(p flow.Profile) (left, right float64) {
	up, down, h := p.Ends()
	a, b := p.Span()
	off := func(x float64, s flow.State) bool {
		n, v := p.At(x)
		return math.Abs(n/s.Density-1) > flat || math.Abs(v/s.Velocity-1) > flat || math.Abs(p.SoundSpeed(x)/s.SoundSpeed-1) > flat
	}
	const steps = 1000
	left, right = a, b
	for i := range steps {
		left = a + (b-a)*float64(i)/steps
		if off(left, up) {
			break
		}
	}
	for i := range steps {
		right = b - (b-a)*float64(i)/steps
		if off(right, down) {
			break
		}
	}
	// At least a length to count on, should the profile be a sharp edge.
	return math.Min(left-h.Position, -1/up.SoundSpeed), math.Max(right-h.Position, 1/down.SoundSpeed)
}

// spectrum is the packets' amplitude against frequency, 1 at its peak: the
// window of J. F. Kaiser (from memory: R. W. Hamming, Digital Filters, 1977),
// which of all with a band is nearly the most confined in time.
func (l *layout) spectrum(omega float64) float64 {
	y := 2*omega/l.top - 1
	if y <= -1 || y >= 1 {
		return 0
	}
	return besselI0(l.shape*math.Sqrt((1-y)*(1+y))) / besselI0(l.shape)
}

// besselI0 is the modified Bessel function I₀ by its series.
func besselI0(x float64) float64 {
	sum, term := 1.0, 1.0
	for k := 1.0; term > 1e-17*sum; k++ {
		term *= x * x / (4 * k * k)
		sum += term
	}
	return sum
}
