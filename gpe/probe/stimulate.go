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

// Response is what a flow makes of the packets.
type Response struct {
	Up, Down flow.State
	Horizon  flow.Horizon
	OmegaMax float64

	// Rows hold the scattering matrix at each frequency as read from the field,
	// phases included. Comoving and Dying are not filled in.
	Rows []*bogoliubov.Scattering
	// Weight is the norm of the ingoing packets at each frequency, as a share
	// of its peak.
	Weight []float64

	Grid     gpe.Grid
	TimeStep float64
	Steps    int
	Duration float64 // in ħ/(m c₀²)
	// Departure is the largest |δn| of the flow without a packet at the end,
	// relative to the largest density: how stationary it was.
	Departure float64
}

// Alpha2 returns |α|² = |S_ud1|² at each frequency: quanta of positive norm sent
// upstream for each that came in.
func (r *Response) Alpha2() []float64 { return r.squares(bogoliubov.U, bogoliubov.D1) }

// Beta2 returns |β|² = |S_d2d1|² at each frequency: quanta of negative norm
// sent downstream for each that came in.
func (r *Response) Beta2() []float64 { return r.squares(bogoliubov.D2, bogoliubov.D1) }

func (r *Response) squares(out, in int) []float64 { return squares(r.Rows, out, in) }

func squares(rows []*bogoliubov.Scattering, out, in int) []float64 {
	x := make([]float64, len(rows))
	for i, s := range rows {
		z := s.S[out][in]
		x[i] = real(z)*real(z) + imag(z)*imag(z)
	}
	return x
}

// lanesOf lists what each lane of the batch carries: packets of a channel with
// a sign, and the flow alone.
var lanesOf = [lanes.Width]struct {
	channel int
	sign    float64
}{{bogoliubov.U, 1}, {bogoliubov.U, -1}, {bogoliubov.D1, 1}, {bogoliubov.D1, -1}, {bogoliubov.D2, 1}, {bogoliubov.D2, -1}, {0, 0}, {0, 0}}

// alone is a lane without a packet.
const alone = lanes.Width - 1

// Stimulate sends packets of all ingoing channels at the horizon of p in the
// full equation and reads the outgoing waves. Errors are ctx's, those of
// bogoliubov.NewScatterer for flows without a horizon or uniform ends, and
// those of gpe.NewStationary and gpe.NewPropagator.
func Stimulate(ctx context.Context, p flow.Profile, o Options) (*Response, error) {
	o = o.filled()
	if _, err := bogoliubov.NewScatterer(p); err != nil {
		return nil, err
	}
	l := newLayout(p, o)
	omega := o.Omega
	if omega == nil {
		omega = l.middle(40)
	}
	for i, w := range omega {
		if !(w > 0 && w < l.top) || i > 0 && w <= omega[i-1] {
			return nil, fmt.Errorf("frequency %g is not between 0 and the packets' highest, %.4g, or not above the one before; leave it out", w, l.top)
		}
	}
	ground, err := gpe.NewStationary(l.grid, o.Law, p, l.seam)
	if err != nil {
		return nil, err
	}
	times, reads := l.times()
	prop, err := gpe.NewPropagator(l.grid, o.Law, ground, nil, o.Scheme, o.TimeStep*l.grid.MaxTimeStep(), times)
	if err != nil {
		return nil, err
	}
	r := &Response{Grid: l.grid, TimeStep: prop.TimeStep, Steps: prop.Steps(), Duration: times[len(times)-1]}
	r.Up, r.Down, r.Horizon = p.Ends()
	r.OmegaMax = bogoliubov.MaxFrequency(r.Down.Velocity, r.Down.SoundSpeed)
	b := l.begin(ground, o.Amplitude)

	in := make([][3]complex128, len(omega))
	for c := range 3 {
		window := l.window(c, l.start[c][0], l.start[c][1], l.start[c][0]/2, l.taper())
		chi := departure(b, c, o.Amplitude)
		for i, w := range omega {
			waves, _ := bogoliubov.Channels(w, l.up, l.down)
			in[i][c] = l.amplitude(chi, window, c, waves[c], w, 0)
		}
		f := 0.0
		_ = f
	}
	r.Rows = make([]*bogoliubov.Scattering, len(omega))
	r.Weight = make([]float64, len(omega))
	for i, w := range omega {
		r.Rows[i] = &bogoliubov.Scattering{Omega: w}
		r.Weight[i] = l.spectrum(w) * l.spectrum(w)
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
			inner := l.near[out]
			if out == bogoliubov.U {
				inner += l.left
			} else {
				inner -= l.right
			}
			window := l.window(out, l.near[out], l.far[out], math.Min(inner, l.taper()), l.taper())
			for c := range 3 {
				chi := departure(b, c, o.Amplitude)
				for i, w := range omega {
					_, waves := bogoliubov.Channels(w, l.up, l.down)
					r.Rows[i].S[out][c] = l.amplitude(chi, window, out, waves[out], w, t) / in[i][c]
				}
			}
		}
	}
	for _, s := range r.Rows {
		s.UnitarityError = s.Unitarity()
	}
	r.Departure = ground.Departure(b, alone)
	return r, nil
}

// begin returns the batch at time 0.
func (l *layout) begin(ground *gpe.Stationary, amplitude float64) *lanes.Batch {
	var packets [3][]complex128
	for c := range packets {
		packets[c] = l.packet(c)
	}
	b := lanes.NewBatch(l.grid.N)
	psi := make([]complex128, l.grid.N)
	for lane, is := range lanesOf {
		for j, z := range ground.Field {
			psi[j] = z * (1 + complex(is.sign*amplitude, 0)*packets[is.channel][j])
		}
		b.SetLane(lane, psi)
	}
	return b
}

// departure returns χ for the packet of channel c: half the difference of the
// two signs, which leaves out the second order, over the flow alone.
func departure(b *lanes.Batch, c int, amplitude float64) []complex128 {
	var plus, minus int
	for lane, is := range lanesOf {
		if is.channel == c && is.sign > 0 {
			plus = lane
		}
		if is.channel == c && is.sign < 0 {
			minus = lane
		}
	}
	chi := b.Lane(nil, plus)
	other, psi := b.Lane(nil, minus), b.Lane(nil, alone)
	for j := range chi {
		chi[j] = (chi[j] - other[j]) / (complex(2*amplitude, 0) * psi[j])
	}
	return chi
}

// piece is the longest leg, so that a run can be stopped: how many of them
// there are at least.
const pieces = 100

// times returns the ends of the legs, and at which of them each outgoing
// channel is read.
func (l *layout) times() (times []float64, reads [3]int) {
	order := []int{0, 1, 2}
	sort.Slice(order, func(i, j int) bool { return l.read[order[i]] < l.read[order[j]] })
	end := l.read[order[2]]
	from := 0.0
	for _, c := range order {
		if n := math.Ceil((l.read[c] - from) / end * pieces); n > 0 {
			for i := 1.0; i <= n; i++ {
				times = append(times, from+(l.read[c]-from)*i/n)
			}
		}
		reads[c] = len(times) - 1
		from = l.read[c]
	}
	return times, reads
}

// middle returns count frequencies across the part of the band in which the
// packets have more than a thousandth of their peak norm.
func (l *layout) middle(count int) []float64 {
	// Where I₀ has fallen so far, by bisection on the rising half.
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
