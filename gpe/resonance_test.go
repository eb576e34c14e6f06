package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// Up to LongestStep nothing grows out of the splitting; with a drift that is
// well below what the kinetic energy alone would allow.
func TestLongestStep(t *testing.T) {
	g := NewGrid(256, 128, -64)
	land := NewSwitch(g, Switch{Velocity: 0.75, SoundUp: 1, SoundDown: 0.5, Width: 1, Ramp: 1})
	ground := UniformGround(g, fluid.Cubic())
	const perXi = 5e7
	noise, err := NewPlaneWaves(ground, 1, 0, perXi, 0)
	if err != nil {
		t.Fatal(err)
	}
	p := &Problem{Grid: g, Law: fluid.Cubic(), Landscape: land, Ground: ground, Noise: noise, AtomsPerLength: perXi, Scheme: Strang(), Times: []float64{80}}
	short := func(dt float64) float64 {
		prop, err := NewPropagator(g, p.Law, land, nil, p.Scheme, dt, p.Times)
		if err != nil {
			t.Fatal(err)
		}
		b := lanes.NewBatch(g.N)
		if err := noise.Sample(b, 1, 0); err != nil {
			t.Fatal(err)
		}
		prop.NewWalker(false).Leg(b, 0)
		prop.plan.Forward(b)
		// Power of waves beyond two thirds of k_max, over that of vacuum noise.
		var power, waves float64
		for place, q := range prop.order {
			if math.Abs(g.Wavenumber(q)) < 2*g.MaxWavenumber()/3 {
				continue
			}
			waves++
			for l := range lanes.Width {
				power += (b.Re[place*lanes.Width+l]*b.Re[place*lanes.Width+l] + b.Im[place*lanes.Width+l]*b.Im[place*lanes.Width+l]) / lanes.Width
			}
		}
		return power / waves / float64(g.N) / float64(g.N) * 2 * perXi * g.Length()
	}
	if v := short(p.LongestStep()); v > 1.5 {
		t.Errorf("at the longest step short waves have %.3g of the vacuum's power", v)
	}
	if v := short(0.95 * g.MaxTimeStep()); v < 100 {
		t.Errorf("at 0.95 of the grid's own limit short waves have %.3g of the vacuum's power: the limit could be longer", v)
	}
}
