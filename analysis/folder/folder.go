// Package folder is a run's folder: which files stand in it, when it may be
// written to, and how a run that was stopped is taken up again.
//
//	run.json      the config as read, version, seed, counts, timing
//	moments.npz   sums that add (package moments)
//	map.npz       x, mean_density, g2_minus_1, g2_error
//	shots.npz     the density of every trajectory at the analysed time
//	result.json   what the run says
//	exact-map.npz the map without sampling error, if it was asked for beside
//	figures/      PNG and SVG
//	partial.npz   what a run that has not ended has got so far
//
// A file appears under its name only when it is whole.
package folder

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"tailrace/analysis/npz/whole"
)

// Folder is the folder of one run.
type Folder struct{ Path string }

// UseError says why a folder cannot be used and what to do.
type UseError struct {
	Path, Why, Hint string
	cause           error
}

func (e *UseError) Error() string { return fmt.Sprintf("%s: %s; %s", e.Path, e.Why, e.Hint) }

// Unwrap returns the file system's error, if there is one.
func (e *UseError) Unwrap() error { return e.cause }

// Create makes the folder for a new run. A folder that holds a run, or
// anything else, is refused: nothing is ever overwritten.
func Create(path string) (*Folder, error) {
	f := &Folder{path}
	entries, err := os.ReadDir(path)
	switch {
	case err == nil && f.has("partial.npz"):
		return nil, &UseError{path, "it holds a run that was stopped", "go on with it by --resume, or choose another --folder", nil}
	case err == nil && f.has("run.json"):
		return nil, &UseError{path, "it holds a run already", "choose another --folder, or move that one away", nil}
	case err == nil && len(entries) > 0:
		return nil, &UseError{path, "there are other files in it", "choose an empty or a new --folder", nil}
	case err != nil && !errors.Is(err, fs.ErrNotExist):
		return nil, &UseError{path, "it cannot be used: " + err.Error(), "choose another --folder", err}
	}
	if err := os.MkdirAll(filepath.Join(path, "figures"), 0o755); err != nil {
		return nil, &UseError{path, "it cannot be made: " + err.Error(), "choose a --folder where you may write", err}
	}
	return f, nil
}

// Resume opens the folder of a run that was stopped.
func Resume(path string) (*Folder, error) {
	f := &Folder{path}
	if _, err := os.Stat(path); err != nil {
		return nil, &UseError{path, "there is nothing to go on with: " + err.Error(), "leave --resume out to start a new run", err}
	}
	if !f.has("partial.npz") {
		if f.has("result.json") {
			return nil, &UseError{path, "the run in it is complete", "read its result.json, or choose another --folder", nil}
		}
		return nil, &UseError{path, "it holds no stopped run", "leave --resume out and choose another --folder", nil}
	}
	return f, nil
}

// File returns the path of a file of the run.
func (f *Folder) File(name string) string { return filepath.Join(f.Path, name) }

func (f *Folder) has(name string) bool {
	_, err := os.Stat(f.File(name))
	return err == nil
}

// Write writes a file, whole or not at all.
func (f *Folder) Write(name string, data []byte) error {
	return whole.WriteFile(f.File(name), func(w io.Writer) error {
		_, err := w.Write(data)
		return err
	})
}

// WriteJSON writes v indented.
func (f *Folder) WriteJSON(name string, v any) error {
	data, err := json.MarshalIndent(v, "", "  ")
	if err != nil {
		return err
	}
	return f.Write(name, append(data, '\n'))
}

// Manifest is run.json.
type Manifest struct {
	Version      string    `json:"version"`
	Source       string    `json:"config_source"`
	Config       string    `json:"config"`
	Seed         uint64    `json:"seed"`
	Exact        bool      `json:"exact,omitempty"` // the map without sampling error
	Trajectories int       `json:"trajectories"`
	Finished     int       `json:"finished"`
	Points       int       `json:"grid_points"`
	Steps        int       `json:"time_steps"`
	Times        []float64 `json:"times_hbar_per_mc2"`
	Workers      int       `json:"workers,omitempty"`
	Kernel       string    `json:"kernel,omitempty"`
	Precision    string    `json:"precision,omitempty"` // of the time steps
	Seconds      float64   `json:"wall_seconds,omitempty"`
	NormDrift    float64   `json:"atoms_relative_drift"`
	EnergyDrift  float64   `json:"energy_drift_per_atom_mc2"`
}

// ReadManifest reads run.json.
func (f *Folder) ReadManifest() (*Manifest, error) {
	data, err := os.ReadFile(f.File("run.json"))
	if err != nil {
		return nil, err
	}
	m := new(Manifest)
	if err := json.Unmarshal(data, m); err != nil {
		return nil, &UseError{f.File("run.json"), "it is damaged: " + err.Error(), "start the run anew in another --folder", err}
	}
	return m, nil
}

// Remove deletes a file of the run if it is there.
func (f *Folder) Remove(name string) error {
	err := os.Remove(f.File(name))
	if errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	return err
}

// Abandon takes away what Create and a failed run left, so that the folder does
// not stand in the way of the next try. What else is in it stays.
func (f *Folder) Abandon() error {
	if err := f.Remove("run.json"); err != nil {
		return err
	}
	// Both fail where something is left in them, which is then no run's.
	os.Remove(f.File("figures"))
	os.Remove(f.Path)
	return nil
}
