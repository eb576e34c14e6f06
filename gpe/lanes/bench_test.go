package lanes

import (
	"fmt"
	"math"
	"testing"

	"github.com/mjibson/go-dsp/fft"
	"gonum.org/v1/gonum/dsp/fourier"

	"tailrace/gpe/fluid"
)

// splitStep is a problem of n points: a batch of unit density with a ripple
// and the tables of one time step.
type splitStep struct {
	plan     *Plan
	kinetic  *Kinetic
	step     *StepTable
	batch    *Batch
	v, g, s  []float64
	angle    []float64
	position float64
}

func newSplitStep(tb testing.TB, n int) *splitStep {
	tb.Helper()
	plan, err := NewPlan(n)
	if err != nil {
		tb.Fatal(err)
	}
	const dx, dt = 0.25, 0.02
	p := &splitStep{
		plan: plan, batch: NewBatch(n), step: NewStepTable(-float64(n)*dx/2, dx, n, 0.5),
		v: make([]float64, n), g: make([]float64, n), s: make([]float64, n),
	}
	angle := make([]float64, n)
	for k := range angle {
		wave := 2 * math.Pi * float64(min(k, n-k)) / (float64(n) * dx)
		angle[k] = wave * wave / 2 * dt
	}
	p.angle, p.kinetic = angle, plan.Kinetic(angle)
	for j := range p.g {
		p.g[j], p.s[j] = dt/math.Pi, 0.02
	}
	for i := range p.batch.Re {
		p.batch.Re[i] = 1 + 0.1*math.Sin(float64(i))
		p.batch.Im[i] = 0.1 * math.Cos(3*float64(i))
	}
	return p
}

// do is one Strang step with its two half phases merged into one.
func (p *splitStep) do() {
	p.advance()
	Phase(p.batch, p.v, p.g)
}

// advance is do without the phase.
func (p *splitStep) advance() {
	p.plan.Propagate(p.batch, p.kinetic)
	p.position += 0.01
	p.step.Fill(p.v, nil, 1, p.position, 0.02/math.Pi)
}

// perPoint reports the time per grid point, step and trajectory.
func perPoint(b *testing.B, n, trajectories int) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(n)/float64(trajectories), "ns/point")
}

var benchLengths = []int{1024, 2048, 4096}

func BenchmarkSplitStep(b *testing.B) {
	for _, n := range benchLengths {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			p := newSplitStep(b, n)
			b.ReportAllocs()
			for b.Loop() {
				p.do()
			}
			perPoint(b, n, Width)
		})
	}
}

// BenchmarkParts tells where the time of a step goes.
func BenchmarkParts(b *testing.B) {
	const n = 2048
	p := newSplitStep(b, n)
	ones := make([]float64, n)
	for i := range ones {
		ones[i] = 1
	}
	for _, part := range []struct {
		name string
		do   func()
	}{
		{"propagate", func() { p.plan.Propagate(p.batch, p.kinetic) }},
		{"phase cubic", func() { Phase(p.batch, p.v, p.g) }},
		{"phase shifted", func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Cubic()) }},
		{"phase swollen", func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Swollen(0.5)) }},
		{"damp", func() { Damp(p.batch, ones) }},
		{"step table", func() { p.step.Fill(p.v, nil, 1, 0.3, 0.01) }},
	} {
		b.Run(part.name, func(b *testing.B) {
			for b.Loop() {
				part.do()
			}
			perPoint(b, n, Width)
		})
	}
}

// BenchmarkTransform does a forward and a backward transform of every
// trajectory, ours and two from general-purpose libraries.
func BenchmarkTransform(b *testing.B) {
	for _, n := range benchLengths {
		b.Run(fmt.Sprintf("lanes/%d", n), func(b *testing.B) {
			norm := make([]float64, n)
			for j := range norm {
				norm[j] = 1 / float64(n)
			}
			p := newSplitStep(b, n)
			for b.Loop() {
				p.plan.Forward(p.batch)
				p.plan.Backward(p.batch)
				Damp(p.batch, norm) // or the numbers overflow
			}
			perPoint(b, n, Width)
		})
		x := make([]complex128, n)
		for i := range x {
			x[i] = complex(1, 0.1*math.Sin(float64(i)))
		}
		b.Run(fmt.Sprintf("gonum/%d", n), func(b *testing.B) {
			plan := fourier.NewCmplxFFT(n)
			y := make([]complex128, n)
			for b.Loop() {
				plan.Coefficients(y, x)
				plan.Sequence(y, y)
			}
			perPoint(b, n, 1)
		})
		b.Run(fmt.Sprintf("go-dsp/%d", n), func(b *testing.B) {
			for b.Loop() {
				fft.IFFT(fft.FFT(x))
			}
			perPoint(b, n, 1)
		})
	}
}
