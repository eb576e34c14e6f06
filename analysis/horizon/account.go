package horizon

import (
	"fmt"
	"math"

	"tailrace/analysis/band"
	"tailrace/analysis/correlation"
	"tailrace/analysis/moments"
	"tailrace/analysis/temperature"
	"tailrace/gpe"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// Input is what an account is drawn up from.
type Input struct {
	Problem   *gpe.Problem
	Sums      *moments.Sums
	Shots     moments.Shots // |ψ|² of every trajectory at the time of the account
	Current   []float64     // mean current there
	Moments   *gpe.Moments  // instead of Sums, Shots and Current: the ensemble without sampling error
	Time      float64
	Frame     Frame
	Predicted flow.Profile // nil: the flow over the step at the measured density
	Step      Step         // with Predicted nil
	Settings  Settings
	Window    band.Window         // empty: as the band's age allows
	Response  bogoliubov.Response // of pictures; nil for none
	Memory    *Memory             // of theory, between campaigns; nil for none
	Cure      string              // what to change when the plateau is not clean
}

// Step is the potential step, for a prediction at the measured density.
type Step struct{ Depth, Width float64 }

// Settings are the choices of the analysis.
type Settings struct {
	Near      float64 // closest the window comes to the horizon, in ξ
	Fraction  float64 // of the way the partners have come that the window covers
	Span      float64 // half the width of the cut, in units of 1/κ
	Resamples int     // bootstrap
	Block     int     // shots drawn together in it, 0 for 1
	// TemplateOnly leaves out the band's line and all thermometers but the
	// template: what many virtual campaigns need.
	TemplateOnly bool
	Shuffles     int // null
	Seed         uint64
	// HeightError is the relative standard error of the predicted height of the
	// band (temperature.Sampling).
	HeightError float64
}

// DefaultSettings are what `run` uses.
var DefaultSettings = Settings{Near: 4, Fraction: 0.65, Span: 9, Resamples: 400, Shuffles: 1000, Seed: 1}

// Flow is both sides and the horizon between them.
type Flow struct {
	Upstream, Downstream flow.State
	Horizon              flow.Horizon // position from the step
}

// Geometry returns the speeds of the partners.
func (f Flow) Geometry() band.Geometry {
	return band.Geometry{Up: f.Upstream.SoundSpeed - f.Upstream.Velocity, Down: f.Downstream.Velocity - f.Downstream.SoundSpeed}
}

// Account is what a run says of its horizon.
type Account struct {
	Time         float64
	Trajectories int
	Noiseless    bool       // drawn from gpe.Moments: there is no chance in it
	Measured     Flow       // of the ensemble: windows' means
	DensityError [2]float64 // standard errors of the densities upstream and downstream, of measured shots
	Predicted    Flow       // of theory
	MeanField    *Profile
	Ensemble     *Profile
	Map          *correlation.Map // positions from the horizon
	Window       band.Window      // from the horizon
	OmegaMax     float64
	SechHeight   float64 // predicted A of the dispersionless band

	// Scattered is the temperature of the predicted flow's emission at low
	// frequency, and ScatteredError how well that limit is known.
	Scattered, ScatteredError float64

	Cut        *band.Cut
	Line       *band.Line
	BentSlope  float64 // what the line's fit makes of the predicted band with dispersion
	Null       *band.Null
	Width      *temperature.Width
	Dispersive *temperature.Dispersive
	Coherence  *temperature.Coherence
	Template   *temperature.Template
	Readings   []temperature.Reading
	// Bias is, for each method, what it makes of the predicted band in this
	// window, over Scattered; a method that cannot read it is not there.
	Bias map[string]float64
	// PredictedCut is the predicted band in the cut's bins, and
	// PredictedCoherence |⟨b_u b_d2⟩| as the window shows it.
	PredictedCut, PredictedCoherence []float64
	// TemplateCut is the fitted template in the cut's bins, with what lies
	// under it.
	TemplateCut []float64

	Ripples  []Ripple
	Warnings []string

	meanCurrent []float64 // of the mean field, in the grid's frame
	profile     flow.Profile
	scatterer   *bogoliubov.Scatterer
}

// Source says what the account was drawn from.
func (a *Account) Source() string {
	if a.Noiseless {
		return "without sampling error"
	}
	return fmt.Sprintf("%d trajectories", a.Trajectories)
}

// PredictedTemperature returns κ/2π of the predicted flow.
func (a *Account) PredictedTemperature() float64 { return a.Predicted.Horizon.Temperature }

// Foresee is the part of an account that needs no ensemble: the noise-free
// flow, its horizon, the theory, the window. Of the input it needs neither sums
// nor shots. Its errors say that there will be nothing to analyse:
// *NoHorizonError, *band.ErrWindow and *flow.NoFlow.
func Foresee(in Input) (*Account, error) {
	p := in.Problem
	a := &Account{Time: in.Time}
	density, current, err := gpe.MeanField(p, []float64{in.Time})
	if err != nil {
		return nil, err
	}
	if a.MeanField, err = NewProfile(p, in.Frame, density[0], current[0], in.Time); err != nil {
		return nil, err
	}
	a.meanCurrent = current[0]
	if err := a.predict(in); err != nil {
		return nil, err
	}
	a.OmegaMax = bogoliubov.MaxFrequency(a.Predicted.Downstream.Velocity, a.Predicted.Downstream.SoundSpeed)
	a.SechHeight = bogoliubov.SechAmplitude(a.Predicted.Horizon.SurfaceGravity, a.Predicted.Upstream, a.Predicted.Downstream, p.AtomsPerLength)
	if a.Window = in.Window; a.Window == (band.Window{}) {
		a.Window = band.AgedWindow(a.Predicted.Geometry(), in.Frame.Age, in.Settings.Near, in.Settings.Fraction)
		a.clip()
	}
	return a, a.Window.Check(a.fromHorizon(), a.MeanField.Density)
}

// fromHorizon returns the grid's positions from the horizon.
func (a *Account) fromHorizon() []float64 {
	x := make([]float64, len(a.MeanField.X))
	for j := range x {
		x[j] = a.MeanField.X[j] - a.MeanField.Horizon.Position
	}
	return x
}

// Draw draws up the account. Its errors are those of Foresee; a fit that fails
// is not an error but a warning, and leaves its field nil.
func Draw(in Input) (*Account, error) {
	a, err := Foresee(in)
	if err != nil {
		return nil, err
	}
	x := a.fromHorizon()
	order := ordering(in.Problem, a.MeanField.Density, a.meanCurrent)
	var sides *band.Sides
	if m := in.Moments; m != nil {
		a.Noiseless, in.Current = true, m.Current
		a.Map = correlation.NewNoiseless(m, x, order)
		sides, err = band.NoiselessSides(m, x, a.Window)
	} else {
		a.Trajectories = in.Sums.Count
		if a.Map, err = correlation.New(in.Sums, in.Shots, x, order); err != nil {
			return nil, err
		}
		sides, err = band.NewSides(in.Shots, x, a.Map.MeanDensity, a.Window)
	}
	if err != nil {
		return nil, err
	}
	a.measure(in)
	return a, a.read(sides, in)
}

// predict fills in the theory of the flow.
func (a *Account) predict(in Input) error {
	profile := in.Predicted
	if profile == nil {
		// Near the step a harmonic cloud is as good as uniform; what happens
		// there is set by the plateau that leads up to it.
		local := a.MeanField.state(a.MeanField.Horizon.Position-in.Settings.Near-8, a.MeanField.Horizon.Position-in.Settings.Near)
		t, err := flow.OverStep(in.Problem.Law, local.Density, in.Step.Depth, in.Step.Width)
		if err != nil {
			return fmt.Errorf("over the step at the density found upstream, %.4g: %w", local.Density, err)
		}
		profile = t
	}
	a.Predicted.Upstream, a.Predicted.Downstream, a.Predicted.Horizon = profile.Ends()
	a.profile = profile
	var err error
	if a.scatterer, err = bogoliubov.NewScatterer(profile); err != nil {
		return err
	}
	a.Scattered, a.ScatteredError, err = a.scatterer.LowFrequencyTemperature()
	return err
}

// even is how far the mean field's density may depart from that beside the
// horizon before the window ends: the band's speeds hold only where the flow is
// about uniform. In a box it never does before the band's own end.
const even = 0.3

// clip ends the window where the flow stops being about uniform.
func (a *Account) clip() {
	h := a.MeanField.Horizon.Position
	w := &a.Window
	bound := func(side string, from, to, step float64) float64 {
		beside := a.MeanField.state(h+math.Min(from, from+step), h+math.Max(from, from+step)).Density
		reach := to
		for j, x := range a.MeanField.X {
			x -= h
			inside := x > math.Min(from, to) && x < math.Max(from, to)
			if inside && math.Abs(a.MeanField.Density[j]/beside-1) > even && math.Abs(x) < math.Abs(reach) {
				reach = x
			}
		}
		if reach != to {
			a.warn("the %s window ends at %.3g ξ instead of %.3g: farther out the density departs by more than %.0f %% from that beside the horizon", side, reach, to, 100*even)
		}
		return reach
	}
	w.UpFar = bound("upstream", w.UpNear, w.UpFar, -4)
	w.DownFar = bound("downstream", w.DownNear, w.DownFar, 4)
}

// ordering is the normal ordering of p's noise. With a cut-off the commutator
// is the kernel of the waves that carry noise and the coherence is taken from
// the mean field.
func ordering(p *gpe.Problem, density, current []float64) correlation.Ordering {
	o := correlation.Ordering{Commutator: p.Commutator()}
	if p.Cutoff <= 0 || p.Cutoff >= p.Grid.MaxWavenumber() {
		return o
	}
	waves := math.Floor(p.Cutoff * p.Grid.Length() / (2 * math.Pi))
	o.Kernel = func(i, j int) float64 {
		// Σ_{|q| ≤ waves} e^{2πiq(i−j)/N}: Dirichlet's kernel.
		half := math.Pi * float64(i-j) / float64(p.Grid.N)
		return math.Sin((2*waves+1)*half) / math.Sin(half) / (p.AtomsPerLength * p.Grid.Length())
	}
	phase := make([]float64, p.Grid.N)
	drift := p.Landscape.Drift()
	for j := 1; j < len(phase); j++ {
		v := 0.0
		if density[j] > 1e-3 {
			v = current[j]/density[j] - drift
		}
		phase[j] = phase[j-1] + v*p.Grid.Dx
	}
	o.Coherence = func(i, j int) float64 {
		return math.Sqrt(density[i]*density[j]) * math.Cos(phase[i]-phase[j])
	}
	return o
}

// measure takes the ensemble's flow in the windows.
func (a *Account) measure(in Input) {
	h := a.MeanField.Horizon.Position
	w := a.Window
	profile, err := NewProfile(in.Problem, in.Frame, a.Map.MeanDensity, in.Current, in.Time)
	if err != nil {
		// The ensemble's mean has too much noise at the step: the mean field
		// has the horizon.
		profile = a.MeanField
	}
	a.Ensemble = profile
	// Its κ is a derivative of noisy data: the horizon is the mean field's.
	a.Measured = Flow{profile.state(h+w.UpFar, h+w.UpNear), profile.state(h+w.DownNear, h+w.DownFar), a.MeanField.Horizon}
	a.Ripples = []Ripple{
		a.MeanField.ripple("upstream", h+w.UpFar, h+w.UpNear),
		a.MeanField.ripple("downstream", h+w.DownNear, h+w.DownFar),
	}
}

func (a *Account) warn(format string, args ...any) {
	a.Warnings = append(a.Warnings, fmt.Sprintf(format, args...))
}
