package report

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"regexp"
	"strconv"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/figure"
	"tailrace/gpe/flow"
)

// Scan is a table of emission spectra over one or more dials.
type Scan struct {
	Title, Config, Version string
	Units                  Units // of a row each its own in lab units: see ScanRow
	Dials                  []Dial
	Rows                   []ScanRow
}

// Dial is what is scanned.
type Dial struct {
	Key, Label, Unit string
	Log              bool // evenly spaced in the logarithm
}

// ScanRow is one setting. Where there is no flow, Why says so and the rest is
// NaN.
type ScanRow struct {
	Values                []float64 // of the dials, in their units
	Units                 Units     // the cloud may change along a scan
	Up, Down              flow.State
	Horizon               flow.Horizon
	Temperature, OmegaMax float64
	Why                   string
}

// ratio returns T over κ/2π.
func (r *ScanRow) ratio() float64 { return r.Temperature / r.Horizon.Temperature }

// columns are the numbers of a row after its dials.
func (s *Scan) columns() []struct {
	key  string
	d    Dimension
	name string
	get  func(*ScanRow) float64
} {
	return []struct {
		key  string
		d    Dimension
		name string
		get  func(*ScanRow) float64
	}{
		{"mach_up", Pure, "Mach up", func(r *ScanRow) float64 { return r.Up.Mach() }},
		{"temperature_low_frequency", Temperature, "T", func(r *ScanRow) float64 { return r.Temperature }},
		{"hawking_temperature", Temperature, "κ/2π", func(r *ScanRow) float64 { return r.Horizon.Temperature }},
		{"ratio", Pure, "ratio", (*ScanRow).ratio},
		{"omega_max", Rate, "ω_max", func(r *ScanRow) float64 { return r.OmegaMax }},
	}
}

// JSON returns the table as one object.
func (s *Scan) JSON() ([]byte, error) {
	var o object
	o.set("title", s.Title)
	o.set("config", s.Config)
	o.set("version", s.Version)
	rows := []object{}
	for i := range s.Rows {
		r := &s.Rows[i]
		var w object
		for k, d := range s.Dials {
			w.set(d.Key, number(r.Values[k]))
		}
		w.set("possible", r.Why == "")
		for _, c := range s.columns() {
			if r.Why != "" {
				w.set(r.Units.Key(c.key, c.d), nil)
			} else {
				w.with(r.Units, c.key, c.get(r), c.d)
			}
		}
		w.set("why", r.Why)
		rows = append(rows, w)
	}
	o.set("scan", rows)
	b, err := json.MarshalIndent(o, "", "  ")
	return append(b, '\n'), err
}

// CSV writes the table with a line of names first.
func (s *Scan) CSV(w io.Writer) error {
	c := csv.NewWriter(w)
	var head []string
	for _, d := range s.Dials {
		head = append(head, strings.TrimSpace(d.Key+" "+d.Unit))
	}
	for _, col := range s.columns() {
		head = append(head, s.Units.Key(col.key, col.d))
	}
	if err := c.Write(append(head, "why")); err != nil {
		return err
	}
	for i := range s.Rows {
		r := &s.Rows[i]
		var line []string
		for _, v := range r.Values {
			line = append(line, strconv.FormatFloat(v, 'g', -1, 64))
		}
		for _, col := range s.columns() {
			if r.Why != "" {
				line = append(line, "")
			} else {
				line = append(line, strconv.FormatFloat(r.Units.Value(col.get(r), col.d), 'g', 8, 64))
			}
		}
		if err := c.Write(append(line, r.Why)); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}

var digits = regexp.MustCompile(`[-+0-9.e]+`)

// Summary prints the table, impossible settings with the reason.
func (s *Scan) Summary(w io.Writer) error {
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n\n", s.Title)
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	for _, d := range s.Dials {
		fmt.Fprintf(t, "%s\t", strings.TrimSuffix(d.Label+", "+d.Unit, ", "))
	}
	for _, c := range s.columns() {
		fmt.Fprintf(t, "%s\t", strings.TrimSuffix(c.name+", "+s.Units.Unit(c.d), ", "))
	}
	fmt.Fprintln(t)
	var impossible []string
	notes := map[string]int{}
	for i := range s.Rows {
		r := &s.Rows[i]
		for _, v := range r.Values {
			fmt.Fprintf(t, "%.4g\t", v)
		}
		for _, c := range s.columns() {
			if r.Why != "" {
				fmt.Fprintf(t, "–\t")
			} else {
				fmt.Fprintf(t, "%.4g\t", r.Units.Value(c.get(r), c.d))
			}
		}
		if r.Why != "" {
			// Reasons that differ in their numbers alone share a footnote.
			kind := digits.ReplaceAllString(r.Why, "")
			if _, known := notes[kind]; !known {
				impossible = append(impossible, r.Why)
				notes[kind] = len(impossible)
			}
			fmt.Fprintf(t, "[%d]\t", notes[kind])
		}
		fmt.Fprintln(t)
	}
	t.Flush()
	if len(impossible) > 0 {
		b.WriteByte('\n')
	}
	for i, why := range impossible {
		fmt.Fprintln(&b, wrap(fmt.Sprintf("[%d] %s", i+1, why), 96, "    "))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// Figure shows the scan: curves over one dial, a map of T over two; nil for
// more.
func (s *Scan) Figure() *figure.Page {
	switch len(s.Dials) {
	case 1:
		return s.curves()
	case 2:
		return s.field()
	}
	return nil
}

func (s *Scan) field() *figure.Page {
	f := figure.Field{LogX: s.Dials[0].Log, LogY: s.Dials[1].Log, XLabel: s.Dials[0].axis(), YLabel: s.Dials[1].axis(),
		Quantity: withUnitOf("emission at low frequency", s.Units, Temperature)}
	columns := 0
	for i := range s.Rows {
		v := s.Rows[i].Values
		if i == 0 || v[0] != f.X[len(f.X)-1] {
			f.X = append(f.X, v[0])
		}
		if v[0] == f.X[0] {
			f.Y = append(f.Y, v[1])
		}
	}
	columns = len(f.X)
	f.Value = make([]float64, len(s.Rows))
	for i := range s.Rows {
		r := &s.Rows[i]
		at := i%len(f.Y)*columns + i/len(f.Y)
		if f.Value[at] = math.NaN(); r.Why == "" {
			f.Value[at] = r.Units.Value(r.Temperature, Temperature)
		}
	}
	return f.Page()
}

// axis returns what the dial's axis says.
func (d Dial) axis() string {
	if d.Unit == "" {
		return d.Label
	}
	return d.Label + " (" + axisMarkup.Replace(d.Unit) + ")"
}

func (s *Scan) curves() *figure.Page {
	var x, t, classical, omega, ratio []float64
	for i := range s.Rows {
		r := &s.Rows[i]
		at := func(v float64) float64 {
			if r.Why != "" {
				return math.NaN()
			}
			return v
		}
		x = append(x, r.Values[0])
		t = append(t, at(r.Units.Value(r.Temperature, Temperature)))
		classical = append(classical, at(r.Units.Value(r.Horizon.Temperature, Temperature)))
		omega = append(omega, at(r.Units.Value(r.OmegaMax, omegaAs)))
		ratio = append(ratio, at(r.ratio()))
	}
	d := s.Dials[0]
	return figure.Chart{Across: d.Label, Unit: axisMarkup.Replace(d.Unit), LogX: d.Log,
		Panels: []figure.ChartPanel{
			{Ordinate: withUnitOf("temperature", s.Units, Temperature), Log: true, Lines: []figure.Curve{
				{Name: "emission at low frequency", X: x, Y: t}, {Name: "κ/2π", X: x, Y: classical}, {Name: "ħω_{max}/*k*_{B}", X: x, Y: omega}}},
			{Ordinate: "*T* / (κ/2π)", Levels: []float64{1}, Lines: []figure.Curve{{Name: "emission at low frequency", X: x, Y: ratio}}},
		}}.Page()
}

// omegaAs shows a frequency as the temperature ħω/k_B: in condensate units the
// two are one number.
const omegaAs = Temperature

func withUnitOf(name string, u Units, d Dimension) string {
	return fmt.Sprintf("%s (%s)", name, u.Axis(d))
}
