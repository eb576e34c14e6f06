// Package forecast says what to expect of a run before it is done: the flow, the
// band and how it will look through the camera, when it is ripe, and how many
// shots it takes.
package forecast

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/band"
	"tailrace/analysis/camera"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
	"tailrace/gpe/lab"
)

// Input is dial settings in condensate units.
type Input struct {
	Profile        flow.Profile
	AtomsPerLength float64 // n₀ξ
	Temperature    float64 // of the cloud
	Camera         camera.Camera
	Age            float64 // of the horizon when the picture is taken
	Speed          float64 // of the step; 0 for a flow at rest
	CloudLength    float64 // ahead of the step at the start
	Width          float64 // of the step
	Shots          int     // that are planned, 0 for none
	Near, Fraction float64 // of the window, as for horizon.Settings
}

// Forecast is what to expect.
type Forecast struct {
	Up, Down  flow.State
	Horizon   flow.Horizon
	OmegaMax  float64
	Scattered float64 // temperature of the emission at low frequency

	Slope     float64 // dx′/dx of the band without dispersion
	Amplitude float64 // of g₂ − 1 in the middle of the predicted band, through the camera; negative
	Width     float64 // full width at half depth across it, upstream, before the camera
	Blurred   float64 // and through it
	Window    band.Window

	// StrengthError is the standard error of the band's strength in one shot:
	// that of M shots is a √M-th.
	StrengthError float64
	// Sensitivity is d ln(strength)/d ln T at the predicted temperature.
	Sensitivity         float64
	ShotsForBand        float64 // for 3 standard deviations
	ShotsForTemperature float64 // for T to 20 %
	Timing              Timing
	Checks              []lab.Check
}

// Timing is when what happens, since the start, in ħ/(m c₀²).
type Timing struct {
	Ripe      float64 // the window holds a band of eight pixels on each side
	WaveAtEnd float64 // the simple wave reaches the far end of the cloud
	WaveBack  float64 // and, reflected, the window
	StepAtEnd float64 // the step reaches the far end
	Imaging   float64 // planned
}

// shape is how much of the window's size a strength needs.
const claimSigma, accuracy = 3, 0.2

// New works out a forecast. Its errors are *band.ErrWindow, where the band is too
// young for the camera, and those of scattering.
//
// The strength of the band, the projection of a map on the prediction P (less its
// mean) with weights W = P/|P|², scatters from shot to shot by
//
//	σ² = Tr[W C_d Wᵀ C_u],
//
// with the covariance C of each side's relative density fluctuations,
//
//	C(d) = (1/n) ∫dk/2π S(k) |R(k)|² cos(kd) + photons on the diagonal,
//
// S the structure factor at the cloud's temperature and R the response of the
// camera: the two sides are independent but for the band. M shots leave σ/√M.
func New(in Input) (*Forecast, error) {
	f := &Forecast{}
	f.Up, f.Down, f.Horizon = in.Profile.Ends()
	scatterer, err := bogoliubov.NewScatterer(in.Profile)
	if err != nil {
		return nil, err
	}
	f.OmegaMax = scatterer.MaxFrequency()
	if f.Scattered, _, err = scatterer.LowFrequencyTemperature(); err != nil {
		return nil, err
	}
	g := band.Geometry{Up: f.Up.SoundSpeed - f.Up.Velocity, Down: f.Down.Velocity - f.Down.SoundSpeed}
	f.Slope = g.Slope()
	f.Window = band.AgedWindow(g, in.Age, in.Near, in.Fraction)
	f.time(in, g)
	xu, xd := pixels(f.Window.UpFar, f.Window.UpNear, in.Camera.Pixel), pixels(f.Window.DownNear, f.Window.DownFar, in.Camera.Pixel)
	const least = 8
	if len(xu) < least || len(xd) < least {
		return f, &band.ErrWindow{Side: map[bool]string{true: "upstream", false: "downstream"}[len(xu) < least],
			Why: fmt.Sprintf("at this age the band is %d pixels long upstream and %d downstream, at least %d are needed; image later, or with smaller pixels", len(xu), len(xd), least)}
	}
	if err := f.strength(in, scatterer, g, xu, xd); err != nil {
		return nil, err
	}
	f.check(in, g)
	return f, nil
}

func pixels(lo, hi, pixel float64) (x []float64) {
	for i := math.Ceil(lo / pixel); i*pixel <= hi; i++ {
		x = append(x, i*pixel)
	}
	return x
}

// time fills in the timetable.
func (f *Forecast) time(in Input, g band.Geometry) {
	t := &f.Timing
	t.Imaging = in.Age
	t.Ripe = math.Max((in.Near+8*in.Camera.Pixel)/g.Up, (in.Near+8*in.Camera.Pixel)/g.Down) / in.Fraction
	t.WaveAtEnd, t.WaveBack, t.StepAtEnd = math.NaN(), math.NaN(), math.NaN()
	if in.Speed > 0 && in.CloudLength > 0 {
		t.WaveAtEnd = in.CloudLength // at c₀ = 1
		t.StepAtEnd = in.CloudLength / in.Speed
		// Back at about c₀, to the window's far end, which moves with the step:
		// L − v_s t − |x| = t − L, |x| = fraction·(c_u−v_u)·t.
		t.WaveBack = 2 * in.CloudLength / (1 + in.Speed + in.Fraction*g.Up)
	}
}

// strength works out the band and what its strength scatters by.
func (f *Forecast) strength(in Input, s *bogoliubov.Scatterer, g band.Geometry, xu, xd []float64) error {
	theory := bogoliubov.NewBand(f.Up, f.Down, in.AtomsPerLength)
	theory.SetResponse(in.Camera.Response(in.Camera.Pixel / math.Sqrt(12)))
	w := theory.Over(xu, xd, f.Scattered/2, 1)
	pairing, err := w.Pairing(s, in.Temperature)
	if err != nil {
		return err
	}
	pattern := w.Paired(nil, pairing, 0)
	sides := &band.Sides{Xu: xu, Xd: xd}
	template := band.Template(sides, pattern)
	cu, cd := in.covariance(xu, f.Up), in.covariance(xd, f.Down)
	var left, right, product mat.Dense
	left.Mul(template, cd)
	right.Mul(&left, template.T())
	product.Mul(&right, cu)
	f.StrengthError = math.Sqrt(mat.Trace(&product))
	project := func(T float64) float64 {
		var product mat.Dense
		product.MulElem(template, mat.NewDense(len(xu), len(xd), theory.Over(xu, xd, T/2, 1).Map(nil, T, 0)))
		return mat.Sum(&product)
	}
	const step = 0.05
	f.Sensitivity = math.Log(project(f.Scattered*(1+step))/project(f.Scattered*(1-step))) / math.Log((1+step)/(1-step))
	f.ShotsForBand = math.Ceil(math.Pow(claimSigma*f.StrengthError, 2))
	f.ShotsForTemperature = math.Ceil(math.Pow(f.StrengthError/(accuracy*f.Sensitivity), 2))

	// Across the band, half way along it: the depth and the width, with the
	// camera and without.
	xp := 0.5 * (f.Window.DownNear + f.Window.DownFar)
	blurredDepth, blurred := profile(theory, s, xp, f, in.Temperature, g)
	f.Amplitude, f.Blurred = blurredDepth, blurred
	_, f.Width = profile(bogoliubov.NewBand(f.Up, f.Down, in.AtomsPerLength), s, xp, f, in.Temperature, g)
	return nil
}

// profile returns the lowest value and the full width at half of it along x at
// one x′.
func profile(theory *bogoliubov.Band, s *bogoliubov.Scatterer, xp float64, f *Forecast, T float64, g band.Geometry) (depth, width float64) {
	var x []float64
	const points = 400
	for i := range points {
		x = append(x, -3*xp*g.Up/g.Down*float64(points-i)/points)
	}
	w := theory.Over(x, []float64{xp}, f.Scattered/2, 1)
	pairing, err := w.Pairing(s, T)
	if err != nil {
		return math.NaN(), math.NaN()
	}
	at := 0
	y := w.Paired(nil, pairing, 0)
	for i, v := range y {
		if v < y[at] {
			at = i
		}
	}
	lo, hi := at, at
	for lo > 0 && y[lo] < y[at]/2 {
		lo--
	}
	for hi < len(y)-1 && y[hi] < y[at]/2 {
		hi++
	}
	return y[at], x[hi] - x[lo]
}

// covariance returns that of the relative density fluctuations of one side's
// pixels.
func (in *Input) covariance(x []float64, s flow.State) *mat.Dense {
	c := in.Camera
	atoms := s.Density * in.AtomsPerLength
	n := len(x)
	top := 30 / c.Pixel
	if c.Resolution > 0 {
		top = math.Min(top, 6/c.Resolution)
	}
	response := c.Response(0)
	const steps = 3000
	at := make([]float64, n)
	for q := range steps {
		k := top * (float64(q) + 0.5) / steps
		weight := bogoliubov.StructureFactor(k, s.SoundSpeed, in.Temperature) * response(k, k) * top / steps / (math.Pi * atoms)
		for i := range at {
			at[i] += weight * math.Cos(k*float64(i)*c.Pixel)
		}
	}
	if c.PhotonsPerAtom > 0 {
		at[0] += 1 / (c.PhotonsPerAtom * atoms * c.Pixel)
	}
	m := mat.NewDense(n, n, nil)
	for i := range n {
		for j := range n {
			m.Set(i, j, at[max(i-j, j-i)])
		}
	}
	return m
}

// check adds the conditions that concern the horizon and the picture.
func (f *Forecast) check(in Input, g band.Geometry) {
	add := func(name string, value, limit float64, why string) {
		f.Checks = append(f.Checks, lab.Check{Name: name, Value: value, Limit: limit, OK: value <= limit, Why: why})
	}
	add("cloud against horizon", in.Temperature/f.Scattered, 1, "temperature of the cloud over that of the emission: in a hotter cloud the band is there all the same, but the partners are hardly entangled and the noise is larger; cool further")
	add("width as a thermometer", f.Scattered/f.OmegaMax, 0.02, "temperature over ħω_max: above this the band is spread by dispersion and its width reads more than a tenth too low in a window like this; its height carries the temperature then, so that density and resolution must be known")
	add("step sharpness", in.Width*f.Up.SoundSpeed, 1, "width of the step in healing lengths of the plateau: a smoother step makes a colder horizon")
	if in.Camera.Resolution > 0 {
		add("resolution", in.Camera.Resolution*2.355/f.Width, 0.6, "the camera's full width at half maximum over that of the band across: above this the band is mostly blur")
	}
	add("pixels", in.Camera.Pixel/f.Width, 0.3, "pixel over the width of the band")
	if t := f.Timing; !math.IsNaN(t.WaveBack) {
		add("reflected wave", t.Imaging/t.WaveBack, 1, "imaging time over that when the simple wave, thrown back at the far end of the cloud, is in the window: image earlier, or use a longer cloud")
	}
	add("ripe", f.Timing.Ripe/f.Timing.Imaging, 1, "when the window holds a band of eight pixels on each side, over the imaging time: image later")
	if in.Shots > 0 {
		add("shots for a band", f.ShotsForBand/float64(in.Shots), 1, fmt.Sprintf("shots for three standard deviations, %.0f, over those planned", f.ShotsForBand))
		add("shots for a temperature", f.ShotsForTemperature/float64(in.Shots), 1, fmt.Sprintf("shots for the temperature to 20 %%, %.0f, over those planned", f.ShotsForTemperature))
	}
}
