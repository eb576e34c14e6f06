// Package whole writes files that are either whole or not there: the bytes go
// to a temporary beside the target, reach the disk, and only then take the
// target's name.
package whole

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
)

// WriteFile makes path hold what write writes. The bytes go to a temporary file
// in path's folder, which is flushed to the disk and renamed to path. On any
// failure, of write or of the disk, the temporary is removed, what path held
// before stays as it was, and the error is returned wrapped. The folder must
// exist. A new file has mode 0666 less the process's umask.
func WriteFile(path string, write func(w io.Writer) error) (err error) {
	temporary, err := create(path)
	if err != nil {
		return fmt.Errorf("%s cannot be written: %w; choose a folder that exists and may be written to", path, err)
	}
	defer func() {
		if err != nil {
			temporary.Close() // a second close is harmless, its error says nothing new
			os.Remove(temporary.Name())
			err = fmt.Errorf("%s was not written: %w", path, err)
		}
	}()
	buffered := bufio.NewWriterSize(temporary, 1<<16)
	if err = write(buffered); err != nil {
		return err
	}
	if err = buffered.Flush(); err != nil {
		return err
	}
	if err = temporary.Sync(); err != nil {
		return err
	}
	if err = temporary.Close(); err != nil {
		return err
	}
	if err = os.Rename(temporary.Name(), path); err != nil {
		return err
	}
	syncFolder(filepath.Dir(path))
	return nil
}

// create opens a new file beside path. os.CreateTemp would give mode 0600,
// which the finished file must not inherit.
func create(path string) (*os.File, error) {
	folder, base := filepath.Split(path)
	for i := range 10000 {
		name := filepath.Join(folder, fmt.Sprintf(".%s.%d-%d.part", base, os.Getpid(), i))
		f, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
		if !errors.Is(err, os.ErrExist) {
			return f, err
		}
	}
	return nil, errors.New("10000 temporaries of this name exist already; remove them")
}

// syncFolder makes the rename itself survive a power cut. The file is whole
// either way and some file systems refuse to sync a folder, so errors pass.
func syncFolder(folder string) {
	if d, err := os.Open(folder); err == nil {
		d.Sync()
		d.Close()
	}
}
