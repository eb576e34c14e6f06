package flow

import (
	"math"

	"tailrace/gpe/fluid"
)

// HalfSoliton returns, in closed form, the flow over a step of zero width in
// the cubic law: half a grey soliton upstream, at whose deepest point the
// uniform downstream begins. Upstream density and sound speed are 1 and
// 0 < machUp < 1 is the upstream velocity; then n_d = m_u², m_d = m_u⁻²,
// V₀ = ½(m_u − 1/m_u)² and κ = 3(1 − m_u^{2/3})√(1 − m_u^{4/3}).
// P.-É. Larré, A. Recati, I. Carusotto, N. Pavloff, Phys. Rev. A 85, 013621
// (2012). The error, if any, is a *NoFlow.
func HalfSoliton(machUp float64) (*Transonic, error) {
	m := machUp
	if err := positive(quantity{"upstream Mach number", m}); err != nil {
		return nil, err
	}
	if m >= 1 {
		return nil, noFlow(NoSubsonicPlateau, "choose an upstream Mach number below 1",
			"upstream Mach number %.6g", m)
	}
	law := fluid.Cubic()
	t := &Transonic{
		Law:        law,
		Depth:      (1/m - m) * (1/m - m) / 2,
		Upstream:   State{1, m, 1},
		Downstream: State{m * m, 1 / m, m},
		Current:    m,
	}
	// n = m² + (1 − m²) tanh²(qx) for x < 0.
	q := math.Sqrt((1 - m) * (1 + m))
	up := newPlateau(law, t.Upstream, t.Depth, 0, true)
	half := func(x float64) node {
		sech := 1 / math.Cosh(q*x)
		tanh := math.Tanh(q * x)
		dn := -q * q * sech * sech
		A := math.Sqrt(1 + dn)
		return node{x, dn / (1 + A), q * q * q * tanh * sech * sech / A, up}
	}
	var back []node
	for x := 0.0; ; x -= spacing(up, x) {
		p := half(x)
		back = append(back, p)
		if -p.a < negligible {
			break
		}
	}
	nodes := make([]node, len(back))
	for i, p := range back {
		nodes[len(back)-1-i] = p
	}
	t.set(nodes)

	// At v = c, n³ = j² = m².
	nh := math.Cbrt(m * m)
	x := -math.Atanh(math.Sqrt((nh-m*m)/((1-m)*(1+m)))) / q
	t.Horizon = horizonAt(x, 3*(1-nh)*math.Sqrt((1-nh)*(1+nh)))
	return t, nil
}
