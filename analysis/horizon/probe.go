package horizon

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/band"
	"tailrace/analysis/moments"
	"tailrace/gpe/lab"
)

// ProbeShare is the share of the noise's largest |k| that the probe of the
// cut-off keeps.
const ProbeShare = 0.75

// Probe is how far results move when the noise stops at ProbeShare of its
// largest |k|: the difference between trajectories with the lower cut-off and
// those of the run with the same index, which share the noise of the long
// waves for the most part.
type Probe struct {
	Trajectories     int
	Up, UpError      float64 // of the density, relative to it, and its standard error
	Down, DownError  float64
	Strength, Spread float64 // of the band, and how much chance alone moves it
}

// NewProbe compares shots of the probe, whose commutator is given, with the
// same number of shots of the run.
func (a *Account) NewProbe(in Input, shots moments.Shots, commutator float64) (*Probe, error) {
	count := shots.Count()
	if count < 2 || count > in.Shots.Count() || shots.Pixels != in.Shots.Pixels {
		panic("horizon: the probe does not match the run")
	}
	p := &Probe{Trajectories: count}
	run := moments.Shots{Pixels: in.Shots.Pixels, Data: in.Shots.Data[:count*in.Shots.Pixels]}
	full := in.Problem.Commutator()
	for _, side := range []struct {
		lo, hi        float64
		move, moveErr *float64
	}{{a.Window.UpFar, a.Window.UpNear, &p.Up, &p.UpError}, {a.Window.DownNear, a.Window.DownFar, &p.Down, &p.DownError}} {
		before, after := a.windowMeans(run, full, side.lo, side.hi), a.windowMeans(shots, commutator, side.lo, side.hi)
		for i := range after {
			after[i] -= before[i]
		}
		mean := stat.Mean(before, nil)
		m, sd := stat.MeanStdDev(after, nil)
		*side.move, *side.moveErr = m/mean, sd/math.Sqrt(float64(count))/mean
	}
	strengths := [2]*band.Null{}
	for i, s := range []moments.Shots{run, shots} {
		sides, err := band.NewSides(s, a.Map.X, a.Map.MeanDensity, a.Window)
		if err != nil {
			return nil, err
		}
		e, err := a.expect(sides, in, 1)
		if err != nil {
			return nil, err
		}
		strengths[i] = band.Shuffle(sides, band.Template(sides, e.band), 200, in.Settings.Seed)
	}
	p.Strength = strengths[1].Strength - strengths[0].Strength
	p.Spread = stat.StdDev(strengths[1].Shuffled, nil)
	return p, nil
}

// windowMeans returns the normally ordered mean density in lo < x < hi of each
// shot.
func (a *Account) windowMeans(shots moments.Shots, commutator, lo, hi float64) []float64 {
	v := make([]float64, shots.Count())
	for i := range v {
		n := 0.0
		for j, x := range a.Map.X {
			if lo < x && x < hi {
				v[i] += float64(shots.Shot(i)[j])
				n++
			}
		}
		v[i] = v[i]/n - commutator/2
	}
	return v
}

// Check is the probe as a check: the plateau must not move by a per cent.
func (p *Probe) Check() lab.Check {
	move := math.Max(math.Abs(p.Up), math.Abs(p.Down))
	return finish(lab.Check{Name: "noise cut-off", Value: move, Limit: 0.01,
		Why: fmt.Sprintf("with the noise cut off at %.2f of its largest k, densities move by %.2f ± %.2f %% upstream and %.2f ± %.2f %% downstream and the band's strength by %.2f (chance alone: %.2f), in %d trajectories",
			ProbeShare, 100*p.Up, 100*p.UpError, 100*p.Down, 100*p.DownError, p.Strength, p.Spread, p.Trajectories)})
}
