package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"runtime"
	"time"

	"github.com/spf13/cobra"

	"tailrace/analysis/folder"
	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe"
	"tailrace/gpe/flow"
	"tailrace/gpe/lanes"
)

type runOptions struct {
	folder  string
	workers int
	resume  bool
	asJSON  bool
	noCache bool
}

func runCommand() *cobra.Command {
	o := runOptions{workers: runtime.NumCPU()}
	c := &cobra.Command{
		Use:   "run CONFIG",
		Short: "the ensemble, the correlation map, the band, the temperature, the report",
		Long: `run carries an ensemble of trajectories through the scenario of CONFIG, the name
of an example or the path of a file, and draws up what it says of the horizon:
the flow, the correlation map, the band across it and its temperature.

Everything is written into a folder of its own. Ctrl-C stops a run after the
trajectories in hand; --resume goes on with it, to the same numbers bit by bit.`,
		Args: oneConfig,
		RunE: func(cmd *cobra.Command, args []string) error { return o.run(cmd.Context(), args[0]) },
	}
	c.Flags().StringVar(&o.folder, "folder", "", "the run's folder (default: the config's name with -run)")
	c.Flags().IntVar(&o.workers, "workers", o.workers, "goroutines that carry trajectories")
	c.Flags().BoolVar(&o.resume, "resume", false, "go on with the run that was stopped in the folder")
	c.Flags().BoolVar(&o.asJSON, "json", false, "print result.json on stdout and nothing else there")
	c.Flags().BoolVar(&o.noCache, "no-cache", false, "find the modes of the initial state anew")
	return c
}

func (o *runOptions) run(ctx context.Context, name string) error {
	if o.workers < 1 {
		return &usageError{fmt.Errorf("--workers = %d: at least one is needed", o.workers)}
	}
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	r := running{options: o, config: config}
	if err := r.prepare(); err != nil {
		return err
	}
	if err := r.open(); err != nil {
		return err
	}
	if err := r.carry(ctx); err != nil {
		return err
	}
	return r.conclude(ctx)
}

// running is one run on its way from config to report.
type running struct {
	options   *runOptions
	config    *configs.Config
	scenario  *configs.Scenario
	predicted flow.Profile
	cache     gpe.ModeCache
	cached    bool
	ensemble  *gpe.Ensemble
	folder    *folder.Folder
	manifest  folder.Manifest
	store     *moments.Store
	bar       *progress
	engine    report.Engine
}

// prepare builds the problem and refuses what would end in nothing: before
// anything is written and any time is spent.
func (r *running) prepare() (err error) {
	if r.scenario, err = r.config.Scenario(); err != nil {
		return err
	}
	r.predicted, err = r.scenario.Predicted()
	if err != nil && !errors.Is(err, configs.ErrNoPrediction) {
		return err
	}
	if r.config.Ensemble.Trajectories < 2 {
		return r.config.Fault("ensemble.trajectories", "", "at least 2 for a correlation", "and a few thousand to see the band")
	}
	if _, err := horizon.Foresee(horizonInput(r.scenario, r.predicted, nil, nil)); err != nil {
		return r.config.Fault("record.times", "", "a last time at which there is a band to read", err.Error())
	}
	if !r.options.noCache {
		r.cache = gpe.DefaultModeCache()
	}
	if r.cached, err = r.scenario.AddNoise(r.cache); err != nil {
		return err
	}
	if r.ensemble, err = gpe.NewEnsemble(r.scenario.Problem); err != nil {
		return err
	}
	// A first draw shows a cloud too hot or too thin.
	p := r.scenario.Problem
	if err := p.Noise.Sample(lanes.NewBatch(p.Grid.N), p.Seed, 0); err != nil {
		return r.config.Fault("cloud.temperature", "", "a cloud that is mostly condensate", err.Error())
	}
	return nil
}

// open makes or opens the run's folder.
func (r *running) open() (err error) {
	path := r.options.folder
	if path == "" {
		path = r.config.Name() + "-run"
	}
	p := r.scenario.Problem
	r.store = moments.NewStore(r.config.Ensemble.Trajectories, p.Grid.N, len(p.Times), func(n int) { r.bar.update(n) })
	r.manifest = folder.Manifest{Version: version, Source: r.config.Source, Config: string(r.config.Text), Seed: p.Seed,
		Trajectories: r.store.Count, Points: p.Grid.N, Steps: r.ensemble.Steps(), Times: p.Times, Workers: r.options.workers, Kernel: lanes.Kernel()}
	if r.options.resume {
		if r.folder, err = folder.Resume(path); err != nil {
			return err
		}
		return takeUp(r.folder, r.config, r.store)
	}
	if r.folder, err = folder.Create(path); err != nil {
		return err
	}
	return r.folder.WriteJSON("run.json", r.manifest)
}

// carry carries the trajectories that are not finished.
func (r *running) carry(ctx context.Context) error {
	p, store := r.scenario.Problem, r.store
	fmt.Fprintf(os.Stderr, "%s: %d points over %.4g ξ, %d trajectories\n", r.config.Name(), p.Grid.N, p.Grid.Length(), store.Count)
	begun, earlier := store.Finished(), store.StepTime()
	r.bar = newProgress("trajectories", store.Count, begun)
	start := time.Now()
	err := r.ensemble.Run(ctx, store.Pending(), store.Count, r.options.workers, store)
	r.bar.end()
	switch {
	case errors.Is(err, context.Canceled):
		return r.stop()
	case err != nil:
		if !r.options.resume {
			err = errors.Join(err, r.folder.Abandon())
		}
		return err
	}
	r.engine = report.Engine{Kernel: lanes.Kernel(), Workers: r.options.workers, Steps: r.ensemble.Steps(), StepTime: store.StepTime() - earlier,
		Wall: time.Since(start), Trajectories: store.Count - begun, NoiseModes: p.Noise.Describe(), ModesFromCache: r.cached}
	r.manifest.Finished, r.manifest.Seconds = store.Finished(), time.Since(start).Seconds()
	r.manifest.NormDrift, r.manifest.EnergyDrift = store.Conserved().NormDrift, store.Conserved().EnergyDrift
	return nil
}

// stop keeps what a run that was stopped has got so far.
func (r *running) stop() error {
	if err := r.store.Save(r.folder.File("partial.npz")); err != nil {
		return err
	}
	return fmt.Errorf("stopped after %s; --resume with the same config and folder goes on", r.store)
}

// conclude draws up the account and writes everything.
func (r *running) conclude(ctx context.Context) error {
	f, p := r.folder, r.scenario.Problem
	sums, err := r.writeMoments()
	if err != nil {
		return err
	}
	input := horizonInput(r.scenario, r.predicted, r.store, sums)
	account, err := horizon.Draw(input)
	if err != nil {
		err = fmt.Errorf("the ensemble is in %s, but its horizon could not be read: %w", f.Path, err)
		return errors.Join(err, r.store.Save(f.File("partial.npz"))) // so that --resume can try again
	}
	checks := append(r.scenario.Checks, horizon.Checks(p, account)...)
	probe, err := probeCutoff(ctx, r.scenario, r.cache, account, input, r.options.workers)
	switch {
	case errors.Is(err, context.Canceled):
		return r.stop()
	case err != nil:
		return err
	case probe != nil:
		checks = append(checks, probe.Check())
	}
	out := &report.Run{Title: r.config.Title, Config: r.config.Source, Version: version,
		Units:   report.Units{Lab: r.scenario.InLab, Scale: r.scenario.Scale, PerXi: p.AtomsPerLength},
		Account: account, Problem: p, Conserved: r.store.Conserved(), Engine: r.engine,
		Checks: checks, Warnings: account.Warnings}
	if out.SpaceTime, err = spaceTime(r.scenario); err != nil {
		return err
	}
	if err := out.WriteArrays(f.Path, input.Shots); err != nil {
		return err
	}
	if _, err := out.Figures(f.File("figures")); err != nil {
		return err
	}
	result, err := out.JSON()
	if err != nil {
		return err
	}
	if err := f.WriteJSON("run.json", r.manifest); err != nil {
		return err
	}
	if err := f.Write("result.json", result); err != nil {
		return err
	}
	if err := f.Remove("partial.npz"); err != nil {
		return err
	}
	if r.options.asJSON {
		_, err = os.Stdout.Write(result)
		return err
	}
	if err := out.Summary(os.Stdout); err != nil {
		return err
	}
	fmt.Printf("\nfigures, arrays and result.json are in %s\n", f.Path)
	return nil
}

// takeUp fills store with what a stopped run left, if it is of the same config.
func takeUp(f *folder.Folder, config *configs.Config, store *moments.Store) error {
	before, err := f.ReadManifest()
	if err != nil {
		return err
	}
	if before.Config != string(config.Text) {
		return &folder.UseError{Path: f.Path, Why: "the run in it is of another config", Hint: "give the config it began with, which its run.json holds, or choose another --folder"}
	}
	if err := store.Load(f.File("partial.npz")); err != nil {
		return &folder.UseError{Path: f.Path, Why: "what the stopped run left cannot be read: " + err.Error(), Hint: "start it anew in another --folder"}
	}
	return nil
}

// writeMoments sums up every recorded time and returns the last sums.
func (r *running) writeMoments() (*moments.Sums, error) {
	p := r.scenario.Problem
	archive := &moments.Archive{Times: p.Times, Problem: p.Fingerprint(), Seed: []uint64{p.Seed}, First: []int64{0}, Count: []int64{int64(r.store.Count)}}
	for i := range p.Times {
		s := moments.NewSums(p.Grid.N)
		if err := s.Add(r.store.Shots(i)); err != nil {
			return nil, err
		}
		archive.Sums = append(archive.Sums, s)
		archive.Current = append(archive.Current, r.store.CurrentSum(i))
	}
	return archive.Sums[len(archive.Sums)-1], archive.Write(r.folder.File("moments.npz"))
}
