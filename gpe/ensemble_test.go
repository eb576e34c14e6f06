package gpe

import (
	"context"
	"errors"
	"math"
	"slices"
	"sync"
	"testing"
	"time"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// keep is a Sink that keeps every trajectory's last density.
type keep struct {
	mu       sync.Mutex
	density  map[int][]float64
	finished int
	after    func(finished int)
}

func (k *keep) Accept(r Record) error {
	k.mu.Lock()
	defer k.mu.Unlock()
	for l := range r.Count {
		d := make([]float64, len(r.Density)/lanes.Width)
		for j := range d {
			d[j] = r.Density[j*lanes.Width+l]
		}
		k.density[(r.First+l)*10+r.Time] = d
	}
	return nil
}

func (k *keep) Finish(_ int, c []Conserved, _ time.Duration) {
	k.mu.Lock()
	defer k.mu.Unlock()
	k.finished += len(c)
	if k.after != nil {
		k.after(k.finished)
	}
}

func smallEnsemble(t testing.TB) *Ensemble { return smallEnsembleIn(t, Double) }

func smallEnsembleIn(t testing.TB, precision Precision) *Ensemble {
	t.Helper()
	p := smoothSweep(t, fluid.Cubic())
	modes, err := FindModes(p.Ground, 0)
	if err != nil {
		t.Fatal(err)
	}
	p.Noise = NewTrappedNoise(p.Ground, modes, 0.1, p.AtomsPerLength, 0)
	p.Scheme, p.TimeStep, p.Times, p.Seed = Strang(), 0.05, []float64{1, 2}, 9
	p.Precision = precision
	e, err := NewEnsemble(p)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// Records are the same bit by bit for any number of workers, for a run cut in
// two, and for an ensemble that does not fill its last batch; in single
// precision also for whichever batches are carried side by side.
func TestEnsembleIsDeterministic(t *testing.T) {
	for _, precision := range []Precision{Double, Single} {
		t.Run(string(precision), func(t *testing.T) {
			e := smallEnsembleIn(t, precision)
			run := func(batches []int, count, workers int, into *keep) {
				if err := e.Run(context.Background(), batches, count, workers, into); err != nil {
					t.Fatal(err)
				}
			}
			fresh := func() *keep { return &keep{density: map[int][]float64{}} }
			one := fresh()
			run([]int{0, 1, 2, 3, 4}, 37, 1, one)
			if one.finished != 37 || len(one.density) != 74 {
				t.Fatalf("%d finished, %d records", one.finished, len(one.density))
			}
			two, seven, cut := fresh(), fresh(), fresh()
			run([]int{3, 1, 0, 4, 2}, 37, 2, two)
			run([]int{0, 1, 2, 3, 4}, 37, 7, seven)
			run([]int{0, 2, 4}, 37, 2, cut)
			run([]int{1, 3}, 37, 1, cut)
			for name, other := range map[string]*keep{"2 workers": two, "7 workers": seven, "cut in two": cut} {
				if len(other.density) != len(one.density) {
					t.Fatalf("%s: %d records", name, len(other.density))
				}
				for i, d := range one.density {
					if !slices.Equal(d, other.density[i]) {
						t.Fatalf("%s: record %d differs", name, i)
					}
				}
			}
			for _, v := range one.density[0] {
				if v != Quantise(v) || float64(float32(v)) != v {
					t.Fatalf("density %v is not a multiple of the quantum", v)
				}
			}
		})
	}
}

func TestEnsembleStops(t *testing.T) {
	e := smallEnsemble(t)
	ctx, cancel := context.WithCancel(context.Background())
	k := &keep{density: map[int][]float64{}, after: func(int) { cancel() }}
	batches := make([]int, 50)
	for i := range batches {
		batches[i] = i
	}
	err := e.Run(ctx, batches, 400, 1, k)
	if !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want the context's", err)
	}
	if k.finished == 0 || k.finished > 16 {
		t.Errorf("%d trajectories finished after the call to stop", k.finished)
	}
}

func TestEnsembleReportsBadDensity(t *testing.T) {
	e := smallEnsemble(t)
	for j := range e.Problem.Ground.Field {
		e.Problem.Ground.Field[j] *= 20 // beyond what a record can hold
	}
	e.Problem.Ground.Atoms *= 400
	var bad *DensityError
	if err := e.Run(context.Background(), []int{0}, 8, 1, &keep{density: map[int][]float64{}}); !errors.As(err, &bad) {
		t.Errorf("error %v, want a DensityError", err)
	}
}

// Beyond dt k_max²/2 = π the splitting resonates and noise grows; NewPropagator
// refuses such a step. Below it, it does not grow.
func TestTimeStepLimit(t *testing.T) {
	g := NewGrid(128, 32, -16)
	land := still{make([]float64, g.N), 1}
	var refused *TimeStepError
	_, err := NewPropagator(g, fluid.Cubic(), land, nil, Strang(), 1.01*g.MaxTimeStep(), []float64{1})
	if !errors.As(err, &refused) || refused.Limit != g.MaxTimeStep() {
		t.Fatalf("error %v, want a TimeStepError", err)
	}
	// The growth is shown by a propagator that is put together by hand.
	ground := UniformGround(g, fluid.Cubic())
	noise, err := NewPlaneWaves(ground, 1, 0, 1e4, 0)
	if err != nil {
		t.Fatal(err)
	}
	grown := func(share float64) float64 {
		prop, err := NewPropagator(g, fluid.Cubic(), land, nil, Strang(), g.MaxTimeStep(), []float64{1})
		if err != nil {
			t.Fatal(err)
		}
		dt := share * g.MaxTimeStep()
		const steps = 3000
		prop.legs = []leg{prop.newLeg(0, dt*steps, steps)}
		b := lanes.NewBatch(g.N)
		if err := noise.Sample(b, 1, 0); err != nil {
			t.Fatal(err)
		}
		spread := func() float64 {
			worst := 0.0
			for i := range b.Re {
				worst = math.Max(worst, math.Abs(math.Hypot(b.Re[i], b.Im[i])-1))
			}
			return worst
		}
		before := spread()
		prop.NewWalker(false).Leg(b, 0)
		return spread() / before
	}
	if r := grown(0.95); r > 2 {
		t.Errorf("below the limit noise grows %.3g-fold", r)
	}
	if r := grown(1.15); r < 5 {
		t.Errorf("beyond the limit noise grows only %.3g-fold: is the limit still right?", r)
	}
}
