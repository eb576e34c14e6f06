package gpe

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"math"
	"os"
	"path/filepath"
)

// cacheVersion changes whenever FindModes would give other numbers.
const cacheVersion = "tailrace modes 1\n"

// ModeCache keeps modes on disk, a file for each trap, under the hash of all
// they depend on. The zero value, with no folder, keeps nothing.
type ModeCache struct {
	Folder string
}

// DefaultModeCache is the cache in the user's cache folder, or none where the
// system has no such folder.
func DefaultModeCache() ModeCache {
	dir, err := os.UserCacheDir()
	if err != nil {
		return ModeCache{}
	}
	return ModeCache{Folder: filepath.Join(dir, "tailrace", "modes")}
}

// key is the hash of what modes depend on.
func key(ground *Ground, cutoff float64) string {
	h := sha256.New()
	h.Write([]byte(cacheVersion))
	put := func(v ...float64) {
		var b [8]byte
		for _, f := range v {
			binary.LittleEndian.PutUint64(b[:], math.Float64bits(f))
			h.Write(b[:])
		}
	}
	put(float64(ground.Grid.N), ground.Grid.Dx, ground.Grid.Origin, ground.Law.Swelling(), ground.Mu, cutoff)
	put(ground.V...)
	return hex.EncodeToString(h.Sum(nil))
}

// Modes returns the modes of ground, from disk where they have been found
// before. Whatever is wrong with the cache (not writable, damaged, full) only
// costs the time to find the modes again. Cached reports where they came from.
func (c ModeCache) Modes(ground *Ground, cutoff float64) (modes *TrappedModes, cached bool, err error) {
	path := ""
	if c.Folder != "" {
		path = filepath.Join(c.Folder, key(ground, cutoff)+".modes")
		if m := readModes(path, ground.Grid.N); m != nil {
			return m, true, nil
		}
	}
	m, err := FindModes(ground, cutoff)
	if err != nil {
		return nil, false, err
	}
	if path != "" {
		writeModes(path, m)
	}
	return m, false, nil
}

// A cache file is the version line, the SHA-256 of the rest, two int64 (points,
// count) and the float64 of energies, f₊ and f₋, little endian.

func writeModes(path string, m *TrappedModes) {
	var body bytes.Buffer
	size := []int64{int64(m.Points), int64(m.Count)}
	for _, part := range []any{size, m.Energies, m.Plus, m.Minus} {
		if binary.Write(&body, binary.LittleEndian, part) != nil {
			return
		}
	}
	sum := sha256.Sum256(body.Bytes())
	if os.MkdirAll(filepath.Dir(path), 0o755) != nil {
		return
	}
	f, err := os.CreateTemp(filepath.Dir(path), ".modes-*")
	if err != nil {
		return
	}
	defer os.Remove(f.Name()) // no-op once renamed
	for _, part := range [][]byte{[]byte(cacheVersion), sum[:], body.Bytes()} {
		if _, err := f.Write(part); err != nil {
			f.Close()
			return
		}
	}
	if f.Close() == nil {
		os.Rename(f.Name(), path)
	}
}

// readModes returns nil when the file is absent or not whole.
func readModes(path string, points int) *TrappedModes {
	data, err := os.ReadFile(path)
	if err != nil {
		return nil
	}
	head := len(cacheVersion) + sha256.Size
	if len(data) < head+16 || string(data[:len(cacheVersion)]) != cacheVersion {
		return nil
	}
	body := data[head:]
	if sum := sha256.Sum256(body); !bytes.Equal(sum[:], data[len(cacheVersion):head]) {
		return nil
	}
	size := [2]int64{}
	r := bytes.NewReader(body)
	if binary.Read(r, binary.LittleEndian, &size) != nil {
		return nil
	}
	n, count := int(size[0]), int(size[1])
	if n != points || count < 1 || count > 2*points || len(body) != 16+8*(count+2*n*count) {
		return nil
	}
	m := &TrappedModes{Points: n, Count: count, Energies: make([]float64, count),
		Plus: make([]float64, n*count), Minus: make([]float64, n*count)}
	for _, part := range [][]float64{m.Energies, m.Plus, m.Minus} {
		if binary.Read(r, binary.LittleEndian, part) != nil {
			return nil
		}
	}
	return m
}

// String says where the cache is.
func (c ModeCache) String() string {
	if c.Folder == "" {
		return "no mode cache"
	}
	return fmt.Sprintf("mode cache in %s", c.Folder)
}
