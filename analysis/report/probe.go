package report

import (
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/figure"
	"tailrace/gpe/probe"
)

// Probe is the answer of a horizon to a packet sent at it, beside scattering.
type Probe struct {
	Units      Units
	Comparison *probe.Comparison
}

// Result returns the object under "probe" of a spectrum.
func (p *Probe) Result() any {
	u, c := p.Units, p.Comparison
	var o object
	o.with(u, "temperature", c.Line.Temperature, Temperature)
	o.set("intercept", number(c.Line.Intercept))
	o.with(u, "temperature_scattered", c.ScatteredLine.Temperature, Temperature)
	o.set("worst_relative_difference", number(c.Worst))
	rows := []object{}
	for i, omega := range c.Omega {
		var r object
		r.with(u, "omega", omega, Rate)
		r.set("alpha_squared", number(c.Alpha2[i]))
		r.set("beta_squared", number(c.Beta2[i]))
		r.set("alpha_squared_scattered", number(c.ScatteredAlpha2[i]))
		r.set("beta_squared_scattered", number(c.ScatteredBeta2[i]))
		r.set("weight", number(c.Weight[i]))
		rows = append(rows, r)
	}
	o.set("rows", rows)
	return o
}

// Summary prints it.
func (p *Probe) Summary(w io.Writer) error {
	u, c := p.Units, p.Comparison
	var b strings.Builder
	fmt.Fprintf(&b, "\na packet of small waves sent at the horizon, in the full equation\n")
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "%s\t|α|²\tscattering\t|β|²\tscattering\t\n", u.named("ω", Rate))
	n := len(c.Omega)
	for i := 0; i < n; i += max(1, n/8) {
		if c.Weight[i] > 0.01 {
			fmt.Fprintf(t, "%.4g\t%.4g\t%.4g\t%.4g\t%.4g\t\n", u.Value(c.Omega[i], Rate), c.Alpha2[i], c.ScatteredAlpha2[i], c.Beta2[i], c.ScatteredBeta2[i])
		}
	}
	t.Flush()
	fmt.Fprintf(&b, "slope of ln(|β|²/|α|²): %s; of the scattering over the same frequencies %s; they differ by at most %.2g of |α|² or |β|²\n",
		u.say(c.Line.Temperature, Temperature), u.say(c.ScatteredLine.Temperature, Temperature), c.Worst)
	if math.Abs(c.ScatteredLine.Intercept) > 0.1 {
		fmt.Fprintf(&b, "the line misses the origin by %.2g: T depends on ω, and its slope is not the temperature at low frequency\n", c.ScatteredLine.Intercept)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// Figure shows ln(|β|²/|α|²) against frequency.
func (p *Probe) Figure() *figure.Page {
	u, c := p.Units, p.Comparison
	var omega, ratio, line, exact []float64
	for i, w := range c.Weight {
		if w > 0.01 {
			omega, ratio = append(omega, u.Value(c.Omega[i], Rate)), append(ratio, c.LogRatio[i])
			line, exact = append(line, c.Line.At(c.Omega[i])), append(exact, c.ScatteredLogRatio[i])
		}
	}
	return figure.Chart{Across: "frequency ω", Unit: u.Axis(Rate), Panels: []figure.ChartPanel{{Ordinate: "ln(|β|^{2}/|α|^{2})",
		Dots:  []figure.Points{{Name: "packet in the full equation", X: omega, Y: ratio}},
		Lines: []figure.Curve{{Name: "scattering", X: omega, Y: exact}, {Name: fmt.Sprintf("line of slope −1/*T*, *T* = %s", axisMarkup.Replace(u.say(c.Line.Temperature, Temperature))), X: omega, Y: line}}}}}.Page()
}
