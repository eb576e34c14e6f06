package flow

import (
	"fmt"
	"testing"

	"tailrace/gpe/fluid"
)

// One solve must take less than 5 ms: a page calls it on every movement of a
// dial.
func BenchmarkSolve(b *testing.B) {
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.4)} {
		for _, width := range []float64{0, 0.1, 0.5, 1, 4} {
			b.Run(fmt.Sprintf("swelling=%g/width=%g", law.Swelling(), width), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					if _, err := Sweep(law, 0.4, 1, width); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
