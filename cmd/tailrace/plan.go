package main

import (
	"errors"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"tailrace/analysis/band"
	"tailrace/analysis/camera"
	"tailrace/analysis/forecast"
	"tailrace/analysis/horizon"
	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe/flow"
	"tailrace/gpe/lab"
)

type planOptions struct {
	asJSON bool
	aim    string
}

func planCommand() *cobra.Command {
	o := planOptions{}
	c := &cobra.Command{
		Use:   "plan CONFIG",
		Short: "what to expect from these dial settings, and whether to trust it",
		Long: `plan says, without simulation, what the settings of CONFIG make: the flow, the
temperature, the band as the camera will show it, when it is ripe, how many shots it
takes, and which conditions hold.

With --aim temperature=0.2nK, or --aim mach=0.6, it finds the depths of the step that
reach it, for a range of speeds.`,
		Args: oneConfig,
		RunE: func(_ *cobra.Command, args []string) error { return o.run(args[0]) },
	}
	c.Flags().BoolVar(&o.asJSON, "json", false, "print one JSON object on stdout and nothing else there")
	c.Flags().StringVar(&o.aim, "aim", "", "temperature=VALUE (of the emission) or mach=VALUE, upstream")
	return c
}

func (o *planOptions) run(name string) error {
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	s, err := config.Stationary()
	if err != nil {
		return err
	}
	in, err := planned(config, s)
	if err != nil {
		return err
	}
	f, err := forecast.New(*in)
	var young *band.ErrWindow
	if errors.As(err, &young) {
		return config.Fault("record.times", "", "a last time at which the camera sees a band", err.Error())
	} else if err != nil {
		return err
	}
	p := &report.Plan{Title: config.Title, Config: config.Source, Version: version, Units: unitsOf(s), F: f, Planned: config.Imaging.Shots}
	if s.InLab && config.Flow.Kind != configs.FlowUniform {
		tube, err := lab.NewTube(lab.Atom{Mass: config.Atom.Mass, ScatteringLength: config.Atom.ScatteringLength}, config.Trap.RadialFrequency, config.Cloud.Radial)
		if err != nil {
			return err
		}
		regime, err := tube.Regime(s.Scale.LineDensity, config.Cloud.Temperature)
		if err != nil {
			return err
		}
		p.Cloud, p.Checks = &regime, regime.Checks(config.Trap.Length)
	}
	if o.aim != "" {
		if p.Aims, err = o.reach(s, in); err != nil {
			return err
		}
	}
	if o.asJSON {
		return printJSON(p.JSON())
	}
	return p.Summary(os.Stdout)
}

// planned is the input of a forecast.
func planned(c *configs.Config, s *configs.Stationary) (*forecast.Input, error) {
	if !c.Given("imaging") {
		return nil, c.Fault("imaging.resolution", "nothing", "the camera", "a section [imaging] says how shots are taken, and so how many it takes")
	}
	if len(c.Record.Times) == 0 {
		return nil, c.Fault("record.times", "nothing", "when pictures are taken", "for example "+map[bool]string{true: `times = ["110 ms"]`, false: "times = [90]"}[s.InLab])
	}
	if s.PerXi == 0 {
		return nil, c.Fault("cloud.atoms", "nothing", "the number of atoms", "the size of the band and of the noise depend on it")
	}
	l := s.Length()
	im, d := c.Imaging, horizon.DefaultSettings
	in := &forecast.Input{Profile: s.Profile, AtomsPerLength: s.PerXi, Temperature: s.Temperature, Shots: im.Shots, Near: d.Near, Fraction: d.Fraction,
		Camera: camera.Camera{Pixel: im.Pixel / l, Resolution: im.Resolution / l, PhotonsPerAtom: im.PhotonsPerAtom, NumberSpread: im.AtomNumberSpread, Jitter: im.StepJitter / l},
		Age:    s.Age(c.Record.Times[len(c.Record.Times)-1])}
	if t, ok := s.Profile.(*flow.Transonic); ok {
		in.Width = t.Width
		in.Speed, in.CloudLength = c.Step.Speed, c.Trap.Length
		if s.InLab {
			in.Speed, in.CloudLength = s.Scale.FromMetresPerSecond(c.Step.Speed), s.Scale.FromMetres(c.Trap.Length)
		}
	} else if u, ok := s.Profile.(*flow.Uniform); ok {
		in.Width = u.Width
	}
	if !(in.Age > 0) {
		return nil, c.Fault("record.times", "", "a time after the horizon has come on", "record later")
	}
	return in, nil
}

// speeds is for how many speeds an aim is looked for.
const speeds = 12

// reach finds the settings that have what is aimed at.
func (o *planOptions) reach(s *configs.Stationary, in *forecast.Input) ([]report.Aim, error) {
	t, ok := s.Profile.(*flow.Transonic)
	if !ok || in.Speed == 0 {
		return nil, &usageError{errors.New("--aim turns the dials of a swept step, and this config has none")}
	}
	name, text, _ := strings.Cut(o.aim, "=")
	wrong := &usageError{fmt.Errorf("--aim = %q: temperature=0.2nK (a plain number in condensate units) or mach=0.6 is expected", o.aim)}
	var aim flow.Aim
	switch name {
	case "mach":
		v, err := strconv.ParseFloat(text, 64)
		if err != nil || !(v > 0 && v < 1) {
			return nil, wrong
		}
		aim = flow.Mach(v)
	case "temperature":
		v, err := configs.ParseTemperature(text, s.InLab)
		if err != nil {
			return nil, wrong
		}
		if s.InLab {
			v = s.Scale.FromKelvin(v)
		}
		aim = flow.SurfaceGravity(v)
	default:
		return nil, wrong
	}
	var aims []report.Aim
	for i := range speeds {
		setting := flow.Setting{Speed: 0.1 + 0.8*float64(i)/(speeds-1), Depth: t.Depth, Width: t.Width}
		a := report.Aim{Setting: setting}
		found, err := flow.Reach(t.Law, aim, setting, flow.Depth, 0.05, 4)
		if err != nil {
			a.Why = err.Error()
			aims = append(aims, a)
			continue
		}
		a.Setting = found[0]
		profile, err := a.Setting.Flow(t.Law)
		if err != nil {
			a.Why = err.Error()
		} else {
			trial := *in
			trial.Profile, trial.Speed = profile, a.Setting.Speed
			// The same place of the step at the picture.
			trial.Age = math.Min(in.Age, in.Age*in.Speed/a.Setting.Speed)
			if a.F, err = forecast.New(trial); err != nil {
				a.F, a.Why = nil, err.Error()
			}
		}
		aims = append(aims, a)
	}
	return aims, nil
}
