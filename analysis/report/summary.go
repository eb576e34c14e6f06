package report

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"tailrace/gpe"
	"tailrace/gpe/flow"
)

// Summary prints the account as a page of text.
func (r *Run) Summary(w io.Writer) error {
	a, u := r.Account, r.Units
	var b strings.Builder
	source := a.Source()
	if a.Noiseless {
		source += ", in the limit of weak noise"
	}
	fmt.Fprintf(&b, "%s\n%s, read %s after the start\n\n", r.Title, source, u.say(a.Time, Time))
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	row := func(cells ...string) { fmt.Fprintln(t, strings.Join(cells, "\t")+"\t") }
	row("", "upstream", "", "", "downstream", "", "")
	row("", "theory", "measured", "off", "theory", "measured", "off")
	line := func(name string, d Dimension, get func(flow.State) float64) {
		cells := []string{name}
		for _, pair := range [][2]flow.State{{a.Predicted.Upstream, a.Measured.Upstream}, {a.Predicted.Downstream, a.Measured.Downstream}} {
			p, m := get(pair[0]), get(pair[1])
			cells = append(cells, fmt.Sprintf("%.4g", u.Value(p, d)), fmt.Sprintf("%.4g", u.Value(m, d)), fmt.Sprintf("%+.1f %%", 100*(m/p-1)))
		}
		row(cells...)
	}
	line(u.named("density", Density), Density, func(s flow.State) float64 { return s.Density })
	line(u.named("velocity", Speed), Speed, func(s flow.State) float64 { return s.Velocity })
	line(u.named("sound speed", Speed), Speed, func(s flow.State) float64 { return s.SoundSpeed })
	line("Mach number", Pure, flow.State.Mach)
	t.Flush()
	b.WriteByte('\n')

	h, m := a.Predicted.Horizon, a.Measured.Horizon
	t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	pair := func(name, theory, measured string) { fmt.Fprintf(t, "%s\t%s\t%s\n", name, theory, measured) }
	pair("", "theory", "measured")
	pair("horizon, from the step", u.say(h.Position, Length), u.say(m.Position, Length))
	pair("surface gravity κ", u.say(h.SurfaceGravity, Rate), u.say(m.SurfaceGravity, Rate))
	pair("κ/2π, as a temperature", u.say(h.Temperature, Temperature), u.say(m.Temperature, Temperature))
	pair("emission at low frequency", u.say(a.Scattered, Temperature), "")
	g := a.Predicted.Geometry()
	slope := "not found"
	switch {
	case a.Line != nil && a.Noiseless:
		slope = fmt.Sprintf("%.3g (ratios %.2f, %.2f)", a.Line.Slope, a.Line.Slope/g.Slope(), a.Line.Slope/a.BentSlope)
	case a.Line != nil && a.Line.SlopeError > 0:
		slope = fmt.Sprintf("%.3g ± %.2g (ratios %.2f, %.2f)", a.Line.Slope, a.Line.SlopeError, a.Line.Slope/g.Slope(), a.Line.Slope/a.BentSlope)
	}
	pair("slope of the band", fmt.Sprintf("%.3g, bent by dispersion to %.3g", g.Slope(), a.BentSlope), slope)
	strength := fmt.Sprintf("%.2f", a.Null.Strength)
	if !a.Noiseless {
		strength = fmt.Sprintf("%.2f, %.1f standard deviations above the null", a.Null.Strength, a.Null.Significance)
	}
	pair("strength of the band", "1", strength)
	t.Flush()
	b.WriteByte('\n')

	notes := append([]string{}, r.Warnings...)
	note := func(text string) string {
		notes = append(notes, text)
		return fmt.Sprintf("[%d]", len(notes))
	}
	t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "temperature\tvalue\t68 %% interval\tof κ/2π\tof emission\t\n")
	for _, v := range a.Readings {
		trust := "not trusted"
		if v.Trusted {
			trust = "trusted"
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%.2f\t%.2f\t%s %s\n", v.Method, u.say(v.Value, Temperature),
			u.interval(v.Low, v.High, Temperature), v.Value/h.Temperature, v.Value/a.Scattered, trust, note(v.Method+": "+v.Why))
	}
	t.Flush()
	b.WriteByte('\n')

	if b2 := r.Beside; b2 != nil {
		fmt.Fprintf(&b, "beside the exact map: χ² of the difference %.3f a pixel over %d pixels (1 ± %.3f by chance), strength of the exact band %.2f\n", b2.ChiSquare, b2.Pixels, b2.Spread, b2.Strength)
		for _, v := range b2.Exact.Readings {
			fmt.Fprintf(&b, "  %s of the exact map: %s, %.2f of the emission\n", v.Method, u.say(v.Value, Temperature), v.Value/a.Scattered)
		}
		if w := b2.Warning(); w != "" {
			notes = append(notes, w)
		}
		b.WriteByte('\n')
	}
	switch {
	case a.Noiseless:
		fmt.Fprintf(&b, "engine: %.3g ns a point, step and direction, %d directions in %.3g s on %d workers, kernel %s\n",
			r.Engine.PerDirection(r.Problem.Grid.N), r.Engine.Directions, r.Engine.Wall.Seconds(), r.Engine.Workers, r.Engine.Kernel)
	default:
		fmt.Fprintf(&b, "kept in every trajectory: atoms to %.1g, energy to %.1g of m c₀² an atom\n", math.Abs(r.Conserved.NormDrift), math.Abs(r.Conserved.EnergyDrift))
		if r.Engine.Trajectories > 0 {
			fmt.Fprintf(&b, "engine: %.3g ns a point and step, %.3g trajectories a second on %d workers, kernel %s, %s precision\n",
				r.Engine.PerPoint(r.Problem.Grid.N), r.Engine.PerSecond(), r.Engine.Workers, r.Engine.Kernel, cmp.Or(r.Engine.Precision, gpe.Double))
		}
		if r.Rounding != nil {
			c := r.Rounding.Check()
			fmt.Fprintln(&b, wrap(fmt.Sprintf("%s: %s", c.Name, c.Why), 96, "    "))
		}
	}
	fmt.Fprintf(&b, "noise: %s\n", r.Engine.NoiseModes)
	for _, c := range r.Checks {
		if !c.OK {
			note(fmt.Sprintf("%s: %.3g, at most %.3g: %s", c.Name, c.Value, c.Limit, c.Why))
		}
	}
	if len(notes) > 0 {
		b.WriteByte('\n')
		for i, n := range notes {
			fmt.Fprintln(&b, wrap(fmt.Sprintf("[%d] %s", i+1, n), 96, "    "))
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// interval prints an interval, if there is one.
func (u Units) interval(low, high float64, d Dimension) string {
	if math.IsNaN(low) || math.IsNaN(high) {
		return "none"
	}
	return fmt.Sprintf("%.3g to %s", u.Value(low, d), u.say(high, d))
}

// say prints a value with its unit.
func (u Units) say(x float64, d Dimension) string {
	return strings.TrimSpace(fmt.Sprintf("%.3g %s", u.Value(x, d), u.Unit(d)))
}

// named prints the name of a row with its unit.
func (u Units) named(name string, d Dimension) string {
	return fmt.Sprintf("%s, %s", name, u.Unit(d))
}

// wrap breaks text at spaces to lines of at most width, later ones indented.
func wrap(text string, width int, indent string) string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(text) {
		if line != "" && len([]rune(line))+1+len([]rune(word)) > width {
			lines = append(lines, line)
			line = indent + word
			continue
		}
		if line != "" {
			line += " "
		}
		line += word
	}
	return strings.Join(append(lines, line), "\n")
}
