package moments

import (
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"sync"
	"testing"
	"time"

	"tailrace/analysis/npz"
	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

// ensemble hands records of drawn trajectories to a store, as gpe.Ensemble
// does.
type ensemble struct {
	density, current []Shots // of each time
	kept             []gpe.Conserved
}

func newEnsemble(count, points, times int) *ensemble {
	e := &ensemble{}
	for i := range times {
		e.density = append(e.density, draw(count, points, uint64(10+i)))
		e.current = append(e.current, draw(count, points, uint64(20+i)))
	}
	r := rand.New(rand.NewPCG(7, 1))
	for range count {
		e.kept = append(e.kept, gpe.Conserved{NormDrift: 1e-13 * r.NormFloat64(), EnergyDrift: 1e-4 * r.NormFloat64()})
	}
	return e
}

// batch runs a batch; lanes beyond the last trajectory carry rubbish, as they
// do in a run.
func (e *ensemble) batch(t testing.TB, s *Store, b int) {
	first := b * lanes.Width
	count := min(lanes.Width, s.Count-first)
	for i := range s.Times {
		r := gpe.Record{Time: i, First: first, Count: count, Density: make([]float64, s.Points*lanes.Width), Current: make([]float64, s.Points*lanes.Width)}
		for j := range r.Density {
			r.Density[j], r.Current[j] = 99, 99
		}
		for l := range count {
			for j := range s.Points {
				r.Density[j*lanes.Width+l] = float64(e.density[i].Shot(first + l)[j])
				r.Current[j*lanes.Width+l] = float64(e.current[i].Shot(first + l)[j])
			}
		}
		if err := s.Accept(r); err != nil {
			t.Error(err)
		}
	}
	s.Finish(first, e.kept[first:first+count], time.Millisecond)
}

func TestStore(t *testing.T) {
	const count, points, times = 45, 6, 2
	e := newEnsemble(count, points, times)
	var called []int
	s := NewStore(count, points, times, func(n int) { called = append(called, n) })
	if got := s.Pending(); !slices.Equal(got, []int{0, 1, 2, 3, 4, 5}) {
		t.Fatalf("pending %v", got)
	}
	for _, b := range []int{5, 0, 3} { // the last one holds 5 trajectories
		e.batch(t, s, b)
	}
	if want := []int{5, 13, 21}; !slices.Equal(called, want) || s.Finished() != 21 {
		t.Errorf("told of %v, want %v; %d are finished", called, want, s.Finished())
	}
	if got := s.Pending(); !slices.Equal(got, []int{1, 2, 4}) {
		t.Errorf("pending %v", got)
	}
	if s.String() != "21 of 45 trajectories" {
		t.Errorf("it says %q", s)
	}
	want := pick(e.density[1], append(append(span(0, 8), span(24, 32)...), span(40, 45)...))
	if got := s.Shots(1); got.Pixels != points || !slices.Equal(got.Data, want.Data) {
		t.Error("the shots of part of the batches are not theirs")
	}

	for _, b := range s.Pending() {
		e.batch(t, s, b)
	}
	for i := range times {
		if got := s.Shots(i); got.Count() != count || !slices.Equal(got.Data, e.density[i].Data) {
			t.Errorf("the shots at time %d are not in the order of their index", i)
		}
		sum, mean := s.CurrentSum(i), s.MeanCurrent(i)
		for j := range points {
			want := 0.0
			for k := range count {
				want += float64(e.current[i].Shot(k)[j])
			}
			if sum[j] != want || mean[j] != want/count {
				t.Errorf("current %v, mean %v, want %v and %v", sum[j], mean[j], want, want/count)
			}
		}
	}
	if s.StepTime() != 6*time.Millisecond {
		t.Errorf("step time %v", s.StepTime())
	}
	var worst gpe.Conserved
	for _, k := range e.kept {
		worst.NormDrift = max(worst.NormDrift, k.NormDrift, -k.NormDrift)
		worst.EnergyDrift = max(worst.EnergyDrift, k.EnergyDrift, -k.EnergyDrift)
	}
	if s.Conserved() != worst {
		t.Errorf("kept %v, want %v", s.Conserved(), worst)
	}
}

// Workers hand over batches at the same time, in any order.
func TestStoreConcurrent(t *testing.T) {
	const count, points, times = 200, 16, 2
	e := newEnsemble(count, points, times)
	s := NewStore(count, points, times, nil)
	var wg sync.WaitGroup
	for _, b := range rand.New(rand.NewPCG(8, 1)).Perm(25) {
		wg.Go(func() { e.batch(t, s, b) })
	}
	wg.Wait()
	for i := range times {
		same(t, sum(t, s.Shots(i)), sum(t, e.density[i]))
		want := NewSums(points)
		if err := want.Add(e.current[i]); err != nil {
			t.Fatal(err)
		}
		if got := s.CurrentSum(i); !slices.Equal(got, want.Density) {
			t.Error("the sum of currents depends on the order")
		}
	}
}

// A run that is saved and taken up by another process ends with the numbers of
// one that was not.
func TestSaveAndLoad(t *testing.T) {
	const count, points, times = 45, 6, 2
	e := newEnsemble(count, points, times)
	whole := NewStore(count, points, times, nil)
	for _, b := range whole.Pending() {
		e.batch(t, whole, b)
	}
	for _, c := range []struct {
		name string
		done []int
	}{
		{"nothing done", nil}, {"some done", []int{4, 1}}, {"the short batch done", []int{5}}, {"all done", span(0, 6)},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "partial.npz")
			first := NewStore(count, points, times, nil)
			for _, b := range c.done {
				e.batch(t, first, b)
			}
			if err := first.Save(path); err != nil {
				t.Fatal(err)
			}
			s := NewStore(count, points, times, nil)
			if err := s.Load(path); err != nil {
				t.Fatal(err)
			}
			if !slices.Equal(s.Pending(), first.Pending()) || s.Finished() != first.Finished() || s.StepTime() != first.StepTime() || s.Conserved() != first.Conserved() {
				t.Fatalf("%s, pending %v, after %s, pending %v", s, s.Pending(), first, first.Pending())
			}
			for _, b := range s.Pending() {
				e.batch(t, s, b)
			}
			for i := range times {
				if !slices.Equal(s.Shots(i).Data, whole.Shots(i).Data) || !slices.Equal(s.CurrentSum(i), whole.CurrentSum(i)) {
					t.Errorf("time %d differs from the run that was not stopped", i)
				}
			}
			if s.Conserved() != whole.Conserved() {
				t.Errorf("kept %v, want %v", s.Conserved(), whole.Conserved())
			}
		})
	}
}

func TestLoadRefused(t *testing.T) {
	const count, points, times = 24, 6, 2
	e := newEnsemble(count, points, times)
	s := NewStore(count, points, times, nil)
	e.batch(t, s, 1)
	path := filepath.Join(t.TempDir(), "partial.npz")
	if err := s.Save(path); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name                 string
		count, points, times int
		kind                 error
	}{
		{"more trajectories", 32, 6, 2, ErrOtherRun},
		{"another number in the last batch", 23, 6, 2, ErrOtherRun},
		{"more points", 24, 7, 2, ErrOtherRun},
		{"more times", 24, 6, 3, npz.ErrMissing},
	} {
		t.Run(c.name, func(t *testing.T) {
			if err := NewStore(c.count, c.points, c.times, nil).Load(path); !errors.Is(err, c.kind) {
				t.Errorf("error %v, want %v", err, c.kind)
			}
		})
	}

	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	for _, keep := range []int{len(text) - 1, len(text) / 2, 100, 4} {
		t.Run(fmt.Sprintf("cut to %d of %d bytes", keep, len(text)), func(t *testing.T) {
			if err := os.WriteFile(path, text[:keep], 0o666); err != nil {
				t.Fatal(err)
			}
			if err := NewStore(count, points, times, nil).Load(path); !errors.Is(err, npz.ErrTruncated) {
				t.Errorf("error %v, want %v", err, npz.ErrTruncated)
			}
		})
	}
	t.Run("one bit turned", func(t *testing.T) {
		turned := slices.Clone(text)
		turned[len(turned)/3] ^= 1
		if err := os.WriteFile(path, turned, 0o666); err != nil {
			t.Fatal(err)
		}
		var damaged *npz.Error // of a header or a check sum, wherever the bit is
		if err := NewStore(count, points, times, nil).Load(path); !errors.As(err, &damaged) {
			t.Errorf("error %v, want an npz.Error", err)
		}
	})
	t.Run("empty", func(t *testing.T) {
		if err := os.WriteFile(path, nil, 0o666); err != nil {
			t.Fatal(err)
		}
		if err := NewStore(count, points, times, nil).Load(path); !errors.Is(err, npz.ErrNotArchive) {
			t.Errorf("error %v, want %v", err, npz.ErrNotArchive)
		}
	})
	t.Run("not there", func(t *testing.T) {
		if err := NewStore(count, points, times, nil).Load(path + "x"); !errors.Is(err, os.ErrNotExist) {
			t.Errorf("error %v, want one that the file does not exist", err)
		}
	})
}

// A record that does not fit is a mistake of the program's.
func TestAcceptPanics(t *testing.T) {
	s := NewStore(8, 6, 1, nil)
	for _, c := range []struct {
		name string
		r    gpe.Record
	}{
		{"a trajectory too many", gpe.Record{First: 8, Count: 1, Density: make([]float64, 48)}},
		{"another grid", gpe.Record{Count: 8, Density: make([]float64, 40)}},
	} {
		t.Run(c.name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			_ = s.Accept(c.r)
		})
	}
}
