package main

import (
	"os"
	"path/filepath"
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

func TestBadInput(t *testing.T) {
	for _, c := range []struct {
		name, base, old, new string
		want                 string
	}{
		{"unknown key", sound, "speed =", "spead =", ""},
		{"no unit", sound, `"0.28 mm/s"`, `"0.28"`, ""},
		{"wrong dimension", sound, `"0.28 mm/s"`, `"0.28 um"`, ""},
		{"negative", sound, `"0.65 um"`, `"-0.65 um"`, ""},
		{"zero", sound, `"3.3 nK"`, `"0 nK"`, ""},
		{"NaN", sound, `atoms = 3000`, `atoms = nan`, ""},
		{"overflow", sound, `atoms = 3000`, `atoms = 1e999`, ""},
		{"empty file", sound, sound, ``, ""},
		{"binary file", sound, sound, "\x00\x01PK", ""},
		{"step faster than the grid can carry", sound, `"0.28 mm/s"`, `"28 mm/s"`, ""},
		{"ring faster than the grid can carry", ring, "velocity = 0.75\nsound_speed_up = 1\nsound_speed_down = 0.5", "velocity = 7.5\nsound_speed_up = 10\nsound_speed_down = 5", ""},
		{"step deeper than the grid can carry", sound, `"3.3 nK"`, `"330 nK"`, ""},
		{"cloud longer than the grid", sound, `"230 um"`, `"70 um"`, ""},
		{"more noise modes than atoms", sound, `atoms = 3000`, `atoms = 400`, ""},
		{"more noise modes than atoms on a ring", ring, `atoms = 6400`, `atoms = 200`, ""},
		{"time step beyond the limit", sound, `"0.1 ms"`, `"1 ms"`, ""},
		{"time step beyond the limit on a ring", ring, "length = 128", "length = 128\ntime_step = 0.5", ""},
		{"odd number of points", sound, `points = 512`, `points = 511`, ""},
		{"number of points that the transform does not know", ring, `points = 256`, `points = 448`, ""},
		{"step narrower than the grid", sound, `"0.65 um"`, `"0.1 um"`, ""},
		{"recorded after the step has left the cloud", sound, `"100 ms"`, `"400 ms"`, ""},
		{"recorded too early for a band", box, `times = [60]`, `times = [20]`, ""},
		{"recorded too early for a band on a ring", ring, `times = [40, 80]`, `times = [30]`, ""},
		{"no times", sound, "[record]\ntimes = [\"100 ms\"]\n", "", ""},
		{"no atoms on a ring", ring, "[cloud]\natoms = 6400\n", "", ""},
		{"step too shallow", sound, `"3.3 nK"`, `"0.05 nK"`, ""},
		{"step supersonic", sound, `"0.28 mm/s"`, `"2 mm/s"`, ""},
		{"step slow", sound, `"0.28 mm/s"`, `"0.0001 mm/s"`, ""},
		{"step supersonic in condensate units", box, "speed = 0.5", "speed = 3", ""},
		{"flow subsonic on both sides", ring, "velocity = 0.75", "velocity = 0.4", ""},
		{"flow supersonic on both sides", ring, "velocity = 0.75", "velocity = 1.5", ""},
		{"start off the grid", sound, `speed = "0.28 mm/s"`, "speed = \"0.28 mm/s\"\nstart = \"10 mm\"", ""},
		{"start left of the cloud", sound, `speed = "0.28 mm/s"`, "speed = \"0.28 mm/s\"\nstart = \"-79 um\"", ""},
		{"a flow that is not run", sound, sound, "units = \"condensate\"\n[flow]\nkind = \"waterfall\"\nmach_up = 0.6\n", ""},
		{"a step's flow without a trap", sound, sound, "units = \"condensate\"\n[flow]\nkind = \"step\"\ndepth = 1\nwidth = 0.5\nspeed = 0.5\n", ""},
		{"too hot", sound, `"0.1 nK"`, `"1 mK"`, ""},
		{"too hot on a ring", ring, `atoms = 6400`, "atoms = 6400\ntemperature = 1000", ""},
		{"one trajectory", ring, "trajectories = 60", "trajectories = 1", ""},
		{"four trajectories", ring, "trajectories = 60", "trajectories = 4", ""},
		{"noise cutoff tiny", ring, "seed = 3", "seed = 3\nnoise_cutoff = 0.001", ""},
		{"deep fall", box, "depth = 1", "depth = 8", ""},
		{"absurdly dense", sound, `atoms = 3000`, `atoms = 1e9`, ""},
		{"huge", ring, `points = 256`, `points = 1048576`, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			folder := t.TempDir()
			write(t, folder, "q.toml", replace(t, c.base, c.old, c.new))
			got := tailrace(t, folder, "run", "./q.toml")
			t.Logf("%d %q\n%s", got.status, got.stdout, got.stderr)
			if _, err := os.Stat(filepath.Join(folder, "q-run")); err == nil {
				t.Log("FOLDER LEFT")
			}
		})
	}
}
