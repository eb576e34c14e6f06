package report

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"math/cmplx"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/figure"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// Spectrum is all that a report of an emission spectrum is made from.
type Spectrum struct {
	Title, Config, Version string
	Units                  Units
	Spectrum               *bogoliubov.Spectrum
	Temperature            float64 // of the cloud
	Probe                  *Probe  // if one was sent
}

// flowOf returns a flow as JSON has it.
func (u Units) flowOf(up, down flow.State, h flow.Horizon) object {
	state := func(s flow.State) object {
		var o object
		o.with(u, "density", s.Density, Density)
		o.with(u, "velocity", s.Velocity, Speed)
		o.with(u, "sound_speed", s.SoundSpeed, Speed)
		o.set("mach", number(s.Mach()))
		return o
	}
	var horizon, o object
	horizon.with(u, "position", h.Position, Length)
	horizon.with(u, "surface_gravity", h.SurfaceGravity, Rate)
	horizon.with(u, "hawking_temperature", h.Temperature, Temperature)
	o.set("upstream", state(up))
	o.set("downstream", state(down))
	o.set("horizon", horizon)
	return o
}

// Result returns the object that spectrum prints.
func (s *Spectrum) Result() any {
	u, e := s.Units, s.Spectrum
	var o object
	o.set("title", s.Title)
	o.set("config", s.Config)
	o.set("version", s.Version)
	o.set("units", map[bool]string{true: "lab", false: "condensate"}[u.Lab])
	o.set("flow", u.flowOf(e.Up, e.Down, e.Horizon))
	o.with(u, "omega_max", e.OmegaMax, Rate)
	o.with(u, "temperature_low_frequency", e.Temperature, Temperature)
	o.with(u, "temperature_low_frequency_error", e.TemperatureError, Temperature)
	o.with(u, "cloud_temperature", s.Temperature, Temperature)
	rows := []object{}
	for _, r := range e.Rows {
		var w object
		w.with(u, "omega", r.Omega, Rate)
		w.set("emission", number(r.Emission()))
		w.set("coherence", number(cmplx.Abs(r.Coherence())))
		w.with(u, "temperature", r.Temperature(), Temperature)
		w.with(u, "horizon_temperature", r.HorizonTemperature(), Temperature)
		w.set("grey_factor", number(r.GreyFactor()))
		w.set("transmission", number(r.Transmission()))
		w.set("emission_warm", number(r.ThermalEmission(s.Temperature)))
		w.set("unitarity_error", number(r.UnitarityError))
		rows = append(rows, w)
	}
	o.set("rows", rows)
	if s.Probe != nil {
		o.set("probe", s.Probe.Result())
	}
	return o
}

// JSON returns the result indented.
func (s *Spectrum) JSON() ([]byte, error) {
	b, err := json.MarshalIndent(s.Result(), "", "  ")
	return append(b, '\n'), err
}

// flowTable prints both sides of a flow and its horizon.
func (u Units) flowTable(b *strings.Builder, up, down flow.State, h flow.Horizon) {
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "\tupstream\tdownstream\t\n")
	for _, row := range []struct {
		name string
		d    Dimension
		get  func(flow.State) float64
	}{
		{u.named("density", Density), Density, func(s flow.State) float64 { return s.Density }},
		{u.named("velocity", Speed), Speed, func(s flow.State) float64 { return s.Velocity }},
		{u.named("sound speed", Speed), Speed, func(s flow.State) float64 { return s.SoundSpeed }},
		{"Mach number", Pure, flow.State.Mach},
	} {
		fmt.Fprintf(t, "%s\t%.4g\t%.4g\t\n", row.name, u.Value(row.get(up), row.d), u.Value(row.get(down), row.d))
	}
	t.Flush()
	fmt.Fprintf(b, "\nhorizon %s from the step, surface gravity %s\n", u.say(h.Position, Length), u.say(h.SurfaceGravity, Rate))
}

// thermalRatio is T/ω_max up to which a band's width is a temperature: beyond
// it a width fit to the exact map of a uniform flow reads less than nine tenths
// (measured).
const thermalRatio = 0.05

// Summary prints the spectrum as a page of text.
func (s *Spectrum) Summary(w io.Writer) error {
	u, e := s.Units, s.Spectrum
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n\n", s.Title)
	u.flowTable(&b, e.Up, e.Down, e.Horizon)
	fmt.Fprintf(&b, "κ/2π, as a temperature     %s\n", u.say(e.Horizon.Temperature, Temperature))
	fmt.Fprintf(&b, "emission at low frequency  %s, %.3f of κ/2π\n", u.say(e.Temperature, Temperature), e.Temperature/e.Horizon.Temperature)
	ratio := e.Temperature / e.OmegaMax
	fmt.Fprintf(&b, "ω_max                      %s; T/ω_max = %.3f: %s\n\n", u.say(e.OmegaMax, Rate), ratio, judgeRatio(ratio))

	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', tabwriter.AlignRight)
	warm := s.Temperature > 0
	fmt.Fprintf(t, "%s\tω/ω_max\temission\tcoherence\t%s\tgrey factor\t", u.named("ω", Rate), u.named("T(ω)", Temperature))
	if warm {
		fmt.Fprintf(t, "warm cloud\t")
	}
	fmt.Fprintln(t)
	const shown = 12
	worst := 0.0
	for i, r := range e.Rows {
		worst = math.Max(worst, r.UnitarityError)
		if n := len(e.Rows); n > shown && i != n-1 && (i*(shown-1))/(n-1) == ((i-1)*(shown-1))/(n-1) && i > 0 {
			continue
		}
		fmt.Fprintf(t, "%.4g\t%.4f\t%.4g\t%.4g\t%.4g\t%.4f\t", u.Value(r.Omega, Rate), r.Omega/e.OmegaMax, r.Emission(), cmplx.Abs(r.Coherence()), u.Value(r.Temperature(), Temperature), r.GreyFactor())
		if warm {
			fmt.Fprintf(t, "%.4g\t", r.ThermalEmission(s.Temperature))
		}
		fmt.Fprintln(t)
	}
	t.Flush()
	fmt.Fprintf(&b, "\nflux is conserved to %.1g", worst)
	if worst > 1e-6 {
		fmt.Fprintf(&b, ", which is worse than the 1e-06 that these numbers need: do not trust the last digits")
	}
	b.WriteByte('\n')
	if warm {
		fmt.Fprintf(&b, "warm cloud: the emission with ingoing waves at %s, each in the frame of its fluid\n", u.say(s.Temperature, Temperature))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func judgeRatio(ratio float64) string {
	switch {
	case ratio < thermalRatio/2:
		return "the spectrum is thermal, and the band's width near the horizon a thermometer"
	case ratio < 0.2:
		return "dispersion matters: the band's width reads too low, its height carries the temperature"
	}
	return "the spectrum is cut off before it has fallen: it is not thermal"
}

// Figure shows the emission, what makes its temperature, and the departure from
// a thermal spectrum.
func (s *Spectrum) Figure() *figure.Page {
	u, e := s.Units, s.Spectrum
	var omega, emission, black, warm, slope, line, ratio, grey []float64
	for _, r := range e.Rows {
		if r.Omega >= e.OmegaMax {
			continue
		}
		omega = append(omega, u.Value(r.Omega, Rate))
		emission = append(emission, r.Emission())
		black = append(black, 1/math.Expm1(r.Omega/e.Temperature))
		warm = append(warm, r.ThermalEmission(s.Temperature))
		slope = append(slope, math.Log1p(1/r.Emission()))
		line = append(line, r.Omega/e.Temperature)
		ratio = append(ratio, r.Temperature()/e.Temperature)
		grey = append(grey, r.HorizonTemperature()/e.Temperature)
	}
	const scattering, thermal = "scattering", "thermal, at the low-frequency temperature"
	top := figure.ChartPanel{Ordinate: "emission |*S*_{u,d2}|^{2}", Log: true, Lines: []figure.Curve{{Name: scattering, X: omega, Y: emission}, {Name: thermal, X: omega, Y: black}}}
	low := emission[len(emission)-1]
	top.Range = figure.Range{Min: math.Max(low/2, emission[0]*1e-9), Max: emission[0] * 2}
	if s.Temperature > 0 {
		top.Lines = append(top.Lines, figure.Curve{Name: fmt.Sprintf("scattering, cloud at %s", axisMarkup.Replace(u.say(s.Temperature, Temperature))), X: omega, Y: warm})
	}
	return figure.Chart{Across: "frequency ω", Unit: u.Axis(Rate), LogX: true,
		Panels: []figure.ChartPanel{
			top,
			{Ordinate: "ln(1 + 1/emission)", Log: true, Lines: []figure.Curve{{Name: scattering, X: omega, Y: slope}, {Name: thermal, X: omega, Y: line}}},
			{Ordinate: "*T*(ω) / *T*(0)", Levels: []float64{1}, Lines: []figure.Curve{{Name: scattering, X: omega, Y: ratio}, {Name: "without the grey factor", X: omega, Y: grey}}},
		},
		Marks: []figure.Mark{{Name: "*k*_{B}*T*(0)/ħ", At: u.Value(e.Temperature, Rate)}},
	}.Page()
}
