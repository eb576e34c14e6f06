package gpe

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// spectrum is the mean and standard error over trajectories of |δn_k|² L/N²·n₀ξ,
// which for weak noise is S(k): the symmetric order of δn = √n(δψ+δψ†) is that
// of an observable, so no correction is due to leading order in 1/(n₀ξ).
type spectrum struct {
	sum, square []float64
	count       float64
	density     float64
}

func (s *spectrum) add(g Grid, b *lanes.Batch, perXi float64) {
	fft := fourier.NewFFT(g.N)
	rho := make([]float64, g.N)
	if s.sum == nil {
		s.sum, s.square = make([]float64, g.N/2+1), make([]float64, g.N/2+1)
	}
	for l := range lanes.Width {
		for j := range rho {
			re, im := b.Re[j*lanes.Width+l], b.Im[j*lanes.Width+l]
			rho[j] = re*re + im*im
			s.density += rho[j] / float64(g.N)
		}
		for q, c := range fft.Coefficients(nil, rho) {
			p := (real(c)*real(c) + imag(c)*imag(c)) * g.Length() / float64(g.N*g.N) * perXi
			s.sum[q] += p
			s.square[q] += p * p
		}
		s.count++
	}
}

// against checks S(k) for q up to top; chi² per wave must be that of noise.
func (s *spectrum) against(t *testing.T, g Grid, top int, want func(k float64) float64) {
	t.Helper()
	chi2 := 0.0
	for q := 1; q <= top; q++ {
		mean := s.sum[q] / s.count
		err := math.Sqrt((s.square[q]/s.count - mean*mean) / s.count)
		d := (mean - want(g.Wavenumber(q))) / err
		chi2 += d * d
		if math.Abs(d) > 4.5 { // one in 150,000 for one wave, there are about a hundred
			t.Errorf("k = %.3f: S = %.4f ± %.4f, want %.4f", g.Wavenumber(q), mean, err, want(g.Wavenumber(q)))
		}
	}
	// Four standard deviations of χ²/n.
	if off := chi2/float64(top) - 1; math.Abs(off) > 4*math.Sqrt(2/float64(top)) {
		t.Errorf("χ² per wave is %.2f over %d waves", 1+off, top)
	}
}

// structure is S(k) = (E/ε) coth(ε/2T), E/ε at T = 0: L. Pitaevskii,
// S. Stringari, Bose–Einstein Condensation and Superfluidity, OUP 2016.
func structure(temperature float64) func(k float64) float64 {
	return func(k float64) float64 {
		e := k * k / 2
		energy := math.Sqrt(e * (e + 2))
		s := e / energy
		if temperature > 0 {
			s /= math.Tanh(energy / (2 * temperature))
		}
		return s
	}
}

// Plane waves have the structure factor of theory, at T = 0 and above, at the
// start and after a while: the vacuum is stationary.
func TestStructureFactorOfARing(t *testing.T) {
	const perXi = 2000 // weak noise: corrections are of order 1/(n₀ξ)
	g := NewGrid(128, 64, -32)
	for _, temperature := range []float64{0, 0.5} {
		t.Run(fmt.Sprintf("T = %g", temperature), func(t *testing.T) {
			ground := UniformGround(g, fluid.Cubic())
			noise, err := NewPlaneWaves(ground, 1, temperature, perXi, 0)
			if err != nil {
				t.Fatal(err)
			}
			land := NewSwitch(g, Switch{Velocity: 0.4, SoundUp: 1, SoundDown: 1, Width: 1})
			p := &Problem{Grid: g, AtomsPerLength: perXi}
			s := make([]float64, g.N)
			fill(s, p.Commutator())
			prop, err := NewPropagator(g, fluid.Cubic(), land, s, Strang(), 0.05, []float64{50})
			if err != nil {
				t.Fatal(err)
			}
			w, b := prop.NewWalker(false), lanes.NewBatch(g.N)
			var before, after spectrum
			for first := 0; first < 800; first += lanes.Width {
				if err := noise.Sample(b, 7, first); err != nil {
					t.Fatal(err)
				}
				before.add(g, b, perXi)
				w.Leg(b, 0)
				after.add(g, b, perXi)
			}
			before.against(t, g, 50, structure(temperature))
			after.against(t, g, 50, structure(temperature))
			if n := before.density/before.count - p.Commutator()/2; math.Abs(n-1) > 1e-12+1/(2*perXi*g.Length()) { // half an atom, the condensate's
				t.Errorf("density %.9f, want 1", n)
			}
		})
	}
}

// A cut-off leaves only the waves below it, and the density as it was.
func TestCutoff(t *testing.T) {
	const perXi, cutoff = 100.0, 3.0
	g := NewGrid(128, 64, -32)
	ground := UniformGround(g, fluid.Cubic())
	noise, err := NewPlaneWaves(ground, 1, 0, perXi, cutoff)
	if err != nil {
		t.Fatal(err)
	}
	p := &Problem{Grid: g, AtomsPerLength: perXi, Cutoff: cutoff}
	plan, err := lanes.NewPlan(g.N)
	if err != nil {
		t.Fatal(err)
	}
	b := lanes.NewBatch(g.N)
	var density float64
	for first := 0; first < 64; first += lanes.Width {
		if err := noise.Sample(b, 3, first); err != nil {
			t.Fatal(err)
		}
		for i := range b.Re {
			density += (b.Re[i]*b.Re[i] + b.Im[i]*b.Im[i]) / float64(g.N*64)
		}
		plan.Forward(b)
		for place, q := range plan.Order() {
			if math.Abs(g.Wavenumber(q)) <= cutoff {
				continue
			}
			for l := range lanes.Width {
				if a := math.Hypot(b.Re[place*lanes.Width+l], b.Im[place*lanes.Width+l]); a > 1e-10 {
					t.Fatalf("k = %.3f carries %.2g beyond the cut-off", g.Wavenumber(q), a)
				}
			}
		}
	}
	if n := density - p.Commutator()/2; math.Abs(n-1) > 1/(perXi*g.Length()) { // half an atom, the condensate's
		t.Errorf("density %.9f, want 1", n)
	}
}

// Deep in a box the noise of its modes has the structure factor of a uniform
// cloud. A window of smooth ends takes the place of the ring; it smears S(k)
// over 2π/40, where S is smooth.
func TestStructureFactorInABox(t *testing.T) {
	const perXi = 2000
	g := NewGrid(256, 128, -64)
	box := Box{Length: 100, WallWidth: 1, WallHeight: 6}
	v := trapOn(g, box)
	ground, err := FindGround(g, fluid.Cubic(), v, 1)
	if err != nil {
		t.Fatal(err)
	}
	modes, err := FindModes(ground, 0)
	if err != nil {
		t.Fatal(err)
	}
	window := make([]float64, g.N)
	norm := 0.0
	for j := range window {
		if x := g.X(j); math.Abs(x) < 40 {
			window[j] = math.Pow(math.Cos(math.Pi*x/80), 2)
		}
		norm += window[j] * window[j] * g.Dx
	}
	for _, temperature := range []float64{0, 0.5} {
		noise := NewTrappedNoise(ground, modes, temperature, perXi, 0)
		b := lanes.NewBatch(g.N)
		fft := fourier.NewFFT(g.N)
		sum, square := make([]float64, g.N/2+1), make([]float64, g.N/2+1)
		const count = 1200
		rho := make([]float64, g.N)
		for first := 0; first < count; first += lanes.Width {
			if err := noise.Sample(b, 11, first); err != nil {
				t.Fatal(err)
			}
			for l := range lanes.Width {
				for j := range rho {
					re, im := b.Re[j*lanes.Width+l], b.Im[j*lanes.Width+l]
					rho[j] = window[j] * (re*re + im*im - ground.Field[j]*ground.Field[j] - 1/(2*perXi*g.Dx))
				}
				for q, c := range fft.Coefficients(nil, rho) {
					p := (real(c)*real(c) + imag(c)*imag(c)) * g.Dx * g.Dx / norm * perXi
					sum[q] += p
					square[q] += p * p
				}
			}
		}
		want := structure(temperature)
		for q := 6; q < 100; q += 4 { // farther apart than the window smears
			mean := sum[q] / count
			err := math.Sqrt((square[q]/count - mean*mean) / count)
			if d := math.Abs(mean - want(g.Wavenumber(q))); d > 4*err+2e-3 { // the smearing
				t.Errorf("T = %g, k = %.3f: S = %.4f ± %.4f, want %.4f", temperature, g.Wavenumber(q), mean, err, want(g.Wavenumber(q)))
			}
		}
	}
}
