package gpe

import (
	"context"
	"math"
	"testing"
	"time"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// In single precision the same trajectories come out, less the rounding of 40
// steps, for every law and both splittings; what is conserved is.
func TestSingleFollowsDouble(t *testing.T) {
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.4)} {
		for _, scheme := range []Scheme{Strang(), Quartic()} {
			p := smoothSweep(t, law)
			noise, err := NewPlaneWaves(UniformGround(p.Grid, law), 1, 0, 50, 0)
			if err != nil {
				t.Fatal(err)
			}
			first, second := lanes.NewBatch(p.Grid.N), lanes.NewBatch(p.Grid.N)
			for h, b := range []*lanes.Batch{first, second} {
				if err := noise.Sample(b, 3, h*lanes.Width); err != nil {
					t.Fatal(err)
				}
			}
			ordering := make([]float64, p.Grid.N)
			fill(ordering, 0.02)
			prop, err := NewPropagator(p.Grid, law, p.Landscape, ordering, scheme, 0.05, []float64{1, 2})
			if err != nil {
				t.Fatal(err)
			}
			w, s := prop.NewWalker(true), prop.Single().NewWalker(true)
			field := func(b *lanes.Batch) *lanes.Batch {
				c := lanes.NewBatch(b.N)
				copy(c.Re, b.Re)
				copy(c.Im, b.Im)
				return c
			}
			pair := []*lanes.Batch{field(first), field(second)}
			before := w.Energies(pair[1], 0)
			s.Leg(pair, 0)
			s.Leg(pair, 1)
			for h, b := range []*lanes.Batch{first, second} {
				w.Reset()
				w.Leg(b, 0)
				w.Leg(b, 1)
				// The norm of a field falls by some 5e-8 in each of 40 to 240
				// flows, as √½ is rounded in butterflies of radix 8.
				d, limit := relativeDistance(pair[h], b), 1e-7*float64(40*len(scheme.local))
				t.Logf("η = %g, %s, batch %d: off by %.2g", law.Swelling(), scheme.Name, h, d)
				if !(d < limit) {
					t.Errorf("η = %g, %s, batch %d: off by %.2g, more than %.2g", law.Swelling(), scheme.Name, h, d, limit)
				}
				for l := range lanes.Width {
					if d := math.Abs(s.Work[h*lanes.Width+l] - w.Work[l]); !(d < 1e-5*math.Abs(w.Work[l])) {
						t.Errorf("batch %d, lane %d: work %v, in double %v", h, l, s.Work[h*lanes.Width+l], w.Work[l])
					}
				}
			}
			after, double := w.Energies(pair[1], 2), w.Energies(second, 2)
			for l := range after {
				kept, want := after[l]-before[l]-s.Work[lanes.Width+l], double[l]-before[l]-w.Work[l]
				// An energy of interaction goes with the square of the norm.
				if d := math.Abs(kept - want); !(d < 2e-7*float64(40*len(scheme.local))*math.Abs(after[l])) {
					t.Errorf("lane %d: the energy drifts by %v, in double by %v", l, kept, want)
				}
			}
		}
	}
}

// What a batch becomes does not depend on what is beside it, on which side it
// is, or on whether anything is.
func TestSingleBatchesAreIndependent(t *testing.T) {
	e := smallEnsembleIn(t, Single)
	n := e.Problem.Grid.N
	fresh := func(first int) *lanes.Batch {
		b := lanes.NewBatch(n)
		if err := e.Problem.Noise.Sample(b, 5, first); err != nil {
			t.Fatal(err)
		}
		return b
	}
	bad := lanes.NewBatch(n)
	for i := range bad.Re {
		bad.Re[i] = math.NaN()
	}
	w := e.single.NewWalker(true)
	alone := fresh(8)
	w.Leg([]*lanes.Batch{bad, fresh(0)}, 0) // leaves NaN behind
	w.Leg([]*lanes.Batch{fresh(0), bad}, 0)
	w.Reset()
	w.Leg([]*lanes.Batch{alone}, 0)
	work := w.Work[3]
	for l, v := range w.Work[lanes.Width:] {
		if v != 0 {
			t.Errorf("lane %d, which is empty, takes the work %v", l, v)
		}
	}
	left, right := fresh(8), fresh(8)
	w.Reset()
	w.Leg([]*lanes.Batch{left, bad}, 0)
	w.Leg([]*lanes.Batch{fresh(0), right}, 0)
	for name, b := range map[string]*lanes.Batch{"left": left, "right": right} {
		if relativeDistance(b, alone) != 0 {
			t.Errorf("%s of another it comes out different", name)
		}
	}
	w.Reset()
	w.Leg([]*lanes.Batch{fresh(0), fresh(8)}, 0)
	if w.Work[lanes.Width+3] != work {
		t.Errorf("work %v beside another, %v alone", w.Work[lanes.Width+3], work)
	}
}

func TestSingleAllocatesNothing(t *testing.T) {
	e := smallEnsembleIn(t, Single)
	w, d := e.single.NewWalker(true), e.propagator.NewWalker(true)
	pair := []*lanes.Batch{lanes.NewBatch(e.Problem.Grid.N), lanes.NewBatch(e.Problem.Grid.N)}
	for name, leg := range map[string]func(){
		"single": func() { w.Leg(pair, 0) }, "single, one batch": func() { w.Leg(pair[:1], 0) }, "double": func() { d.Leg(pair[0], 0) },
	} {
		if n := testing.AllocsPerRun(3, leg); n != 0 {
			t.Errorf("%s: %g allocations a leg", name, n)
		}
	}
}

// The fingerprint tells the precisions apart and takes the zero value, which
// problems had before there were two, for double.
func TestFingerprintHasThePrecision(t *testing.T) {
	p := smallEnsemble(t).Problem
	double := p.Fingerprint()
	p.Precision = ""
	if p.Fingerprint() != double {
		t.Error("the zero precision is not double")
	}
	p.Precision = Single
	if p.Fingerprint() == double {
		t.Error("single and double have the same fingerprint")
	}
}

// conserved is a Sink that also keeps what was conserved.
type conserved struct {
	keep
	kept []Conserved
}

func (k *conserved) Finish(first int, c []Conserved, steps time.Duration) {
	k.kept = append(k.kept, c...) // one worker only
	k.keep.Finish(first, c, steps)
}

// An ensemble in single precision keeps atoms and energy to its rounding.
func TestSingleEnsembleConserves(t *testing.T) {
	e := smallEnsembleIn(t, Single)
	k := &conserved{keep: keep{density: map[int][]float64{}}}
	if err := e.Run(context.Background(), []int{0, 1, 2}, 24, 1, k); err != nil {
		t.Fatal(err)
	}
	for _, c := range k.kept {
		if !(math.Abs(c.NormDrift) < 1e-5) { // 40 steps, some 1e-7 each
			t.Errorf("the norm drifts by %.2g", c.NormDrift)
		}
	}
	if len(k.kept) != 24 {
		t.Errorf("%d trajectories", len(k.kept))
	}
}
