package main

import (
	"os"
	"path/filepath"
	"regexp"
	"syscall"
	"testing"
)

// A real full disk: a memory file system of 256 KiB, which only root may mount.
// The moments of the ring take 800 KiB.
func TestDiskFull(t *testing.T) {
	folder := t.TempDir()
	write(t, folder, "q.toml", ring)
	disk := filepath.Join(folder, "disk")
	if err := os.Mkdir(disk, 0o777); err != nil {
		t.Fatal(err)
	}
	if err := syscall.Mount("tmpfs", disk, "tmpfs", 0, "size=256k"); err != nil {
		t.Skipf("no small file system to fill can be mounted here: %v", err)
	}
	defer syscall.Unmount(disk, 0)
	got := tailrace(t, folder, "run", "--folder", "disk/run", "./q.toml")
	got.stderr = regexp.MustCompile(`\.[0-9]+-[0-9]+\.part`).ReplaceAllString(got.stderr, ".PART")
	expect(t, got, failed, "disk/run/moments.npz was not written: write disk/run/.moments.npz.PART: no space left on device")
	entries, err := os.ReadDir(filepath.Join(disk, "run"))
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if e.Name() != "figures" && e.Name() != "run.json" {
			t.Errorf("%s is left behind", e.Name())
		}
	}
}
