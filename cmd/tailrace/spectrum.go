package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"tailrace/analysis/figure"
	"tailrace/analysis/npz/whole"
	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/probe"
)

type spectrumOptions struct {
	asJSON      bool
	figures     string
	frequencies string
	scans       []string
	csv         string
	probe       bool
}

func spectrumCommand() *cobra.Command {
	o := spectrumOptions{}
	c := &cobra.Command{
		Use:   "spectrum CONFIG",
		Short: "the emission spectrum of the stationary flow",
		Long: `spectrum scatters waves at the horizon of the flow of CONFIG: that which a swept
step leaves behind, a waterfall or a uniform flow. It needs no ensemble, and takes
a fraction of a second.

With --scan key=from:to:count it does so for a range of settings and makes a table
of the temperature at low frequency beside κ/2π; with :log at the end the values
are evenly spaced in the logarithm. Several --scan make every combination.`,
		Args: oneConfig,
		RunE: func(cmd *cobra.Command, args []string) error { return o.run(cmd.Context(), args[0]) },
	}
	c.Flags().BoolVar(&o.asJSON, "json", false, "print one JSON object on stdout and nothing else there")
	c.Flags().StringVar(&o.figures, "figures", "", "a folder for the figure, as PNG and SVG")
	c.Flags().StringVar(&o.frequencies, "frequencies", "200", "how many, logarithmic up to ω_max, or a list of them in units of ω_max such as 0.1,0.5,0.9")
	c.Flags().StringArrayVar(&o.scans, "scan", nil, "key=from:to:count[:log]")
	c.Flags().BoolVar(&o.probe, "probe", false, "also send a packet of waves at the horizon in the full equation, and compare")
	c.Flags().StringVar(&o.csv, "csv", "", "a file for the table of a scan")
	return c
}

func (o *spectrumOptions) run(ctx context.Context, name string) error {
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	if len(o.scans) > 0 {
		return o.scan(ctx, config)
	}
	if o.csv != "" && len(o.scans) == 0 {
		return &usageError{errors.New("--csv is the table of a scan: give a --scan too")}
	}
	s, err := config.Stationary()
	if err != nil {
		return err
	}
	share, err := o.shares()
	if err != nil {
		return err
	}
	scatterer, err := bogoliubov.NewScatterer(s.Profile)
	if err != nil {
		return err
	}
	omega := make([]float64, len(share))
	for i, f := range share {
		omega[i] = f * scatterer.MaxFrequency()
	}
	spectrum, err := bogoliubov.NewSpectrum(s.Profile, omega)
	if err != nil {
		return err
	}
	out := &report.Spectrum{Title: config.Title, Config: config.Source, Version: version, Units: unitsOf(s), Spectrum: spectrum, Temperature: s.Temperature}
	if err := o.save(out.Figure(), "spectrum"); err != nil {
		return err
	}
	if o.probe {
		if out.Probe, err = o.send(ctx, s); err != nil {
			return err
		}
		if err := o.save(out.Probe.Figure(), "probe"); err != nil {
			return err
		}
	}
	if o.asJSON {
		return printJSON(out.JSON())
	}
	if err := out.Summary(os.Stdout); err != nil || out.Probe == nil {
		return err
	}
	return out.Probe.Summary(os.Stdout)
}

// send sends a packet at the horizon.
func (o *spectrumOptions) send(ctx context.Context, s *configs.Stationary) (*report.Probe, error) {
	bar := newProgress("per cent", 100, 0)
	defer bar.end()
	r, err := probe.Stimulate(ctx, s.Profile, probe.Options{Progress: func(done float64) { bar.update(int(100 * done)) }})
	if err != nil {
		return nil, err
	}
	c, err := r.Compare()
	if err != nil {
		return nil, err
	}
	return &report.Probe{Units: unitsOf(s), Comparison: c}, nil
}

func unitsOf(s *configs.Stationary) report.Units {
	return report.Units{Lab: s.InLab, Scale: s.Scale, PerXi: s.PerXi}
}

func printJSON(text []byte, err error) error {
	if err == nil {
		_, err = os.Stdout.Write(text)
	}
	return err
}

// save writes a figure if a folder is given.
func (o *spectrumOptions) save(page *figure.Page, name string) error {
	if o.figures == "" || page == nil {
		return nil
	}
	if err := os.MkdirAll(o.figures, 0o755); err != nil {
		return fmt.Errorf("the folder for figures cannot be made: %w", err)
	}
	return page.Save(o.figures, name)
}

// maxFrequencies bounds a spectrum.
const maxFrequencies = 100000

// shares returns the frequencies in units of ω_max.
func (o *spectrumOptions) shares() ([]float64, error) {
	wrong := func(why string) ([]float64, error) {
		return nil, &usageError{fmt.Errorf("--frequencies = %q: %s; a number of them is expected, from 2 to %d, or a list in units of ω_max such as 0.1,0.5,0.9", o.frequencies, why, maxFrequencies)}
	}
	if !strings.Contains(o.frequencies, ",") && !strings.Contains(o.frequencies, ".") {
		n, err := strconv.Atoi(strings.TrimSpace(o.frequencies))
		if err != nil || n < 2 || n > maxFrequencies {
			return wrong("this is no such number")
		}
		return bogoliubov.Frequencies(1, n), nil
	}
	var list []float64
	for _, part := range strings.Split(o.frequencies, ",") {
		v, err := strconv.ParseFloat(strings.TrimSpace(part), 64)
		if err != nil || !(v >= 1e-6 && v <= 1e3) {
			return wrong(fmt.Sprintf("%q is not between 1e-6 and 1000", part))
		}
		list = append(list, v)
	}
	if len(list) > maxFrequencies {
		return wrong("there are too many")
	}
	return list, nil
}

// maxRows bounds the settings of a scan.
const maxRows = 100000

// scan makes the table of a scan.
func (o *spectrumOptions) scan(ctx context.Context, config *configs.Config) error {
	var scans []*configs.Scan
	rows := 1
	for _, text := range o.scans {
		s, err := config.Scan(text)
		if err != nil {
			return &usageError{err}
		}
		for _, other := range scans {
			if other.Key == s.Key {
				return &usageError{fmt.Errorf("--scan %s: %s is scanned twice", text, s.Key)}
			}
		}
		scans = append(scans, s)
		if rows *= len(s.Values); rows > maxRows {
			return &usageError{fmt.Errorf("the scans have more than %d combinations", maxRows)}
		}
	}
	out := &report.Scan{Title: config.Title, Config: config.Source, Version: version}
	for _, s := range scans {
		out.Dials = append(out.Dials, report.Dial{Key: s.Key, Label: s.Label(), Unit: s.UnitName(), Log: s.Log})
	}
	bar := newProgress("settings", rows, 0)
	defer bar.end()
	for i := range rows {
		if err := ctx.Err(); err != nil {
			return fmt.Errorf("stopped after %d of %d settings", i, rows)
		}
		values := make([]float64, len(scans))
		rest := i
		for k := len(scans) - 1; k >= 0; k-- {
			n := len(scans[k].Values)
			values[k] = scans[k].Values[rest%n]
			rest /= n
		}
		row, err := setting(config, scans, values)
		if err != nil {
			return err
		}
		if row.Why == "" || i == 0 {
			out.Units = row.Units
		}
		out.Rows = append(out.Rows, *row)
		bar.update(i + 1)
	}
	if o.csv != "" {
		if err := whole.WriteFile(o.csv, func(w io.Writer) error { return out.CSV(w) }); err != nil {
			return err
		}
	}
	if err := o.save(out.Figure(), "scan"); err != nil {
		return err
	}
	if o.asJSON {
		return printJSON(out.JSON())
	}
	return out.Summary(os.Stdout)
}

// setting is one row of a scan. A setting without a flow is a row that says why.
func setting(config *configs.Config, scans []*configs.Scan, values []float64) (*report.ScanRow, error) {
	row := &report.ScanRow{Values: values, Units: report.Units{Lab: config.Units == configs.Lab}}
	c, err := config.With(scans, values)
	if err != nil {
		return impossible(row, err)
	}
	s, err := c.Stationary()
	if err != nil {
		return impossible(row, err)
	}
	row.Units = unitsOf(s)
	scatterer, err := bogoliubov.NewScatterer(s.Profile)
	if err != nil {
		return impossible(row, err)
	}
	row.Up, row.Down, row.Horizon = s.Profile.Ends()
	row.OmegaMax = scatterer.MaxFrequency()
	if row.Temperature, _, err = scatterer.LowFrequencyTemperature(); err != nil {
		return impossible(row, err)
	}
	return row, nil
}

// impossible marks a row.
func impossible(row *report.ScanRow, err error) (*report.ScanRow, error) {
	var fault *configs.Error
	row.Why = err.Error()
	if errors.As(err, &fault) {
		row.Why = strings.TrimSuffix(fault.Allowed+"; "+fault.Hint, "; ")
	}
	return row, nil
}
