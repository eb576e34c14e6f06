// Package rehearsal runs virtual campaigns: shots drawn from the exact
// fluctuations of a flow, through a camera, analysed by the code that reads real
// ones, so often that bias, spread and the honesty of intervals show.
package rehearsal

import (
	"context"
	"math"
	"sync"

	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/camera"
	"tailrace/analysis/horizon"
	"tailrace/analysis/interpretation"
	"tailrace/analysis/shots"
)

// Input is a campaign that is yet to be done.
type Input struct {
	Virtual, Empty *camera.Virtual      // with the band, and without what joins the two sides
	Known          interpretation.Input // what the experimenter will know; its Set is filled in
	Sizes          []int                // shots of a campaign
	Campaigns      int                  // of each size, with the band and without
	Seed           uint64
	Workers        int
	Progress       func(done int) // campaigns; may be nil
}

// Row is what campaigns of one size come to.
type Row struct {
	Shots     int
	Campaigns int

	Detected    float64 // share that shows a band of 3 standard deviations
	FalseAlarms float64 // share of campaigns without a band that do
	Strength    float64 // mean over the prediction
	Scatter     float64 // and its standard deviation

	// Of the template's temperature: mean, standard deviation over campaigns,
	// mean half-width of the 68 % interval, share of intervals that hold the
	// truth, and campaigns in which it could be read at all.
	Mean, Spread, Interval, Covered float64
	Read                            int
}

// Rehearsal is the table of all sizes.
type Rehearsal struct {
	Truth float64 // the temperature of the scattering, low frequency
	Rows  []Row
}

// Set turns drawn shots into a set as read.
func Set(v *camera.Virtual, drawn *camera.Shots, time float64) *shots.Set {
	s := &shots.Set{Path: "virtual", Count: drawn.Count(), Pixels: drawn.Pixels, Pixel: v.Camera.Pixel, StepPosition: drawn.StepPosition, Time: time,
		Density: make([]float64, len(drawn.Data))}
	for i, x := range drawn.Data {
		s.Density[i] = float64(x)
	}
	return s
}

// outcome is one campaign.
type outcome struct {
	strength, significance float64
	value, low, high       float64 // NaN where it could not be read
}

// Run runs the campaigns. It returns ctx's error when it is cancelled, and the
// first error of an analysis.
func Run(ctx context.Context, in Input) (*Rehearsal, error) {
	r := &Rehearsal{}
	memory := new(horizon.Memory)
	var mu sync.Mutex
	done := 0
	for _, size := range in.Sizes {
		with, without := make([]outcome, in.Campaigns), make([]outcome, in.Campaigns)
		queue := make(chan int)
		var wg sync.WaitGroup
		var failed error
		for range max(1, in.Workers) {
			wg.Go(func() {
				for k := range queue {
					var o [2]outcome
					var err error
					var truth float64
					for i, v := range []*camera.Virtual{in.Virtual, in.Empty} {
						if o[i], truth, err = campaign(in, v, size, in.Seed+uint64(2*k+i)+uint64(size)<<20, memory, i == 0); err != nil {
							break
						}
					}
					mu.Lock()
					if err != nil && failed == nil {
						failed = err
					}
					with[k], without[k], r.Truth = o[0], o[1], truth
					if done++; in.Progress != nil {
						in.Progress(done)
					}
					mu.Unlock()
				}
			})
		}
		for k := range in.Campaigns {
			mu.Lock()
			stop := failed != nil || ctx.Err() != nil
			mu.Unlock()
			if stop {
				break
			}
			queue <- k
		}
		close(queue)
		wg.Wait()
		if failed != nil {
			return nil, failed
		}
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		r.Rows = append(r.Rows, tabulate(size, with, without, r.Truth))
	}
	return r, nil
}

// campaign draws and analyses one.
func campaign(in Input, v *camera.Virtual, size int, seed uint64, memory *horizon.Memory, temperatures bool) (outcome, float64, error) {
	known := in.Known
	known.Set = Set(v, v.Draw(size, seed), in.Known.Set.Time)
	if !temperatures {
		known.Settings.Resamples = 0
	}
	a, err := interpretation.Account(&known, memory)
	if err != nil {
		return outcome{}, 0, err
	}
	o := outcome{a.Null.Strength, a.Null.Significance, math.NaN(), math.NaN(), math.NaN()}
	for _, t := range a.Readings {
		if t.Method == "template" {
			o.value, o.low, o.high = t.Value, t.Low, t.High
		}
	}
	return o, a.Scattered, nil
}

const claim = 3

func tabulate(size int, with, without []outcome, truth float64) Row {
	row := Row{Shots: size, Campaigns: len(with)}
	n := float64(len(with))
	var strengths, values []float64
	for _, o := range with {
		strengths = append(strengths, o.strength)
		if o.significance >= claim && o.strength > 0 {
			row.Detected += 1 / n
		}
		if math.IsNaN(o.value) || math.IsNaN(o.low) {
			continue
		}
		values = append(values, o.value)
		row.Interval += (o.high - o.low) / 2
		if o.low <= truth && truth <= o.high {
			row.Covered++
		}
	}
	for _, o := range without {
		if o.significance >= claim && o.strength > 0 {
			row.FalseAlarms += 1 / n
		}
	}
	row.Strength, row.Scatter = stat.MeanStdDev(strengths, nil)
	row.Read = len(values)
	if row.Read > 0 {
		row.Interval /= float64(row.Read)
		row.Covered /= float64(row.Read)
		row.Mean = stat.Mean(values, nil)
	} else {
		row.Mean, row.Interval, row.Covered = math.NaN(), math.NaN(), math.NaN()
	}
	row.Spread = math.NaN()
	if row.Read > 1 {
		row.Spread = stat.StdDev(values, nil)
	}
	return row
}
