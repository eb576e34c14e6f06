package probe

import (
	"context"
	"errors"
	"math"
	"math/cmplx"
	"testing"

	"tailrace/gpe"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

func stimulate(t testing.TB, p flow.Profile, o Options) *Response {
	t.Helper()
	r, err := Stimulate(context.Background(), p, o)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// must returns a profile that there is.
func must[P flow.Profile](p P, err error) flow.Profile {
	if err != nil {
		panic(err)
	}
	return p
}

// agree holds r against the scattering solver: |α|² and |β|² and the temperature
// of their line, relatively, and all elements of the matrix, phases included, in
// the middle of the band.
func agree(t *testing.T, p flow.Profile, r *Response, squares, temperature, elements float64) *Comparison {
	t.Helper()
	c, err := r.Compare()
	if err != nil {
		t.Fatal(err)
	}
	if !(c.Worst <= squares) {
		t.Errorf("|α|² or |β|² is off by %.2g of itself, %.2g is asked for", c.Worst, squares)
	}
	if off := math.Abs(c.Line.Temperature/c.ScatteredLine.Temperature - 1); !(off <= temperature) {
		t.Errorf("the line's temperature is %.5g, by scattering %.5g", c.Line.Temperature, c.ScatteredLine.Temperature)
	}
	s, err := bogoliubov.NewScatterer(p)
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range r.Rows {
		if r.Weight[i] < 0.1 {
			continue
		}
		want, err := s.At(row.Omega)
		if err != nil {
			t.Fatal(err)
		}
		for o := range 3 {
			for in := range 3 {
				if d := cmplx.Abs(row.S[o][in] - want.S[o][in]); !(d <= elements) {
					t.Errorf("ω = %.4g: S[%d][%d] = %.5f, by scattering %.5f", row.Omega, o, in, row.S[o][in], want.S[o][in])
				}
			}
		}
		for in, sign := range []float64{1, 1, -1} {
			// The balance doubles and adds what amplitudes are off.
			if d := r.NormBalance(in)[i] - sign; math.Abs(d) > 2*elements {
				t.Errorf("ω = %.4g: norm of channel %d balances to %.2g", row.Omega, in, d)
			}
		}
	}
	t.Logf("N %d, %d steps of %.3g; |α|², |β|² to %.2g; T %.5g by %.5g; through the origin %.5g by %.5g; intercept %.3f; departure %.1g",
		r.Grid.N, r.Steps, r.TimeStep, c.Worst, c.Line.Temperature, c.ScatteredLine.Temperature, c.Line.Thermal, c.ScatteredLine.Thermal, c.Line.Intercept, r.Departure)
	return c
}

// A short packet at a sharp horizon. Its tails, exp(−9) of its peak, over the
// tenth of it that a hundredth of the norm is, are 2·10⁻³ of the amplitude, and
// the amplitudes are not all as large as one.
func TestStimulateHalfSoliton(t *testing.T) {
	p := must(flow.HalfSoliton(0.7))
	r := stimulate(t, p, Options{Concentration: 9})
	agree(t, p, r, 0.02, 2e-3, 0.01)
	if r.Departure > 1e-4 { // the time step's own error in the flow, dt²
		t.Errorf("the flow without a packet has moved by %.1g", r.Departure)
	}
}

// Uniform flows with a horizon 1 and 2 wide, whose low-frequency temperatures
// are 0.0357 and 0.0190, and horizons in a density step: to half of the hundredth
// that a measurement would be glad of. What is there is 2.5·10⁻³, the time step's.
func TestStimulateAgrees(t *testing.T) {
	if testing.Short() {
		t.Skip("seconds of propagation")
	}
	sw := fluid.Swollen(0.4)
	for _, c := range []struct {
		name string
		p    flow.Profile
		o    Options
	}{
		{"uniform 1", must(flow.UniformSwitch(0.75, 1, 0.5, 1)), Options{}},
		{"uniform 2", must(flow.UniformSwitch(0.75, 1, 0.5, 2)), Options{}},
		{"sweep", must(flow.Sweep(fluid.Cubic(), 0.5, 1, 0.5)), Options{}},
		{"half-soliton", must(flow.HalfSoliton(0.7)), Options{}},
		{"swollen sweep", must(flow.Sweep(sw, 0.5, 1, 0.5)), Options{Law: sw, Top: 0.9}},
		{"stretched", flow.Stretched{Profile: must(flow.HalfSoliton(0.6)), Factor: 1.5}, Options{}},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			agree(t, c.p, stimulate(t, c.p, c.o), 0.005, 1e-3, 0.01)
		})
	}
}

// A long time step turns the short waves' phase by 0.06 over the packet's duration.
// That leaves the scattering at a uniform flow as it is, because amplitudes are
// read at the wavenumbers that go with their frequencies; at those of the
// equation without steps |α|² would be off by 0.05 at the ends of the band.
func TestStimulateWithLongSteps(t *testing.T) {
	if testing.Short() {
		t.Skip("a second of propagation")
	}
	t.Parallel()
	p := must(flow.UniformSwitch(0.75, 1, 0.5, 2))
	agree(t, p, stimulate(t, p, Options{TimeStep: 0.18}), 0.005, 1e-3, 0.02)
}

// At a horizon in a density step what the time step leaves falls as its square,
// from 10⁻⁴; the packets' tails must be well below.
func TestStimulateConverges(t *testing.T) {
	if testing.Short() {
		t.Skip("a second of propagation")
	}
	t.Parallel()
	p := must(flow.HalfSoliton(0.7))
	var read [3][]float64
	for i, dt := range []float64{0.03, 0.015, 0.0075} {
		r := stimulate(t, p, Options{Concentration: 11, TimeStep: dt, Omega: []float64{0.2, 0.25, 0.3}})
		read[i] = append(r.Alpha2(), r.Beta2()...)
	}
	var a, b float64
	for i := range read[0] {
		a, b = math.Hypot(a, read[0][i]-read[1][i]), math.Hypot(b, read[1][i]-read[2][i])
	}
	if order := math.Log2(a / b); math.Abs(order-2) > 0.1 { // the next order
		t.Errorf("the answers change by %.3g and %.3g: order %.2f, want 2", a, b, order)
	}
}

// Half the difference of two signs leaves the amplitude's square as the first
// thing by which a packet that is not small departs.
func TestStimulateIsLinear(t *testing.T) {
	p := must(flow.HalfSoliton(0.7))
	o := Options{Concentration: 7, Omega: []float64{0.2, 0.25}, TimeStep: 0.02}
	read := func(amplitude float64) []float64 {
		o.Amplitude = amplitude
		r := stimulate(t, p, o)
		return append(r.Alpha2(), r.Beta2()...)
	}
	const small, medium, large = 1e-4, 0.005, 0.01
	base, once, twice := read(small), read(medium), read(large)
	var a, b, size float64
	for i, v := range base {
		a, b, size = math.Hypot(a, once[i]-v), math.Hypot(b, twice[i]-v), math.Hypot(size, v)
	}
	if ratio := b / a; math.Abs(ratio-4) > 0.2 { // the next order, of amplitude 0.01
		t.Errorf("the answers depart by %.2g and %.2g when the amplitude doubles: want 4 times", a, b)
	}
	if off := a / size * (small * small) / (medium * medium); off > 1e-6 {
		t.Errorf("at an amplitude of %g the answers are off by %.2g of themselves", small, off)
	}
	t.Logf("departures %.3g and %.3g of %.3g", a, b, size)
}

func TestStimulateRefuses(t *testing.T) {
	p := must(flow.HalfSoliton(0.7))
	var frequency *FrequencyError
	if _, err := Stimulate(context.Background(), p, Options{Omega: []float64{0.1, 0.7}}); !errors.As(err, &frequency) || frequency.Omega != 0.7 {
		t.Errorf("a frequency above ω_max gives %v", err)
	}
	var step *gpe.TimeStepError
	if _, err := Stimulate(context.Background(), p, Options{TimeStep: 0.036}); !errors.As(err, &step) || step.Limit > 0.036 {
		t.Errorf("a step that resonates gives %v", err)
	}
	var work *WorkError
	if _, err := Stimulate(context.Background(), must(flow.HalfSoliton(0.99)), Options{}); !errors.As(err, &work) {
		t.Errorf("a flow hardly beyond the speed of sound gives %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	stopped := 0.0
	_, err := Stimulate(ctx, p, Options{Concentration: 7, Progress: func(done float64) { stopped = done; cancel() }})
	if !errors.Is(err, context.Canceled) || stopped > 0.02 {
		t.Errorf("a cancelled run gives %v after %.2f of it", err, stopped)
	}
}

func TestFitLine(t *testing.T) {
	var rows []*bogoliubov.Scattering
	for _, w := range []float64{0.1, 0.2, 0.4} {
		r := &bogoliubov.Scattering{Omega: w}
		r.S[bogoliubov.U][bogoliubov.D1] = 2
		r.S[bogoliubov.D2][bogoliubov.D1] = complex(0, 2*math.Exp((0.3-w/0.05)/2))
		rows = append(rows, r)
	}
	l := FitLine(rows, []float64{1, 3, 2})
	// −T from Σwω²/Σwωy by hand: 0.45/(0.45/0.05 − 0.3·1.5).
	want := Line{Temperature: 0.05, Intercept: 0.3, Thermal: 0.45 / (0.45/0.05 - 0.3*1.5)}
	for _, d := range []float64{l.Temperature - want.Temperature, l.Intercept - want.Intercept, l.Thermal - want.Thermal, l.Bend, l.At(0.2) + 3.7} {
		if math.Abs(d) > 1e-12 { // rounding
			t.Errorf("line %+v, want %+v", l, want)
		}
	}
}

func BenchmarkStimulate(b *testing.B) {
	p := must(flow.UniformSwitch(0.75, 1, 0.5, 1))
	for b.Loop() {
		stimulate(b, p, Options{})
	}
}
