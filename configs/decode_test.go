package configs

import (
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/pelletier/go-toml/v2"

	"tailrace/gpe"
	"tailrace/gpe/lab"
)

func decode(t *testing.T, text string) *Config {
	t.Helper()
	c, err := Decode("q.toml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// Numbers of a lab file arrive in SI units; CODATA 2018.
func TestLabUnits(t *testing.T) {
	const kB, h, u, a0 = 1.380649e-23, 6.62607015e-34, 1.66053906660e-27, 5.29177210903e-11
	for _, c := range []struct {
		name, key, value string
		field            func(*Config) float64
		want             float64
	}{
		{"micrometres", "step.width", `"0.5 um"`, func(c *Config) float64 { return c.Step.Width }, 5e-7},
		{"micro sign", "step.width", "\"0.5 \u00b5m\"", func(c *Config) float64 { return c.Step.Width }, 5e-7},
		{"Greek mu", "step.width", "\"0.5 \u03bcm\"", func(c *Config) float64 { return c.Step.Width }, 5e-7},
		{"nanometres without a space", "step.width", `"500nm"`, func(c *Config) float64 { return c.Step.Width }, 5e-7},
		{"exponent", "step.width", `"5e-7 m"`, func(c *Config) float64 { return c.Step.Width }, 5e-7},
		{"speed", "step.speed", `"0.3 mm/s"`, func(c *Config) float64 { return c.Step.Speed }, 3e-4},
		{"speed in um/ms", "step.speed", `"0.3 um/ms"`, func(c *Config) float64 { return c.Step.Speed }, 3e-4},
		{"depth in joules", "step.depth", `"6.9e-32 J"`, func(c *Config) float64 { return c.Step.Depth }, 6.9e-32},
		{"depth as a temperature", "step.depth", `"5 nK"`, func(c *Config) float64 { return c.Step.Depth }, 5e-9 * kB},
		{"depth as a frequency", "step.depth", `"0.1 kHz"`, func(c *Config) float64 { return c.Step.Depth }, 100 * h},
		{"start inside", "step.start", `"-2 um"`, func(c *Config) float64 { return c.Step.Start }, -2e-6},
		{"time", "step.ramp", `"3 ms"`, func(c *Config) float64 { return c.Step.Ramp }, 3e-3},
		{"temperature", "cloud.temperature", `"120 pK"`, func(c *Config) float64 { return c.Cloud.Temperature }, 1.2e-10},
		{"frequency", "trap.radial_frequency", `"0.26 kHz"`, func(c *Config) float64 { return c.Trap.RadialFrequency }, 260},
		{"mass", "atom.mass", `"87 u"`, func(c *Config) float64 { return c.Atom.Mass }, 87 * u},
		{"scattering length", "atom.scattering_length", `"150 a0"`, func(c *Config) float64 { return c.Atom.ScatteringLength }, 150 * a0},
		{"whole number", "cloud.atoms", `6000`, func(c *Config) float64 { return c.Cloud.Atoms }, 6000},
		{"whole number with a point", "cloud.atoms", `6.0e3`, func(c *Config) float64 { return c.Cloud.Atoms }, 6000},
		{"automatic", "grid.length", `"0 um"`, func(c *Config) float64 { return c.Grid.Length }, 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			config := decode(t, set(t, sound, c.key, c.value))
			if got := c.field(config); math.Abs(got-c.want) > 4e-16*math.Abs(c.want) { // two roundings
				t.Errorf("%g, want %g", got, c.want)
			}
			if !config.Given(c.key) {
				t.Error("not given")
			}
		})
	}
}

// set gives a key of the text a value, in place of another if it has one.
func set(t *testing.T, text, key, value string) string {
	t.Helper()
	section, leaf, _ := strings.Cut(key, ".")
	var out []string
	in, done := "", false
	for _, line := range strings.Split(text, "\n") {
		if strings.HasPrefix(line, "[") {
			in = strings.Trim(line, "[]")
		}
		if in == section && strings.HasPrefix(line, leaf+" =") {
			continue
		}
		out = append(out, line)
		if line == "["+section+"]" {
			out, done = append(out, leaf+" = "+value), true
		}
	}
	text = strings.Join(out, "\n")
	if !done {
		text += "[" + section + "]\n" + leaf + " = " + value + "\n"
	}
	return text
}

func TestDefaults(t *testing.T) {
	c := decode(t, sound)
	for _, d := range []struct {
		name      string
		got, want float64
	}{
		{"wall_height", c.Trap.WallHeight, 6},
		{"temperature", c.Cloud.Temperature, 0},
		{"trajectories", float64(c.Ensemble.Trajectories), 1024},
		{"seed", float64(c.Ensemble.Seed), 1},
		{"noise_cutoff", c.Ensemble.NoiseCutoff, 0},
		{"points", float64(c.Grid.Points), 0},
		{"start", c.Step.Start, 0},
	} {
		if d.got != d.want {
			t.Errorf("%s = %g, want %g", d.name, d.got, d.want)
		}
	}
	if c.Cloud.Radial != lab.Frozen {
		t.Errorf("radial = %q", c.Cloud.Radial)
	}
	if c.Ensemble.Precision != gpe.Double {
		t.Errorf("precision = %q", c.Ensemble.Precision)
	}
	species, err := lab.SpeciesByName("Rb-87")
	if err != nil {
		t.Fatal(err)
	}
	atom, err := species.Atom()
	if err != nil {
		t.Fatal(err)
	}
	if c.Atom.Mass != atom.Mass || c.Atom.ScatteringLength != atom.ScatteringLength {
		t.Errorf("atom %+v, want %+v", c.Atom, atom)
	}
	if c.Given("trap.wall_height") || c.Given("ensemble") || !c.Given("trap") || !c.Given("trap.length") {
		t.Error("Given is wrong")
	}
	if !c.Sweep() {
		t.Error("not a sweep")
	}
}

func TestPrecisionReachesTheProblem(t *testing.T) {
	for _, want := range []gpe.Precision{gpe.Double, gpe.Single} {
		c := decode(t, set(t, sound, "ensemble.precision", `"`+string(want)+`"`))
		c.Record.Times = []float64{1e-3}
		s, err := c.Scenario()
		if err != nil {
			t.Fatal(err)
		}
		if s.Problem.Precision != want {
			t.Errorf("precision = %q, want %q", s.Problem.Precision, want)
		}
	}
}

// The largest seed keeps all its digits, which a float64 would not.
func TestSeed(t *testing.T) {
	c := decode(t, set(t, sound, "ensemble.seed", "9223372036854775807"))
	if c.Ensemble.Seed != math.MaxInt64 {
		t.Errorf("seed %d", c.Ensemble.Seed)
	}
}

func TestAtomByNumbers(t *testing.T) {
	c := decode(t, replace(t, sound, `species = "Rb-87"`, "mass = \"7 u\"\nscattering_length = \"50 a0\""))
	if want := 7 * lab.AtomicMass; math.Abs(c.Atom.Mass/want-1) > 1e-15 {
		t.Errorf("mass %g", c.Atom.Mass)
	}
	c = decode(t, replace(t, sound, `"Rb-87"`, "\"K-39\"\nscattering_length = \"50 a0\""))
	if want := 50 * lab.BohrRadius; math.Abs(c.Atom.ScatteringLength/want-1) > 1e-15 || c.Atom.Mass == 0 {
		t.Errorf("atom %+v", c.Atom)
	}
}

// The many ways in which TOML writes the same thing, and where it stands.
func TestLayouts(t *testing.T) {
	for _, c := range []struct {
		name, text string
		line       int // of step.depth
	}{
		{"plain", sound, 13},
		{"carriage returns", strings.ReplaceAll(sound, "\n", "\r\n"), 13},
		{"byte order mark", "\ufeff" + sound, 13},
		{"inline table", replace(t, sound, "[step]\ndepth = \"5 nK\"\nwidth = \"0.5 um\"\nspeed = \"0.3 mm/s\"\n", "") +
			"[grid]\n", 2},
		{"spaces", strings.ReplaceAll(sound, "[step]", "  [ step ]  # the step"), 13},
	} {
		t.Run(c.name, func(t *testing.T) {
			text := c.text
			if c.name == "inline table" {
				text = replace(t, text, "units", "step = {depth = \"5 nK\", width = \"0.5 um\", speed = \"0.3 mm/s\"}\nunits")
			}
			config := decode(t, text)
			if config.Step.Depth != 5*1e-9*lab.Boltzmann {
				t.Errorf("depth %g", config.Step.Depth)
			}
			if got := config.Line("step.depth"); got != c.line {
				t.Errorf("depth on line %d, want %d", got, c.line)
			}
			err := config.Fault("step.depth", "", "too deep", "less")
			if want := `: step.depth = "5 nK": too deep, less`; !strings.HasSuffix(err.Error(), want) {
				t.Errorf("fault %q, want an end %q", err, want)
			}
			if string(config.Text) != text {
				t.Error("the text is not as read")
			}
		})
	}
}

func TestFault(t *testing.T) {
	c := decode(t, sound)
	for _, f := range []struct {
		name, key, found, want string
	}{
		{"as written", "step.speed", "", `q.toml:15: step.speed = "0.3 mm/s": slower, please`},
		{"as found", "step.speed", "2 c", `q.toml:15: step.speed = 2 c: slower, please`},
		{"left out", "step.ramp", "nothing", `q.toml:12: step.ramp = nothing: slower, please`},
		{"no section", "grid.points", "", `q.toml: grid.points: slower, please`},
	} {
		t.Run(f.name, func(t *testing.T) {
			err := c.Fault(f.key, f.found, "slower", "please")
			var e *Error
			if !errors.As(err, &e) || err.Error() != f.want {
				t.Errorf("got %v, want %s", err, f.want)
			}
		})
	}
}

// A step is the same in [step] and, in condensate units, in [flow].
func TestStepFlow(t *testing.T) {
	const inFlow = "units = \"condensate\"\n[flow]\nkind = \"step\"\ndepth = 1\nwidth = 0.5\nspeed = 0.4\n"
	a := decode(t, inFlow)
	if a.Sweep() {
		t.Error("a flow alone is no sweep")
	}
	trap := "[trap]\nshape = \"box\"\nlength = 150\nwall_width = 1\n[cloud]\natoms = 6000\n"
	b := decode(t, "units = \"condensate\"\n"+trap+"[step]\ndepth = 1\nwidth = 0.5\nspeed = 0.4\n")
	if !b.Sweep() {
		t.Error("a sweep is not one")
	}
	if a.Step != b.Step || a.Step.Speed != 0.4 || a.Flow.Speed != 0.4 || b.Flow.Width != 0.5 || a.Flow.Depth != b.Flow.Depth {
		t.Errorf("%+v %+v, %+v %+v", a.Step, a.Flow, b.Step, b.Flow)
	}
	if c := decode(t, inFlow+trap); !c.Sweep() {
		t.Error("a step and a trap are not a sweep")
	}
	for _, text := range []string{
		inFlow + "[step]\ndepth = 1\n",
		replace(t, inFlow, "width = 0.5", "width = 0"),
		replace(t, inFlow, "speed = 0.4\n", ""),
		inFlow + "mach_up = 0.5\n",
	} {
		if _, err := Decode("q.toml", []byte(text)); err == nil {
			t.Errorf("accepted:\n%s", text)
		}
	}
	if w := decode(t, "units = \"condensate\"\n[flow]\nkind = \"waterfall\"\nmach_up = 0.6\n"); w.Flow.MachUp != 0.6 {
		t.Errorf("waterfall %+v", w.Flow)
	}
	sharp := decode(t, replace(t, ring, "width = 1", "width = 0")+"[cavity]\nlength = 12\n")
	if sharp.Cavity.Length != 12 || sharp.Flow.Width != 0 {
		t.Errorf("cavity %+v", sharp)
	}
}

// Every example in the table of keys is in the key's own range, and so is every
// default.
func TestTable(t *testing.T) {
	for _, k := range keys {
		for _, u := range []Units{Lab, Condensate} {
			if !k.exists(u) {
				continue
			}
			var tree map[string]any
			if err := toml.Unmarshal([]byte("x = "+k.sample(u)), &tree); err != nil {
				t.Errorf("%s, %s: example %q: %v", k.name, u, k.sample(u), err)
				continue
			}
			d := decoder{c: &Config{Units: u}, bad: map[string]bool{}}
			if problem, _ := d.read(k, tree["x"]); problem != "" {
				t.Errorf("%s, %s: example %q: %s", k.name, u, k.sample(u), problem)
			}
			if k.kind == text || k.kind == choice {
				continue
			}
			s, dim := k.span(u)
			if low, high := s.end(s.low, dim), s.end(s.high, dim); !(low < high) {
				t.Errorf("%s, %s: range %s", k.name, u, s)
			}
		}
		if section, _, ok := strings.Cut(k.name, "."); ok && !isSection(section) {
			t.Errorf("%s is in no section", k.name)
		}
		if k.fallback != "" {
			var tree map[string]any
			if err := toml.Unmarshal([]byte("x = "+k.fallback), &tree); err != nil {
				t.Fatal(err)
			}
			d := decoder{c: &Config{Units: Lab}, bad: map[string]bool{}}
			if problem, _ := d.read(k, tree["x"]); problem != "" {
				t.Errorf("%s: default %s: %s", k.name, k.fallback, problem)
			}
		}
	}
}

func TestReference(t *testing.T) {
	reference := Reference()
	head, _, _ := strings.Cut(reference, "\n## `[")
	parts := map[string]string{"": head}
	for _, p := range strings.Split(reference, "\n## `[")[1:] {
		name, body, _ := strings.Cut(p, "]`")
		parts[name] = body
	}
	for _, k := range keys {
		section, leaf, ok := strings.Cut(k.name, ".")
		if !ok {
			section, leaf = "", k.name
		}
		if !strings.Contains(parts[section], "\n| `"+leaf+"` | "+k.meaning) {
			t.Errorf("the reference lacks %s", k.name)
		}
	}
	for _, want := range []string{"| frequency | kHz, Hz |", "above 0 mm/s and at most 1 m/s", "| `6` |", "\"Cs-133\""} {
		if !strings.Contains(reference, want) {
			t.Errorf("the reference lacks %q", want)
		}
	}
}

// Every unit, against its size typed once more: SI prefixes and CODATA 2018.
func TestUnitSizes(t *testing.T) {
	const kB, h = 1.380649e-23, 6.62607015e-34
	want := map[dimension]map[string]float64{
		length:      {"m": 1, "mm": 1e-3, "um": 1e-6, "nm": 1e-9, "a0": 5.29177210903e-11},
		speed:       {"m/s": 1, "cm/s": 1e-2, "mm/s": 1e-3, "um/ms": 1e-3, "um/s": 1e-6},
		duration:    {"s": 1, "ms": 1e-3, "us": 1e-6},
		frequency:   {"kHz": 1e3, "Hz": 1},
		temperature: {"K": 1, "mK": 1e-3, "uK": 1e-6, "nK": 1e-9, "pK": 1e-12},
		energy:      {"J": 1, "mK": 1e-3 * kB, "uK": 1e-6 * kB, "nK": 1e-9 * kB, "pK": 1e-12 * kB, "kHz": 1e3 * h, "Hz": h},
		mass:        {"kg": 1, "u": 1.66053906660e-27},
	}
	for _, d := range dimensions {
		if len(units[d]) != len(want[d]) {
			t.Errorf("%s has %d units, want %d", d, len(units[d]), len(want[d]))
		}
		for name, size := range want[d] {
			got, err := parseQuantity("2 "+name, d)
			if err != nil || math.Abs(got/(2*size)-1) > 1e-15 {
				t.Errorf("2 %s = %g, want %g (%v)", name, got, 2*size, err)
			}
		}
	}
}

func TestFormatQuantity(t *testing.T) {
	for _, c := range []struct {
		si   float64
		d    dimension
		want string
	}{
		{1.5e-4, length, "150 um"},
		{3e-9, length, "3 nm"},
		{3e-12, length, "0.003 nm"},
		{3.45e-4, speed, "345 um/s"},
		{0.0918, duration, "91.8 ms"},
		{5e-9 * lab.Boltzmann, energy, "5 nK"},
		{260, frequency, "260 Hz"},
		{0, duration, "0 us"},
	} {
		if got := formatQuantity(c.si, c.d); got != c.want {
			t.Errorf("%g: %q, want %q", c.si, got, c.want)
		}
	}
}
