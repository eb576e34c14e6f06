package lanes

import "tailrace/gpe/fluid"

// Phase multiplies each lane by its local phase under the cubic law,
//
//	ψ_j ← ψ_j exp(−iπ(v_j + g_j ρ)),  ρ = |ψ_j|².
//
// Phases are in units of π: for a sub-step dt, v is the potential times dt/π
// and g the coupling times dt/π. Both have length N and are shared by all
// lanes. The factor is accurate to 5e-16 for the phase as computed, which must
// stay below 2^51 in size; in single precision to 2e-7, below 2^22. It does not
// allocate.
func Phase[T Float](b *BatchOf[T], v, g []T) {
	b.check()
	checkLength("potential", len(v), b.N)
	checkLength("coupling", len(g), b.N)
	of[T](active).phaseCubic(b.Re, b.Im, v, g)
}

// PhaseLaw multiplies each lane by its local phase under any law f,
//
//	ψ_j ← ψ_j exp(−iπ(v_j + g_j f(|ψ_j|² − s_j))),
//
// with v, g as for Phase and s the density to subtract before the law is
// applied (that of the noise in symmetric order), of length N and shared by
// all lanes. Where the swollen law has no value, 2η(|ψ_j|² − s_j) < −1, the
// result is NaN; 2ηs_j < 1 excludes that.
func PhaseLaw[T Float](b *BatchOf[T], v, g, s []T, law fluid.Law) {
	b.check()
	checkLength("potential", len(v), b.N)
	checkLength("coupling", len(g), b.N)
	checkLength("subtracted density", len(s), b.N)
	if eta := law.Swelling(); eta > 0 {
		of[T](active).phaseSwollen(b.Re, b.Im, v, g, s, T(eta), T(law.Scale()))
	} else {
		of[T](active).phaseShifted(b.Re, b.Im, v, g, s)
	}
}

// Damp multiplies point j of every lane by the real number d[j]; d has length
// N. It serves absorbing regions.
func Damp[T Float](b *BatchOf[T], d []T) {
	b.check()
	checkLength("damping", len(d), b.N)
	of[T](active).damp(b.Re, b.Im, d)
}
