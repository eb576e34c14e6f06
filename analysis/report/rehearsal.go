package report

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/figure"
	"tailrace/analysis/rehearsal"
)

// Rehearsal is a report on virtual campaigns.
type Rehearsal struct {
	Title, Config, Version string
	Units                  Units
	R                      *rehearsal.Rehearsal
}

// JSON returns the table as one object.
func (r *Rehearsal) JSON() ([]byte, error) {
	u := r.Units
	var o object
	o.set("title", r.Title)
	o.set("config", r.Config)
	o.set("version", r.Version)
	o.with(u, "temperature_low_frequency", r.R.Truth, Temperature)
	rows := []object{}
	for _, w := range r.R.Rows {
		var x object
		x.set("shots", w.Shots)
		x.set("campaigns", w.Campaigns)
		x.set("detected", number(w.Detected))
		x.set("false_alarms", number(w.FalseAlarms))
		x.set("strength", number(w.Strength))
		x.set("strength_scatter", number(w.Scatter))
		x.set("read", w.Read)
		x.with(u, "temperature", w.Mean, Temperature)
		x.with(u, "spread", w.Spread, Temperature)
		x.with(u, "interval", w.Interval, Temperature)
		x.set("covered", number(w.Covered))
		rows = append(rows, x)
	}
	o.set("rows", rows)
	b, err := json.MarshalIndent(o, "", "  ")
	return append(b, '\n'), err
}

// Summary prints the table and what it means.
func (r *Rehearsal) Summary(w io.Writer) error {
	u := r.Units
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n%d virtual campaigns of each size; the temperature of the emission is %s\n\n", r.Title, r.R.Rows[0].Campaigns, u.say(r.R.Truth, Temperature))
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "shots\tband seen\tfalse alarms\tstrength\t%s\tbias\tspread\tinterval ±\tholds the truth\t\n", u.named("temperature", Temperature))
	for _, x := range r.R.Rows {
		fmt.Fprintf(t, "%d\t%.0f %%\t%.0f %%\t%.2f ± %.2f\t%.3g\t%+.0f %%\t%.3g\t%.3g\t%.0f %% of %d\t\n", x.Shots, 100*x.Detected, 100*x.FalseAlarms, x.Strength, x.Scatter,
			u.Value(x.Mean, Temperature), 100*(x.Mean/r.R.Truth-1), u.Value(x.Spread, Temperature), u.Value(x.Interval, Temperature), 100*x.Covered, x.Read)
	}
	t.Flush()
	last := r.R.Rows[len(r.R.Rows)-1]
	// The strength's scatter falls as the root of the shots.
	per := last.Scatter * math.Sqrt(float64(last.Shots))
	fmt.Fprintf(&b, "\nby the scatter of the strength, a band of the predicted height stands 3 standard deviations above chance from about %.0f shots on, 5 from %.0f\n", math.Ceil(9*per*per/10)*10, math.Ceil(25*per*per/10)*10)
	if s := last.Spread / r.R.Truth; !math.IsNaN(s) {
		fmt.Fprintf(&b, "a temperature to 20 %% takes about %.0f shots\n", math.Ceil(float64(last.Shots)*math.Pow(s/0.2, 2)/10)*10)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// Figure shows detection and temperature against the number of shots.
func (r *Rehearsal) Figure() *figure.Page {
	u := r.Units
	var x, seen, alarms, truth []float64
	var d figure.Points
	d.Name = "template, spread over campaigns"
	for _, w := range r.R.Rows {
		x = append(x, float64(w.Shots))
		seen, alarms = append(seen, w.Detected), append(alarms, w.FalseAlarms)
		truth = append(truth, u.Value(r.R.Truth, Temperature))
		d.X, d.Y, d.Error = append(d.X, float64(w.Shots)), append(d.Y, u.Value(w.Mean, Temperature)), append(d.Error, u.Value(w.Spread, Temperature))
	}
	return figure.Chart{Across: "shots", LogX: true, Panels: []figure.ChartPanel{
		{Ordinate: "share of campaigns", Range: figure.Range{Min: -0.05, Max: 1.05}, Lines: []figure.Curve{{Name: "band seen at 3σ", X: x, Y: seen}, {Name: "seen where there is none", X: x, Y: alarms}}},
		{Ordinate: withUnitOf("temperature", u, Temperature), Dots: []figure.Points{d}, Lines: []figure.Curve{{Name: "emission at low frequency", X: x, Y: truth}}},
	}}.Page()
}
