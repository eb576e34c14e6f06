package probe

import (
	"context"
	"fmt"
	"math"
	"sort"

	"tailrace/gpe"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
	"tailrace/gpe/lanes"
)

// FrequencyError reports a frequency that cannot be read.
type FrequencyError struct{ Omega, Top float64 }

func (e *FrequencyError) Error() string {
	return fmt.Sprintf("the frequency %.4g cannot be read from packets of frequencies 0 to %.4g; leave it out, and list the others rising", e.Omega, e.Top)
}

// UnsteadyError reports a flow that did not stay as it was while it was probed.
type UnsteadyError struct{ Departure float64 }

func (e *UnsteadyError) Error() string {
	return fmt.Sprintf("the flow moved by %.1g of its density while it was probed, at most %g is allowed; use a shorter time step or a finer grid", e.Departure, steady)
}

// steady is how far a flow may move: the change of its scattering is about as
// large.
const steady = 1e-3

// Response is what a flow makes of the packets.
type Response struct {
	Up, Down flow.State
	Horizon  flow.Horizon
	OmegaMax float64

	// Rows hold the scattering matrix at each frequency as read from the field,
	// phases included. Comoving and Dying are not filled in.
	Rows []*bogoliubov.Scattering
	// Weight is the norm of the ingoing packets at each frequency, as a share
	// of its peak. What is left of errors goes with its slope.
	Weight []float64

	Grid     gpe.Grid
	TimeStep float64
	Steps    int
	Duration float64 // in ħ/(m c₀²)
	// Departure is the largest |δn| of the flow without a packet at the end, as
	// a share of the largest density: how stationary it was.
	Departure float64

	scatterer *bogoliubov.Scatterer
}

// Stimulate sends packets of all ingoing channels at the horizon of p in the
// full equation and reads the outgoing waves. Errors are ctx's, a
// *FrequencyError, a *WorkError, an *UnsteadyError, those of bogoliubov.NewScatterer for flows
// without a horizon or uniform ends, and those of gpe.NewStationary and
// gpe.NewPropagator. It
// panics when an option is out of range.
func Stimulate(ctx context.Context, p flow.Profile, o Options) (*Response, error) {
	scatterer, err := bogoliubov.NewScatterer(p)
	if err != nil {
		return nil, err
	}
	up, down, horizon := p.Ends()
	o = o.filled(horizon, scatterer.MaxFrequency())
	l := newLayout(p, o)
	omega := o.Omega
	if omega == nil {
		omega = l.middle(40)
	}
	r := &Response{Up: up, Down: down, Horizon: horizon, OmegaMax: scatterer.MaxFrequency(), scatterer: scatterer}
	for i, w := range omega {
		if !(w > 0 && w < l.top) || i > 0 && w <= omega[i-1] {
			return nil, &FrequencyError{w, l.top}
		}
		r.Rows = append(r.Rows, &bogoliubov.Scattering{Omega: w})
		r.Weight = append(r.Weight, l.spectrum(w)*l.spectrum(w))
	}
	ground, err := l.ground(p, o)
	if err != nil {
		return nil, err
	}
	times, reads := l.times()
	prop, err := gpe.NewPropagator(l.grid, o.Law, ground, nil, gpe.Strang(), l.step, times)
	if err != nil {
		return nil, err
	}
	r.Grid, r.TimeStep, r.Steps, r.Duration = l.grid, prop.TimeStep, prop.Steps(), times[len(times)-1]

	b := l.begin(ground, o.Amplitude)
	var in [3][]complex128
	for c := range in {
		in[c] = l.ingoing(departure(b, c, o.Amplitude), c, omega)
	}
	walker := prop.NewWalker(false)
	for leg, t := range times {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		walker.Leg(b, leg)
		if o.Progress != nil {
			o.Progress(t / r.Duration)
		}
		for out := range 3 {
			if reads[out] != leg {
				continue
			}
			for c := range in {
				for i, a := range l.outgoing(departure(b, c, o.Amplitude), out, omega, t) {
					r.Rows[i].S[out][c] = a / in[c][i]
				}
			}
		}
	}
	for _, s := range r.Rows {
		s.UnitarityError = s.Unitarity()
	}
	if r.Departure = ground.Departure(b, alone); !(r.Departure <= steady) {
		return nil, &UnsteadyError{r.Departure}
	}
	return r, nil
}

// carried lists what each lane of the batch carries: a packet of a channel with
// a sign, or the flow alone.
var carried = [lanes.Width]struct {
	channel int
	sign    float64
}{
	2 * bogoliubov.U: {bogoliubov.U, 1}, 2*bogoliubov.U + 1: {bogoliubov.U, -1},
	2 * bogoliubov.D1: {bogoliubov.D1, 1}, 2*bogoliubov.D1 + 1: {bogoliubov.D1, -1},
	2 * bogoliubov.D2: {bogoliubov.D2, 1}, 2*bogoliubov.D2 + 1: {bogoliubov.D2, -1},
}

// alone is a lane without a packet.
const alone = lanes.Width - 1

// begin returns the batch at time 0.
func (l *layout) begin(ground *gpe.Stationary, amplitude float64) *lanes.Batch {
	var packets [3][]complex128
	for c := range packets {
		packets[c] = l.packet(c)
	}
	b := lanes.NewBatch(l.grid.N)
	psi := make([]complex128, l.grid.N)
	for lane, is := range carried {
		for j, z := range ground.Field {
			psi[j] = z * (1 + complex(is.sign*amplitude, 0)*packets[is.channel][j])
		}
		b.SetLane(lane, psi)
	}
	return b
}

// departure returns χ for the packet of channel c in units of its amplitude:
// half the difference of the two signs, which leaves out the second order, over
// the flow alone.
func departure(b *lanes.Batch, c int, amplitude float64) []complex128 {
	chi := b.Lane(nil, 2*c)
	other, psi := b.Lane(nil, 2*c+1), b.Lane(nil, alone)
	for j := range chi {
		chi[j] = (chi[j] - other[j]) / (complex(2*amplitude, 0) * psi[j])
	}
	return chi
}

// ingoing returns the amplitudes of the packet of channel c at time 0.
func (l *layout) ingoing(chi []complex128, c int, omega []float64) []complex128 {
	window := l.before(c)
	a := make([]complex128, len(omega))
	for i, w := range omega {
		waves, _ := bogoliubov.Channels(w, l.up, l.down)
		a[i] = l.amplitude(chi, window, c, waves[c], w, 0)
	}
	return a
}

// outgoing returns the amplitudes of the outgoing waves of channel c at time t.
func (l *layout) outgoing(chi []complex128, c int, omega []float64, t float64) []complex128 {
	window := l.after(c)
	a := make([]complex128, len(omega))
	for i, w := range omega {
		_, waves := bogoliubov.Channels(w, l.up, l.down)
		a[i] = l.amplitude(chi, window, c, waves[c], w, t)
	}
	return a
}

// pieces is in how many legs, at least, a run is cut so that it can be stopped.
const pieces = 100

// times returns the ends of the legs, and at which of them each outgoing
// channel is read.
func (l *layout) times() (times []float64, reads [3]int) {
	order := []int{0, 1, 2}
	sort.Slice(order, func(i, j int) bool { return l.read[order[i]] < l.read[order[j]] })
	from, last := 0.0, l.read[order[2]]
	for _, c := range order {
		to := l.read[c]
		for i, n := 1.0, math.Ceil((to-from)/last*pieces); i <= n; i++ {
			times = append(times, from+(to-from)*i/n)
		}
		reads[c] = len(times) - 1
		from = to
	}
	return times, reads
}

// middle returns count frequencies across the part of the band in which the
// packets have more than a thousandth of their peak norm.
func (l *layout) middle(count int) []float64 {
	// The spectrum rises up to the middle of the band.
	low, high := 0.0, l.top/2
	for range 60 {
		if m := (low + high) / 2; l.spectrum(m)*l.spectrum(m) < 1e-3 {
			low = m
		} else {
			high = m
		}
	}
	omega := make([]float64, count)
	for i := range omega {
		omega[i] = high + (l.top-2*high)*float64(i)/float64(count-1)
	}
	return omega
}
