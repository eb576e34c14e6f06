package main

import (
	"bufio"
	"bytes"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"time"
)

// stopAfter begins a run in folder and interrupts it when it has carried
// trajectories for a while. It returns the status and what the run said last.
func stopAfter(t *testing.T, folder string, while time.Duration, args ...string) (status int, last string) {
	t.Helper()
	c := exec.Command("tailrace", args...)
	c.Dir, c.Stdout = folder, io.Discard
	stderr, err := c.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(stderr)
	for lines.Scan() {
		last = lines.Text()
		if strings.Contains(last, "points over") { // the ensemble comes next
			time.AfterFunc(while, func() { c.Process.Signal(os.Interrupt) })
		}
	}
	c.Wait()
	return c.ProcessState.ExitCode(), last
}

// However often a run is stopped and taken up, and by how many workers, it ends
// with the moments and the map of a run that was not.
func TestStopAndResume(t *testing.T) {
	t.Parallel()
	folder := t.TempDir()
	write(t, folder, "q.toml", replace(t, ring, "trajectories = 60", "trajectories = 156"))
	finished, while := 0, 150*time.Millisecond
	for i, workers := range []string{"1", "2", "1"} {
		args := []string{"run", "--folder", "stopped", "--workers", workers, "./q.toml"}
		if i > 0 {
			args = append(args, "--resume")
		}
		status, last := stopAfter(t, folder, while, args...)
		for i == 0 && status == done && while > time.Millisecond { // a fast machine
			while /= 4
			if err := os.RemoveAll(filepath.Join(folder, "stopped")); err != nil {
				t.Fatal(err)
			}
			status, last = stopAfter(t, folder, while, args...)
		}
		if status == done {
			t.Logf("the run was complete before stop %d", i+1)
			break
		}
		says := regexp.MustCompile(`^tailrace: stopped after ([0-9]+) of 156 trajectories; --resume with the same config and folder goes on$`).FindStringSubmatch(last)
		if status != failed || says == nil {
			t.Fatalf("status %d, %s", status, last)
		}
		n, _ := strconv.Atoi(says[1])
		if n < finished {
			t.Errorf("after stop %d there are %d trajectories, there were %d", i+1, n, finished)
		}
		finished = n
	}
	if finished == 0 {
		t.Error("no stop came between the first trajectory and the last")
	}
	if _, err := os.Stat(filepath.Join(folder, "stopped", "result.json")); err != nil {
		if got := tailrace(t, folder, "run", "--folder", "stopped", "--resume", "./q.toml"); got.status != done {
			t.Fatal(got.stderr)
		}
	}
	if got := tailrace(t, folder, "run", "--folder", "straight", "./q.toml"); got.status != done {
		t.Fatal(got.stderr)
	}
	for _, name := range []string{"moments.npz", "map.npz", "shots.npz"} {
		a, err := os.ReadFile(filepath.Join(folder, "stopped", name))
		if err != nil {
			t.Fatal(err)
		}
		b, err := os.ReadFile(filepath.Join(folder, "straight", name))
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(a, b) {
			t.Errorf("%s of the run that was stopped differs", name)
		}
	}
}
