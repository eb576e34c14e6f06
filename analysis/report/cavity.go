package report

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"math/cmplx"
	"slices"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/figure"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/bogoliubov/cavity"
)

// Cavity is all that a report of the modes between two horizons is made from,
// in condensate units.
type Cavity struct {
	Title, Config, Version string
	Units                  Units
	Cavity                 cavity.Cavity
	Thresholds             []float64
	Modes                  []cavity.Mode
	Scan                   []cavity.Point // nil for none
	// Around is a finer scan for the figure, and Marks the thresholds in it.
	Around []cavity.Point
	Marks  []float64
}

func (r *Cavity) omegaMax() float64 {
	return bogoliubov.MaxFrequency(r.Cavity.Velocity, r.Cavity.Inside)
}

// unstable counts growing modes, both of a pair.
func unstable(modes []cavity.Mode) int {
	n := 0
	for _, m := range modes {
		n++
		if m.Frequency > 0 {
			n++
		}
	}
	return n
}

func (r *Cavity) modes(modes []cavity.Mode) []object {
	list := []object{} // an empty list, not null
	for _, m := range modes {
		var o object
		o.with(r.Units, "frequency", m.Frequency, Rate)
		o.with(r.Units, "growth_rate", m.GrowthRate, Rate)
		o.with(r.Units, "e_folding_time", 1/m.GrowthRate, Time)
		list = append(list, o)
	}
	return list
}

// JSON returns the object that --json prints. Frequencies are angular;
// `unstable_modes` counts ω and −ω* of a pair, `modes` lists one of them.
func (r *Cavity) JSON() ([]byte, error) {
	c, u := r.Cavity, r.Units
	var o, f object
	o.set("title", r.Title)
	o.set("config", r.Config)
	o.set("version", r.Version)
	o.set("units", map[bool]string{true: "lab", false: "condensate"}[u.Lab])
	f.with(u, "velocity", c.Velocity, Speed)
	f.with(u, "sound_speed_outside", c.Outside, Speed)
	f.with(u, "sound_speed_inside", c.Inside, Speed)
	f.set("mach_outside", c.Velocity/c.Outside)
	f.set("mach_inside", c.Velocity/c.Inside)
	f.with(u, "width", c.Width, Length)
	o.set("flow", f)
	o.with(u, "length", c.Length, Length)
	o.with(u, "omega_max", r.omegaMax(), Rate)
	o.set(u.Key("thresholds", Length), u.Values(r.Thresholds, Length))
	o.set("unstable_modes", unstable(r.Modes))
	o.set("modes", r.modes(r.Modes))
	if r.Scan != nil {
		rows := make([]object, len(r.Scan))
		for i, p := range r.Scan {
			rows[i].with(u, "length", p.Length, Length)
			rows[i].set("unstable_modes", unstable(p.Modes))
			rows[i].set("modes", r.modes(p.Modes))
		}
		o.set("scan", rows)
	}
	b, err := json.MarshalIndent(o, "", "  ")
	return append(b, '\n'), err
}

// listed is how many modes the summary lists.
const listed = 12

// Summary prints the report as a page of text.
func (r *Cavity) Summary(w io.Writer) error {
	c, u := r.Cavity, r.Units
	var b strings.Builder
	edges := "sharp edges"
	if c.Width > 0 {
		edges = "edges of width " + u.say(c.Width, Length)
	}
	fmt.Fprintf(&b, "%s\nlength %s, %s\n\n", r.Title, u.say(c.Length, Length), edges)
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "\toutside\tinside\t\n")
	fmt.Fprintf(t, "%s\t%.4g\t%.4g\t\n", u.named("velocity", Speed), u.Value(c.Velocity, Speed), u.Value(c.Velocity, Speed))
	fmt.Fprintf(t, "%s\t%.4g\t%.4g\t\n", u.named("sound speed", Speed), u.Value(c.Outside, Speed), u.Value(c.Inside, Speed))
	fmt.Fprintf(t, "Mach number\t%.4g\t%.4g\t\n", c.Velocity/c.Outside, c.Velocity/c.Inside)
	t.Flush()

	passed := 0
	for passed < len(r.Thresholds) && r.Thresholds[passed] < c.Length {
		passed++
	}
	from, last := 0, len(r.Thresholds)
	if passed > 6 { // the last few and the next
		from, last = passed-5, min(passed+1, last)
	}
	var lengths []string
	for _, d := range r.Thresholds[from:last] {
		lengths = append(lengths, fmt.Sprintf("%.4f", u.Value(d, Length)))
	}
	before := ""
	if from > 0 {
		before = "… "
	}
	fmt.Fprintf(&b, "\nanother mode grows from each of these lengths, %s:\n  %s%s\n", u.Unit(Length), before, strings.Join(lengths, "  "))

	var notes []string
	if len(r.Modes) == 0 {
		fmt.Fprintf(&b, "\nno mode grows")
		if len(r.Thresholds) > 0 && c.Length <= r.Thresholds[0] {
			fmt.Fprintf(&b, ": the cavity is shorter than the first threshold")
		}
		b.WriteString("\n")
	} else {
		b.WriteByte('\n')
		t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
		fmt.Fprintf(t, "mode\t%s\t%s\t%s\t\n", u.named("frequency", Rate), u.named("growth rate", Rate), u.named("e-folding time", Time))
		for i, m := range r.Modes[:min(listed, len(r.Modes))] {
			frequency := "0"
			if m.Frequency > 0 {
				frequency = fmt.Sprintf("±%.4g", u.Value(m.Frequency, Rate))
			}
			fmt.Fprintf(t, "%d\t%s\t%.4g\t%.4g\t\n", i+1, frequency, u.Value(m.GrowthRate, Rate), u.Value(1/m.GrowthRate, Time))
		}
		t.Flush()
		if more := len(r.Modes) - listed; more > 0 {
			fmt.Fprintf(&b, "and %d slower ones, which --json lists\n", more)
		}
		notes = append(notes, "frequencies and rates are angular: an amplitude grows as exp(growth rate × t), a correlation as its square")
	}
	notes = append(notes, fmt.Sprintf("the modes are complete: as many as the argument principle counts among growth rates above %s", u.say(1e-6*r.omegaMax(), Rate)))
	if c.Width > 0 {
		notes = append(notes, fmt.Sprintf("thresholds are those of edges of this width; sharp ones would have %s, π/k₀ = %s apart",
			u.say(c.SharpThreshold(0), Length)+" for the first", u.say(math.Pi/c.ZeroWave(), Length)))
	}
	if n := len(r.Modes); n >= 2 && r.Modes[1].GrowthRate > 0.7*r.Modes[0].GrowthRate {
		notes = append(notes, "the fastest modes grow almost alike: what is seen first is a mixture, not one of them")
	}
	if r.Scan != nil {
		b.WriteByte('\n')
		t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
		fmt.Fprintf(t, "%s\tgrowing modes\t%s\t%s\t\n", u.named("length", Length), u.named("fastest: growth rate", Rate), u.named("frequency", Rate))
		for _, p := range r.Scan {
			rate, frequency := "–", "–"
			if len(p.Modes) > 0 {
				rate, frequency = fmt.Sprintf("%.4g", u.Value(p.Modes[0].GrowthRate, Rate)), fmt.Sprintf("%.4g", u.Value(p.Modes[0].Frequency, Rate))
			}
			fmt.Fprintf(t, "%.4g\t%d\t%s\t%s\t\n", u.Value(p.Length, Length), unstable(p.Modes), rate, frequency)
		}
		t.Flush()
		notes = append(notes, "growing modes of a length: both of a pair ±frequency count")
	}
	b.WriteByte('\n')
	for i, n := range notes {
		fmt.Fprintln(&b, wrap(fmt.Sprintf("[%d] %s", i+1, n), 96, "    "))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// drawn is how many modes have their pattern drawn.
const drawn = 3

// Figures writes the figures into folder, which must exist, as PNG and SVG, and
// returns their names: growth and frequency against length, and the patterns of
// the fastest modes if there are any.
func (r *Cavity) Figures(folder string) ([]string, error) {
	names := []string{"growth"}
	if err := r.growthFigure().Save(folder, "growth"); err != nil {
		return nil, err
	}
	page, err := r.patternFigure()
	if page == nil || err != nil {
		return names, err
	}
	return append(names, "patterns"), page.Save(folder, "patterns")
}

func (r *Cavity) growthFigure() *figure.Page {
	u := r.Units
	f := figure.Growth{Length: u.Value(r.Cavity.Length, Length), Thresholds: u.Values(r.Marks, Length), LengthUnit: u.Axis(Length), RateUnit: u.Axis(Rate)}
	for _, b := range branches(r.Around, r.Marks, r.omegaMax()) {
		name := ""
		if b.GrowthRate[0] == 0 { // its beginning is in the figure
			name = fmt.Sprintf("mode from %.3g %s", u.Value(b.Length[0], Length), u.Axis(Length))
		}
		f.Branches = append(f.Branches, figure.Branch{Name: name, Length: u.Values(b.Length, Length), Frequency: u.Values(b.Frequency, Rate), GrowthRate: u.Values(b.GrowthRate, Rate)})
	}
	return f.Page()
}

// branches joins the modes of rising lengths to curves: each to the nearest in
// ω at the length before, if it is near. Every curve begins, and a mode that
// comes to rest passes, at a threshold, where ω = 0.
func branches(points []cavity.Point, thresholds []float64, omegaMax float64) []figure.Branch {
	const near = 0.3 // of ω_max
	var all []figure.Branch
	var open []int // the branch of each mode of the last point
	points = slices.Clone(points)
	slices.SortFunc(points, func(a, b cavity.Point) int {
		if a.Length < b.Length {
			return -1
		}
		return 1
	})
	add := func(b int, length float64, m cavity.Mode) {
		all[b].Length = append(all[b].Length, length)
		all[b].Frequency = append(all[b].Frequency, m.Frequency)
		all[b].GrowthRate = append(all[b].GrowthRate, m.GrowthRate)
	}
	for i, p := range points {
		var before []cavity.Mode
		threshold := math.NaN()
		if i > 0 {
			before = points[i-1].Modes
			for _, d := range thresholds {
				if d > points[i-1].Length && d <= p.Length {
					threshold = d
				}
			}
		}
		type link struct {
			from, to int
			distance float64
		}
		var links []link
		for a, m := range before {
			for b, q := range p.Modes {
				if d := cmplx.Abs(m.Omega() - q.Omega()); d < near*omegaMax {
					links = append(links, link{a, b, d})
				}
			}
		}
		slices.SortFunc(links, func(a, b link) int {
			if a.distance < b.distance {
				return -1
			}
			return 1
		})
		next := make([]int, len(p.Modes))
		for b := range next {
			next[b] = -1
		}
		taken := make([]bool, len(before))
		for _, l := range links {
			if taken[l.from] || next[l.to] >= 0 {
				continue
			}
			taken[l.from] = true
			next[l.to] = open[l.from]
			if before[l.from].Frequency == 0 && p.Modes[l.to].Frequency > 0 && !math.IsNaN(threshold) {
				add(next[l.to], threshold, cavity.Mode{})
			}
		}
		for b, m := range p.Modes {
			if next[b] < 0 {
				next[b] = len(all)
				all = append(all, figure.Branch{})
				if !math.IsNaN(threshold) && m.Frequency == 0 {
					add(next[b], threshold, cavity.Mode{})
				}
			}
			add(next[b], p.Length, m)
		}
		open = next
	}
	return all
}

func (r *Cavity) patternFigure() (*figure.Page, error) {
	if len(r.Modes) == 0 {
		return nil, nil
	}
	u, c := r.Units, r.Cavity
	f := figure.Patterns{Inside: figure.Range{Min: 0, Max: u.Value(c.Length, Length)}, LengthUnit: u.Axis(Length)}
	// As far as the fastest fades to a twentieth, on the side where it is
	// slowest to do so, but not so far that the inside is not seen.
	reach := math.Min(3*(c.Velocity+c.Outside)/r.Modes[0].GrowthRate, 0.35*c.Length+8)
	const points = 1200
	x := make([]float64, points)
	for i := range x {
		x[i] = -reach + (c.Length+2*reach)*float64(i)/(points-1)
	}
	f.Position = u.Values(x, Length)
	for i, m := range r.Modes[:min(drawn, len(r.Modes))] {
		p, err := c.Pattern(m, x)
		if err != nil {
			return nil, err
		}
		s := p.Density()
		most := slices.MaxFunc(s, func(a, b complex128) int { return int(math.Copysign(1, cmplx.Abs(a)-cmplx.Abs(b))) })
		turn := cmplx.Conj(most) / complex(cmplx.Abs(most), 0)
		frequency := "does not oscillate"
		if m.Frequency > 0 {
			frequency = fmt.Sprintf("frequency %.3g", u.Value(m.Frequency, Rate))
		}
		shape := figure.Shape{Name: fmt.Sprintf("mode %d: %s, growth rate %.3g %s", i+1, frequency, u.Value(m.GrowthRate, Rate), u.Axis(Rate))}
		for _, z := range s {
			z *= turn
			shape.Real = append(shape.Real, real(z))
			shape.Imag = append(shape.Imag, imag(z))
			shape.Envelope = append(shape.Envelope, cmplx.Abs(z))
		}
		f.Shapes = append(f.Shapes, shape)
	}
	return f.Page(), nil
}
