package lanes

import (
	"strings"
	"testing"
	"unsafe"

	"tailrace/gpe/fluid"
)

func TestBatchLayout(t *testing.T) {
	for _, n := range []int{1, 2, 3, 17, 64, 1000, 4096} {
		b := NewBatch(n)
		if len(b.Re) != n*Width || len(b.Im) != n*Width || b.N != n {
			t.Errorf("%d points: %d and %d values", n, len(b.Re), len(b.Im))
		}
		for _, s := range [][]float64{b.Re, b.Im} {
			if uintptr(unsafe.Pointer(&s[0]))%64 != 0 {
				t.Errorf("%d points: not on a cache line", n)
			}
		}
		x := random(n, 1)
		b.SetLane(5, x)
		if b.Re[(n-1)*Width+5] != real(x[n-1]) || b.Im[(n-1)*Width+5] != imag(x[n-1]) {
			t.Errorf("%d points: the last point of lane 5 is not where it should be", n)
		}
		if relative(b.Lane(nil, 5), x) != 0 || relative(b.Lane(make([]complex128, n), 5), x) != 0 {
			t.Errorf("%d points: what was put in does not come out", n)
		}
		if norm(b.Lane(nil, 4)) != 0 || norm(b.Lane(nil, 6)) != 0 {
			t.Errorf("%d points: neighbouring lanes are touched", n)
		}
	}
}

func TestKernelName(t *testing.T) {
	if Kernel() != active.name || Kernel() == "" {
		t.Errorf("kernel %q", Kernel())
	}
}

func TestMisuse(t *testing.T) {
	p, err := NewPlan(64)
	if err != nil {
		t.Fatal(err)
	}
	other, _ := NewPlan(64)
	short, b := make([]float64, 63), NewBatch(64)
	full := make([]float64, 64)
	table := NewStepTable(0, 1, 64, 1)
	for _, c := range []struct {
		name, says string
		do         func()
	}{
		{"empty batch", "at least 1", func() { NewBatch(0) }},
		{"lane too high", "lanes are 0 to 7", func() { b.Lane(nil, 8) }},
		{"lane too low", "lanes are 0 to 7", func() { b.SetLane(-1, make([]complex128, 64)) }},
		{"short field", "field has 63", func() { b.SetLane(0, make([]complex128, 63)) }},
		{"short destination", "destination has 63", func() { b.Lane(make([]complex128, 63), 0) }},
		{"batch of another length", "batch of 32 points", func() { p.Forward(NewBatch(32)) }},
		{"batch not made here", "use NewBatch", func() { p.Backward(&Batch{N: 64}) }},
		{"table of another plan", "another plan", func() { p.Propagate(b, other.Kinetic(full)) }},
		{"short angles", "kinetic angle has 63", func() { p.Kinetic(short) }},
		{"short potential", "potential has 63", func() { Phase(b, short, full) }},
		{"short coupling", "coupling has 63", func() { Phase(b, full, short) }},
		{"short subtracted density", "subtracted density has 63", func() { PhaseLaw(b, full, full, short, fluid.Cubic()) }},
		{"short damping", "damping has 63", func() { Damp(b, short) }},
		{"short step", "potential has 63", func() { table.Fill(short, nil, 1, 0, 1) }},
		{"short base", "base potential has 63", func() { table.Fill(full, short, 1, 0, 1) }},
		{"sharp step", "positive", func() { NewStepTable(0, 1, 64, 0) }},
		{"no spacing", "positive", func() { NewStepTable(0, 0, 64, 1) }},
	} {
		t.Run(c.name, func(t *testing.T) {
			defer func() {
				s, _ := recover().(string)
				if !strings.HasPrefix(s, "lanes: ") || !strings.Contains(s, c.says) {
					t.Errorf("panic %q; want lanes: … %s …", s, c.says)
				}
			}()
			c.do()
		})
	}
}
