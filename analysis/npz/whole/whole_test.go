package whole

import (
	"bytes"
	"errors"
	"io"
	"os"
	"path/filepath"
	"testing"
)

func onlyFile(t *testing.T, folder, name, content string) {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	if name == "" {
		if len(entries) != 0 {
			t.Fatalf("the folder holds %v, want nothing", entries)
		}
		return
	}
	if len(entries) != 1 || entries[0].Name() != name {
		t.Fatalf("the folder holds %v, want only %s", entries, name)
	}
	got, err := os.ReadFile(filepath.Join(folder, name))
	if err != nil || string(got) != content {
		t.Fatalf("%s holds %q (%v), want %q", name, got, err, content)
	}
}

func TestWriteFile(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "a.txt")
	text := func(s string) func(io.Writer) error {
		return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
	}
	boom := errors.New("boom")

	err := WriteFile(path, func(w io.Writer) error { w.Write(bytes.Repeat([]byte("x"), 1<<18)); return boom })
	if !errors.Is(err, boom) {
		t.Fatalf("error %v, want boom", err)
	}
	onlyFile(t, folder, "", "")

	if err := WriteFile(path, text("first")); err != nil {
		t.Fatal(err)
	}
	onlyFile(t, folder, "a.txt", "first")

	err = WriteFile(path, func(w io.Writer) error { io.WriteString(w, "half"); return boom })
	if !errors.Is(err, boom) {
		t.Fatalf("error %v, want boom", err)
	}
	onlyFile(t, folder, "a.txt", "first")

	if err := WriteFile(path, text("second")); err != nil {
		t.Fatal(err)
	}
	onlyFile(t, folder, "a.txt", "second")
}

func TestWriteFileRefused(t *testing.T) {
	folder := t.TempDir()
	write := func(w io.Writer) error { return nil }
	if err := WriteFile(filepath.Join(folder, "none", "a"), write); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("missing folder: error %v, want one that wraps os.ErrNotExist", err)
	}
	if err := os.Mkdir(filepath.Join(folder, "taken"), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := WriteFile(filepath.Join(folder, "taken"), write); err == nil {
		t.Error("a folder was overwritten")
	}
	onlyFolder, _ := os.ReadDir(folder)
	if len(onlyFolder) != 1 {
		t.Errorf("left behind: %v", onlyFolder)
	}
}
