package probe

import (
	"context"
	"math"
	"math/cmplx"
	"testing"
	"time"

	"tailrace/gpe"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

func try(t *testing.T, name string, p flow.Profile, o Options) {
	start := time.Now()
	r, err := Stimulate(context.Background(), p, o)
	if err != nil {
		t.Fatal(err)
	}
	took := time.Since(start)
	l := newLayout(p, o.filled())
	t.Logf("%s: took %v N %d dx %.3g L %.4g origin %.4g dt %.3g steps %d T %.4g departure %.2g; arrival %.4g reads %.4g end %.4g duration %.4g margins %.3g %.3g", name, took, r.Grid.N, r.Grid.Dx, r.Grid.Length(), r.Grid.Origin, r.TimeStep, r.Steps, r.Duration, r.Departure, l.arrival, l.read, l.end, l.duration, l.left, l.right)
	s, _ := bogoliubov.NewScatterer(p)
	var ws []float64
	for _, row := range r.Rows {
		ws = append(ws, row.Omega)
	}
	rows, _ := s.All(ws)
	c, err := r.Compare()
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("   worst %.2g line %.5v  scattered %.5v", c.Worst, c.Line, c.ScatteredLine)
	for i := 0; i < len(rows); i += 6 {
		var d [3][3]float64
		worst := 0.0
		for a := range 3 {
			for b := range 3 {
				d[a][b] = cmplx.Abs(r.Rows[i].S[a][b])/cmplx.Abs(rows[i].S[a][b]) - 1
				worst = math.Max(worst, cmplx.Abs(r.Rows[i].S[a][b]-rows[i].S[a][b]))
			}
		}
		t.Logf("w/wm %.3f weight %.2g  rel err |S|: %8.5f  complex %.2g  unit %.2g", ws[i]/r.OmegaMax, r.Weight[i], d, worst, r.Rows[i].UnitarityError)
	}
}

func TestTry(t *testing.T) {
	half, _ := flow.HalfSoliton(0.7)
	sweep, _ := flow.Sweep(fluid.Cubic(), 0.5, 1, 0.5)
	uni, _ := flow.UniformSwitch(0.75, 1, 0.5, 1)
	uni2, _ := flow.UniformSwitch(0.75, 1, 0.5, 2)
	_ = gpe.Strang
	_, _, _ = sweep, half, uni2
	_, _, _ = sweep, half, uni2
	_, _, _ = sweep, half, uni2
	uni3, _ := flow.UniformSwitch(0.75, 1, 0.5, 0.5)
	half5, _ := flow.HalfSoliton(0.5)
	half8, _ := flow.HalfSoliton(0.85)
	sw := fluid.Swollen(0.4)
	swollen, err := flow.Sweep(sw, 0.5, 1, 0.5)
	if err != nil {
		t.Fatal(err)
	}
	try(t, "uniform .5", uni3, Options{})
	try(t, "uniform 1", uni, Options{})
	try(t, "uniform 2", uni2, Options{})
	try(t, "sweep", sweep, Options{})
	try(t, "half .5", half5, Options{})
	try(t, "half .7", half, Options{})
	try(t, "half .8", half8, Options{})
	try(t, "half .7 conc 9", half, Options{Concentration: 9})
	try(t, "swollen ", swollen, Options{Law: sw, Concentration: 9})
	try(t, "swollen with cubic ", swollen, Options{Concentration: 9})
}
