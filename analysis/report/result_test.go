package report

import (
	"bytes"
	"encoding/json"
	"math"
	"path/filepath"
	"reflect"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/band"
	"tailrace/analysis/correlation"
	"tailrace/analysis/horizon"
	"tailrace/analysis/moments"
	"tailrace/analysis/npz"
	"tailrace/analysis/temperature"
	"tailrace/gpe"
	"tailrace/gpe/flow"
	"tailrace/gpe/lab"
)

// A scale of round numbers: ξ is 1 µm, c₀ 1 mm/s, time 1 ms, m c₀²/k_B 10 nK.
var round = lab.Scale{Mass: 1e-25, LineDensity: 5e7, SoundSpeed: 1e-3, HealingLength: 1e-6, Time: 1e-3, Energy: 1e-31, Temperature: 1e-8, AtomsPerHealingLength: 50}

// newRun is a run with everything found.
func newRun(inLab bool) *Run {
	f := horizon.Flow{Upstream: flow.State{Density: 0.9, Velocity: 0.6, SoundSpeed: 0.95}, Downstream: flow.State{Density: 0.3, Velocity: 1.9, SoundSpeed: 0.55},
		Horizon: flow.Horizon{Position: -1.5, SurfaceGravity: 0.45, Temperature: 0.07}}
	measured := f
	measured.Upstream.Velocity = 0.606
	return &Run{
		Title: "a made-up run", Config: "./q.toml", Version: "9", Units: Units{Lab: inLab, Scale: round, PerXi: 50},
		Account: &horizon.Account{
			Time: 110, Trajectories: 2000, Measured: measured, Predicted: f, OmegaMax: 0.8, Scattered: 0.065, BentSlope: -3.5, SechHeight: 2e-4,
			Window: band.Window{UpFar: -20, UpNear: -4, DownNear: 4, DownFar: 60},
			Line:   &band.Line{Slope: -3.9, SlopeError: 0.1}, Null: &band.Null{Strength: 0.97, Significance: 8.5, PValue: 1.0 / 1001},
			Width:    &temperature.Width{Amplitude: 2.5e-4, Kappa: 0.4, Delay: 1.2, Offset: 1e-5, ChiSquare: 31, DegreesOfFreedom: 29, Covariance: mat.NewSymDense(4, []float64{4e-10, 0, 0, 0, 0, 1, 0, 0, 0, 0, 1, 0, 0, 0, 0, 1})},
			Readings: []temperature.Reading{{Method: "width", Value: 0.05, Low: 0.04, High: 0.06, Why: "because"}, {Method: "dispersive", Value: 0.07, Low: 0.066, High: 0.075, Trusted: true, Why: "it is so"}},
		},
		Problem:   &gpe.Problem{Grid: gpe.NewGrid(256, 128, -64), AtomsPerLength: 50},
		Conserved: gpe.Conserved{NormDrift: 1e-13, EnergyDrift: 2e-4},
		Checks:    []lab.Check{{Name: "noise modes", Value: 0.2, Limit: 0.15, Why: "far fewer modes than atoms are wanted"}, {Name: "vacuum", Value: 0.5, Limit: 0.9, OK: true}},
		Warnings:  []string{"there is something"},
		Engine:    Engine{Kernel: "portable", Workers: 2, Steps: 1000, StepTime: 10240 * time.Millisecond, Wall: 10 * time.Second, Trajectories: 2000, NoiseModes: "255 modes"},
	}
}

// decoded is result.json as a consumer has it: values by dotted key, with []
// for the items of a list.
func decoded(t *testing.T, r *Run) map[string]any {
	t.Helper()
	text, err := r.JSON()
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.HasSuffix(text, []byte("}\n")) {
		t.Errorf("it ends in %q", text[len(text)-3:])
	}
	var top any
	d := json.NewDecoder(bytes.NewReader(text))
	if err := d.Decode(&top); err != nil {
		t.Fatal(err)
	}
	flat := map[string]any{}
	var walk func(path string, v any)
	walk = func(path string, v any) {
		switch v := v.(type) {
		case map[string]any:
			for k, x := range v {
				walk(strings.TrimPrefix(path+"."+k, "."), x)
			}
		case []any:
			flat[path+"[]"] = len(v)
			for _, x := range v {
				walk(path+"[]", x)
			}
		default:
			flat[path] = v // of a list, its last item's
		}
	}
	walk("", top)
	return flat
}

// keys of result.json, each with its unit in lab units. They stay: other
// people's programs read them.
var keys = [][2]string{
	{"title", ""}, {"config", ""}, {"version", ""}, {"units", ""}, {"trajectories", ""}, {"time", "ms"},
	{"flow.upstream.density", "per_um"}, {"flow.upstream.velocity", "mm_per_s"}, {"flow.upstream.sound_speed", "mm_per_s"}, {"flow.upstream.mach", ""},
	{"flow.downstream.density", "per_um"}, {"flow.downstream.velocity", "mm_per_s"}, {"flow.downstream.sound_speed", "mm_per_s"}, {"flow.downstream.mach", ""},
	{"flow.horizon.position", "um"}, {"flow.horizon.surface_gravity", "per_s"}, {"flow.horizon.hawking_temperature", "nK"},
	{"measured_flow.upstream.density", "per_um"}, {"measured_flow.upstream.velocity", "mm_per_s"}, {"measured_flow.upstream.sound_speed", "mm_per_s"}, {"measured_flow.upstream.mach", ""},
	{"measured_flow.downstream.density", "per_um"}, {"measured_flow.downstream.velocity", "mm_per_s"}, {"measured_flow.downstream.sound_speed", "mm_per_s"}, {"measured_flow.downstream.mach", ""},
	{"measured_flow.horizon.position", "um"}, {"measured_flow.horizon.surface_gravity", "per_s"}, {"measured_flow.horizon.hawking_temperature", "nK"},
	{"omega_max", "per_s"}, {"temperature_low_frequency", "nK"},
	{"band.amplitude", ""}, {"band.amplitude_error", ""}, {"band.delay", "ms"}, {"band.offset", ""}, {"band.chi_square", ""}, {"band.degrees_of_freedom", ""},
	{"band.amplitude_predicted_without_dispersion", ""}, {"band.slope", ""}, {"band.slope_error", ""}, {"band.slope_predicted", ""}, {"band.slope_predicted_with_dispersion", ""},
	{"band.significance", ""}, {"band.p_value", ""}, {"band.strength_over_predicted", ""},
	{"band.window.upstream_far", "um"}, {"band.window.upstream_near", "um"}, {"band.window.downstream_near", "um"}, {"band.window.downstream_far", "um"},
	{"temperatures[]", ""}, {"temperatures[].method", ""}, {"temperatures[].value", "nK"}, {"temperatures[].low", "nK"}, {"temperatures[].high", "nK"}, {"temperatures[].trusted", ""}, {"temperatures[].why", ""},
	{"conservation.atoms_relative", ""}, {"conservation.energy_per_atom_over_kB", "nK"},
	{"checks[]", ""}, {"checks[].name", ""}, {"checks[].value", ""}, {"checks[].limit", ""}, {"checks[].ok", ""}, {"checks[].why", ""},
	{"warnings[]", ""},
}

func TestKeys(t *testing.T) {
	for _, inLab := range []bool{false, true} {
		found := decoded(t, newRun(inLab))
		for _, k := range keys {
			name := k[0]
			if inLab && k[1] != "" {
				name += "_" + k[1]
			}
			v, ok := found[name]
			if !ok {
				t.Errorf("lab %v: there is no %s", inLab, name)
			}
			if v == nil {
				t.Errorf("lab %v: %s is null", inLab, name)
			}
			delete(found, name)
		}
		for name := range found {
			t.Errorf("lab %v: %s is not a key", inLab, name)
		}
	}
}

// Values in condensate units stand as they are, in lab units they are turned:
// with the round scale, 1 ξ is 1 µm, c₀ 1 mm/s, 1 ms, 50 atoms per µm, 10 nK.
func TestValues(t *testing.T) {
	for _, c := range []struct {
		key, unit       string
		condensate, lab any
	}{
		{"units", "", "condensate", "lab"},
		{"trajectories", "", 2000.0, 2000.0},
		{"time", "ms", 110.0, 110.0},
		{"flow.upstream.density", "per_um", 0.9, 45.0},
		{"flow.downstream.velocity", "mm_per_s", 1.9, 1.9},
		{"measured_flow.upstream.velocity", "mm_per_s", 0.606, 0.606},
		{"flow.horizon.position", "um", -1.5, -1.5},
		{"flow.horizon.surface_gravity", "per_s", 0.45, 450.0},
		{"flow.horizon.hawking_temperature", "nK", 0.07, 0.7},
		{"omega_max", "per_s", 0.8, 800.0},
		{"band.amplitude", "", 2.5e-4, 2.5e-4},
		{"band.amplitude_error", "", 2e-5, 2e-5},
		{"band.slope", "", -3.9, -3.9},
		{"band.slope_predicted", "", -1.35 / 0.35, -1.35 / 0.35},
		{"band.window.downstream_far", "um", 60.0, 60.0},
		{"temperatures[]", "", 2, 2},
		{"temperatures[].method", "", "dispersive", "dispersive"},
		{"temperatures[].low", "nK", 0.066, 0.66},
		{"temperatures[].trusted", "", true, true},
		{"conservation.atoms_relative", "", 1e-13, 1e-13},
		{"conservation.energy_per_atom_over_kB", "nK", 2e-4, 2e-3},
	} {
		check := func(inLab bool, name string, want any) {
			got := decoded(t, newRun(inLab))[name]
			g, isNumber := got.(float64)
			w, wantsNumber := want.(float64)
			if isNumber && wantsNumber && math.Abs(g/w-1) < 1e-12 || reflect.DeepEqual(got, want) {
				return
			}
			t.Errorf("lab %v: %s is %v, want %v", inLab, name, got, want)
		}
		check(false, c.key, c.condensate)
		name := c.key
		if c.unit != "" {
			name += "_" + c.unit
		}
		check(true, name, c.lab)
	}
}

// What could not be found is null under the same keys, and JSON is whole.
func TestNotFound(t *testing.T) {
	r := newRun(true)
	nan := math.NaN()
	r.Account.Width, r.Account.Line, r.Account.Readings = nil, nil, nil
	r.Account.Null = &band.Null{Strength: nan, Significance: nan, PValue: 1}
	r.Account.Measured.Upstream.Velocity = nan
	r.Account.SechHeight = math.Inf(1)
	r.Checks = []lab.Check{{Name: "outflow returns", Value: nan, Limit: 1}}
	r.Warnings = nil
	found := decoded(t, r)
	for _, name := range []string{"band.amplitude", "band.amplitude_error", "band.delay_ms", "band.slope", "band.slope_error", "band.significance",
		"band.strength_over_predicted", "band.amplitude_predicted_without_dispersion", "measured_flow.upstream.velocity_mm_per_s", "measured_flow.upstream.mach", "checks[].value"} {
		if v, ok := found[name]; !ok || v != nil {
			t.Errorf("%s is %v (there: %v), want null", name, v, ok)
		}
	}
	for _, name := range []string{"temperatures[]", "warnings[]"} { // an empty list, not null
		if found[name] != 0 {
			t.Errorf("%s has %v items, want 0", name, found[name])
		}
	}
	r.Account.Line = &band.Line{Slope: -4} // a slope without an error
	if found := decoded(t, r); found["band.slope"] != -4.0 || found["band.slope_error"] != nil {
		t.Errorf("slope %v ± %v, want -4 and null", found["band.slope"], found["band.slope_error"])
	}
	r.Account.Readings = []temperature.Reading{{Method: "width", Value: 0.05, Low: nan, High: nan}}
	if found := decoded(t, r); found["temperatures[].low_nK"] != nil || math.Abs(found["temperatures[].value_nK"].(float64)-0.5) > 1e-12 {
		t.Errorf("temperature %v from %v, want 0.5 and null", found["temperatures[].value_nK"], found["temperatures[].low_nK"])
	}
}

// spaces is what tables are laid out with; the tests do not mind how many.
var spaces = regexp.MustCompile(" +")

func TestSummary(t *testing.T) {
	for _, c := range []struct {
		name  string
		inLab bool
		want  []string
	}{
		{"lab", true, []string{
			"a made-up run\n2000 trajectories, read 110 ms after the start\n",
			"density, µm⁻¹ 45 45", "velocity, mm/s 0.6 0.606 +1.0 %",
			"surface gravity κ 450 s⁻¹", "κ/2π, as a temperature 0.7 nK",
			"slope of the band -3.86, bent by dispersion to -3.5 -3.9 ± 0.1 (ratios 1.01, 1.11)",
			"0.97, 8.5 standard deviations above the null",
			"width 0.5 nK 0.4 to 0.6 nK 0.71 0.77 not trusted [2]", "emission at low frequency 0.65 nK",
			"dispersive 0.7 nK 0.66 to 0.75 nK 1.00 1.08 trusted [3]",
			"kept in every trajectory: atoms to 1e-13, energy to 0.0002 of m c₀² an atom",
			"engine: 20 ns a point and step, 200 trajectories a second on 2 workers, kernel portable",
			"noise: 255 modes",
			"[1] there is something\n[2] width: because\n[3] dispersive: it is so\n[4] noise modes: 0.2, at most 0.15: far fewer modes than atoms are wanted\n",
		}},
		{"condensate", false, []string{
			"read 110 ħ/mc₀² after the start", "density, n₀", "velocity, c₀", "surface gravity κ 0.45 mc₀²/ħ", "0.066 to 0.075 mc₀²/k_B",
		}},
	} {
		t.Run(c.name, func(t *testing.T) {
			var b strings.Builder
			if err := newRun(c.inLab).Summary(&b); err != nil {
				t.Fatal(err)
			}
			squeezed := spaces.ReplaceAllString(b.String(), " ")
			for _, want := range c.want {
				if !strings.Contains(squeezed, want) {
					t.Errorf("there is no %q in\n%s", want, b.String())
				}
			}
			for i, line := range strings.Split(b.String(), "\n") {
				if n := len([]rune(line)); n > 110 {
					t.Errorf("line %d has %d characters", i+1, n)
				}
			}
		})
	}
	t.Run("nothing found", func(t *testing.T) {
		r := newRun(true)
		r.Account.Width, r.Account.Line, r.Account.Readings = nil, nil, nil
		var b strings.Builder
		if err := r.Summary(&b); err != nil {
			t.Fatal(err)
		}
		if !strings.Contains(spaces.ReplaceAllString(b.String(), " "), "bent by dispersion to -3.5 not found") {
			t.Errorf("it does not say that no slope was found:\n%s", b.String())
		}
	})
}

func TestWrap(t *testing.T) {
	for _, c := range []struct {
		name, text, want string
		width            int
	}{
		{"short", "a b", "a b", 10},
		{"broken", "aaaa bbbb cc", "aaaa bbbb\n  cc", 9},
		{"a word too long", "aaaaaaaaaaaa b", "aaaaaaaaaaaa\n  b", 5},
		{"counts characters, not bytes", "µµµµ µµµµ", "µµµµ µµµµ", 9},
	} {
		if got := wrap(c.text, c.width, "  "); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}

// Arrays leave in SI units with a lab, in ξ and atoms per ξ without.
func TestArrays(t *testing.T) {
	for _, inLab := range []bool{false, true} {
		r := newRun(inLab)
		const points = 3
		r.Problem = &gpe.Problem{Grid: gpe.Grid{N: points, Dx: 0.5, Origin: -0.5}, AtomsPerLength: 50}
		g2, e := mat.NewDense(points, points, nil), mat.NewDense(points, points, nil)
		g2.Set(0, 2, -1e-3)
		e.Set(0, 2, 1e-4)
		g2.Set(1, 1, math.NaN())
		r.Account.Map = &correlation.Map{X: []float64{-2, -1.5, -1}, MeanDensity: []float64{0.9, 0.6, 0.3}, G2: g2, Error: e}
		r.Account.MeanField = &horizon.Profile{X: []float64{-3, -2.5, -2}}
		s := r.Problem.Commutator()
		shots := moments.Shots{Pixels: points, Data: []float32{1, 0.5, 0.25, 0.75, 0.5, 1}}
		folder := t.TempDir()
		if err := r.Units.WriteMap(folder, "map.npz", r.Account.Map); err != nil {
			t.Fatal(err)
		}
		if err := r.WriteShots(folder, shots); err != nil {
			t.Fatal(err)
		}
		length, density, duration := 1.0, 50.0, 1.0
		if inLab {
			length, density, duration = 1e-6, 5e7, 1e-3
		}
		read := func(file, name string) []float64 {
			f, err := npz.ReadFile(filepath.Join(folder, file))
			if err != nil {
				t.Fatal(err)
			}
			v, _, err := f.Float64(name)
			if err != nil {
				t.Fatal(err)
			}
			return v
		}
		for _, c := range []struct {
			file, name string
			want       []float64
		}{
			{"map.npz", "x", []float64{-2 * length, -1.5 * length, -length}},
			{"map.npz", "mean_density", []float64{0.9 * density, 0.6 * density, 0.3 * density}},
			{"map.npz", "g2_minus_1", []float64{0, 0, -1e-3, 0, math.NaN(), 0, 0, 0, 0}},
			{"map.npz", "g2_error", []float64{0, 0, 1e-4, 0, 0, 0, 0, 0, 0}},
			{"shots.npz", "density", []float64{(1 - s/2) * density, (0.5 - s/2) * density, (0.25 - s/2) * density, (0.75 - s/2) * density, (0.5 - s/2) * density, (1 - s/2) * density}},
			{"shots.npz", "pixel", []float64{0.5 * length}},
			{"shots.npz", "step_position", []float64{3 * length, 3 * length}},
			{"shots.npz", "time", []float64{110 * duration}},
		} {
			got := read(c.file, c.name)
			if !slices.EqualFunc(got, c.want, func(a, b float64) bool {
				return math.IsNaN(a) && math.IsNaN(b) || math.Abs(a-b) <= 1e-14*math.Abs(b)
			}) {
				t.Errorf("lab %v: %s in %s is %v, want %v", inLab, c.name, c.file, got, c.want)
			}
		}
	}
}
