package report

import (
	"encoding/json"
	"math"
	"time"

	"tailrace/analysis/horizon"
	"tailrace/analysis/temperature"
	"tailrace/gpe"
	"tailrace/gpe/lab"
)

// Run is all that a report of a run is made from.
type Run struct {
	Title, Config, Version string
	Units                  Units
	Account                *horizon.Account
	Problem                *gpe.Problem
	Conserved              gpe.Conserved
	Checks                 []lab.Check
	Warnings               []string
	Engine                 Engine
	Rounding               *horizon.Rounding // nil in double precision
	SpaceTime              SpaceTime
	Beside                 *horizon.Beside // the exact map, if it was asked for
}

// Engine is how fast the ensemble ran.
type Engine struct {
	Kernel          string
	Precision       gpe.Precision
	Workers         int
	Steps           int           // time steps of a trajectory
	StepTime        time.Duration // in time steps, summed over workers
	Wall            time.Duration
	Trajectories    int // that ran in this session
	NoiseModes      string
	ModesFromCache  bool
	Directions      int // of the noise, for an exact map
	PointsPerSecond float64
}

// PerPoint returns the nanoseconds per grid point and time step of one
// trajectory, on one core.
func (e Engine) PerPoint(points int) float64 {
	if e.Trajectories == 0 {
		return math.NaN()
	}
	return float64(e.StepTime.Nanoseconds()) / float64(e.Trajectories) / float64(e.Steps) / float64(points)
}

// PerDirection returns the nanoseconds of wall time per grid point, time step
// and direction of an exact map.
func (e Engine) PerDirection(points int) float64 {
	return float64(e.Wall.Nanoseconds()) / float64(e.Directions) / float64(e.Steps) / float64(points)
}

// PerSecond returns trajectories per second of wall time.
func (e Engine) PerSecond() float64 { return float64(e.Trajectories) / e.Wall.Seconds() }

func (r *Run) flow(f horizon.Flow) object {
	return r.Units.flowOf(f.Upstream, f.Downstream, f.Horizon)
}

// Result returns the object of result.json. `flow` is the theory's, and
// `measured_flow` the ensemble's.
func (r *Run) Result() any {
	a := r.Account
	var o object
	o.set("title", r.Title)
	o.set("config", r.Config)
	o.set("version", r.Version)
	o.set("units", map[bool]string{true: "lab", false: "condensate"}[r.Units.Lab])
	o.set("trajectories", a.Trajectories)
	o.with(r.Units, "time", a.Time, Time)
	o.set("flow", r.flow(a.Predicted))
	o.set("measured_flow", r.flow(a.Measured))
	o.with(r.Units, "omega_max", a.OmegaMax, Rate)
	o.with(r.Units, "temperature_low_frequency", a.Scattered, Temperature)
	o.set("band", r.band())
	if b := r.Beside; b != nil {
		var e object
		e.set("chi_square_per_pixel", number(b.ChiSquare))
		e.set("chi_square_spread", number(b.Spread))
		e.set("pixels", b.Pixels)
		e.set("strength_over_predicted", number(b.Strength))
		e.set("temperatures", r.temperatures(b.Exact.Readings))
		o.set("exact", e)
	}
	o.set("temperatures", r.temperatures(a.Readings))
	var kept object
	if !a.Noiseless {
		kept.set("atoms_relative", number(r.Conserved.NormDrift))
		kept.with(r.Units, "energy_per_atom_over_kB", r.Conserved.EnergyDrift, Temperature)
	}
	o.set("conservation", kept)
	checks := []object{}
	for _, c := range r.Checks {
		checks = append(checks, object{{"name", c.Name}, {"value", number(c.Value)}, {"limit", number(c.Limit)}, {"ok", c.OK}, {"why", c.Why}})
	}
	o.set("checks", checks)
	o.set("warnings", append([]string{}, r.Warnings...))
	return o
}

func (r *Run) temperatures(readings []temperature.Reading) []object {
	temperatures := []object{} // an empty list, not null
	for _, t := range readings {
		var v object
		v.set("method", t.Method)
		v.with(r.Units, "value", t.Value, Temperature)
		v.with(r.Units, "low", t.Low, Temperature)
		v.with(r.Units, "high", t.High, Temperature)
		v.set("trusted", t.Trusted)
		v.set("why", t.Why)
		temperatures = append(temperatures, v)
	}
	return temperatures
}

func (r *Run) band() object {
	a := r.Account
	g := a.Predicted.Geometry()
	var o object
	// What could not be fitted is null: the keys are always there.
	w := a.Width
	if w == nil {
		nan := math.NaN()
		w = &temperature.Width{Amplitude: nan, Delay: nan, Offset: nan, ChiSquare: nan}
	}
	amplitudeError := math.NaN()
	if w.Covariance != nil {
		amplitudeError = math.Sqrt(w.Covariance.At(0, 0))
	}
	o.set("amplitude", number(w.Amplitude))
	o.set("amplitude_error", number(amplitudeError))
	o.with(r.Units, "delay", w.Delay, Time)
	o.set("offset", number(w.Offset))
	o.set("chi_square", number(w.ChiSquare))
	o.set("degrees_of_freedom", w.DegreesOfFreedom)
	o.set("amplitude_predicted_without_dispersion", number(a.SechHeight))
	slope, slopeError := math.NaN(), math.NaN()
	if l := a.Line; l != nil {
		slope = l.Slope
		if l.SlopeError > 0 {
			slopeError = l.SlopeError
		}
	}
	o.set("slope", number(slope))
	o.set("slope_error", number(slopeError))
	o.set("slope_predicted", number(g.Slope()))
	o.set("slope_predicted_with_dispersion", number(a.BentSlope))
	o.set("significance", number(a.Null.Significance))
	o.set("p_value", number(a.Null.PValue))
	o.set("strength_over_predicted", number(a.Null.Strength))
	var window object
	window.with(r.Units, "upstream_far", a.Window.UpFar, Length)
	window.with(r.Units, "upstream_near", a.Window.UpNear, Length)
	window.with(r.Units, "downstream_near", a.Window.DownNear, Length)
	window.with(r.Units, "downstream_far", a.Window.DownFar, Length)
	o.set("window", window)
	return o
}

// JSON returns result.json.
func (r *Run) JSON() ([]byte, error) {
	b, err := json.MarshalIndent(r.Result(), "", "  ")
	return append(b, '\n'), err
}
