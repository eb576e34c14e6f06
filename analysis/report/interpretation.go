package report

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/figure"
	"tailrace/analysis/interpretation"
)

// Interpretation is all that a report on measured shots is made from.
type Interpretation struct {
	Title, Config, Version string
	Source, Checksum       string // of the shots
	Units                  Units
	It                     *interpretation.Interpretation
}

// run is the same account as that of a run, for what the two share.
func (p *Interpretation) run() *Run {
	return &Run{Title: p.Title, Config: p.Config, Version: p.Version, Units: p.Units, Account: p.It.Account}
}

func (p *Interpretation) say(T float64) string { return p.Units.say(T, Temperature) }

// Verdict returns it in words.
func (p *Interpretation) Verdict() string { return p.It.Verdict(p.say) }

// explanationValue prints the value of an explanation with its unit.
func (p *Interpretation) explanationValue(e interpretation.Explanation) string {
	return p.Units.say(e.Value, p.dimension(e))
}

func (p *Interpretation) dimension(e interpretation.Explanation) Dimension {
	return map[string]Dimension{"length": Length, "temperature": Temperature}[e.Unit]
}

// Result returns the object of the interpretation's JSON.
func (p *Interpretation) Result() any {
	u, it, a := p.Units, p.It, p.It.Account
	var o object
	o.set("verdict", p.Verdict())
	o.set("seen", it.Seen())
	o.set("title", p.Title)
	o.set("config", p.Config)
	o.set("version", p.Version)
	var in object
	in.set("file", p.Source)
	in.set("sha256", p.Checksum)
	in.set("shots", it.Input.Set.Count)
	in.set("pixels", it.Input.Set.Pixels)
	in.set("missing_pixels", it.Input.Set.Missing)
	in.set("used", len(it.Aligned.Index))
	in.with(u, "alignment_rest", it.Rest, Length)
	in.set("normalisation", it.Input.Normalisation.String())
	in.set("bootstrap_block", it.Block)
	rejected := []object{}
	for _, r := range it.Rejected {
		rejected = append(rejected, object{{"shot", r.Shot}, {"why", r.Why}})
	}
	in.set("rejected", rejected)
	drifts := []object{}
	for _, d := range it.Drifts {
		drifts = append(drifts, object{{"what", d.What}, {"rank_correlation", number(d.Correlation)}, {"p_value", number(d.PValue)}, {"neighbours", number(d.Neighbours)}})
	}
	in.set("drifts", drifts)
	o.set("shots", in)
	run := p.run()
	o.set("flow", run.flow(a.Predicted))
	o.set("measured_flow", run.flow(a.Measured))
	o.with(u, "omega_max", a.OmegaMax, Rate)
	o.with(u, "temperature_low_frequency", a.Scattered, Temperature)
	o.set("band", run.band())
	if a := it.Along; a != nil {
		along := []object{}
		for _, x := range a.Slices {
			var w object
			w.with(u, "from", x.From, Time)
			w.with(u, "to", x.To, Time)
			w.set("strength_over_predicted", number(x.Strength))
			w.set("error", number(x.Error))
			along = append(along, w)
		}
		o.set("along", along)
		o.with(u, "front", a.Front, Time)
	}
	var s object
	s.set("slope", number(-it.Search.Ratio))
	s.with(u, "offset", it.Search.Offset, Length)
	s.set("sign", number(it.Search.Sign))
	s.set("significance_local", number(it.Search.Significance))
	s.set("p_value", number(it.Search.PValue))
	s.set("ridges", it.Search.Ridges)
	o.set("search", s)
	o.set("temperatures", run.temperatures(a.Readings))
	systematics := []object{}
	for _, v := range it.Systematics {
		var w object
		w.set("choice", v.What)
		w.set("strength_over_predicted", number(v.Strength))
		w.with(u, "dispersive", v.Dispersive, Temperature)
		w.with(u, "template", v.Template, Temperature)
		systematics = append(systematics, w)
	}
	o.set("systematics", systematics)
	explanations := []object{}
	for _, e := range it.Explanations {
		var w object
		w.set("name", e.Name)
		w.with(u, "value", e.Value, p.dimension(e))
		w.set("p_value", number(e.PValue))
		w.set("found", e.Found)
		w.set("why", e.Why)
		explanations = append(explanations, w)
	}
	o.set("explanations", explanations)
	o.set("separability", p.separability())
	o.set("conservation", object{})
	o.set("warnings", append([]string{}, a.Warnings...))
	return o
}

func (p *Interpretation) separability() any {
	q := p.It.Separability
	if q == nil {
		return nil
	}
	var o object
	o.set("entangled", q.Found)
	o.set("most_significant", number(q.MostSignificant))
	rows := []object{}
	for f, w := range q.Omega {
		var r object
		r.with(p.Units, "omega", w, Rate)
		r.set("population_up_at_most", number(q.Up[f]))
		r.set("population_down_at_most", number(q.Down[f]))
		r.set("pairing_squared", number(q.Pairing[f]))
		r.set("bound", number(q.Bound[f]))
		r.set("low", number(q.Low[f]))
		r.set("high", number(q.High[f]))
		rows = append(rows, r)
	}
	o.set("rows", rows)
	assumptions := []object{}
	for _, a := range q.Assumptions {
		assumptions = append(assumptions, object{{"what", a.What}, {"ok", a.OK}, {"why", a.Why}})
	}
	o.set("assumptions", assumptions)
	return o
}

// JSON returns the result indented.
func (p *Interpretation) JSON() ([]byte, error) {
	b, err := json.MarshalIndent(p.Result(), "", "  ")
	return append(b, '\n'), err
}

// Summary prints the interpretation as a page of text.
func (p *Interpretation) Summary(w io.Writer) error {
	u, it, a := p.Units, p.It, p.It.Account
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n\n%s\n\n", wrap(p.Verdict(), 96, ""), p.read())
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "\ttheory\tmeasured\n")
	fmt.Fprintf(t, "%s upstream\t%.4g\t%.4g ± %.2g\n", u.named("density", Density), u.Value(a.Predicted.Upstream.Density, Density), u.Value(a.Measured.Upstream.Density, Density), u.Value(a.DensityError[0], Density))
	fmt.Fprintf(t, "%s downstream\t%.4g\t%.4g ± %.2g\n", u.named("density", Density), u.Value(a.Predicted.Downstream.Density, Density), u.Value(a.Measured.Downstream.Density, Density), u.Value(a.DensityError[1], Density))
	fmt.Fprintf(t, "κ/2π, as a temperature\t%s\t\n", p.say(a.Predicted.Horizon.Temperature))
	fmt.Fprintf(t, "emission at low frequency\t%s\t\n", p.say(a.Scattered))
	slope := "not found"
	if a.Line != nil && a.Line.SlopeError > 0 {
		slope = fmt.Sprintf("%.3g ± %.2g", a.Line.Slope, a.Line.SlopeError)
	}
	fmt.Fprintf(t, "slope of the band\t%.3g\t%s\n", a.BentSlope, slope)
	fmt.Fprintf(t, "strength of the band\t1\t%.2f ± %.2f\n", a.Null.Strength, a.Null.Spread())
	t.Flush()
	b.WriteByte('\n')
	var notes []string
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
		fmt.Fprintf(t, "%s\t%s\t%s\t%.2f\t%.2f\t%s %s\n", v.Method, p.say(v.Value), u.interval(v.Low, v.High, Temperature), v.Value/a.Predicted.Horizon.Temperature, v.Value/a.Scattered, trust, note(v.Method+": "+v.Why))
	}
	t.Flush()
	b.WriteByte('\n')
	t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "choice\tstrength\tdispersive\ttemplate\n")
	for _, v := range it.Systematics {
		fmt.Fprintf(t, "%s\t%.2f\t%s\t%s\n", v.What, v.Strength, p.orNone(v.Dispersive), p.orNone(v.Template))
	}
	t.Flush()
	fmt.Fprintf(&b, "choices move the strength by ±%.2f, the dispersive temperature by ±%s and the template by ±%s\n\n",
		it.Spread(func(v interpretation.Variation) float64 { return v.Strength }),
		p.say(it.Spread(func(v interpretation.Variation) float64 { return v.Dispersive })), p.say(it.Spread(func(v interpretation.Variation) float64 { return v.Template })))
	t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "duller explanation\tvalue\tp\t\n")
	for _, e := range it.Explanations {
		fmt.Fprintf(t, "%s\t%s\t%.2g\t%s %s\n", e.Name, p.explanationValue(e), e.PValue, found(e.Found), note(e.Name+": "+e.Why))
	}
	t.Flush()
	if q := it.Separability; q != nil {
		fmt.Fprintf(&b, "\n%s\n", wrap("partners: "+p.entangled(), 96, "    "))
	}
	b.WriteByte('\n')
	for i, n := range append(notes, a.Warnings...) {
		fmt.Fprintln(&b, wrap(fmt.Sprintf("[%d] %s", i+1, n), 96, "    "))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func found(f bool) string {
	if f {
		return "found"
	}
	return "not seen"
}

func (p *Interpretation) orNone(T float64) string {
	if math.IsNaN(T) {
		return "none"
	}
	return p.say(T)
}

// read says what was read and kept.
func (p *Interpretation) read() string {
	it := p.It
	text := fmt.Sprintf("%d of %d shots used, %d rejected", len(it.Aligned.Index), it.Input.Set.Count, len(it.Rejected))
	for i, r := range it.Rejected {
		if i == 5 {
			text += fmt.Sprintf("; and %d more", len(it.Rejected)-5)
			break
		}
		text += fmt.Sprintf("; shot %d: %s", r.Shot, r.Why)
	}
	for _, d := range it.Drifts {
		if d.PValue < 1e-3 {
			text += fmt.Sprintf("; the %s drifts (rank correlation %.2f, p = %.1g)", d.What, d.Correlation, d.PValue)
		}
	}
	return wrap(text+fmt.Sprintf("; aligned to whole pixels, which leaves %s; bootstrap in blocks of %d", p.Units.say(it.Rest, Length), it.Block), 96, "")
}

// entangled says what the bound says.
func (p *Interpretation) entangled() string {
	q := p.It.Separability
	broken := ""
	for _, a := range q.Assumptions {
		if !a.OK {
			broken += map[bool]string{true: "; but this needs, what is not so here, that ", false: ", and that "}[broken == ""] + a.What
		}
	}
	if q.Found {
		return fmt.Sprintf("entangled: n_u n_d2 − |⟨b_u b_d2⟩|² is below zero by up to %.1f standard deviations, whatever the ingoing waves are%s", q.MostSignificant, broken)
	}
	return "nothing is shown: the populations that a density map bounds from above leave room for partners that are not entangled; an independent measurement of the ingoing waves would narrow that" + broken
}

// Figures returns the figures by name.
func (p *Interpretation) Figures() []struct {
	Name, Caption string
	Page          *figure.Page
} {
	r := p.run()
	r.Problem = nil
	return []struct {
		Name, Caption string
		Page          *figure.Page
	}{
		{"map", "The correlation map, smoothed a little for the eye. The band is predicted along the dashed line; the analysis uses the window.", r.mapWith(p.It.Input.Camera.Pixel)},
		{"cut", "The cut across the band, averaged along it, with the fits.", r.cutFigure()},
		{"coherence", "The coherence of the partners against frequency, through the window, with the thermal fit.", r.coherenceFigure()},
		{"along", "The band's strength along its length, against the time since the pairs left the horizon: it should hold to the horizon's age and end there.", p.alongFigure()},
		{"null", "The strength of the band where theory puts it, and what shuffling the downstream halves between shots makes of it.", r.nullFigure()},
		{"separability", "The bound on n_u n_d2 − |⟨b_u b_d2⟩|²: below zero the partners are entangled.", p.separabilityFigure()},
	}
}

func (p *Interpretation) alongFigure() *figure.Page {
	a, u := p.It.Along, p.Units
	if a == nil || len(a.Slices) < 2 {
		return nil
	}
	var d figure.Points
	d.Name = "strength in a slice"
	for _, s := range a.Slices {
		d.X, d.Y, d.Error = append(d.X, u.Value((s.From+s.To)/2, Time)), append(d.Y, s.Strength), append(d.Error, s.Error)
	}
	f := figure.Chart{Across: "age of the pairs", Unit: u.Axis(Time), Panels: []figure.ChartPanel{{Ordinate: "strength over its prediction", Levels: []float64{0, 1}, Dots: []figure.Points{d}}}}
	if !math.IsNaN(a.Age) && a.Age < a.Slices[len(a.Slices)-1].To {
		f.Marks = []figure.Mark{{Name: "age of the horizon", At: u.Value(a.Age, Time)}}
	}
	return f.Page()
}

// Times is a report on several times of a sweep.
type Times struct {
	Units Units
	Times *interpretation.Times
}

// Result returns the object under "times".
func (t *Times) Result() any {
	u := t.Units
	var o object
	rows := []object{}
	for _, m := range t.Times.Moments {
		var r object
		r.with(u, "age", m.Age, Time)
		r.set("strength_over_predicted", number(m.Strength))
		r.set("strength_error", number(m.StrengthError))
		r.set("significance", number(m.Significance))
		r.set("method", m.Method)
		r.with(u, "temperature", m.Temperature, Temperature)
		r.with(u, "low", m.Low, Temperature)
		r.with(u, "high", m.High, Temperature)
		r.with(u, "front", m.Front, Time)
		rows = append(rows, r)
	}
	o.set("rows", rows)
	o.with(u, "mean_temperature", t.Times.Mean, Temperature)
	o.with(u, "mean_temperature_error", t.Times.MeanError, Temperature)
	o.set("steady_p_value", number(t.Times.PValue))
	o.set("front_growth", number(t.Times.Growth))
	return o
}

// JSON returns the result indented.
func (t *Times) JSON() ([]byte, error) {
	b, err := json.MarshalIndent(t.Result(), "", "  ")
	return append(b, '\n'), err
}

// Summary prints the table.
func (t *Times) Summary(w io.Writer) error {
	u := t.Units
	var b strings.Builder
	tw := tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(tw, "age\tstrength\tabove chance\ttemperature\t68 %% interval\tby\tthe band ends at\n")
	for _, m := range t.Times.Moments {
		method, temperature, front := m.Method, "none trusted", "not seen"
		if method != "" {
			temperature = u.say(m.Temperature, Temperature)
		}
		if !math.IsNaN(m.Front) {
			front = u.say(m.Front, Time)
		}
		fmt.Fprintf(tw, "%s\t%.2f ± %.2f\t%.1f\t%s\t%s\t%s\t%s\n", u.say(m.Age, Time), m.Strength, m.StrengthError, m.Significance, temperature, u.interval(m.Low, m.High, Temperature), method, front)
	}
	tw.Flush()
	if !math.IsNaN(t.Times.PValue) {
		fmt.Fprintf(&b, "\na steady temperature of %s ± %s would scatter as much with probability %.2g\n", u.say(t.Times.Mean, Temperature), u.say(t.Times.MeanError, Temperature), t.Times.PValue)
	}
	if !math.IsNaN(t.Times.Growth) {
		fmt.Fprintf(&b, "the end of the band moves on by %.2f of the age, where a horizon's own band has 1\n", t.Times.Growth)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func (p *Interpretation) separabilityFigure() *figure.Page {
	q := p.It.Separability
	if q == nil {
		return nil
	}
	u := p.Units
	omega := u.Values(q.Omega, Rate)
	errors := make([]float64, len(q.Bound))
	product := make([]float64, len(q.Bound))
	for f := range errors {
		errors[f] = (q.High[f] - q.Low[f]) / 2
		product[f] = math.Max(q.Up[f], 0) * math.Max(q.Down[f], 0)
	}
	return figure.Chart{Across: "frequency ω", Unit: u.Axis(Rate), Panels: []figure.ChartPanel{
		{Ordinate: "squares", Lines: []figure.Curve{{Name: "*n*_{u}*n*_{d2} at most", X: omega, Y: product}, {Name: "|*b*_{u}*b*_{d2}|^{2}", X: omega, Y: q.Pairing}}},
		{Ordinate: "bound on Δ", Levels: []float64{0}, Dots: []figure.Points{{Name: "bound, 68 %", X: omega, Y: q.Bound, Error: errors}}},
	}}.Page()
}
