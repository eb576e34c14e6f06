package interpretation

import (
	"context"
	"math"
	"os"
	"testing"

	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/band"
	"tailrace/analysis/camera"
	"tailrace/analysis/horizon"
	"tailrace/analysis/shots"
	"tailrace/gpe"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

func long(t *testing.T) {
	t.Helper()
	if os.Getenv("TAILRACE_LONG") == "" {
		t.Skip("takes long; TAILRACE_LONG=1 runs it")
	}
}

// truth is a flow whose fluctuations are known exactly: uniform, v = 0.75,
// c_u = 1, c_d = 0.5, a horizon of the given width, read at t = 90.
type truth struct {
	moments *gpe.Moments
	x       []float64
	profile flow.Profile
	perXi   float64
	T       float64 // of the scattering, low frequency
}

// newTruth works it out for a cloud at the given temperature.
func newTruth(t testing.TB, width, temperature, perXi float64, points int, length float64) *truth {
	t.Helper()
	g := gpe.NewGrid(points, length, -length/2)
	land := gpe.NewSwitch(g, gpe.Switch{Velocity: 0.75, SoundUp: 1, SoundDown: 0.5, Width: width, Ramp: 3})
	p := &gpe.Problem{Grid: g, Law: fluid.Cubic(), Landscape: land, Ground: gpe.UniformGround(g, fluid.Cubic()),
		AtomsPerLength: perXi, Scheme: gpe.Strang(), Times: []float64{90}}
	p.TimeStep = math.Min(0.05, 0.9*p.LongestStep())
	var err error
	if p.Noise, err = gpe.NewPlaneWaves(p.Ground, 1, temperature, perXi, 0); err != nil {
		t.Fatal(err)
	}
	tangent, err := gpe.NewTangent(p)
	if err != nil {
		t.Fatal(err)
	}
	q := &truth{x: g.Positions(), perXi: perXi}
	if q.moments, err = tangent.Run(context.Background(), 2, nil); err != nil {
		t.Fatal(err)
	}
	if q.profile, err = flow.UniformSwitch(0.75, 1, 0.5, width); err != nil {
		t.Fatal(err)
	}
	s, err := bogoliubov.NewScatterer(q.profile)
	if err != nil {
		t.Fatal(err)
	}
	if q.T, _, err = s.LowFrequencyTemperature(); err != nil {
		t.Fatal(err)
	}
	return q
}

var sharp = camera.Camera{Pixel: 0.5, Resolution: 0.4, PhotonsPerAtom: 60, NumberSpread: 0.02, Jitter: 0.3}

// campaign draws shots.
func (q *truth) campaign(t testing.TB, c camera.Camera, choice camera.Choice, count int, seed uint64) *shots.Set {
	t.Helper()
	v, err := camera.NewVirtual(q.moments, q.x, q.perXi, c, -27, 27, choice)
	if err != nil {
		t.Fatal(err)
	}
	return asSet(v, v.Draw(count, seed))
}

func asSet(v *camera.Virtual, drawn *camera.Shots) *shots.Set {
	s := &shots.Set{Path: "virtual", Count: drawn.Count(), Pixels: drawn.Pixels, Pixel: v.Camera.Pixel, StepPosition: drawn.StepPosition, Time: 90}
	for _, x := range drawn.Data {
		s.Density = append(s.Density, float64(x))
	}
	return s
}

// input is what an experimenter would know.
func (q *truth) input(s *shots.Set, c camera.Camera) *Input {
	settings := horizon.DefaultSettings
	settings.Resamples, settings.Shuffles = 60, 400
	return &Input{Set: s, Length: 1, Density: 1, Predicted: q.profile, Law: fluid.Cubic(), AtomsPerLength: q.perXi, Camera: c,
		Age: 78, Settings: settings, Window: band.Window{UpFar: -16, UpNear: -4, DownNear: 4, DownFar: 16}}
}

func found(r *Interpretation) (names []string) {
	for _, e := range r.Explanations {
		if e.Found {
			names = append(names, e.Name)
		}
	}
	return names
}

// A sound campaign shows its band and temperature, and blames nothing; without
// correlation across the horizon there is no band.
func TestSoundCampaign(t *testing.T) {
	q := newTruth(t, 1, 0, 30, 768, 384)
	r, err := Interpret(q.input(q.campaign(t, sharp, camera.Everything, 4000, 1), sharp))
	if err != nil {
		t.Fatal(err)
	}
	t.Log(r.Verdict(func(T float64) string { return "T" }))
	for _, e := range r.Explanations {
		t.Logf("%+v", e)
	}
	if !r.Seen() || r.Search.PValue > 0.01 || r.Search.Sign > 0 {
		t.Errorf("significance %.1f, search %+v", r.Account.Null.Significance, r.Search.PValue)
	}
	if _, v, lo, hi, ok := r.trusted(); !ok || v < lo || v > hi || math.Abs(v/q.T-1) > 4*(hi-lo)/2/q.T {
		t.Errorf("T = %.4f (%.4f to %.4f), the truth is %.4f", v, lo, hi, q.T)
	}
	if names := found(r); len(names) != 0 {
		t.Errorf("blamed: %v", names)
	}
	if len(r.Rejected) > 2 {
		t.Errorf("rejected %v", r.Rejected)
	}
	r, err = Interpret(q.input(q.campaign(t, sharp, camera.Uncorrelated, 4000, 2), sharp))
	if err != nil {
		t.Fatal(err)
	}
	if r.Seen() || r.Search.PValue < 0.003 {
		t.Errorf("a band in nothing: %.1f standard deviations, p = %.3g", r.Account.Null.Significance, r.Search.PValue)
	}
}

// Each duller cause is found when it is put in on purpose.
func TestDullerCauses(t *testing.T) {
	long(t)
	q := newTruth(t, 1, 0, 30, 768, 384)
	for _, c := range []struct {
		name string
		make func() (*shots.Set, camera.Camera)
	}{
		{"spread of the atom number", func() (*shots.Set, camera.Camera) {
			wide := sharp
			wide.NumberSpread = 0.15
			return q.campaign(t, wide, camera.Everything, 3000, 3), sharp // nobody knew
		}},
		{"the step's position", func() (*shots.Set, camera.Camera) {
			// The uniform flow has no step in its density: one is put in.
			m := *q.moments
			m.Density = append([]float64(nil), m.Density...)
			for j, x := range q.x {
				m.Density[j] *= 1 - 0.4*(1+math.Tanh(x/0.7))/2
			}
			moving := sharp
			moving.Jitter = 1
			v, err := camera.NewVirtual(&m, q.x, q.perXi, moving, -27, 27, camera.Everything)
			if err != nil {
				t.Fatal(err)
			}
			s := asSet(v, v.Draw(3000, 4))
			middle := stat.Mean(s.StepPosition, nil)
			for i := range s.StepPosition {
				s.StepPosition[i] = middle // nobody noted it
			}
			return s, sharp
		}},
		{"cross-talk in the pictures", func() (*shots.Set, camera.Camera) {
			s := q.campaign(t, sharp, camera.Everything, 3000, 5)
			for i := range s.Count {
				// A pattern of the camera that comes and goes.
				a := 0.04 * math.Sin(float64(i)*2.399)
				for k := range s.Shot(i) {
					s.Shot(i)[k] *= 1 + a*math.Cos(math.Pi*float64(k)/float64(s.Pixels-1)*8)
				}
			}
			return s, sharp
		}},
		{"phonons already there", func() (*shots.Set, camera.Camera) {
			hot := newTruth(t, 1, 0.5, 30, 768, 384)
			return hot.campaign(t, sharp, camera.Everything, 3000, 6), sharp
		}},
		{"a ripple in the mean density", func() (*shots.Set, camera.Camera) {
			s := q.campaign(t, sharp, camera.Everything, 3000, 7)
			for i := range s.Count {
				for k := range s.Shot(i) {
					s.Shot(i)[k] *= 1 + 0.03*math.Cos(1.1*float64(k)*s.Pixel)
				}
			}
			return s, sharp
		}},
		{"too few shots", func() (*shots.Set, camera.Camera) {
			return q.campaign(t, sharp, camera.Everything, 100, 8), sharp
		}},
	} {
		s, cam := c.make()
		r, err := Interpret(q.input(s, cam))
		if err != nil {
			t.Fatal(err)
		}
		caught := false
		for _, e := range r.Explanations {
			if e.Name == c.name {
				caught = e.Found
				t.Logf("%s: value %.4g, p = %.2g, found %v: %s", e.Name, e.Value, e.PValue, e.Found, e.Why)
			}
		}
		if !caught {
			t.Errorf("%s is there and not found; found are %v", c.name, found(r))
		}
	}
}

// The partners of a cold flow are entangled, and shown to be; with enough heat
// they are not, and nothing is claimed. The populations are those of scattering.
func TestSeparability(t *testing.T) {
	long(t)
	ideal := camera.Camera{Pixel: 0.5, Points: true}
	for _, c := range []struct {
		temperature float64
		entangled   bool
	}{{0, true}, {2, false}} {
		q := newTruth(t, 1, c.temperature, 30, 768, 384)
		v, err := camera.NewVirtual(q.moments, q.x, q.perXi, camera.Camera{Pixel: 0.5}, -27, 27, camera.Everything)
		if err != nil {
			t.Fatal(err)
		}
		in := q.input(asSet(v, v.Draw(6000, 9)), ideal)
		in.Temperature = c.temperature
		r, err := Interpret(in)
		if err != nil {
			t.Fatal(err)
		}
		p := r.Separability
		scatterer, err := bogoliubov.NewScatterer(q.profile)
		if err != nil {
			t.Fatal(err)
		}
		for f, w := range p.Omega {
			s, err := scatterer.At(w)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("T = %g, ω = %.4f: up %.3f (scattering %.3f), down %.3f, pairing² %.3f (%.3f), bound %.3f ± %.3f", c.temperature, w, p.Up[f], s.ThermalEmission(c.temperature), p.Down[f], p.Pairing[f], s.Emission()*(s.Emission()+1), p.Bound[f], (p.High[f]-p.Low[f])/2)
		}
		if p.Found != c.entangled {
			t.Errorf("T = %g: entangled is %v", c.temperature, p.Found)
		}
	}
}
