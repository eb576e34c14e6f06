package flow

import (
	"errors"
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

// What is aimed at is reached, by either dial, and comes back to the setting it
// was taken from.
func TestReach(t *testing.T) {
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.4)} {
		for _, at := range []Setting{{0.5, 1, 0.5}, {0.3, 1.2, 0.2}, {0.2, 0.8, 1}} {
			f, err := at.Flow(law)
			if err != nil {
				t.Fatal(err)
			}
			for _, aim := range []Aim{Mach(f.Upstream.Mach()), SurfaceGravity(f.Horizon.Temperature)} {
				for _, c := range []struct {
					dial     Dial
					low, top float64
				}{{Depth, 0.2, 3}, {Width, 0.01, 4}, {Speed, 0.05, 0.95}} {
					found, err := Reach(law, aim, at, c.dial, c.low, c.top)
					if err != nil {
						t.Errorf("%s by %s from %v: %v", aim.Name, c.dial, at, err)
						continue
					}
					back := math.Inf(1)
					for _, s := range found {
						g, err := s.Flow(law)
						if err != nil {
							t.Fatal(err)
						}
						got, _ := aim.Of(g)
						if math.Abs(got/aim.Value-1) > 1e-9 {
							t.Errorf("%s by %s: %v has %.12g, want %.12g", aim.Name, c.dial, s, got, aim.Value)
						}
						back = math.Min(back, math.Abs(s.At(c.dial)/at.At(c.dial)-1))
					}
					if back > 1e-7 { // 1e-9 over the slope
						t.Errorf("%s by %s: %v does not hold %v", aim.Name, c.dial, found, at)
					}
				}
			}
		}
	}
}

// An aim out of reach says what is nearest.
func TestOutOfReach(t *testing.T) {
	for _, c := range []struct {
		aim      Aim
		at       Setting
		dial     Dial
		low, top float64
		found    bool
	}{
		{SurfaceGravity(1), Setting{0.5, 1, 0.5}, Depth, 0.2, 3, true},
		{SurfaceGravity(1e-9), Setting{0.5, 1, 0.5}, Depth, 0.5, 1, true},
		{Mach(0.2), Setting{0.5, 1, 0.5}, Speed, 0.1, 0.9, true},
		{Mach(0.5), Setting{0.5, 1, 0.5}, Speed, 1.1, 2, false},
	} {
		_, err := Reach(fluid.Cubic(), c.aim, c.at, c.dial, c.low, c.top)
		var out *OutOfReach
		if !errors.As(err, &out) || out.Found != c.found || out.Error() == "" {
			t.Errorf("%s = %g by %s: %v", c.aim.Name, c.aim.Value, c.dial, err)
			continue
		}
		t.Log(out)
		if !c.found {
			var none *NoFlow
			if !errors.As(err, &none) {
				t.Errorf("no reason in %v", err)
			}
			continue
		}
		f, err := out.Nearest.Flow(fluid.Cubic())
		if err != nil {
			t.Fatal(err)
		}
		if got, _ := c.aim.Of(f); got != out.Value {
			t.Errorf("the nearest has %g, said is %g", got, out.Value)
		}
	}
}

// Along a family the aim stays.
func TestFamily(t *testing.T) {
	aim := SurfaceGravity(0.06)
	family := Family(fluid.Cubic(), aim, Setting{Width: 0.5}, Speed, []float64{0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.95}, Depth, 0.2, 3)
	if len(family) < 4 {
		t.Fatalf("a family of %v", family)
	}
	for _, s := range family {
		f, err := s.Flow(fluid.Cubic())
		if err != nil || math.Abs(f.Horizon.Temperature/aim.Value-1) > 1e-9 {
			t.Errorf("%v: κ/2π = %g, %v", s, f.Horizon.Temperature, err)
		}
	}
}

// Whatever the dials, a flow is finite or there is none, and a reason.
func FuzzSweep(f *testing.F) {
	f.Add(0.5, 1.0, 0.5)
	f.Add(0.0, 0.0, 0.0)
	f.Add(-1.0, math.Inf(1), math.NaN())
	f.Add(1e-300, 1e300, 1e-300)
	f.Add(0.999999, 1e-9, 1e6)
	f.Fuzz(func(t *testing.T, speed, depth, width float64) {
		s, err := Sweep(fluid.Cubic(), speed, depth, width)
		if err != nil {
			var none *NoFlow
			if !errors.As(err, &none) {
				t.Fatalf("%v is no *NoFlow", err)
			}
			return
		}
		for _, v := range []float64{s.Upstream.Density, s.Upstream.Velocity, s.Downstream.Density, s.Downstream.Velocity, s.Horizon.SurfaceGravity, s.Horizon.Position} {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				t.Fatalf("speed %g, depth %g, width %g: %+v", speed, depth, width, s.Upstream)
			}
		}
		if !(s.Upstream.Mach() < 1 && s.Downstream.Mach() > 1 && s.Horizon.SurfaceGravity > 0) {
			t.Fatalf("speed %g, depth %g, width %g: no horizon in %+v, %+v", speed, depth, width, s.Upstream, s.Downstream)
		}
	})
}
