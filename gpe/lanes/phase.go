package lanes

import "tailrace/gpe/fluid"

// Phase multiplies each lane by its local phase under the cubic law,
//
//	ψ_j ← ψ_j exp(−iπ(v_j + g_j ρ)),  ρ = |ψ_j|².
//
// Phases are in units of π: for a sub-step dt, v is the potential times dt/π
// and g the coupling times dt/π. Both have length N and are shared by all
// lanes. The factor is accurate to 5e-16 for the phase as computed, which must
// stay below 2^51 in size. It does not allocate.
func Phase(b *Batch, v, g []float64) {
	b.check()
	checkLength("potential", len(v), b.N)
	checkLength("coupling", len(g), b.N)
	active.phaseCubic(b.Re, b.Im, v, g)
}

// PhaseLaw multiplies each lane by its local phase under any law f,
//
//	ψ_j ← ψ_j exp(−iπ(v_j + g_j f(|ψ_j|² − s_j))),
//
// with v, g as for Phase and s the density to subtract before the law is
// applied (that of the noise in symmetric order), of length N and shared by
// all lanes. Where the swollen law has no value, 2η(|ψ_j|² − s_j) < −1, the
// result is NaN; 2ηs_j < 1 excludes that.
func PhaseLaw(b *Batch, v, g, s []float64, law fluid.Law) {
	b.check()
	checkLength("potential", len(v), b.N)
	checkLength("coupling", len(g), b.N)
	checkLength("subtracted density", len(s), b.N)
	if eta := law.Swelling(); eta > 0 {
		active.phaseSwollen(b.Re, b.Im, v, g, s, eta, law.Scale())
	} else {
		active.phaseShifted(b.Re, b.Im, v, g, s)
	}
}

// Damp multiplies point j of every lane by the real number d[j]; d has length
// N. It serves absorbing regions.
func Damp(b *Batch, d []float64) {
	b.check()
	checkLength("damping", len(d), b.N)
	active.damp(b.Re, b.Im, d)
}
