package gpe

import "tailrace/gpe/lanes"

// The noise of the initial state is Gaussian. Each of its modes has two real
// amplitudes, so that a trajectory starts, but for the change of its
// condensate's number, which is of second order, from
//
//	ψ = φ₀ + Σ_i y_i d_i(x),
//
// with independent y_i of unit variance. The d_i are its directions, two to a
// mode: with s the standard deviation of the real and the imaginary part of β,
// they are s(u + v*) and is(u − v*).

// Directions implements Noise.
func (w *PlaneWaves) Directions() int { return 2 * w.modes }

// Direct implements Noise.
func (w *PlaneWaves) Direct(b *lanes.Batch, first int) {
	clear(b.Re)
	clear(b.Im)
	for l := range lanes.Width {
		if (first+l)/2 >= w.modes {
			break
		}
		at := w.carriers[(first+l)/2]
		m := w.partner[at]
		u, v := (w.plus[at]+w.minus[at])/2, (w.plus[at]-w.minus[at])/2
		// u β on k and v β* on −k, which may be the same wave.
		if (first+l)%2 == 0 {
			b.Re[at*lanes.Width+l] += u
			b.Re[m*lanes.Width+l] += v
		} else {
			b.Im[at*lanes.Width+l] += u
			b.Im[m*lanes.Width+l] -= v
		}
	}
	w.plan.Backward(b)
}

// Directions implements Noise.
func (t *TrappedNoise) Directions() int { return 2 * t.modes.Count }

// Direct implements Noise.
func (t *TrappedNoise) Direct(b *lanes.Batch, first int) {
	clear(b.Re)
	clear(b.Im)
	for l := range lanes.Width {
		m := (first + l) / 2
		if m >= t.modes.Count {
			break
		}
		into, from := b.Re, t.modes.Plus
		if (first+l)%2 == 1 {
			into, from = b.Im, t.modes.Minus
		}
		for j := range t.modes.Points {
			into[j*lanes.Width+l] = t.sd[m] * from[j*t.modes.Count+m]
		}
	}
}
