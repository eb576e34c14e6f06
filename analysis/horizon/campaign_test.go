package horizon

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/band"
	"tailrace/analysis/camera"
	"tailrace/analysis/moments"
	"tailrace/gpe"
)

// campaigns is a flow whose exact fluctuations are known, seen by a camera.
type campaigns struct {
	in      Input
	moments *gpe.Moments
	x       []float64 // from the step
}

// exactCampaigns carries the directions of in's noise; the number of atoms in
// a healing length is free until shots are drawn.
func exactCampaigns(t testing.TB, in Input) *campaigns {
	t.Helper()
	tangent, err := gpe.NewTangent(in.Problem)
	if err != nil {
		t.Fatal(err)
	}
	c := &campaigns{in: in, x: in.Problem.Grid.Positions()}
	if c.moments, err = tangent.Run(context.Background(), 2, nil); err != nil {
		t.Fatal(err)
	}
	for j := range c.x {
		c.x[j] -= in.Frame.Position
	}
	return c
}

// with returns the campaigns with another number of atoms in a healing length.
func (c *campaigns) with(perXi float64) *campaigns {
	scale := math.Sqrt(c.in.Problem.AtomsPerLength / perXi)
	m := *c.moments
	m.Directions = make([]float64, len(c.moments.Directions))
	for i, v := range c.moments.Directions {
		m.Directions[i] = v * scale
	}
	in := c.in
	p := *in.Problem
	p.AtomsPerLength = perXi
	in.Problem = &p
	return &campaigns{in, &m, c.x}
}

// aligned lays shots on top of each other by whole pixels and rescales each to
// the mean number.
func aligned(v *camera.Virtual, s *camera.Shots, lo, hi float64) Pictures {
	c := v.Camera
	first, last := int(math.Ceil(lo/c.Pixel)), int(math.Floor(hi/c.Pixel))
	p := Pictures{}
	for i := first; i <= last; i++ {
		p.X = append(p.X, float64(i)*c.Pixel)
	}
	p.Shots = moments.Shots{Pixels: len(p.X)}
	for i := range s.Count() {
		step := int(math.Round(s.StepPosition[i] / c.Pixel))
		p.Shots.Data = append(p.Shots.Data, s.Shot(i)[step+first:step+last+1]...)
	}
	var total float64
	for _, x := range p.Shots.Data {
		total += float64(x)
	}
	total /= float64(p.Shots.Count())
	for i := range p.Shots.Count() {
		row, sum := p.Shots.Shot(i), 0.0
		for _, x := range row {
			sum += float64(x)
		}
		for k := range row {
			row[k] *= float32(total / sum)
		}
	}
	return p
}

func TestTryCampaign(t *testing.T) {
	long(t)
	c := exactCampaigns(t, ring(t, 1, 90, 1, 1024, 512)).with(30)
	cam := camera.Camera{Pixel: 0.5, Resolution: 0.5, PhotonsPerAtom: 50, NumberSpread: 0.03, Jitter: 0.3}
	v, err := camera.NewVirtual(c.moments, c.x, 30, cam, -26, 26, camera.Everything)
	if err != nil {
		t.Fatal(err)
	}
	in := c.in
	in.Window = near16
	in.Response = cam.Response(0.5 / math.Sqrt(12))
	in.Settings.Resamples = 100
	in.Settings.Shuffles = 200
	in.Memory = new(Memory)
	values := map[string][]float64{}
	cover := map[string]int{}
	const n = 24
	for k := range n {
		s := v.Draw(4000, uint64(k))
		a, err := Interpret(in, aligned(v, s, -22, 22))
		if err != nil {
			t.Fatal(err)
		}
		if k == 0 {
			t.Log(a.Warnings, a.Null.Strength, a.Null.Significance, a.Bias, a.Scattered)
			f := band.Find(mustSides(t, a, aligned(v, s, -22, 22)), 200, 1)
			t.Log(f.Ratio, f.Offset, f.Width, f.Sign, f.Significance, f.PValue, f.Ridges)
		}
		for _, r := range a.Readings {
			values[r.Method] = append(values[r.Method], r.Value)
			if r.Low <= a.Scattered && a.Scattered <= r.High {
				cover[r.Method]++
			}
			if k == 0 {
				t.Logf("%+v", r)
			}
		}
		values["strength"] = append(values["strength"], a.Null.Strength)
	}
	for m, x := range values {
		mean, sd := stat.MeanStdDev(x, nil)
		t.Logf("%s: %.4f ± %.4f (%d), covered %d of %d", m, mean, sd, len(x), cover[m], n)
	}
}

func mustSides(t testing.TB, a *Account, p Pictures) *band.Sides {
	x := make([]float64, len(p.X))
	for j := range x {
		x[j] = p.X[j] - a.Predicted.Horizon.Position
	}
	mean, _ := p.Mean()
	s, err := band.NewSides(p.Shots, x, mean, a.Window)
	if err != nil {
		t.Fatal(err)
	}
	return s
}
