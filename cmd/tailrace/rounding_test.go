package main

import (
	"errors"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"

	"tailrace/analysis/horizon"
	"tailrace/configs"
)

// inSingle is a scenario with time steps in single precision.
func inSingle(t testing.TB, text string) string {
	return replace(t, text, "[ensemble]\n", "[ensemble]\nprecision = \"single\"\n")
}

// singly writes the scenario of one file in single precision into another: a
// script's "singly from to".
func singly(ts *testscript.TestScript, _ bool, args []string) {
	text := strings.Replace(ts.ReadFile(args[0]), "[ensemble]\n", "[ensemble]\nprecision = \"single\"\n", 1)
	ts.Check(os.WriteFile(ts.MkAbs(args[1]), []byte(text), 0o666))
}

// A trial that moves the map by a fifth of its error or more is a fault of the
// config.
func TestPrecisionIsJudged(t *testing.T) {
	folder := t.TempDir()
	write(t, folder, "q.toml", inSingle(t, ring))
	config, err := configs.Load(filepath.Join(folder, "q.toml"))
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		shift   float64
		refused bool
	}{{0, false}, {0.2, false}, {0.21, true}, {7, true}} {
		r := running{config: config, rounding: &horizon.Rounding{Trial: 32, Trajectories: 60, Shift: c.shift}}
		err := r.judgePrecision()
		var fault *configs.Error
		if errors.As(err, &fault) != c.refused {
			t.Fatalf("shift %g: error %v", c.shift, err)
		}
		if c.refused && (fault.Key != "ensemble.precision" || fault.Found != `"single"` || status(err) != inputFault) {
			t.Errorf("shift %g: %v", c.shift, err)
		}
	}
}

// In a cloud a million times as dense quantum noise is a thousand times smaller
// beside the field, whose rounding is not: single precision is refused before
// anything is written.
func TestPrecisionIsRefused(t *testing.T) {
	t.Parallel()
	folder := t.TempDir()
	text := replace(t, inSingle(t, ring), "trajectories = 60", "trajectories = 2048")
	text = replace(t, text, "length = 128", "length = 128\ntime_step = 0.05")
	write(t, folder, "q.toml", replace(t, text, "atoms = 6400", "atoms = 6.4e9"))
	got := tailrace(t, folder, "run", "./q.toml")
	says := regexp.MustCompile(`q\.toml:[0-9]+: ensemble\.precision = "single": it moves the map by [0-9.]+ of the statistical error of 2048 trajectories, .* at most 0\.2 is allowed, use precision = "double", or fewer trajectories\n$`)
	if got.status != inputFault || !says.MatchString(got.stderr) || got.stdout != "" {
		t.Errorf("status %d: %s", got.status, got.stderr)
	}
	if _, err := os.Stat(filepath.Join(folder, "q-run")); err == nil {
		t.Error("a folder is left behind")
	}
}
