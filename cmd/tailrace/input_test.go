package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// sound is a sweep in lab units without fault.
const sound = `title = "t"
units = "lab"
[atom]
species = "Rb-87"
[trap]
radial_frequency = "170 Hz"
shape = "box"
length = "80 um"
wall_width = "1.3 um"
[cloud]
atoms = 3000
temperature = "0.1 nK"
[step]
depth = "3.3 nK"
width = "0.65 um"
speed = "0.28 mm/s"
[grid]
points = 512
length = "230 um"
time_step = "0.1 ms"
[ensemble]
trajectories = 16
[record]
times = ["100 ms"]
`

// Faults of a config: `tailrace run ./q.toml` says exactly this, ends with
// status 2, prints nothing on stdout and leaves no folder behind.
func TestBadConfig(t *testing.T) {
	const fastRing = "velocity = 7.5\nsound_speed_up = 10\nsound_speed_down = 5"
	for _, c := range []struct {
		name, base, old, new string
		want                 string
	}{
		{"unknown key", sound, "speed =", "spead =",
			`./q.toml:13: step.speed: missing: a sweep needs it, for example speed = "0.3 mm/s"
./q.toml:16: step.spead = "0.28 mm/s": unknown key, allowed in [step] are depth, width, speed, start, ramp, perhaps speed is meant`},
		{"missing unit", sound, `"0.28 mm/s"`, `"0.28"`,
			`./q.toml:16: step.speed = "0.28": a speed needs a unit, for example "0.3 mm/s"`},
		{"wrong dimension", sound, `"0.28 mm/s"`, `"0.28 um"`,
			`./q.toml:16: step.speed = "0.28 um": a speed is expected, and um is a unit of length, for example "0.3 mm/s"`},
		{"negative", sound, `"0.65 um"`, `"-0.65 um"`,
			`./q.toml:15: step.width = "-0.65 um": it must be above 0 um and at most 1 mm, for example "0.5 um"`},
		{"zero", sound, `"3.3 nK"`, `"0 nK"`,
			`./q.toml:14: step.depth = "0 nK": it must be above 0 nK and at most 1 mK, for example "5 nK"`},
		{"NaN", sound, `atoms = 3000`, `atoms = nan`,
			`./q.toml:11: cloud.atoms = nan: it must be at least 1 and at most 1e10, for example 5500`},
		{"overflow", sound, `atoms = 3000`, `atoms = 1e999`,
			`./q.toml:11: cloud.atoms = 1e999: the number is too large for any key`},
		{"empty file", sound, sound, ``,
			`./q.toml: the file says nothing, start from one of the examples: basin, harbour, lock, quay, sluice, uniform, weir`},
		{"binary file", sound, sound, "\x00\x01PK",
			`./q.toml: this is not text, a scenario file is TOML in UTF-8`},
		{"step faster than the grid can carry", sound, `"0.28 mm/s"`, `"28 mm/s"`,
			`./q.toml:16: step.speed = "28 mm/s": with this depth the fluid reaches 2.91 cm/s, and the grid carries at most 2.56 mm/s, use more grid.points, or a slower or shallower step`},
		{"step deeper than the grid can carry", sound, `"3.3 nK"`, `"330 nK"`,
			`./q.toml:16: step.speed = "0.28 mm/s": with this depth the fluid reaches 8.27 mm/s, and the grid carries at most 2.56 mm/s, use more grid.points, or a slower or shallower step`},
		{"ring faster than the grid can carry", ring, "velocity = 0.75\nsound_speed_up = 1\nsound_speed_down = 0.5", fastRing,
			`./q.toml:7: flow.velocity = 7.5: the grid carries a fluid of at most 1.571, use more grid.points or a shorter ring`},
		{"cloud longer than the grid", sound, `"230 um"`, `"70 um"`,
			`./q.toml:19: grid.length = "70 um": at least 95.3 um is needed for the cloud and its walls, and more for what the step lets out, use a longer grid or leave its length out`},
		{"more noise modes than atoms", sound, `atoms = 3000`, `atoms = 400`,
			`./q.toml:18: grid.points = 512: it makes 512 noise modes for 400 atoms, and the truncated Wigner method needs far more atoms than modes, use fewer grid points, a shorter grid, a lower ensemble.noise_cutoff or more atoms`},
		{"more noise modes than atoms on a ring", ring, `atoms = 6400`, `atoms = 200`,
			`./q.toml:14: grid.points = 256: it makes 256 noise modes for 200 atoms, and the truncated Wigner method needs far more atoms than modes, use fewer grid points, a shorter grid, a lower ensemble.noise_cutoff or more atoms`},
		{"time step beyond the limit", sound, `"0.1 ms"`, `"1 ms"`,
			`./q.toml:20: grid.time_step = "1 ms": at most 167 us is stable on this grid, beyond it waves of the grid grow out of nothing: use a shorter step, or fewer grid points`},
		{"time step beyond the limit on a ring", ring, "length = 128", "length = 128\ntime_step = 0.5",
			`./q.toml:16: grid.time_step = 0.5: at most 0.1188 is stable on this grid, beyond it waves of the grid grow out of nothing: use a shorter step, or fewer grid points`},
		{"odd number of points", sound, `points = 512`, `points = 511`,
			`./q.toml:18: grid.points = 511: it must be 2^a, 3·2^a or 5·2^a, the nearest are 384 and 512`},
		{"even number of points that no transform has", ring, `points = 256`, `points = 448`,
			`./q.toml:14: grid.points = 448: it must be 2^a, 3·2^a or 5·2^a, the nearest are 384 and 512`},
		{"step narrower than the grid", sound, `"0.65 um"`, `"0.1 um"`,
			`./q.toml:18: grid.points = 512: the step's width is 0.22 of a grid spacing and would not be seen, use at least 1280 points`},
		{"recorded after the step has left the cloud", sound, `"100 ms"`, `"400 ms"`,
			`./q.toml:24: record.times = ["400 ms"]: at most 286 ms is allowed, when the step reaches the far end of the cloud, record earlier, sweep more slowly or use a longer cloud`},
		{"no recorded times", sound, "[record]\ntimes = [\"100 ms\"]\n", "",
			`./q.toml: record.times = nothing: at least one time, for example times = ["60 ms", "110 ms"]`},
		{"no atoms on a ring", ring, "[cloud]\natoms = 6400\n", "",
			`./q.toml: cloud.atoms: missing: it sets the size of the quantum noise, for example atoms = 5500 in a section [cloud]`},
		{"supersonic step", shallow, "speed = 0.5", "speed = 1.2",
			`./q.toml:12: step.speed = 1.2: there is no horizon at this speed, depth and width, step too fast: speed 1.2 is not below the sound speed 1 of the cloud at rest; lower the speed`},
		{"step too wide for a horizon", wide, "speed = 0.5", "speed = 0.5",
			`./q.toml:12: step.speed = 0.5: there is no horizon at this speed, depth and width, no change from subsonic to supersonic: width 900 leaves the plateau within 0.0002 of the speed of sound; narrow the step`},
		{"flow subsonic on both sides", ring, "velocity = 0.75", "velocity = 0.4",
			`./q.toml:7: flow.velocity = 0.4: a horizon needs sound_speed_down < velocity < sound_speed_up, change one of the three`},
		{"flow supersonic on both sides", ring, "velocity = 0.75", "velocity = 1.5",
			`./q.toml:7: flow.velocity = 1.5: a horizon needs sound_speed_down < velocity < sound_speed_up, change one of the three`},
		{"step that starts off the grid", sound, `speed = "0.28 mm/s"`, "speed = \"0.28 mm/s\"\nstart = \"10 mm\"",
			`./q.toml:17: step.start = "10 mm": it must be a place on the grid, start the step at the edge of the cloud, start = 0`},
		{"step that starts at the far end", sound, `speed = "0.28 mm/s"`, "speed = \"0.28 mm/s\"\nstart = \"-79 um\"",
			`./q.toml:25: record.times = ["100 ms"]: at most 3.57 ms is allowed, when the step reaches the far end of the cloud, record earlier, sweep more slowly or use a longer cloud`},
		{"a waterfall", sound, sound, "units = \"condensate\"\n[flow]\nkind = \"waterfall\"\nmach_up = 0.6\n",
			`./q.toml:3: flow.kind = "waterfall": there is no ensemble of this flow, give kind = "uniform", or a [trap], a [cloud] and a [step] that is swept through it`},
		{"a step's flow without a trap", sound, sound, "units = \"condensate\"\n[flow]\nkind = \"step\"\ndepth = 1\nwidth = 0.5\nspeed = 0.5\n",
			`./q.toml:3: flow.kind = "step": there is no ensemble of this flow, give kind = "uniform", or a [trap], a [cloud] and a [step] that is swept through it`},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			folder := t.TempDir()
			write(t, folder, "q.toml", replace(t, c.base, c.old, c.new))
			got := tailrace(t, folder, "run", "./q.toml")
			expect(t, got, inputFault, c.want)
			if _, err := os.Stat(filepath.Join(folder, "q-run")); err == nil {
				t.Error("a folder is left behind")
			}
		})
	}
}

var (
	shallow = strings.Replace(strings.Replace(box, "depth = 1", "depth = 0.001", 1), "times = [60]", "times = [30]", 1)
	wide    = strings.Replace(box, "width = 0.5", "width = 900", 1)
)

// expect demands a status and an error message, less the lines that tell how
// far a run has come.
func expect(t *testing.T, got outcome, status int, want string) {
	t.Helper()
	if got.status != status {
		t.Errorf("status %d, want %d", got.status, status)
	}
	if got.stdout != "" {
		t.Errorf("on stdout: %q", got.stdout)
	}
	message := got.stderr
	if i := strings.Index(message, "tailrace: "); i >= 0 {
		message = message[i+len("tailrace: "):]
	}
	message = strings.TrimSuffix(message, "\n")
	if message != want {
		t.Errorf("message\n%s\nwant\n%s", message, want)
	}
}

// Faults of the command line and of the folder.
func TestBadCommand(t *testing.T) {
	for _, c := range []struct {
		name   string
		args   string // apart at spaces
		status int
		want   string
	}{
		{"unknown command", "fly", inputFault, `there is no command "fly"; tailrace --help lists what there is`},
		{"unknown flag", "--fly", inputFault, `unknown flag: --fly; tailrace --help lists what there is`},
		{"no config", "run", inputFault, `one config is expected, 0 were given: the name of an example or the path of a file`},
		{"two configs", "run quay basin", inputFault, `one config is expected, 2 were given: the name of an example or the path of a file`},
		{"unknown flag of run", "run --worker 2 quay", inputFault, `unknown flag: --worker; tailrace run --help lists what there is`},
		{"a word for a number", "run --workers two quay", inputFault, `invalid argument "two" for "--workers" flag: strconv.ParseInt: parsing "two": invalid syntax; tailrace run --help lists what there is`},
		{"no workers", "run --workers 0 quay", inputFault, `--workers = 0: at least one is needed`},
		{"negative workers", "run --workers -3 quay", inputFault, `--workers = -3: at least one is needed`},
		{"unknown example", "run quai", inputFault, `quai: there is no example of this name, perhaps quay is meant; the examples are basin, harbour, lock, quay, sluice, uniform, weir; a file is given by its path, such as ./scenario.toml`},
		{"unknown example to check", "check atlantis", inputFault, `atlantis: there is no example of this name, the examples are basin, harbour, lock, quay, sluice, uniform, weir; a file is given by its path, such as ./scenario.toml`},
		{"unknown example to print", "examples atlantis", inputFault, `atlantis: there is no example of this name, the examples are basin, harbour, lock, quay, sluice, uniform, weir; a file is given by its path, such as ./scenario.toml`},
		{"two examples", "examples quay basin", inputFault, `at most one example is expected, 2 were given`},
		{"no such file", "run ./none.toml", inputFault, `./none.toml: there is no such file, the examples, which need no file, are basin, harbour, lock, quay, sluice, uniform, weir`},
		{"a folder", "run ./full", inputFault, `./full: this is a folder, give the scenario file in it`},
		{"check of nothing", "check", inputFault, `one config is expected, 0 were given: the name of an example or the path of a file`},
		{"a run is there", "run --folder ran ./q.toml", inputFault, `ran: it holds a run already; choose another --folder, or move that one away`},
		{"a stopped run is there", "run --folder stopped ./q.toml", inputFault, `stopped: it holds a run that was stopped; go on with it by --resume, or choose another --folder`},
		{"other files are there", "run --folder full ./q.toml", inputFault, `full: there are other files in it; choose an empty or a new --folder`},
		{"a file for a folder", "run --folder q.toml ./q.toml", inputFault, `q.toml: it cannot be used: open q.toml: not a directory; choose another --folder`},
		{"a folder in a file", "run --folder q.toml/run ./q.toml", inputFault, `q.toml/run: it cannot be used: open q.toml/run: not a directory; choose another --folder`},
		{"resume of nothing", "run --resume ./q.toml", inputFault, `q-run: there is nothing to go on with: stat q-run: no such file or directory; leave --resume out to start a new run`},
		{"resume of a complete run", "run --resume --folder ran ./q.toml", inputFault, `ran: the run in it is complete; read its result.json, or choose another --folder`},
		{"resume of other files", "run --resume --folder full ./q.toml", inputFault, `full: it holds no stopped run; leave --resume out and choose another --folder`},
		{"resume with another config", "run --resume --folder stopped ./q.toml", inputFault, `stopped: the run in it is of another config; give the config it began with, which its run.json holds, or choose another --folder`},
		{"resume with a damaged run.json", "run --resume --folder torn ./q.toml", inputFault, `torn/run.json: it is damaged: unexpected end of JSON input; start the run anew in another --folder`},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			folder := t.TempDir()
			write(t, folder, "q.toml", ring)
			for name, files := range map[string]map[string]string{
				"ran":     {"run.json": "{}", "result.json": "{}"},
				"stopped": {"run.json": `{"config": "title = \"another\"\n"}`, "partial.npz": ""},
				"torn":    {"run.json": `{"config": `, "partial.npz": ""},
				"full":    {"notes.txt": ""},
			} {
				if err := os.Mkdir(filepath.Join(folder, name), 0o777); err != nil {
					t.Fatal(err)
				}
				for file, text := range files {
					write(t, filepath.Join(folder, name), file, text)
				}
			}
			expect(t, tailrace(t, folder, strings.Fields(c.args)...), c.status, c.want)
		})
	}
}

// What would end in nothing is refused before any time is spent, and leaves no
// folder that stands in the way of the next try.
func TestHopelessRuns(t *testing.T) {
	for _, c := range []struct {
		name, base, old, new string
		want                 string
	}{
		{"too hot", ring, `atoms = 6400`, "atoms = 6400\ntemperature = 1000",
			`./q.toml:5: cloud.temperature = 1000: a cloud that is mostly condensate, the fluctuations hold more atoms than the cloud: it is too hot, too thin or the grid too fine`},
		{"one trajectory", ring, "trajectories = 60", "trajectories = 1",
			`./q.toml:17: ensemble.trajectories = 1: at least 2 for a correlation, and a few thousand to see the band`},
		{"recorded before there is a band", ring, "[40, 80]", "[30]",
			`./q.toml:20: record.times = [30]: a last time at which there is a band to read, the upstream window cannot be used: from -4.225 to -4 it has 1 points, at least 8 are needed; record later, so that the band is longer`},
		{"hardly any noise", ring, "trajectories = 60", "trajectories = 60\nnoise_cutoff = 0.05",
			`./q.toml:18: ensemble.noise_cutoff = 0.05: at least 0.79, it leaves 3 waves, too few for any band`},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			folder := t.TempDir()
			write(t, folder, "q.toml", replace(t, c.base, c.old, c.new))
			expect(t, tailrace(t, folder, "run", "./q.toml"), inputFault, c.want)
			if _, err := os.Stat(filepath.Join(folder, "q-run")); err == nil {
				t.Error("there is a folder")
			}
		})
	}
}

// The superuser may write anywhere, so this one needs an ordinary user.
func TestUnwritableFolder(t *testing.T) {
	folder := t.TempDir()
	write(t, folder, "q.toml", ring)
	locked := filepath.Join(folder, "locked")
	if err := os.Mkdir(locked, 0o555); err != nil {
		t.Fatal(err)
	}
	if f, err := os.Create(filepath.Join(locked, "probe")); err == nil {
		f.Close()
		t.Skip("permissions do not bind this user")
	}
	expect(t, tailrace(t, folder, "run", "--folder", "locked/run", "./q.toml"), inputFault,
		"locked/run: it cannot be made: mkdir locked/run: permission denied; choose a --folder where you may write")
}
