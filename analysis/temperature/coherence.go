package temperature

import (
	"fmt"
	"math"
	"math/cmplx"

	"tailrace/analysis/band"
	"tailrace/analysis/fit"
	"tailrace/gpe/bogoliubov"
)

// Coherence is |⟨b_u b_d2⟩|(ω) as the window's double transform shows it
// (bogoliubov.Transform), and the fit of the thermal 1/(2 sinh(ω/2T)), put
// through the same window, to it. Only sizes are fitted, so that neither a
// delay nor the phase of the scattering matters; the height does.
type Coherence struct {
	Omega         []float64
	Value, Error  []float64 // |⟨b_u b_d2⟩| and its standard error
	Resolution    float64   // 2π over the window's length in time
	T, Delay      float64
	Samples       []float64 // of T
	Failed        int
	transform     *bogoliubov.Transform
	unit          []complex128
	shot          [][]complex128 // [frequency][shot]
	power, chance []float64      // |G|² less what chance adds, and the latter
}

// leastFrequencies is how many frequencies a fit needs.
const leastFrequencies = 6

// FitCoherence transforms the window of s and fits it, starting from t, with
// the interval as how says. It returns an error when the window is so short in
// time that it does not resolve frequencies below ω_max.
func FitCoherence(s *band.Sides, g band.Geometry, theory *bogoliubov.Band, omegaMax, t float64, how Sampling) (*Coherence, error) {
	duration := math.Min(math.Abs(s.Xu[len(s.Xu)-1]-s.Xu[0])/g.Up, math.Abs(s.Xd[len(s.Xd)-1]-s.Xd[0])/g.Down)
	c := &Coherence{Resolution: 2 * math.Pi / duration}
	top := math.Min(0.95*omegaMax, 6*t)
	step := math.Min(c.Resolution/2, top/leastFrequencies)
	for w := step; w < top*(1+1e-9); w += step {
		c.Omega = append(c.Omega, w)
	}
	coldest := t / 8
	c.transform = theory.Transform(c.Omega, s.Xu, s.Xd, coldest)
	c.unit = c.transform.Unit()
	c.project(s)
	c.power, c.chance = make([]float64, len(c.Omega)), make([]float64, len(c.Omega))
	scatter := make([]float64, len(c.Omega))
	mean := c.mean(nil, nil)
	count := float64(s.Shots())
	for f, z := range mean {
		for _, v := range c.shot[f] {
			d := v - z
			scatter[f] += real(d)*real(d) + imag(d)*imag(d)
		}
		c.chance[f] = scatter[f] / (count * (count - 1))
		if s.Noiseless {
			c.chance[f] = 1e-4 * square(z)
		}
		c.power[f] = square(z) - c.chance[f]
		unit := cmplx.Abs(c.unit[f])
		c.Value = append(c.Value, math.Sqrt(math.Max(c.power[f], 0))/unit)
		c.Error = append(c.Error, math.Sqrt(c.chance[f]/2)/unit)
	}
	best, delay, err := c.solve(c.power, t, 1)
	if err != nil {
		return nil, fmt.Errorf("the coherence spectrum could not be fitted: %w", err)
	}
	c.T, c.Delay = best, delay
	r := how.source(0xc0e)
	weight := make([]float64, s.Shots())
	power := make([]float64, len(c.Omega))
	var resampled []complex128
	for range how.Resamples {
		clear(weight)
		for drawn := 0; drawn < len(weight); {
			first := r.IntN(len(weight))
			for i := 0; i < max(1, how.Block) && drawn < len(weight); i++ {
				weight[(first+i)%len(weight)]++
				drawn++
			}
		}
		resampled = c.mean(resampled, weight)
		for f, z := range resampled {
			power[f] = square(z) - 2*c.chance[f] // chance has been at it twice
		}
		v, _, err := c.solve(power, c.T, how.height(r))
		if err != nil {
			c.Failed++
			continue
		}
		c.Samples = append(c.Samples, v)
	}
	return c, nil
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// project finds each shot's part in each frequency.
func (c *Coherence) project(s *band.Sides) {
	c.shot = make([][]complex128, len(c.Omega))
	scale := complex(float64(s.Shots())/float64(s.Shots()-1), 0)
	for f := range c.Omega {
		c.shot[f] = make([]complex128, s.Shots())
	}
	var z []complex128
	for i := range s.Shots() {
		z = c.transform.Shot(z, s.U.RawRowView(i), s.D.RawRowView(i))
		for f, v := range z {
			c.shot[f][i] = scale * v
		}
	}
}

// mean returns the mean over shots, weighted unless weight is nil.
func (c *Coherence) mean(dst []complex128, weight []float64) []complex128 {
	if dst == nil {
		dst = make([]complex128, len(c.Omega))
	}
	for f, shots := range c.shot {
		var sum complex128
		for i, v := range shots {
			if weight == nil {
				sum += v
			} else {
				sum += complex(weight[i], 0) * v
			}
		}
		dst[f] = sum / complex(float64(len(shots)), 0)
	}
	return dst
}

// solve fits T to the power at each frequency. Its error is 2|G|·σ/√2 for a
// strong band and the scatter of chance alone for none.
func (c *Coherence) solve(power []float64, start, height float64) (T, delay float64, err error) {
	model := make([]complex128, len(c.Omega))
	weight := make([]float64, len(power))
	for f := range power {
		weight[f] = 1 / math.Sqrt(2*math.Max(c.power[f], 0)*c.chance[f]+c.chance[f]*c.chance[f])
	}
	span := 2 * math.Pi / c.Resolution
	r, err := fit.Solve(fit.Problem{
		Count: len(power),
		Start: []float64{math.Log(start), c.Delay},
		Scale: []float64{1, 1 / start},
		Lower: []float64{math.Log(start / 8), -span / 2},
		Upper: []float64{math.Log(start * 8), span / 2},
		Residuals: func(dst, p []float64) {
			c.transform.Thermal(model, math.Exp(p[0]), p[1])
			for f, z := range model {
				dst[f] = (height*height*square(z) - power[f]) * weight[f]
			}
		},
	}, options)
	if err != nil {
		return 0, 0, err
	}
	if r.AtBound[0] || r.AtBound[1] {
		return 0, 0, fmt.Errorf("the fit left the range of temperatures or delays: T = %.3g, delay %.3g", math.Exp(r.Params[0]), r.Params[1])
	}
	return math.Exp(r.Params[0]), r.Params[1], nil
}

// Temperature returns T with its bootstrap interval.
func (c *Coherence) Temperature() (value, low, high float64) {
	low, high = interval(c.Samples)
	return c.T, low, high
}

// Model returns |⟨b_u b_d2⟩| of a thermal horizon of temperature T as the
// window shows it, at each frequency.
func (c *Coherence) Model(T float64) []float64 {
	return c.Read(c.transform.Thermal(nil, T, c.Delay))
}

// Paired returns |⟨b_u b_d2⟩| of a given pairing as the window shows it.
func (c *Coherence) Paired(pairing []complex128) []float64 {
	return c.Read(c.transform.Paired(nil, pairing, 0))
}

// Reads returns the temperature that the fit makes of a given pairing.
func (c *Coherence) Reads(pairing []complex128) (float64, error) {
	g := c.transform.Paired(nil, pairing, 0)
	power := make([]float64, len(g))
	for f, z := range g {
		power[f] = square(z)
	}
	T, _, err := c.solve(power, c.T, 1)
	return T, err
}

// Frequencies returns the frequencies at which Paired wants a pairing.
func (c *Coherence) Frequencies() []float64 { return c.transform.Frequencies() }

// Read turns a transform of the window into a coherence.
func (c *Coherence) Read(transform []complex128) []float64 {
	v := make([]float64, len(transform))
	for f, z := range transform {
		v[f] = cmplx.Abs(z) / cmplx.Abs(c.unit[f])
	}
	return v
}
