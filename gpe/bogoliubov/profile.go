package bogoliubov

import "math"

// Profile is the band averaged over groups of points, such as the bins of a
// cut across it. What does not depend on temperature and delay is summed once,
// so that a fit evaluates it in microseconds.
type Profile struct {
	omega, weight []float64
	cos, sin      []float64 // mean of cos and sin(k_u x − k_d x′), [groups × waves]
	groups        int
}

// Profile returns the band's average over groups of the window's points: group
// tells the group of point (i, j), or a negative number for none. It panics
// when a group is empty.
func (w *Window) Profile(groups int, group func(i, j int) int) *Profile {
	n := len(w.rule.omega)
	p := &Profile{omega: w.rule.omega, weight: w.rule.weight, groups: groups,
		cos: make([]float64, groups*n), sin: make([]float64, groups*n)}
	members := make([]float64, groups)
	for i := range w.x.Rows {
		x := w.x.Data[i*w.x.Stride:]
		for j := range w.xp.Rows {
			b := group(i, j)
			if b < 0 {
				continue
			}
			members[b]++
			xp := w.xp.Data[j*w.xp.Stride:]
			for q := range n {
				c, s, cp, sp := x[2*q], x[2*q+1], xp[2*q], xp[2*q+1]
				p.cos[b*n+q] += c*cp + s*sp
				p.sin[b*n+q] += s*cp - c*sp
			}
		}
	}
	for b, m := range members {
		if m == 0 {
			panic("bogoliubov: a group of points is empty")
		}
		for q := range n {
			p.cos[b*n+q] /= m
			p.sin[b*n+q] /= m
		}
	}
	return p
}

// At sets dst to g₂ − 1 of each group for temperature T and delay t0, within
// the range given to Over, and returns it; nil allocates.
func (p *Profile) At(dst []float64, T, t0 float64) []float64 {
	return p.Paired(dst, thermalPairing(p.omega, T), t0)
}

// Paired is At for a given pairing ⟨b_u b_d2⟩ at the profile's frequencies.
func (p *Profile) Paired(dst []float64, pairing []complex128, t0 float64) []float64 {
	if dst == nil {
		dst = make([]float64, p.groups)
	}
	clear(dst)
	n := len(p.omega)
	for q, omega := range p.omega {
		sin, cos := math.Sincos(omega * t0)
		z := complex(p.weight[q], 0) * pairing[q] * complex(cos, sin)
		a, b := real(z), imag(z)
		for g := range dst {
			dst[g] += a*p.cos[g*n+q] - b*p.sin[g*n+q]
		}
	}
	return dst
}
