package horizon

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

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

// aligned lays shots on top of each other by whole pixels, keeps those from lo to
// hi and rescales each shot to the mean number in the whole picture. That must be
// much longer than the window: number that comes and goes in it by itself is
// taken for spread, and the band with it.
func aligned(v *camera.Virtual, s *camera.Shots, lo, hi float64) Pictures {
	c := v.Camera
	first, last := int(math.Ceil(lo/c.Pixel)), int(math.Floor(hi/c.Pixel))
	p := Pictures{}
	for i := first; i <= last; i++ {
		p.X = append(p.X, float64(i)*c.Pixel)
	}
	p.Shots = moments.Shots{Pixels: len(p.X)}
	number := make([]float64, s.Count())
	var total float64
	for i := range s.Count() {
		for _, x := range s.Shot(i) {
			number[i] += float64(x)
		}
		total += number[i] / float64(s.Count())
		step := int(math.Round(s.StepPosition[i] / c.Pixel))
		for _, x := range s.Shot(i)[step+first : step+last+1] {
			p.Shots.Data = append(p.Shots.Data, x*float32(1/number[i]))
		}
	}
	for i := range p.Shots.Data {
		p.Shots.Data[i] *= float32(total)
	}
	return p
}

// Over many campaigns of 4,000 shots, three flows, three resolutions and two
// spreads of the atom number, the template's bias is below half its standard
// error and its 68 % interval holds the truth as often as it says.
func TestThermometerIsHonest(t *testing.T) {
	long(t)
	const each = 12
	covered, total := 0, 0
	seed := uint64(0)
	for _, f := range []struct {
		name  string
		in    Input
		perXi float64
	}{
		{"width ½", ring(t, 0.5, 90, 1, 1024, 512), 30},
		{"width 1", ring(t, 1, 90, 1, 1024, 512), 30},
		{"width 2", ring(t, 2, 90, 1, 1024, 512), 12},
	} {
		c := exactCampaigns(t, f.in).with(f.perXi)
		for _, resolution := range []float64{0.3, 0.6, 1} {
			for _, spread := range []float64{0, 0.05} {
				cam := camera.Camera{Pixel: 0.5, Resolution: resolution, PhotonsPerAtom: 50, NumberSpread: spread, Jitter: 0.3}
				v, err := camera.NewVirtual(c.moments, c.x, f.perXi, cam, -70, 70, camera.Everything)
				if err != nil {
					t.Fatal(err)
				}
				in := c.in
				in.Window, in.Response, in.Memory = near16, cam.Response(0.5/math.Sqrt(12)), new(Memory)
				in.Settings.Resamples, in.Settings.Shuffles, in.Settings.TemplateOnly = 100, 100, true
				var values, sizes []float64
				var truth float64
				for range each {
					seed++
					a, err := Interpret(in, aligned(v, v.Draw(4000, seed), -22, 22))
					if err != nil {
						t.Fatal(err)
					}
					truth = a.Scattered
					for _, r := range a.Readings {
						if r.Method != "template" || math.IsNaN(r.Low) {
							continue
						}
						values, sizes = append(values, r.Value), append(sizes, (r.High-r.Low)/2)
						total++
						if r.Low <= truth && truth <= r.High {
							covered++
						}
					}
				}
				mean, sd := stat.MeanStdDev(values, nil)
				t.Logf("%s, resolution %g, spread %g: %.4f ± %.4f, interval ± %.4f, truth %.4f (%d fits)", f.name, resolution, spread, mean, sd, stat.Mean(sizes, nil), truth, len(values))
				// Half a standard error of one campaign, and three of the mean's own.
				if bias := math.Abs(mean - truth); bias > sd/2+3*sd/math.Sqrt(float64(len(values))) {
					t.Errorf("the bias is %.4f, its standard error %.4f", mean-truth, sd)
				}
			}
		}
	}
	share := float64(covered) / float64(total)
	t.Logf("the 68 %% interval holds the truth in %d of %d campaigns, %.0f %%", covered, total, 100*share)
	if share < 0.60 || share > 0.76 {
		t.Errorf("the 68 %% interval holds the truth in %.0f %% of campaigns", 100*share)
	}
}

// Where nothing joins the two sides, a band of three standard deviations is
// claimed in about one campaign in a thousand.
func TestFalseAlarms(t *testing.T) {
	long(t)
	c := exactCampaigns(t, ring(t, 1, 90, 1, 768, 384)).with(30)
	cam := camera.Camera{Pixel: 0.5, Resolution: 0.5, PhotonsPerAtom: 50, NumberSpread: 0.05, Jitter: 0.3}
	v, err := camera.NewVirtual(c.moments, c.x, 30, cam, -60, 60, camera.Uncorrelated)
	if err != nil {
		t.Fatal(err)
	}
	in := c.in
	in.Window, in.Response, in.Memory = near16, cam.Response(0.5/math.Sqrt(12)), new(Memory)
	in.Settings.Resamples, in.Settings.Shuffles, in.Settings.TemplateOnly = 0, 200, true
	const campaigns = 300
	alarms := 0
	var z []float64
	for k := range campaigns {
		a, err := Interpret(in, aligned(v, v.Draw(1500, uint64(k)), -22, 22))
		if err != nil {
			t.Fatal(err)
		}
		z = append(z, a.Null.Significance)
		if a.Null.Significance >= 3 {
			alarms++
		}
	}
	mean, sd := stat.MeanStdDev(z, nil)
	t.Logf("%d of %d campaigns claim a band; significances %.2f ± %.2f", alarms, campaigns, mean, sd)
	if alarms > 3 {
		t.Errorf("%d of %d campaigns without a band claim one", alarms, campaigns)
	}
}
