package report

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"tailrace/analysis/forecast"
	"tailrace/gpe/flow"
	"tailrace/gpe/lab"
)

// Plan is a report on dial settings.
type Plan struct {
	Title, Config, Version string
	Units                  Units
	F                      *forecast.Forecast
	Cloud                  *lab.Regime // nil without a laboratory
	CloudTemperature       float64
	Checks                 []lab.Check // of the cloud
	Planned                int         // shots
	Aims                   []Aim       // if something was aimed at
}

// Aim is one setting that reaches what was aimed at.
type Aim struct {
	Setting flow.Setting
	F       *forecast.Forecast // nil where there is none
	Why     string
}

// all returns the checks of cloud and forecast.
func (p *Plan) all() []lab.Check { return append(append([]lab.Check{}, p.Checks...), p.F.Checks...) }

// grave are the checks that speak against a run at all.
var grave = map[string]bool{"weak interaction": true, "quasi-1D": true, "ripe": true, "shots for a band": true, "reflected wave": true}

// Verdict says go, go with care, or no go, and why.
func (p *Plan) Verdict() string {
	var against, care []string
	for _, c := range p.all() {
		if c.OK {
			continue
		}
		if grave[c.Name] {
			against = append(against, c.Name)
		} else {
			care = append(care, c.Name)
		}
	}
	switch {
	case len(against) > 0:
		return "no go: " + strings.Join(against, ", ") + "; what to turn is said with each"
	case len(care) > 0:
		return "go with care: " + strings.Join(care, ", ") + "; why is said with each"
	}
	return "go: every condition holds"
}

// Result returns the object that plan prints.
func (p *Plan) Result() any {
	u, f := p.Units, p.F
	var o object
	o.set("verdict", p.Verdict())
	o.set("title", p.Title)
	o.set("config", p.Config)
	o.set("version", p.Version)
	o.set("flow", u.flowOf(f.Up, f.Down, f.Horizon))
	o.with(u, "omega_max", f.OmegaMax, Rate)
	o.with(u, "temperature_low_frequency", f.Scattered, Temperature)
	var b object
	b.set("slope", number(f.Slope))
	b.set("amplitude", number(f.Amplitude))
	b.with(u, "width", f.Width, Length)
	b.with(u, "width_through_camera", f.Blurred, Length)
	b.set("strength_error_of_one_shot", number(f.StrengthError))
	o.set("band", b)
	var t object
	t.with(u, "ripe", f.Timing.Ripe, Time)
	t.with(u, "imaging", f.Timing.Imaging, Time)
	t.with(u, "wave_at_end", f.Timing.WaveAtEnd, Time)
	t.with(u, "wave_back", f.Timing.WaveBack, Time)
	t.with(u, "step_at_end", f.Timing.StepAtEnd, Time)
	o.set("timing", t)
	o.set("shots_needed", number(f.ShotsForBand))
	o.set("shots_needed_for_temperature", number(f.ShotsForTemperature))
	if p.Units.Lab {
		var c object
		c.set("density_per_um", number(p.Units.Scale.LineDensity*1e-6))
		c.set("sound_speed_mm_per_s", number(p.Units.Scale.SoundSpeed*1e3))
		c.set("healing_length_um", number(p.Units.Scale.HealingLength*1e6))
		c.set("atoms_per_healing_length", number(p.Units.Scale.AtomsPerHealingLength))
		if r := p.Cloud; r != nil {
			c.set("chemical_potential_over_radial", number(r.ChemicalPotential))
			c.set("gamma", number(r.Gamma))
			c.set("swelling", number(r.Swelling))
			c.set("coherence_length_um", number(r.CoherenceLength*1e6))
		}
		o.set("cloud", c)
	}
	checks := []object{}
	for _, c := range p.all() {
		checks = append(checks, object{{"name", c.Name}, {"value", number(c.Value)}, {"limit", number(c.Limit)}, {"ok", c.OK}, {"why", c.Why}})
	}
	o.set("checks", checks)
	if p.Aims != nil {
		aims := []object{}
		for _, a := range p.Aims {
			var w object
			w.with(u, "speed", a.Setting.Speed, Speed)
			w.with(u, "depth", a.Setting.Depth, Temperature)
			w.with(u, "width", a.Setting.Width, Length)
			if a.F != nil {
				w.set("mach_up", number(a.F.Up.Mach()))
				w.with(u, "temperature_low_frequency", a.F.Scattered, Temperature)
				w.set("shots_needed", number(a.F.ShotsForBand))
			}
			w.set("why", a.Why)
			aims = append(aims, w)
		}
		o.set("aims", aims)
	}
	return o
}

// JSON returns the result indented.
func (p *Plan) JSON() ([]byte, error) {
	b, err := json.MarshalIndent(p.Result(), "", "  ")
	return append(b, '\n'), err
}

// Summary prints the plan as a page of text.
func (p *Plan) Summary(w io.Writer) error {
	u, f := p.Units, p.F
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n%s\n\n", p.Title, wrap(p.Verdict(), 96, "    "))
	if u.Lab {
		fmt.Fprintf(&b, "the cloud at rest: %.4g atoms a µm, sound %.3g mm/s, healing length %.3g µm with %.3g atoms in it\n", u.Scale.LineDensity*1e-6, u.Scale.SoundSpeed*1e3, u.Scale.HealingLength*1e6, u.Scale.AtomsPerHealingLength)
		if r := p.Cloud; r != nil {
			fmt.Fprintf(&b, "μ is %.2g ħω⊥, γ %.2g, a·n %.2g, radial size %.2g µm, phases are coherent over %s\n", r.ChemicalPotential, r.Gamma, r.Swelling, r.RadialSize*1e6, coherent(r.CoherenceLength))
		}
		b.WriteByte('\n')
	}
	u.flowTable(&b, f.Up, f.Down, f.Horizon)
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "κ/2π, as a temperature\t%s\n", u.say(f.Horizon.Temperature, Temperature))
	fmt.Fprintf(t, "emission at low frequency\t%s, %.3f of κ/2π\n", u.say(f.Scattered, Temperature), f.Scattered/f.Horizon.Temperature)
	fmt.Fprintf(t, "ω_max\t%s\n", u.say(f.OmegaMax, Rate))
	fmt.Fprintf(t, "the band\tslope %.3g, depth %.2g through the camera, %s wide, %s through the camera\n", f.Slope, f.Amplitude, u.say(f.Width, Length), u.say(f.Blurred, Length))
	fmt.Fprintf(t, "shots\t%.0f for three standard deviations, %.0f for the temperature to 20 %%; %d are planned, which make %.0f\n", f.ShotsForBand, f.ShotsForTemperature, p.Planned, math.Sqrt(float64(p.Planned))/f.StrengthError)
	when := func(x float64) string {
		if math.IsNaN(x) {
			return "never"
		}
		return u.say(x, Time)
	}
	fmt.Fprintf(t, "timetable\tthe band is ripe at %s; pictures are taken at %s; the wave reaches the far end at %s\n", when(f.Timing.Ripe), when(f.Timing.Imaging), when(f.Timing.WaveAtEnd))
	fmt.Fprintf(t, "\tand is back in the window at %s; the step reaches the far end at %s\n", when(f.Timing.WaveBack), when(f.Timing.StepAtEnd))
	t.Flush()
	fmt.Fprintf(&b, "how to start: the step at the wall, which opens at once and at full speed; started elsewhere\nor slowly it leaves solitons upstream or a ripple downstream\n\n")
	t = tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "condition\tvalue\tat most\t\n")
	var notes []string
	for _, c := range p.all() {
		mark := "ok"
		if !c.OK {
			notes = append(notes, c.Name+": "+c.Why)
			mark = fmt.Sprintf("beyond it [%d]", len(notes))
		}
		fmt.Fprintf(t, "%s\t%.3g\t%.3g\t%s\n", c.Name, c.Value, c.Limit, mark)
	}
	t.Flush()
	if p.Aims != nil {
		b.WriteByte('\n')
		p.aims(&b)
	}
	if len(notes) > 0 {
		b.WriteByte('\n')
	}
	for i, n := range notes {
		fmt.Fprintln(&b, wrap(fmt.Sprintf("[%d] %s", i+1, n), 96, "    "))
	}
	fmt.Fprintf(&b, "\nthe beams of trap and step are class 3B or 4 lasers: settings go through the laser-safety officer first\n")
	_, err := io.WriteString(w, b.String())
	return err
}

func coherent(metres float64) string {
	if math.IsInf(metres, 0) {
		return "any length"
	}
	return fmt.Sprintf("%.3g µm", metres*1e6)
}

// aims prints the settings that reach what was aimed at.
func (p *Plan) aims(b *strings.Builder) {
	u := p.Units
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "%s\t%s\tMach up\t%s\tshots\t\n", u.named("speed", Speed), u.named("depth", Temperature), u.named("emission", Temperature))
	fewest := math.Inf(1)
	for _, a := range p.Aims {
		if a.F != nil {
			fewest = math.Min(fewest, a.F.ShotsForBand)
		}
	}
	for _, a := range p.Aims {
		if a.F == nil {
			fmt.Fprintf(t, "%.4g\t–\t–\t–\t–\t\n", u.Value(a.Setting.Speed, Speed))
			continue
		}
		mark := ""
		if a.F.ShotsForBand == fewest {
			mark = "fewest"
		}
		fmt.Fprintf(t, "%.4g\t%.4g\t%.4g\t%.4g\t%.0f\t%s\n", u.Value(a.Setting.Speed, Speed), u.Value(a.Setting.Depth, Temperature), a.F.Up.Mach(), u.Value(a.F.Scattered, Temperature), a.F.ShotsForBand, mark)
	}
	t.Flush()
	for _, a := range p.Aims {
		if a.Why != "" {
			fmt.Fprintln(b, wrap(a.Why, 96, "    "))
			break
		}
	}
}
