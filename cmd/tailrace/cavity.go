package main

import (
	"context"
	"fmt"
	"math"
	"os"

	"github.com/spf13/cobra"

	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe/bogoliubov/cavity"
)

type cavityOptions struct {
	asJSON  bool
	scan    string
	figures string
}

func cavityCommand() *cobra.Command {
	var o cavityOptions
	c := &cobra.Command{
		Use:   "cavity CONFIG",
		Short: "modes and growth between two horizons",
		Long: `cavity finds the modes of a supersonic stretch between two horizons that grow by
themselves: their frequencies, growth rates and e-folding times, and the lengths
from which each of them grows. CONFIG, the name of an example or the path of a
file, describes a uniform flow, [flow] kind = "uniform", and the [cavity] length.`,
		Args: oneConfig,
		RunE: func(cmd *cobra.Command, args []string) error { return o.run(cmd.Context(), args[0]) },
	}
	c.Flags().BoolVar(&o.asJSON, "json", false, "print one JSON object")
	c.Flags().StringVar(&o.scan, "scan", "", "the modes at other lengths too: length=FIRST:LAST:NUMBER")
	c.Flags().StringVar(&o.figures, "figures", "", "draw growth against length and the modes' patterns into this folder")
	return c
}

func (o *cavityOptions) run(ctx context.Context, name string) error {
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	h, err := config.TwoHorizons()
	if err != nil {
		return err
	}
	out := &report.Cavity{Title: config.Title, Config: config.Source, Version: version,
		Units: report.Units{Lab: h.InLab, Scale: h.Scale}, Cavity: h.Cavity}
	lengths, err := o.lengths(config, h)
	if err != nil {
		return err
	}
	if out.Modes, err = h.Modes(); err != nil {
		return err
	}
	out.Thresholds = h.Thresholds(math.Max(h.Length, h.SharpThreshold(2)))
	if lengths != nil {
		if out.Scan, err = scan(ctx, h.Cavity, lengths); err != nil {
			return err
		}
	}
	if o.figures != "" {
		if err := o.draw(ctx, out); err != nil {
			return err
		}
	}
	if o.asJSON {
		text, err := out.JSON()
		if err != nil {
			return err
		}
		_, err = os.Stdout.Write(text)
		return err
	}
	return out.Summary(os.Stdout)
}

// lengths reads --scan, in condensate units; nil without it.
func (o *cavityOptions) lengths(config *configs.Config, h *configs.TwoHorizons) ([]float64, error) {
	if o.scan == "" {
		return nil, nil
	}
	lengths, err := config.Scan("cavity.length", o.scan)
	if err != nil {
		return nil, &usageError{fmt.Errorf("--scan %q: %w", o.scan, err)}
	}
	longest := h.SharpThreshold(cavity.MostThresholds)
	for i := range lengths {
		if h.InLab {
			lengths[i] = h.Scale.FromMetres(lengths[i])
		}
		if lengths[i] > longest {
			return nil, &usageError{fmt.Errorf("--scan %q: at most %.4g healing lengths are allowed in this flow, in which a cavity has %d modes", o.scan, longest, cavity.MostThresholds)}
		}
	}
	return lengths, nil
}

// scan finds the modes at every length and says on stderr how far it is.
func scan(ctx context.Context, c cavity.Cavity, lengths []float64) ([]cavity.Point, error) {
	bar := newProgress("lengths", len(lengths), 0)
	defer bar.end()
	return c.Scan(ctx, lengths, bar.update)
}

// draw makes the figures: of the lengths of --scan if there are enough for a
// curve, and of those around the cavity's own otherwise.
func (o *cavityOptions) draw(ctx context.Context, out *report.Cavity) error {
	if err := os.MkdirAll(o.figures, 0o777); err != nil {
		return fmt.Errorf("the folder for the figures cannot be made: %w", err)
	}
	const enough = 100
	out.Around = out.Scan
	if len(out.Around) < enough {
		from, to := surroundings(out.Cavity)
		if n := len(out.Scan); n > 0 {
			from, to = math.Min(out.Scan[0].Length, out.Scan[n-1].Length), math.Max(out.Scan[0].Length, out.Scan[n-1].Length)
		}
		lengths := make([]float64, 241)
		for i := range lengths {
			lengths[i] = from + (to-from)*float64(i)/float64(len(lengths)-1)
		}
		var err error
		if out.Around, err = scan(ctx, out.Cavity, lengths); err != nil {
			return err
		}
	}
	first, last := out.Around[0].Length, out.Around[len(out.Around)-1].Length
	for _, d := range out.Cavity.Thresholds(math.Max(first, last)) {
		if d >= math.Min(first, last) && d <= math.Max(first, last) {
			out.Marks = append(out.Marks, d)
		}
	}
	names, err := out.Figures(o.figures)
	if err != nil {
		return err
	}
	for _, n := range names {
		fmt.Fprintf(os.Stderr, "drawn: %s.png and .svg in %s\n", n, o.figures)
	}
	return nil
}

// surroundings is the range of lengths around a cavity's own that the figure
// shows: from below the first threshold, or five thresholds back, to two or
// three on.
func surroundings(c cavity.Cavity) (from, to float64) {
	apart := c.SharpThreshold(1) - c.SharpThreshold(0)
	first := c.Thresholds(0)[0]
	from = math.Max(0.5*first, c.Length-5*apart)
	to = math.Max(c.Length+1.5*apart, first+3*apart)
	if from > 0.5*first && from < first+apart {
		from = 0.5 * first
	}
	return math.Min(from, 0.9*c.Length), math.Min(to, c.SharpThreshold(cavity.MostThresholds))
}
