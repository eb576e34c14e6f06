package configs

import (
	"errors"
	"fmt"
	"math"

	"tailrace/gpe"
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
	"tailrace/gpe/lab"
	"tailrace/gpe/lanes"
)

// Scenario is a config turned into a problem in condensate units, and the
// dictionary back to the laboratory. The noise is not found yet: for a trapped
// cloud that takes seconds (see AddNoise).
type Scenario struct {
	Config  *Config
	Problem *gpe.Problem

	InLab bool
	Scale lab.Scale // zero unless InLab
	Tube  *lab.Tube // nil unless InLab and trapped

	Sweep  *gpe.Sweep  // nil for a uniform flow
	Switch *gpe.Switch // nil for a sweep

	Checks []lab.Check
}

// Scenario builds the problem. It returns *Error, or several joined, for what
// shows only now: a grid too short for the cloud or too coarse for the flow, a
// time step too long, a step that runs out of cloud, more noise modes than
// atoms.
func (c *Config) Scenario() (*Scenario, error) {
	switch {
	case c.Given("cavity"):
		return nil, c.Fault("cavity", "", "an ensemble has one horizon, and this section asks for two", "leave it out, or see the modes between the two with tailrace cavity")
	case c.Flow.Kind == FlowUniform:
		return c.ring()
	case c.Sweep():
		return c.swept()
	}
	return nil, c.Fault("flow.kind", "", "there is no ensemble of this flow",
		`give kind = "uniform", or a [trap], a [cloud] and a [step] that is swept through it`)
}

// sizes is the lengths of a scenario in condensate units.
type sizes struct {
	length, wallWidth, wallHeight, frequency float64 // trap
	depth, width, speed, start, ramp         float64 // step
	temperature                              float64
	gridLength, timeStep                     float64
	times                                    []float64
}

// in converts the config with scale s; the zero scale leaves numbers alone.
func (c *Config) in(s *lab.Scale) sizes {
	if s == nil {
		return sizes{c.Trap.Length, c.Trap.WallWidth, c.Trap.WallHeight, c.Trap.AxialFrequency,
			c.stepDepth(), c.stepWidth(), c.stepSpeed(), c.Step.Start, c.Step.Ramp,
			c.Cloud.Temperature, c.Grid.Length, c.Grid.TimeStep, c.Record.Times}
	}
	z := sizes{s.FromMetres(c.Trap.Length), s.FromMetres(c.Trap.WallWidth), c.Trap.WallHeight, s.FromHertz(c.Trap.AxialFrequency),
		s.FromJoules(c.Step.Depth), s.FromMetres(c.Step.Width), s.FromMetresPerSecond(c.Step.Speed), s.FromMetres(c.Step.Start), s.FromSeconds(c.Step.Ramp),
		s.FromKelvin(c.Cloud.Temperature), s.FromMetres(c.Grid.Length), s.FromSeconds(c.Grid.TimeStep), nil}
	for _, t := range c.Record.Times {
		z.times = append(z.times, s.FromSeconds(t))
	}
	return z
}

func (c *Config) stepDepth() float64 { return firstPositive(c.Step.Depth, c.Flow.Depth) }
func (c *Config) stepWidth() float64 { return firstPositive(c.Step.Width, c.Flow.Width) }
func (c *Config) stepSpeed() float64 { return firstPositive(c.Step.Speed, c.Flow.Speed) }

func firstPositive(a, b float64) float64 {
	if a > 0 {
		return a
	}
	return b
}

// swept builds the problem of a step swept through a trapped cloud.
func (c *Config) swept() (*Scenario, error) {
	if len(c.Record.Times) == 0 {
		return nil, c.Fault("record.times", "nothing", "at least one time", `for example times = ["60 ms", "110 ms"]`)
	}
	s := &Scenario{Config: c, InLab: c.Units == Lab}
	if !s.InLab {
		p, err := s.cloud(c.in(nil), fluid.Cubic())
		if err != nil {
			return nil, err
		}
		p.AtomsPerLength = c.Cloud.Atoms / p.Ground.Atoms
		return s, s.finish()
	}
	tube, err := lab.NewTube(lab.Atom{Mass: c.Atom.Mass, ScatteringLength: c.Atom.ScatteringLength}, c.Trap.RadialFrequency, c.Cloud.Radial)
	if err != nil {
		return nil, c.blame("trap.radial_frequency", err)
	}
	s.Tube = tube
	n0, err := c.densityGuess(tube)
	if err != nil {
		return nil, c.blame("cloud.atoms", err)
	}
	// The reference density is that of the plateau (of the Thomas–Fermi peak in
	// a harmonic trap) for which the true ground state has the wanted number of
	// atoms: a few rounds from the Thomas–Fermi guess.
	power := 1.0 // d ln N / d ln n₀
	if c.Trap.Shape == Harmonic {
		power = 1.5
	}
	for range 12 {
		scale, law, err := tube.Scale(n0)
		if err != nil {
			return nil, c.blame("cloud.atoms", err)
		}
		s.Scale = scale
		p, err := s.cloud(c.in(&scale), law)
		if err != nil {
			return nil, err
		}
		p.AtomsPerLength = scale.AtomsPerHealingLength
		ratio := c.Cloud.Atoms / p.Atoms()
		if math.Abs(ratio-1) < 1e-6 {
			return s, s.finish()
		}
		n0 *= math.Pow(ratio, 1/power)
	}
	return nil, c.Fault("cloud.atoms", "", "a number for which the trap has a ground state", "the atom number did not settle; try a longer trap or more atoms")
}

func (c *Config) densityGuess(tube *lab.Tube) (float64, error) {
	if c.Trap.Shape == Harmonic {
		return tube.HarmonicDensity(c.Cloud.Atoms, c.Trap.AxialFrequency)
	}
	return tube.BoxDensity(c.Cloud.Atoms, lab.Walls{Length: c.Trap.Length, Width: c.Trap.WallWidth, Height: c.Trap.WallHeight})
}

// blame turns an error from below into a fault of a key.
func (c *Config) blame(key string, err error) error {
	return c.Fault(key, "", "a value for which the cloud exists", err.Error())
}

// cloud lays out grid and landscape and finds the ground state.
func (s *Scenario) cloud(z sizes, law fluid.Law) (*gpe.Problem, error) {
	c := s.Config
	mu := law.Mu(1)
	var trap gpe.Confinement
	var halfCloud, margin float64
	if c.Trap.Shape == Harmonic {
		edge := math.Sqrt(2*mu) / z.frequency
		trap, halfCloud, margin = gpe.Harmonic{Frequency: z.frequency, Edge: edge}, edge, 0.3*edge+10
	} else {
		trap, halfCloud, margin = gpe.Box{Length: z.length, WallWidth: z.wallWidth, WallHeight: z.wallHeight * mu}, z.length/2, 12+4*z.wallWidth
	}
	end := z.times[len(z.times)-1]
	grid, err := s.grid(z, halfCloud, margin, end)
	if err != nil {
		return nil, err
	}
	start := trap.RightEdge() + z.start
	if last := start - z.speed*end; last < -halfCloud {
		return nil, c.Fault("record.times", "", fmt.Sprintf("at most %s is allowed, when the step reaches the far end of the cloud", s.duration((start+halfCloud)/z.speed)),
			"record earlier, sweep more slowly or use a longer cloud")
	}
	if right := grid.X(grid.N - 1); start > right || start < grid.Origin {
		return nil, c.Fault("step.start", "", "it must be a place on the grid", "start the step at the edge of the cloud, start = 0")
	}
	sweep := gpe.NewSweep(grid, gpe.Sweep{Trap: trap, Depth: z.depth, Width: z.width, Speed: z.speed, Start: start, Ramp: z.ramp})
	v := make([]float64, grid.N)
	for j := range v {
		v[j] = trap.At(grid.X(j))
	}
	ground, err := gpe.FindGround(grid, law, v, mu)
	if err != nil {
		return nil, c.Fault("cloud.atoms", "", "a cloud that fits its trap", err.Error())
	}
	s.Sweep = sweep
	s.Problem = &gpe.Problem{Grid: grid, Law: law, Landscape: sweep, Ground: ground, Temperature: z.temperature,
		Cutoff: c.Ensemble.NoiseCutoff, Scheme: gpe.Strang(), TimeStep: z.timeStep, Times: z.times, Seed: c.Ensemble.Seed, Precision: c.Ensemble.Precision}
	return s.Problem, s.timeStep()
}

// Spacing of an automatic grid: at most coarse in ξ and a share of the widths
// of step and wall, whose Fourier transform must have died at k_max.
const (
	coarse    = 0.36
	perWidth  = 0.7
	stepShare = 0.6 // of the longest stable time step
	longStep  = 0.1 // ħ/mc²: keeps the energy to 10⁻² m c² an atom
)

func (s *Scenario) grid(z sizes, halfCloud, margin, end float64) (gpe.Grid, error) {
	c := s.Config
	left := -halfCloud - margin
	length := z.gridLength
	if length == 0 {
		// Room for the outflow: it falls from m c² + depth and keeps ahead of
		// the step's own motion.
		outflow := math.Max(0, math.Sqrt(2*(z.depth+1))-z.speed+0.5) * end
		if c.Trap.Shape == Harmonic {
			outflow = math.Min(outflow, halfCloud*(math.Sqrt(1+z.depth)-1)+margin)
		}
		length = 2*halfCloud + 2*margin + outflow
	}
	if need := 2*halfCloud + 12; length < need {
		return gpe.Grid{}, c.Fault("grid.length", "", fmt.Sprintf("at least %s is needed for the cloud and its walls, and more for what the step lets out", s.distance(need)),
			"use a longer grid or leave its length out")
	}
	points := c.Grid.Points
	if points == 0 {
		dx := math.Min(coarse, perWidth*z.width)
		if c.Trap.Shape != Harmonic {
			dx = math.Min(dx, perWidth*z.wallWidth)
		}
		points = goodLength(int(math.Ceil(length / dx)))
	}
	if err := c.points(points); err != nil {
		return gpe.Grid{}, err
	}
	g := gpe.NewGrid(points, length, left)
	if z.width < g.Dx/2 {
		return gpe.Grid{}, c.Fault("grid.points", fmt.Sprint(points), fmt.Sprintf("the step's width is %.2g of a grid spacing and would not be seen", z.width/g.Dx),
			fmt.Sprintf("use at least %d points", goodLength(int(math.Ceil(length/(2*z.width))))))
	}
	// The outflow and the vacuum waves that meet the step must be waves of the
	// grid.
	if fast := math.Sqrt(2*(z.depth+1)) + z.speed; fast > g.MaxWavenumber()/2 {
		return gpe.Grid{}, c.Fault("step.speed", "", fmt.Sprintf("with this depth the fluid reaches %s, and the grid carries at most %s", s.velocity(fast), s.velocity(g.MaxWavenumber()/2)),
			"use more grid.points, or a slower or shallower step")
	}
	return g, nil
}

// points refuses a number of grid points that no transform has.
func (c *Config) points(n int) error {
	_, err := lanes.NewPlan(n)
	var length *lanes.LengthError
	switch {
	case err == nil:
		return nil
	case errors.As(err, &length) && length.Below > 0 && length.Above > 0:
		return c.Fault("grid.points", "", "it must be 2^a, 3·2^a or 5·2^a", fmt.Sprintf("the nearest are %d and %d", length.Below, length.Above))
	}
	return c.Fault("grid.points", "", "it must be 2^a, 3·2^a or 5·2^a", err.Error())
}

// goodLength returns the smallest length of at least n points that the
// transform likes.
func goodLength(n int) int {
	for m := max(n, 64); ; m++ {
		odd := m
		for odd%2 == 0 {
			odd /= 2
		}
		if odd == 1 || odd == 3 || odd == 5 {
			return m
		}
	}
}

// timeStep refuses a time step that is unstable. Where there is none, the
// grid's limit stands in until AddNoise can choose one.
func (s *Scenario) timeStep() error {
	p := s.Problem
	limit := p.LongestStep()
	if p.TimeStep == 0 {
		p.TimeStep = stepShare * limit
	}
	if p.TimeStep > limit {
		return s.Config.Fault("grid.time_step", "", fmt.Sprintf("at most %s is stable on this grid", s.duration(limit)),
			"beyond it waves of the grid grow out of nothing: use a shorter step, or fewer grid points")
	}
	return nil
}

// ring builds the problem of a uniform flow.
func (c *Config) ring() (*Scenario, error) {
	if len(c.Record.Times) == 0 {
		return nil, c.Fault("record.times", "nothing", "at least one time", "for example times = [60, 90]")
	}
	if !c.Given("cloud.atoms") {
		return nil, c.Fault("cloud.atoms", "nothing", "the number of atoms on the ring", "it sets the size of the quantum noise")
	}
	s := &Scenario{Config: c, InLab: c.Units == Lab}
	z := c.in(nil)
	up, down, v, width := c.Flow.SoundSpeedUp, c.Flow.SoundSpeedDown, c.Flow.Velocity, c.Flow.Width
	if s.InLab {
		if c.Grid.Length == 0 {
			return nil, c.Fault("grid.length", "nothing", "the length of the ring", "with the atom number it gives the density of a uniform flow")
		}
		scale, err := lab.NewScale(c.Atom.Mass, c.Cloud.Atoms/c.Grid.Length, up)
		if err != nil {
			return nil, c.blame("flow.sound_speed_up", err)
		}
		s.Scale, z = scale, c.in(&scale)
		up, down, v = 1, scale.FromMetresPerSecond(down), scale.FromMetresPerSecond(v)
		width = scale.FromMetres(width)
	}
	length := firstPositive(z.gridLength, 512)
	points := c.Grid.Points
	if points == 0 {
		points = goodLength(int(math.Ceil(length * 2)))
	}
	if err := c.points(points); err != nil {
		return nil, err
	}
	g := gpe.NewGrid(points, length, -length/2)
	if v > g.MaxWavenumber()/4 {
		return nil, c.Fault("flow.velocity", "", fmt.Sprintf("the grid carries a fluid of at most %s", s.velocity(g.MaxWavenumber()/4)), "use more grid.points or a shorter ring")
	}
	land := gpe.NewSwitch(g, gpe.Switch{Velocity: v, SoundUp: up, SoundDown: down, Width: width, Ramp: z.ramp})
	s.Switch = land
	s.Problem = &gpe.Problem{Grid: g, Law: fluid.Cubic(), Landscape: land, Ground: gpe.UniformGround(g, fluid.Cubic()),
		AtomsPerLength: c.Cloud.Atoms / length, Temperature: z.temperature, Cutoff: c.Ensemble.NoiseCutoff,
		Scheme: gpe.Strang(), TimeStep: z.timeStep, Times: z.times, Seed: c.Ensemble.Seed, Precision: c.Ensemble.Precision}
	if err := s.timeStep(); err != nil {
		return nil, err
	}
	return s, s.finish()
}

// leastModes is the least number of waves that can carry a band at all.
const leastModes = 32

// finish makes the checks that need the whole problem.
func (s *Scenario) finish() error {
	p, c := s.Problem, s.Config
	if s.Tube != nil {
		r, err := s.Tube.Regime(s.Scale.LineDensity, c.Cloud.Temperature)
		if err != nil {
			return c.blame("cloud.temperature", err)
		}
		length := c.Trap.Length
		if c.Trap.Shape == Harmonic {
			length = 2 * s.Tube.HarmonicRadius(s.Scale.LineDensity, c.Trap.AxialFrequency)
		}
		s.Checks = append(s.Checks, r.Checks(length)...)
	}
	modes := p.Commutator() * p.AtomsPerLength * p.Grid.Length()
	if modes < leastModes {
		return c.Fault("ensemble.noise_cutoff", "", fmt.Sprintf("at least %.2g", leastModes*math.Pi/p.Grid.Length()),
			fmt.Sprintf("it leaves %.0f waves, too few for any band", modes))
	}
	if modes > p.Atoms() {
		return c.Fault("grid.points", "", fmt.Sprintf("it makes %.0f noise modes for %.0f atoms, and the truncated Wigner method needs far more atoms than modes", modes, p.Atoms()),
			"use fewer grid points, a shorter grid, a lower ensemble.noise_cutoff or more atoms")
	}
	s.Checks = append(s.Checks, lab.Check{
		Name: "noise modes", Value: modes / 2 / p.Atoms(), Limit: 0.15,
		Why: fmt.Sprintf("half a quantum in each of %.0f modes, over %.0f atoms: the truncated Wigner method wants few", modes, p.Atoms()),
	})
	if swelling := p.Law.Swelling(); 2*swelling*p.Commutator() >= 1 {
		return c.Fault("grid.points", "", "a grid on which the vacuum noise leaves the swollen law defined", "use fewer grid points or more atoms")
	}
	for i := range s.Checks {
		s.Checks[i].OK = s.Checks[i].Value <= s.Checks[i].Limit
	}
	return nil
}

// ErrNoPrediction means that there is no single flow to predict: along a
// harmonic cloud it changes with the density.
var ErrNoPrediction = errors.New("the flow changes along a harmonic cloud")

// Predicted returns the stationary flow that theory gives without simulation:
// of a sweep into a box, or of a uniform flow. Its error is a *Error about the
// step when there is no such flow, or ErrNoPrediction.
func (s *Scenario) Predicted() (flow.Profile, error) {
	if s.Switch != nil {
		w := s.Switch
		u, err := flow.UniformSwitch(w.Velocity, w.SoundUp, w.SoundDown, w.Width)
		if err != nil {
			return nil, s.Config.Fault("flow.velocity", "", "a velocity between the two sound speeds", err.Error())
		}
		return u, nil
	}
	if s.Config.Trap.Shape == Harmonic {
		return nil, ErrNoPrediction
	}
	t, err := flow.Sweep(s.Problem.Law, s.Sweep.Speed, s.Sweep.Depth, s.Sweep.Width)
	if err != nil {
		return nil, s.Config.Fault("step.speed", "", "there is no horizon at this speed, depth and width", err.Error())
	}
	return t, nil
}

// AddNoise finds the modes of the initial state and fills in Problem.Noise,
// and, where the config gives no time step, chooses it and the splitting.
func (s *Scenario) AddNoise(cache gpe.ModeCache) (cached bool, err error) {
	p := s.Problem
	if p.Noise, cached, err = NoiseOf(p, cache, p.Cutoff); err != nil || s.Config.Grid.TimeStep > 0 {
		return cached, err
	}
	if p.Scheme, p.TimeStep, err = gpe.ChooseStep(p, s.Config.Grid.Accuracy); err != nil {
		if errors.Is(err, gpe.ErrNoCondensate) {
			return cached, s.Config.Fault("cloud.temperature", "", "a cloud that is mostly condensate", err.Error())
		}
		return cached, s.Config.Fault("grid.accuracy", "", "an accuracy that a time step can reach", err.Error())
	}
	return cached, nil
}

// NoiseOf returns the noise of p's initial state up to a cut-off.
func NoiseOf(p *gpe.Problem, cache gpe.ModeCache, cutoff float64) (noise gpe.Noise, cached bool, err error) {
	if w, ok := p.Landscape.(*gpe.Switch); ok {
		noise, err = gpe.NewPlaneWaves(p.Ground, w.SoundUp, p.Temperature, p.AtomsPerLength, cutoff)
		return noise, true, err
	}
	modes, cached, err := cache.Modes(p.Ground, cutoff)
	if err != nil {
		return nil, false, err
	}
	return gpe.NewTrappedNoise(p.Ground, modes, p.Temperature, p.AtomsPerLength, cutoff), cached, nil
}

// distance, duration and velocity print a number of condensate units in the
// config's own units.
func (s *Scenario) distance(x float64) string {
	if s.InLab {
		return formatQuantity(s.Scale.Metres(x), length)
	}
	return fmt.Sprintf("%.4g", x)
}

func (s *Scenario) duration(t float64) string {
	if s.InLab {
		return formatQuantity(s.Scale.Seconds(t), duration)
	}
	return fmt.Sprintf("%.4g", t)
}

func (s *Scenario) velocity(v float64) string {
	if s.InLab {
		return formatQuantity(s.Scale.MetresPerSecond(v), speed)
	}
	return fmt.Sprintf("%.4g", v)
}
