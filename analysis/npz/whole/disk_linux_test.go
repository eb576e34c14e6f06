package whole

import (
	"errors"
	"io"
	"path/filepath"
	"syscall"
	"testing"
)

// A real full disk: a memory file system of 64 KiB, which only root may mount.
func TestWriteFileDiskFull(t *testing.T) {
	folder := t.TempDir()
	if err := syscall.Mount("tmpfs", folder, "tmpfs", 0, "size=64k"); err != nil {
		t.Skipf("no small file system to fill can be mounted here: %v", err)
	}
	defer syscall.Unmount(folder, 0)
	err := WriteFile(filepath.Join(folder, "big"), func(w io.Writer) error {
		_, err := w.Write(make([]byte, 1<<20))
		return err
	})
	if !errors.Is(err, syscall.ENOSPC) {
		t.Errorf("error %v, want one that wraps ENOSPC", err)
	}
	onlyFile(t, folder, "", "")
}
