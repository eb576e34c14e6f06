package flow

import (
	"fmt"
	"math"

	"tailrace/gpe/fluid"
)

// Setting is the dials of a swept step, in units of the cloud at rest.
type Setting struct{ Speed, Depth, Width float64 }

// Flow returns the flow that the step makes (Sweep).
func (s Setting) Flow(law fluid.Law) (*Transonic, error) {
	return Sweep(law, s.Speed, s.Depth, s.Width)
}

// Dial is one of the dials of a Setting.
type Dial int

// The dials.
const (
	Speed Dial = iota
	Depth
	Width
)

func (d Dial) String() string { return [...]string{"speed", "depth", "width"}[d] }

// turned returns the setting with the dial at v.
func (s Setting) turned(d Dial, v float64) Setting {
	switch d {
	case Speed:
		s.Speed = v
	case Depth:
		s.Depth = v
	default:
		s.Width = v
	}
	return s
}

// At returns where the dial stands.
func (s Setting) At(d Dial) float64 { return [...]float64{s.Speed, s.Depth, s.Width}[d] }

// Aim is what is wanted of a flow: a number that it has.
type Aim struct {
	Name  string // such as "the upstream Mach number"
	Of    func(*Transonic) (float64, error)
	Value float64 // wanted, above zero
}

// Mach aims at an upstream Mach number.
func Mach(value float64) Aim {
	return Aim{"the upstream Mach number", func(t *Transonic) (float64, error) { return t.Upstream.Mach(), nil }, value}
}

// SurfaceGravity aims at κ/2π, in units of m c₀².
func SurfaceGravity(temperature float64) Aim {
	return Aim{"κ/2π", func(t *Transonic) (float64, error) { return t.Horizon.Temperature, nil }, temperature}
}

// OutOfReach reports an aim that no setting of the dial reaches.
type OutOfReach struct {
	Aim      Aim
	Dial     Dial
	Low, Top float64 // where the dial may stand
	Nearest  Setting // that comes nearest
	Value    float64 // what it has
	Found    bool    // whether there was any flow at all
	Why      error   // of a setting without a flow, if there was one
}

func (e *OutOfReach) Error() string {
	if !e.Found {
		return fmt.Sprintf("%s of %.4g cannot be reached: with %s between %.4g and %.4g there is no flow with a horizon (%v)",
			e.Aim.Name, e.Aim.Value, e.Dial, e.Low, e.Top, e.Why)
	}
	way := "more"
	if e.Value > e.Aim.Value {
		way = "less"
	}
	return fmt.Sprintf("%s of %.4g cannot be reached with %s between %.4g and %.4g: the nearest is %.4g, at %s %.4g; something else than that must make it %s",
		e.Aim.Name, e.Aim.Value, e.Dial, e.Low, e.Top, e.Value, e.Dial, e.Nearest.At(e.Dial), way)
}

// Unwrap returns why a setting had no flow, if one had none.
func (e *OutOfReach) Unwrap() error { return e.Why }

// aimSteps is how many settings are looked at before the aim is homed in on.
const aimSteps = 32

// Reach returns every setting that has the aim, with the dial between low and
// top > low and the others as in at: usually one, two where the aim has a
// maximum in between; in the order of the dial. The aim is met to 1e-9. The
// error is an *OutOfReach that holds the nearest there is.
func Reach(law fluid.Law, aim Aim, at Setting, dial Dial, low, top float64) ([]Setting, error) {
	if !(aim.Value > 0) || !(low < top) || math.IsInf(low, 0) || math.IsInf(top, 0) {
		panic(fmt.Sprintf("flow: an aim of %g with a dial from %g to %g", aim.Value, low, top))
	}
	failed := &OutOfReach{Aim: aim, Dial: dial, Low: low, Top: top, Value: math.NaN()}
	off := math.Inf(1)
	value := func(v float64) float64 {
		s := at.turned(dial, v)
		t, err := s.Flow(law)
		if err == nil {
			var x float64
			if x, err = aim.Of(t); err == nil {
				if d := math.Abs(math.Log(x / aim.Value)); d < off {
					off, failed.Found, failed.Nearest, failed.Value = d, true, s, x
				}
				return math.Log(x / aim.Value)
			}
		}
		failed.Why = err
		return math.NaN()
	}
	// Where there is no flow the edge of what there is is looked for, so that an
	// aim close to it is found.
	type point struct{ x, y float64 }
	var points []point
	add := func(x, y float64) {
		if n := len(points); n > 0 && math.IsNaN(points[n-1].y) != math.IsNaN(y) {
			a, b := points[n-1], point{x, y}
			for range 40 {
				m := (a.x + b.x) / 2
				if c := (point{m, value(m)}); math.IsNaN(c.y) == math.IsNaN(a.y) {
					a = c
				} else {
					b = c
				}
			}
			points = append(points, a, b)
		}
		points = append(points, point{x, y})
	}
	for i := range aimSteps + 1 {
		x := low + (top-low)*float64(i)/aimSteps
		if low > 0 && top/low > 20 {
			x = low * math.Pow(top/low, float64(i)/aimSteps)
		}
		add(x, value(x))
	}
	var found []Setting
	for i := 1; i < len(points); i++ {
		a, b := points[i-1], points[i]
		switch {
		case a.y == 0:
			found = append(found, at.turned(dial, a.x))
		case a.y*b.y < 0:
			if x, ok := home(value, a.x, b.x, a.y, b.y); ok {
				found = append(found, at.turned(dial, x))
			}
		}
	}
	if n := len(points); points[n-1].y == 0 {
		found = append(found, at.turned(dial, points[n-1].x))
	}
	if len(found) == 0 {
		// A maximum just below the aim, or above it between two points.
		return nil, failed
	}
	return found, nil
}

// home finds a root of f in a bracket by Ridders's method. C. Ridders, IEEE
// Trans. Circuits Syst. 26, 979 (1979).
func home(f func(float64) float64, a, b, fa, fb float64) (float64, bool) {
	x := a
	for range 60 {
		m := (a + b) / 2
		fm := f(m)
		root := math.Sqrt(fm*fm - fa*fb)
		if math.IsNaN(root) || root == 0 {
			return x, false
		}
		next := m + (m-a)*math.Copysign(1, fa-fb)*fm/root
		fn := f(next)
		if math.IsNaN(fn) {
			return x, false
		}
		x = next
		if math.Abs(fn) < 1e-10 || math.Abs(b-a) < 1e-14*math.Abs(b) {
			return x, true
		}
		switch {
		case fm*fn < 0:
			a, fa, b, fb = m, fm, next, fn
		case fa*fn < 0:
			b, fb = next, fn
		default:
			a, fa = next, fn
		}
	}
	return x, true
}

// Family returns the settings along which the aim is kept: for each value of
// one dial those of the other, between low and top, that reach it, the first
// where there are several. Values for which there is none are left out.
func Family(law fluid.Law, aim Aim, at Setting, along Dial, values []float64, dial Dial, low, top float64) []Setting {
	var family []Setting
	for _, v := range values {
		found, err := Reach(law, aim, at.turned(along, v), dial, low, top)
		if err == nil {
			family = append(family, found[0])
		}
	}
	return family
}
