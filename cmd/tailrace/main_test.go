package main

import (
	"bytes"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/rogpeppe/go-internal/testscript"
)

// The tests run the program itself: this binary, under the name tailrace, in a
// process of its own.
func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"tailrace": main})
}

func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:                 "testdata/script",
		RequireUniqueNames:  true,
		RequireExplicitExec: true,
		Setup: func(e *testscript.Env) error {
			e.Setenv("XDG_CACHE_HOME", filepath.Join(e.WorkDir, "cache"))
			for name, text := range map[string]string{"ring.toml": ring, "box.toml": box, "long.toml": long} {
				if err := os.WriteFile(filepath.Join(e.WorkDir, name), []byte(text), 0o666); err != nil {
					return err
				}
			}
			return nil
		},
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"onejson": oneJSON, "numpy": numpy, "appears": appears, "keys": keys, "shorten": shorten, "singly": singly,
		},
	})
}

// outcome is what a command left behind.
type outcome struct {
	status         int
	stdout, stderr string
}

// tailrace runs the program in folder.
func tailrace(t testing.TB, folder string, args ...string) outcome {
	t.Helper()
	c := exec.Command("tailrace", args...)
	var stdout, stderr bytes.Buffer
	c.Dir, c.Stdout, c.Stderr = folder, &stdout, &stderr
	c.Env = append(os.Environ(), "XDG_CACHE_HOME="+filepath.Join(folder, "cache"))
	err := c.Run()
	var exit *exec.ExitError
	if err != nil && !errors.As(err, &exit) {
		t.Fatal(err)
	}
	return outcome{c.ProcessState.ExitCode(), stdout.String(), stderr.String()}
}

// write puts a file into folder.
func write(t testing.TB, folder, name, text string) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(folder, name), []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

// replace returns text with its only old replaced by new.
func replace(t testing.TB, text, old, new string) string {
	t.Helper()
	if strings.Count(text, old) != 1 {
		t.Fatalf("%d times %q", strings.Count(text, old), old)
	}
	return strings.Replace(text, old, new, 1)
}

// appears waits until a file is there: a script's "appears file".
func appears(ts *testscript.TestScript, _ bool, args []string) {
	name := ts.MkAbs(args[0])
	for range 3000 { // half a minute, for a machine that is busy with something else
		if _, err := os.Stat(name); err == nil {
			return
		}
		time.Sleep(10 * time.Millisecond)
	}
	ts.Fatalf("%s did not appear", name)
}

// shorten takes the last hundred bytes off a file.
func shorten(ts *testscript.TestScript, _ bool, args []string) {
	name := ts.MkAbs(args[0])
	info, err := os.Stat(name)
	ts.Check(err)
	ts.Check(os.Truncate(name, info.Size()-100))
}

// numpy runs a Python program that is a file of the script, or skips it where
// there is no numpy.
func numpy(ts *testscript.TestScript, _ bool, args []string) {
	const python = "/usr/bin/python3"
	if err := exec.Command(python, "-c", "import numpy").Run(); err != nil {
		ts.Logf("%s with numpy is not there (Debian's python3-numpy): %v", python, err)
		return
	}
	ts.Check(ts.Exec(python, args...))
}

// Scenarios that run in about a second.
const (
	ring = `title = "a small ring"
units = "condensate"
[cloud]
atoms = 6400
[flow]
kind = "uniform"
velocity = 0.75
sound_speed_up = 1
sound_speed_down = 0.5
width = 1
[step]
ramp = 1
[grid]
points = 256
length = 128
[ensemble]
trajectories = 60
seed = 1
[record]
times = [40, 80]
`
	box = `title = "a small box"
units = "condensate"
[trap]
shape = "box"
length = 60
wall_width = 1
[cloud]
atoms = 3000
[step]
depth = 1
width = 0.5
speed = 0.5
[grid]
points = 256
length = 128
[ensemble]
trajectories = 16
[record]
times = [60]
`
)

// long is ring with enough trajectories to be stopped on the way.
var long = strings.Replace(ring, "trajectories = 60", "trajectories = 240", 1)
