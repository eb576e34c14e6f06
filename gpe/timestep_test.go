package gpe

import (
	"testing"

	"tailrace/gpe/lanes"
)

// The chosen step reaches the accuracy asked for, against far finer steps; a
// coarse accuracy takes Strang's splitting and a fine one the quartic.
func TestChooseStep(t *testing.T) {
	e := smallEnsemble(t)
	p := *e.Problem
	p.Times = []float64{4}
	exact := fieldAfter(t, &p, Quartic(), 0.002)
	for _, c := range []struct {
		accuracy float64
		want     string
	}{{0.02, "strang"}, {1e-6, "quartic"}} {
		scheme, dt, err := ChooseStep(&p, c.accuracy)
		if err != nil {
			t.Fatal(err)
		}
		if scheme.Name != c.want {
			t.Errorf("accuracy %g: %s in steps of %.3g, want %s", c.accuracy, scheme.Name, dt, c.want)
		}
		if off := relativeDistance(fieldAfter(t, &p, scheme, dt), exact); off > 1.2*c.accuracy { // an estimate's own error
			t.Errorf("accuracy %g: %s in steps of %.3g is off by %.3g", c.accuracy, scheme.Name, dt, off)
		}
	}
	if _, _, err := ChooseStep(&p, 1e-30); err == nil {
		t.Error("an accuracy beyond rounding was promised")
	}
}

func fieldAfter(t *testing.T, p *Problem, scheme Scheme, dt float64) *lanes.Batch {
	t.Helper()
	ordering := make([]float64, p.Grid.N)
	fill(ordering, p.Commutator())
	prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, ordering, scheme, dt, p.Times)
	if err != nil {
		t.Fatal(err)
	}
	b := lanes.NewBatch(p.Grid.N)
	if err := p.Noise.Sample(b, p.Seed, 0); err != nil {
		t.Fatal(err)
	}
	prop.NewWalker(false).Leg(b, 0)
	return b
}
