package lanes

import (
	"fmt"
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

// singleStep is splitStep in single precision: the potential is made in double
// precision and rounded once a step.
type singleStep struct {
	*splitStep
	plan    *SinglePlan
	kinetic *SingleKinetic
	batch   *Single
	v, g, s []float32
}

func newSingleStep(tb testing.TB, n int) *singleStep {
	tb.Helper()
	d := newSplitStep(tb, n)
	plan, err := NewSinglePlan(n)
	if err != nil {
		tb.Fatal(err)
	}
	p := &singleStep{splitStep: d, plan: plan, kinetic: plan.Kinetic(d.angle), batch: NewSingle(n),
		v: make([]float32, n), g: make([]float32, n), s: make([]float32, n)}
	Load(p.batch, 0, d.batch)
	Load(p.batch, 1, d.batch)
	Round(p.g, d.g)
	Round(p.s, d.s)
	return p
}

// do is one Strang step as splitStep.do makes it.
func (p *singleStep) do() {
	p.advance()
	Phase(p.batch, p.v, p.g)
}

// advance is do without the phase.
func (p *singleStep) advance() {
	p.plan.Propagate(p.batch, p.kinetic)
	p.position += 0.01
	p.step.Fill(p.splitStep.v, nil, 1, p.position, 0.02/math.Pi)
	Round(p.v, p.splitStep.v)
}

func BenchmarkSplitStepSingle(b *testing.B) {
	for _, n := range benchLengths {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			p := newSingleStep(b, n)
			b.ReportAllocs()
			for b.Loop() {
				p.do()
			}
			perPoint(b, n, SingleWidth)
		})
	}
}

// BenchmarkPartsSingle tells where the time of a step goes.
func BenchmarkPartsSingle(b *testing.B) {
	const n = 2048
	p := newSingleStep(b, n)
	for _, part := range []struct {
		name string
		do   func()
	}{
		{"propagate", func() { p.plan.Propagate(p.batch, p.kinetic) }},
		{"phase cubic", func() { Phase(p.batch, p.v, p.g) }},
		{"phase shifted", func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Cubic()) }},
		{"phase swollen", func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Swollen(0.5)) }},
		{"round the table", func() { Round(p.v, p.splitStep.v) }},
		{"load and store", func() { Load(p.batch, 0, p.splitStep.batch); Store(p.splitStep.batch, p.batch, 0) }},
	} {
		b.Run(part.name, func(b *testing.B) {
			for b.Loop() {
				part.do()
			}
			perPoint(b, n, SingleWidth)
		})
	}
}
