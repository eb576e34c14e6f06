package main

import (
	"cmp"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"tailrace/analysis/camera"
	"tailrace/analysis/folder"
	"tailrace/analysis/horizon"
	"tailrace/analysis/interpretation"
	"tailrace/analysis/npz/whole"
	"tailrace/analysis/report"
	"tailrace/analysis/shots"
	"tailrace/configs"
)

type interpretOptions struct {
	config, folder, normalise string
	asJSON, points, several   bool
	resamples, shuffles       int
}

func interpretCommand() *cobra.Command {
	o := interpretOptions{}
	c := &cobra.Command{
		Use:   "interpret SHOTS...",
		Short: "measured or simulated shots: map, band, temperature, verdicts",
		Long: `interpret reads shots, an archive of numpy (.npz) or a text file (.csv), lays them
on top of each other by the step, and says what they show: whether there is a
band, which temperature it has and how far that depends on choices, which duller
explanations there are, whether the partners are entangled. It writes report.html
and result.json into a folder of its own.

The config says what is known of the experiment: atoms, trap, step and camera. A
run's folder has its own. Several files are several times of one sweep: each is
interpreted, and then whether temperature and band grow with time as they should.`,
		Args: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				return &usageError{errors.New("a file of shots or the folder of a run is expected")}
			}
			return nil
		},
		RunE: func(_ *cobra.Command, args []string) error { return o.run(args) },
	}
	c.Flags().StringVar(&o.config, "config", "", "the scenario of the experiment: an example's name or a file")
	c.Flags().StringVar(&o.folder, "folder", "", "where report.html, result.json and figures go (default: the shots' name with -interpreted)")
	c.Flags().StringVar(&o.normalise, "normalise", "rescale", "what is done about the spread of the atom number: rescale, project or none")
	c.Flags().BoolVar(&o.asJSON, "json", false, "print result.json on stdout and nothing else there")
	c.Flags().BoolVar(&o.points, "points", false, "pixels are points of a simulation, without a camera (a run's folder implies it)")
	c.Flags().IntVar(&o.resamples, "resamples", 400, "bootstrap samples")
	c.Flags().IntVar(&o.shuffles, "shuffles", 1000, "shuffles behind the significance")
	return c
}

func (o *interpretOptions) run(paths []string) error {
	normalisation, sound := map[string]shots.Normalisation{"rescale": shots.Rescale, "project": shots.Project, "none": shots.Raw}[o.normalise]
	if !sound {
		return &usageError{fmt.Errorf("--normalise = %q: rescale, project or none is expected", o.normalise)}
	}
	if o.resamples < 20 || o.shuffles < 100 || o.resamples > 100000 || o.shuffles > 100000 {
		return &usageError{fmt.Errorf("--resamples %d, --shuffles %d: at least 20 and 100, at most 100000 of each", o.resamples, o.shuffles)}
	}
	if len(paths) > 1 && o.folder != "" {
		return &usageError{errors.New("--folder is for one file of shots; several have a folder each, by their names")}
	}
	o.several = len(paths) > 1
	var all []*report.Interpretation
	for _, path := range paths {
		r, err := o.one(path, normalisation)
		if err != nil {
			return err
		}
		all = append(all, r)
		if len(paths) > 1 && !o.asJSON {
			fmt.Printf("%s: %s\n\n", path, r.Verdict())
		}
	}
	if len(all) == 1 {
		return nil
	}
	slices.SortStableFunc(all, func(a, b *report.Interpretation) int { return cmp.Compare(a.It.Input.Age, b.It.Input.Age) })
	var its []*interpretation.Interpretation
	for _, r := range all {
		its = append(its, r.It)
	}
	times := &report.Times{Units: all[0].Units, Times: interpretation.Together(its)}
	if o.asJSON {
		return printJSON(times.JSON())
	}
	return times.Summary(os.Stdout)
}

// one interprets one file and writes its folder.
func (o *interpretOptions) one(path string, normalisation shots.Normalisation) (*report.Interpretation, error) {
	config, points, err := o.scenario(path)
	if err != nil {
		return nil, err
	}
	known, err := config.Stationary()
	if err != nil {
		return nil, err
	}
	if known.PerXi == 0 {
		return nil, config.Fault("cloud.atoms", "nothing", "the number of atoms", "the height of the band depends on it")
	}
	units := shots.Condensate
	if known.InLab {
		units = shots.Lab
	}
	set, err := shots.Read(path, units)
	if err != nil {
		return nil, err
	}
	sum, err := checksum(set.Path)
	if err != nil {
		return nil, err
	}
	cam, err := cameraOf(known, set, points)
	if err != nil {
		return nil, err
	}
	out := o.folder
	if out == "" {
		base := filepath.Base(filepath.Clean(path))
		out = strings.TrimSuffix(base, filepath.Ext(base)) + "-interpreted"
	}
	made, err := folder.Create(out)
	if err != nil {
		return nil, err
	}
	settings := horizon.DefaultSettings
	settings.Resamples, settings.Shuffles = o.resamples, o.shuffles
	it, err := interpretation.Interpret(&interpretation.Input{
		Set: set, Length: known.Length(), Density: known.Density(), Predicted: known.Profile, Law: known.Law,
		AtomsPerLength: known.PerXi, Temperature: known.Temperature, Camera: cam, Age: known.Age(set.Time),
		Settings: settings, Normalisation: normalisation})
	if err != nil {
		return nil, errors.Join(fmt.Errorf("%s: %w", path, err), made.Abandon())
	}
	r := &report.Interpretation{Title: config.Title, Config: config.Source, Version: version, Source: set.Path, Checksum: sum, Units: unitsOf(known), It: it}
	result, err := o.write(made, r)
	switch {
	case err != nil || o.several:
		return r, err
	case o.asJSON:
		_, err = os.Stdout.Write(result)
		return r, err
	}
	if err := r.Summary(os.Stdout); err != nil {
		return r, err
	}
	fmt.Printf("\nreport.html, result.json and figures are in %s\n", made.Path)
	return r, nil
}

// write writes the folder of an interpretation.
func (o *interpretOptions) write(made *folder.Folder, r *report.Interpretation) ([]byte, error) {
	for _, f := range r.Figures() {
		if f.Page != nil {
			if err := f.Page.Save(made.File("figures"), f.Name); err != nil {
				return nil, err
			}
		}
	}
	if err := r.Units.WriteMap(made.Path, "map.npz", r.It.Account.Map); err != nil {
		return nil, err
	}
	result, err := r.JSON()
	if err != nil {
		return nil, err
	}
	if err := made.Write("result.json", result); err != nil {
		return nil, err
	}
	return result, whole.WriteFile(made.File("report.html"), r.HTML)
}

// scenario finds the config: the one given, or a run's own.
func (o *interpretOptions) scenario(path string) (c *configs.Config, points bool, err error) {
	info, statErr := os.Stat(path)
	isRun := statErr == nil && info.IsDir()
	if o.config != "" {
		c, err = configs.Load(o.config)
		return c, isRun || o.points, err
	}
	if !isRun {
		return nil, false, &usageError{fmt.Errorf("what is known of the experiment is missing: give --config, the name of an example or a file with atoms, trap, step and imaging")}
	}
	m, err := (&folder.Folder{Path: path}).ReadManifest()
	if err != nil {
		return nil, false, &folder.UseError{Path: path, Why: "it is not the folder of a run: " + err.Error(), Hint: "give a run's folder, or a file of shots with --config"}
	}
	c, err = configs.Decode(m.Source, []byte(m.Config))
	return c, true, err
}

// cameraOf is the camera of a config in condensate units.
func cameraOf(s *configs.Stationary, set *shots.Set, points bool) (camera.Camera, error) {
	pixel := set.Pixel / s.Length()
	if points {
		return camera.Camera{Pixel: pixel, Points: true}, nil
	}
	c := s.Config
	im := c.Imaging
	if !c.Given("imaging") {
		return camera.Camera{}, c.Fault("imaging.resolution", "nothing", "the camera's resolution", "it blurs the band, and the height that is left is what the temperature is read from; a section [imaging] says it")
	}
	if off := set.Pixel/im.Pixel - 1; math.Abs(off) > 0.02 {
		return camera.Camera{}, c.Fault("imaging.pixel", "", fmt.Sprintf("the shots have pixels of %.4g", set.Pixel), "the two must agree")
	}
	return camera.Camera{Pixel: pixel, Resolution: im.Resolution / s.Length(), PhotonsPerAtom: im.PhotonsPerAtom, NumberSpread: im.AtomNumberSpread, Jitter: im.StepJitter / s.Length()}, nil
}

// checksum is the SHA-256 of a file.
func checksum(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}
