package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"slices"

	"github.com/spf13/cobra"

	"tailrace/analysis/report"
	"tailrace/configs"
	"tailrace/gpe/bogoliubov/cavity"
)

type cavityOptions struct {
	asJSON        bool
	scan, figures string
	scans, draws  bool // whether they are given
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
		RunE: func(cmd *cobra.Command, args []string) error {
			o.scans, o.draws = cmd.Flags().Changed("scan"), cmd.Flags().Changed("figures")
			return o.run(cmd.Context(), args[0])
		},
	}
	c.Flags().BoolVar(&o.asJSON, "json", false, "print one JSON object")
	c.Flags().StringVar(&o.scan, "scan", "", "the modes at other lengths too: length=FIRST:LAST:NUMBER")
	c.Flags().StringVar(&o.figures, "figures", "", "draw growth against length and the modes' patterns into this folder")
	return c
}

func (o *cavityOptions) run(ctx context.Context, name string) error {
	if o.draws && o.figures == "" {
		return &usageError{errors.New("--figures: the name of a folder is expected")}
	}
	config, err := configs.Load(name)
	if err != nil {
		return err
	}
	h, err := config.TwoHorizons()
	if err != nil {
		return err
	}
	out := &report.Cavity{Title: cmp.Or(config.Title, config.Name()), Config: config.Source, Version: version,
		Units: report.Units{Lab: h.InLab, Scale: h.Scale}, Cavity: h.Cavity}
	lengths, err := o.lengths(config, h, out.Units)
	if err != nil {
		return err
	}
	if out.Modes, err = h.Modes(); err != nil {
		return err
	}
	out.Thresholds = h.Thresholds(math.Max(h.Length, h.SharpThreshold(3)))
	if lengths != nil {
		if out.Scan, err = scan(ctx, h.Cavity, lengths); err != nil {
			return err
		}
	}
	if o.draws {
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
func (o *cavityOptions) lengths(config *configs.Config, h *configs.TwoHorizons, u report.Units) ([]float64, error) {
	if !o.scans {
		return nil, nil
	}
	lengths, err := config.Span("cavity.length", o.scan)
	if err != nil {
		return nil, &usageError{fmt.Errorf("--scan %q: %w", o.scan, err)}
	}
	longest := h.Longest()
	for i := range lengths {
		if h.InLab {
			lengths[i] = h.Scale.FromMetres(lengths[i])
		}
		if lengths[i] > longest {
			return nil, &usageError{fmt.Errorf("--scan %q: at most %.4g %s is allowed in this flow, with edges of this width", o.scan, u.Value(longest, report.Length), u.Unit(report.Length))}
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

// draw makes the figures: over the range of lengths of --scan, or around the
// cavity's own.
func (o *cavityOptions) draw(ctx context.Context, out *report.Cavity) error {
	if err := os.MkdirAll(o.figures, 0o777); err != nil {
		return fmt.Errorf("the folder for the figures cannot be made: %w", err)
	}
	from, to := surroundings(out.Cavity)
	if n := len(out.Scan); n > 0 {
		from, to = math.Min(out.Scan[0].Length, out.Scan[n-1].Length), math.Max(out.Scan[0].Length, out.Scan[n-1].Length)
	}
	const even = 200
	var lengths []float64
	for i := range even + 1 {
		lengths = append(lengths, from+(to-from)*float64(i)/even)
	}
	// Close to thresholds, where curves are steep, more.
	apart := math.Pi / out.Cavity.ZeroWave()
	for _, d := range out.Cavity.Thresholds(to) {
		if d < from || d > to {
			continue
		}
		out.Marks = append(out.Marks, d)
		for _, off := range []float64{-0.02, -0.008, -0.002, 0.002, 0.008, 0.02} {
			if x := d + off*apart; x > from && x < to {
				lengths = append(lengths, x)
			}
		}
	}
	slices.Sort(lengths)
	var err error
	if out.Around, err = scan(ctx, out.Cavity, lengths); err != nil {
		return err
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
// shows: from below the first threshold, or five thresholds back, to a few on.
func surroundings(c cavity.Cavity) (from, to float64) {
	apart := c.SharpThreshold(1) - c.SharpThreshold(0)
	first := c.Thresholds(0)[0]
	from = math.Max(0.5*first, c.Length-5*apart)
	to = math.Max(c.Length+1.5*apart, first+3.4*apart)
	if from > 0.5*first && from < first+apart {
		from = 0.5 * first
	}
	return math.Min(from, 0.9*c.Length), math.Min(to, c.Longest())
}
