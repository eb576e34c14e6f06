package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"runtime"
	"slices"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"tailrace/analysis/camera"
	"tailrace/analysis/horizon"
	"tailrace/analysis/interpretation"
	"tailrace/analysis/rehearsal"
	"tailrace/analysis/report"
	"tailrace/analysis/shots"
	"tailrace/configs"
	"tailrace/gpe"
)

type rehearseOptions struct {
	campaigns, workers    int
	sizes, figures, write string
	asJSON                bool
	seed                  uint64
}

func rehearseCommand() *cobra.Command {
	o := rehearseOptions{campaigns: 20, workers: runtime.NumCPU()}
	c := &cobra.Command{
		Use:   "rehearse CONFIG",
		Short: "a virtual campaign: shots through a camera, analysed like real ones",
		Long: `rehearse carries the exact fluctuations of the scenario of CONFIG through its sweep,
draws shots from them as the camera of its [imaging] takes them, and analyses them
with the code that reads real ones, many campaigns of several sizes: how often the
band is seen, how often one is seen where there is none, what the temperature comes
to and whether its intervals are honest. It takes the limit of weak noise.`,
		Args: oneConfig,
		RunE: func(cmd *cobra.Command, args []string) error { return o.run(cmd.Context(), args[0]) },
	}
	c.Flags().IntVar(&o.campaigns, "campaigns", o.campaigns, "campaigns of each size")
	c.Flags().IntVar(&o.workers, "workers", o.workers, "goroutines")
	c.Flags().StringVar(&o.sizes, "shots", "", "shots of a campaign, a list such as 500,1000,2000 (default: a quarter, half, all and twice imaging.shots)")
	c.Flags().StringVar(&o.figures, "figures", "", "a folder for the figure, as PNG and SVG")
	c.Flags().StringVar(&o.write, "write", "", "write one campaign of imaging.shots as a file for interpret (.npz)")
	c.Flags().BoolVar(&o.asJSON, "json", false, "print one JSON object on stdout and nothing else there")
	c.Flags().Uint64Var(&o.seed, "seed", 1, "seed of the shots")
	return c
}

func (o *rehearseOptions) run(ctx context.Context, name string) error {
	if o.campaigns < 2 || o.campaigns > 100000 || o.workers < 1 {
		return &usageError{fmt.Errorf("--campaigns %d, --workers %d: at least 2 campaigns and 1 worker are needed", o.campaigns, o.workers)}
	}
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	if !config.Given("imaging") {
		return config.Fault("imaging.resolution", "nothing", "the camera", "a section [imaging] says how shots are taken")
	}
	sizes, err := o.list(config)
	if err != nil {
		return err
	}
	r := running{options: &runOptions{workers: o.workers, exact: exactOnly}, config: config}
	if err := r.prepare(); err != nil {
		return err
	}
	if r.predicted == nil {
		return config.Fault("trap.shape", "", "a box or a uniform flow", "along a harmonic cloud there is no single flow to compare with")
	}
	tangent, err := r.tangent()
	if err != nil {
		return err
	}
	moments, err := r.carryDirections(ctx, tangent)
	if errors.Is(err, context.Canceled) {
		return errors.New("stopped before the fluctuations were known")
	} else if err != nil {
		return err
	}
	in, units, err := o.rehearsal(&r, moments, sizes)
	if err != nil {
		return err
	}
	if o.write != "" {
		if err := o.campaign(&r, in, units); err != nil {
			return err
		}
	}
	bar := newProgress("campaigns", len(sizes)*o.campaigns, 0)
	in.Progress = bar.update
	result, err := rehearsal.Run(ctx, *in)
	bar.end()
	if errors.Is(err, context.Canceled) {
		return errors.New("stopped before the campaigns were done")
	} else if err != nil {
		return err
	}
	out := &report.Rehearsal{Title: config.Title, Config: config.Source, Version: version, Units: units, R: result}
	if o.figures != "" {
		if err := os.MkdirAll(o.figures, 0o755); err != nil {
			return fmt.Errorf("the folder for figures cannot be made: %w", err)
		}
		if err := out.Figure().Save(o.figures, "rehearsal"); err != nil {
			return err
		}
	}
	if o.asJSON {
		return printJSON(out.JSON())
	}
	return out.Summary(os.Stdout)
}

// list returns the sizes of campaigns.
func (o *rehearseOptions) list(c *configs.Config) ([]int, error) {
	if o.sizes == "" {
		n := c.Imaging.Shots
		sizes := []int{max(10, n/4), max(10, n/2), max(10, n), max(10, 2*n)}
		return slices.Compact(sizes), nil
	}
	var sizes []int
	for _, part := range strings.Split(o.sizes, ",") {
		n, err := strconv.Atoi(strings.TrimSpace(part))
		if err != nil || n < 10 || n > 1000000 {
			return nil, &usageError{fmt.Errorf("--shots = %q: whole numbers from 10 to 1000000 are expected, with commas between", o.sizes)}
		}
		sizes = append(sizes, n)
	}
	slices.Sort(sizes)
	return slices.Compact(sizes), nil
}

// rehearsal puts together what the campaigns need, in condensate units.
func (o *rehearseOptions) rehearsal(r *running, m *gpe.Moments, sizes []int) (*rehearsal.Input, report.Units, error) {
	s, p := r.scenario, r.scenario.Problem
	units := report.Units{Lab: s.InLab, Scale: s.Scale, PerXi: p.AtomsPerLength}
	length := 1.0
	if s.InLab {
		length = s.Scale.Metres(1)
	}
	im := r.config.Imaging
	cam := camera.Camera{Pixel: im.Pixel / length, Resolution: im.Resolution / length, PhotonsPerAtom: im.PhotonsPerAtom, NumberSpread: im.AtomNumberSpread, Jitter: im.StepJitter / length}
	frame := horizonInput(s, r.predicted, nil, nil)
	x := p.Grid.Positions()
	for j := range x {
		x[j] -= frame.Frame.Position
	}
	settings := horizon.DefaultSettings
	settings.Resamples, settings.Shuffles, settings.TemplateOnly = 100, 200, true
	in := &rehearsal.Input{Sizes: sizes, Campaigns: o.campaigns, Seed: o.seed, Workers: o.workers,
		Known: interpretation.Input{Set: &shots.Set{Time: frame.Time}, Length: 1, Density: 1, Predicted: r.predicted, Law: p.Law,
			AtomsPerLength: p.AtomsPerLength, Temperature: p.Temperature, Camera: cam, Age: frame.Frame.Age, Settings: settings}}
	lo, hi := pictured(m, x, cam)
	var err error
	if in.Virtual, err = camera.NewVirtual(m, x, p.AtomsPerLength, cam, lo, hi, camera.Everything); err != nil {
		return nil, units, r.config.Fault("imaging.pixel", "", "pixels that the cloud fills", err.Error())
	}
	if in.Empty, err = camera.NewVirtual(m, x, p.AtomsPerLength, cam, lo, hi, camera.Uncorrelated); err != nil {
		return nil, units, r.config.Fault("imaging.pixel", "", "pixels that the cloud fills", err.Error())
	}
	return in, units, nil
}

// pictured is the part of the grid that has any cloud, and some margin.
func pictured(m *gpe.Moments, x []float64, c camera.Camera) (lo, hi float64) {
	const thin = 0.02
	lo, hi = math.Inf(1), math.Inf(-1)
	peak := slices.Max(m.Density)
	for j, n := range m.Density {
		if n > thin*peak {
			lo, hi = math.Min(lo, x[j]), math.Max(hi, x[j])
		}
	}
	margin := 4*c.Resolution + 4*c.Jitter + 2*c.Pixel
	return math.Max(lo-margin, x[0]+margin), math.Min(hi+margin, x[len(x)-1]-margin)
}

// campaign writes one campaign for interpret.
func (o *rehearseOptions) campaign(r *running, in *rehearsal.Input, u report.Units) error {
	set := rehearsal.Set(in.Virtual, in.Virtual.Draw(r.config.Imaging.Shots, o.seed), in.Known.Set.Time)
	length, density, time := 1.0, u.PerXi, 1.0
	if u.Lab {
		length, density, time = u.Scale.Metres(1), u.Scale.AtomsPerMetre(1), u.Scale.Seconds(1)
	}
	set.Pixel *= length
	set.Time *= time
	for i := range set.Density {
		set.Density[i] *= density
	}
	for i := range set.StepPosition {
		set.StepPosition[i] *= length
	}
	return shots.Write(o.write, set)
}
