package gpe

import (
	"fmt"
	"math"

	"tailrace/gpe/lanes"
)

// TrialTime is how long a trial of ChooseStep lasts, in ħ/(m c₀²): long enough
// for the step to meet the cloud and the noise.
const TrialTime = 10.0

// finestTrial is how many halvings of the longest step are tried.
const finestTrial = 10

// ChooseStep finds the cheapest splitting and time step for which the field,
// noise included, is off by less than accuracy after TrialTime (or the whole
// run, if that is shorter), as a share of its norm. Errors are estimated by
// halving the step; steps are the grid's limit over powers of √2. It needs
// p.Noise and sets nothing.
//
// By measurement Strang's splitting is the cheaper one for accuracies above
// about 5·10⁻⁴ of the field, the quartic one below (BenchmarkAccuracy).
func ChooseStep(p *Problem, accuracy float64) (Scheme, float64, error) {
	if !(accuracy > 0) {
		panic("gpe: the accuracy must be positive")
	}
	end := math.Min(TrialTime, p.Times[len(p.Times)-1])
	ordering := make([]float64, p.Grid.N)
	fill(ordering, p.Commutator())
	carry := func(scheme Scheme, dt float64) (*lanes.Batch, error) {
		prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, ordering, scheme, dt, []float64{end})
		if err != nil {
			return nil, err
		}
		b := lanes.NewBatch(p.Grid.N)
		if err := p.Noise.Sample(b, p.Seed, 0); err != nil {
			return nil, err
		}
		prop.NewWalker(false).Leg(b, 0)
		return b, nil
	}
	longest := 0.95 * p.LongestStep()
	best, step, cost := Scheme{}, 0.0, math.Inf(1)
	for _, scheme := range []Scheme{Strang(), Quartic()} {
		for k := range finestTrial {
			dt := longest * math.Pow(2, -float64(k)/2)
			work := float64(len(scheme.local)) / dt
			if work >= cost {
				break // dearer than what is found already
			}
			coarse, err := carry(scheme, dt)
			if err != nil {
				return Scheme{}, 0, err
			}
			fine, err := carry(scheme, dt/2)
			if err != nil {
				return Scheme{}, 0, err
			}
			shrink := math.Pow(2, float64(scheme.Order))
			if relativeDistance(coarse, fine)*shrink/(shrink-1) <= accuracy {
				best, step, cost = scheme, dt, work
				break
			}
		}
	}
	if step == 0 {
		return Scheme{}, 0, fmt.Errorf("no time step down to %.2g gives an accuracy of %.2g", longest*math.Pow(2, -(finestTrial-1)/2.0), accuracy)
	}
	return best, step, nil
}

// LongestStep returns the longest time step at which nothing grows out of the
// splitting: the grid's limit with the drift and the interaction in it. In a
// step the shortest waves turn by dt(k²/2 + |v|k + c²); pairs of them that turn
// by a whole number of turns together, to within 2c²dt, grow out of the noise.
// With a drift two waves near +k_max are such a pair, for on the grid their sum
// is a long wave.
func (p *Problem) LongestStep() float64 {
	coupling := make([]float64, p.Grid.N)
	stiff := 0.0
	for _, t := range []float64{0, p.Times[len(p.Times)-1]} {
		p.Landscape.Coupling(coupling, t, 1)
		for j, g := range coupling {
			n := p.Ground.Field[j] * p.Ground.Field[j]
			stiff = math.Max(stiff, g*n*p.Law.Slope(n))
		}
	}
	k := p.Grid.MaxWavenumber()
	return math.Pi / (k*k/2 + math.Abs(p.Landscape.Drift())*k + 2*stiff)
}

func relativeDistance(a, b *lanes.Batch) float64 {
	off, norm := 0.0, 0.0
	for i := range a.Re {
		off += (a.Re[i]-b.Re[i])*(a.Re[i]-b.Re[i]) + (a.Im[i]-b.Im[i])*(a.Im[i]-b.Im[i])
		norm += b.Re[i]*b.Re[i] + b.Im[i]*b.Im[i]
	}
	return math.Sqrt(off / norm)
}
