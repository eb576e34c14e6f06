package folder

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
)

// lay makes a folder that holds the named files.
func lay(t *testing.T, files ...string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "run")
	if err := os.Mkdir(path, 0o755); err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		if err := os.WriteFile(filepath.Join(path, f), []byte("{}"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return path
}

func TestCreate(t *testing.T) {
	for _, c := range []struct {
		name string
		path func(t *testing.T) string
	}{
		{"new", func(t *testing.T) string { return filepath.Join(t.TempDir(), "run") }},
		{"new in new folders", func(t *testing.T) string { return filepath.Join(t.TempDir(), "a", "b", "run") }},
		{"empty", func(t *testing.T) string { return lay(t) }},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := c.path(t)
			f, err := Create(path)
			if err != nil {
				t.Fatal(err)
			}
			if f.Path != path || f.File("run.json") != filepath.Join(path, "run.json") {
				t.Errorf("folder %q", f.Path)
			}
			if info, err := os.Stat(filepath.Join(path, "figures")); err != nil || !info.IsDir() {
				t.Errorf("no folder for figures: %v", err)
			}
		})
	}
}

// In the messages, PATH stands for the folder's path.
func TestRefused(t *testing.T) {
	with := func(files ...string) func(*testing.T) string {
		return func(t *testing.T) string { return lay(t, files...) }
	}
	missing := func(t *testing.T) string { return filepath.Join(t.TempDir(), "run") }
	file := func(t *testing.T) string { return filepath.Join(lay(t, "taken"), "taken") }
	below := func(t *testing.T) string { return filepath.Join(file(t), "run") }
	for _, c := range []struct {
		name  string
		open  func(string) (*Folder, error)
		path  func(*testing.T) string
		want  string
		cause error
	}{
		{"create over a run", Create, with("run.json", "result.json"),
			"PATH: it holds a run already; choose another --folder, or move that one away", nil},
		{"create over a run that failed", Create, with("run.json"),
			"PATH: it holds a run already; choose another --folder, or move that one away", nil},
		{"create over a stopped run", Create, with("run.json", "partial.npz"),
			"PATH: it holds a run that was stopped; go on with it by --resume, or choose another --folder", nil},
		{"create over other files", Create, with("thesis.tex"),
			"PATH: there are other files in it; choose an empty or a new --folder", nil},
		{"create over a hidden file", Create, with(".keep"),
			"PATH: there are other files in it; choose an empty or a new --folder", nil},
		{"create in a file's place", Create, file,
			"PATH: it cannot be used: open PATH: not a directory; choose another --folder", nil},
		{"create below a file", Create, below,
			"PATH: it cannot be used: open PATH: not a directory; choose another --folder", nil},
		{"resume nothing", Resume, missing,
			"PATH: there is nothing to go on with: stat PATH: no such file or directory; leave --resume out to start a new run", fs.ErrNotExist},
		{"resume an empty folder", Resume, with(),
			"PATH: it holds no stopped run; leave --resume out and choose another --folder", nil},
		{"resume what failed", Resume, with("run.json", "moments.npz"),
			"PATH: it holds no stopped run; leave --resume out and choose another --folder", nil},
		{"resume a complete run", Resume, with("run.json", "result.json"),
			"PATH: the run in it is complete; read its result.json, or choose another --folder", nil},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := c.path(t)
			before := listing(t, filepath.Dir(path))
			f, err := c.open(path)
			if f != nil {
				t.Error("a folder came with the error")
			}
			var use *UseError
			if !errors.As(err, &use) || use.Path != path {
				t.Fatalf("error %v, want a UseError of %s", err, path)
			}
			if got := strings.ReplaceAll(err.Error(), path, "PATH"); got != c.want {
				t.Errorf("message\n%s\nwant\n%s", got, c.want)
			}
			if c.cause != nil && !errors.Is(err, c.cause) {
				t.Errorf("the error does not wrap %v", c.cause)
			}
			if after := listing(t, filepath.Dir(path)); !reflect.DeepEqual(after, before) {
				t.Errorf("there is now %v, before %v", after, before)
			}
		})
	}
}

// listing lists all below a folder.
func listing(t *testing.T, path string) (names []string) {
	t.Helper()
	filepath.WalkDir(path, func(name string, _ fs.DirEntry, err error) error {
		if err == nil {
			names = append(names, name)
		}
		return nil
	})
	return names
}

// The superuser may write anywhere, so this one needs an ordinary user.
func TestCreateWhereOneMayNotWrite(t *testing.T) {
	parent := lay(t)
	if err := os.Chmod(parent, 0o555); err != nil {
		t.Fatal(err)
	}
	defer os.Chmod(parent, 0o755)
	if f, err := os.Create(filepath.Join(parent, "probe")); err == nil {
		f.Close()
		t.Skip("permissions do not bind this user")
	}
	path := filepath.Join(parent, "run")
	_, err := Create(path)
	want := path + ": it cannot be made: mkdir " + path + ": permission denied; choose a --folder where you may write"
	if !errors.Is(err, fs.ErrPermission) || err.Error() != want {
		t.Errorf("error %v, want %s", err, want)
	}
}

func TestResume(t *testing.T) {
	for _, files := range [][]string{{"partial.npz", "run.json"}, {"partial.npz", "run.json", "result.json"}} {
		path := lay(t, files...)
		f, err := Resume(path)
		if err != nil || f.Path != path {
			t.Errorf("with %v: %v, %v", files, f, err)
		}
	}
}

func TestManifest(t *testing.T) {
	f, err := Create(filepath.Join(t.TempDir(), "run"))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := f.ReadManifest(); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("before it is written: %v", err)
	}
	want := Manifest{Version: "1", Source: "./q.toml", Config: "title = \"µ\"\n", Seed: 1<<63 - 1, Trajectories: 64, Finished: 64, Points: 256,
		Steps: 1600, Times: []float64{40, 80}, Workers: 2, Kernel: "portable", Seconds: 1.5, NormDrift: 1e-14, EnergyDrift: -3e-4}
	if err := f.WriteJSON("run.json", want); err != nil {
		t.Fatal(err)
	}
	if got, err := f.ReadManifest(); err != nil || !reflect.DeepEqual(*got, want) {
		t.Errorf("%+v, %v, want %+v", got, err, want)
	}
	if err := f.Write("run.json", []byte(`{"version": `)); err != nil {
		t.Fatal(err)
	}
	_, err = f.ReadManifest()
	var use *UseError
	if wantText := f.File("run.json") + ": it is damaged: unexpected end of JSON input; start the run anew in another --folder"; !errors.As(err, &use) || err.Error() != wantText {
		t.Errorf("cut short: %v, want %s", err, wantText)
	}
}

func TestRemove(t *testing.T) {
	f := &Folder{lay(t, "partial.npz")}
	for range 2 { // the second time it is gone already
		if err := f.Remove("partial.npz"); err != nil {
			t.Error(err)
		}
	}
	if f.has("partial.npz") {
		t.Error("it is still there")
	}
}
