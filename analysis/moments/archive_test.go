package moments

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"tailrace/analysis/npz"
)

// archive returns the moments of trajectories from to to−1 of an ensemble.
func archive(t testing.TB, e *ensemble, from, to int) *Archive {
	t.Helper()
	a := &Archive{Times: []float64{40, 80}, Problem: 77, Seed: []uint64{1<<63 + 5}, First: []int64{int64(from)}, Count: []int64{int64(to - from)}}
	for i := range a.Times {
		a.Sums = append(a.Sums, sum(t, pick(e.density[i], span(from, to))))
		a.Current = append(a.Current, sum(t, pick(e.current[i], span(from, to))).Density)
	}
	return a
}

func sameArchive(t testing.TB, got, want *Archive) {
	t.Helper()
	if !slices.Equal(got.Times, want.Times) {
		t.Fatalf("times %v, want %v", got.Times, want.Times)
	}
	for i := range want.Times {
		same(t, got.Sums[i], want.Sums[i])
		if !slices.Equal(got.Current[i], want.Current[i]) {
			t.Fatalf("current at time %d differs", i)
		}
	}
}

func TestArchiveMerge(t *testing.T) {
	e := newEnsemble(60, 9, 2)
	want := archive(t, e, 0, 60)
	parts := [][2]int{{0, 8}, {8, 9}, {9, 40}, {40, 60}}
	for _, order := range [][]int{{0, 1, 2, 3}, {3, 2, 1, 0}, {2, 0, 3, 1}} {
		folder := t.TempDir()
		var total *Archive
		for _, k := range order {
			path := filepath.Join(folder, "moments.npz")
			if err := archive(t, e, parts[k][0], parts[k][1]).Write(path); err != nil {
				t.Fatal(err)
			}
			part, err := ReadArchive(path)
			if err != nil {
				t.Fatal(err)
			}
			if total == nil {
				total = part
			} else if err := total.Merge(part); err != nil {
				t.Fatal(err)
			}
		}
		sameArchive(t, total, want)
		if len(total.First) != 4 || len(total.Count) != 4 {
			t.Errorf("ranges from %v, of %v", total.First, total.Count)
		}
	}
}

// Files of the same moments are the same files.
func TestArchiveBytes(t *testing.T) {
	e := newEnsemble(20, 9, 2)
	folder := t.TempDir()
	var files [2][]byte
	for i := range files {
		path := filepath.Join(folder, "moments.npz")
		if err := archive(t, e, 0, 20).Write(path); err != nil {
			t.Fatal(err)
		}
		var err error
		if files[i], err = os.ReadFile(path); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(files[0], files[1]) {
		t.Error("two files of the same moments differ")
	}
}

func TestArchiveMergeRefused(t *testing.T) {
	e, other := newEnsemble(60, 9, 2), newEnsemble(60, 10, 2)
	for _, c := range []struct {
		name string
		with func() *Archive
		want string
	}{
		{"the same trajectories", func() *Archive { return archive(t, e, 10, 30) },
			"the moments cannot be added: both hold trajectory 10"},
		{"one in common, below", func() *Archive { return archive(t, e, 0, 11) },
			"the moments cannot be added: both hold trajectory 10"},
		{"one in common, above", func() *Archive { return archive(t, e, 29, 60) },
			"the moments cannot be added: both hold trajectory 29"},
		{"all around", func() *Archive { return archive(t, e, 0, 60) },
			"the moments cannot be added: both hold trajectory 10"},
		{"another grid", func() *Archive { return archive(t, other, 40, 60) },
			"the moments cannot be added: recorded at 40 with 9 points and at 40 with 10"},
		{"another time", func() *Archive { a := archive(t, e, 40, 60); a.Times = []float64{40, 81}; return a },
			"the moments cannot be added: recorded at 80 with 9 points and at 81 with 9"},
		{"a time less", func() *Archive { a := archive(t, e, 40, 60); a.Times = a.Times[:1]; return a },
			"the moments cannot be added: 2 recorded times and 1"},
	} {
		t.Run(c.name, func(t *testing.T) {
			a := archive(t, e, 10, 30)
			err := a.Merge(c.with())
			if !errors.Is(err, ErrMismatch) || err.Error() != c.want {
				t.Errorf("error %v, want %s", err, c.want)
			}
			sameArchive(t, a, archive(t, e, 10, 30))
			if !slices.Equal(a.First, []int64{10}) {
				t.Errorf("ranges from %v", a.First)
			}
		})
	}
}

func TestReadArchiveRefused(t *testing.T) {
	sound := archive(t, newEnsemble(20, 9, 2), 0, 20).Arrays()
	without := func(name string) []npz.Array {
		return slices.DeleteFunc(slices.Clone(sound), func(a npz.Array) bool { return a.Name == name })
	}
	instead := func(a npz.Array) []npz.Array { return append(without(a.Name), a) }
	for _, c := range []struct {
		name   string
		arrays []npz.Array
		kind   error
	}{
		{"no times", without("times"), npz.ErrMissing},
		{"no counts", without("count"), npz.ErrMissing},
		{"no products", without("product_sum_1"), npz.ErrMissing},
		{"no current", without("current_sum_0"), npz.ErrMissing},
		{"flat products", instead(npz.Vector("product_sum_0", make([]float64, 81))), ErrMismatch},
		{"products of another grid", instead(npz.Array{Name: "product_sum_0", Shape: []int{8, 8}, Data: make([]float64, 64)}), ErrMismatch},
		{"current of another grid", instead(npz.Vector("current_sum_1", make([]float64, 8))), ErrMismatch},
		{"a count too many", instead(npz.Array{Name: "count", Shape: []int{2}, Data: []int64{10, 10}}), ErrMismatch},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "moments.npz")
			if err := npz.WriteFile(path, c.arrays...); err != nil {
				t.Fatal(err)
			}
			if _, err := ReadArchive(path); !errors.Is(err, c.kind) {
				t.Errorf("error %v, want %v", err, c.kind)
			}
		})
	}
}
