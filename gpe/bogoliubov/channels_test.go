package bogoliubov

import (
	"testing"

	"tailrace/gpe/flow"
)

// All waves obey the dispersion relation, their speed is dω/dk, and ingoing ones
// move towards the horizon.
func TestChannels(t *testing.T) {
	for _, s := range [][2]flow.State{{uniformUp, uniformDown}, {sweptUp, sweptDown}} {
		up, down := s[0], s[1]
		top := MaxFrequency(down.Velocity, down.SoundSpeed)
		for _, share := range []float64{0.01, 0.5, 0.95, 1.2} {
			omega := share * top
			in, out := Channels(omega, up, down)
			const step = 1e-4
			inAbove, outAbove := Channels(omega*(1+step), up, down)
			inBelow, outBelow := Channels(omega*(1-step), up, down)
			for c := range 3 {
				side, towards := down, -1.0
				if c == U {
					side, towards = up, 1
				}
				if c == D2 && share > 1 {
					if in[c] != (PlaneWave{}) || out[c] != (PlaneWave{}) {
						t.Errorf("above ω_max there is a wave of negative norm")
					}
					continue
				}
				for _, w := range []struct {
					is, above, below PlaneWave
					direction        float64
				}{{in[c], inAbove[c], inBelow[c], towards}, {out[c], outAbove[c], outBelow[c], -towards}} {
					norm := map[int]int{U: 1, D1: 1, D2: -1}[c]
					near(t, "ω", side.Velocity*w.is.K+float64(norm)*Energy(w.is.K, side.SoundSpeed), omega, 1e-12*(1+w.is.K*w.is.K)) // rounding
					if w.is.Norm != norm || w.is.Speed*w.direction <= 0 {
						t.Errorf("channel %d at ω = %.3g: %+v moves the wrong way or has the wrong norm", c, omega, w.is)
					}
					speed := 2 * step * omega / (w.above.K - w.below.K)
					near(t, "dω/dk over the speed", speed/w.is.Speed, 1, 1e-5) // steep near ω_max: step²/(1 − share)²
				}
			}
			k, speed := OutgoingUp(omega, up.Velocity, up.SoundSpeed)
			near(t, "k_u", out[U].K, k, 1e-14)
			near(t, "|w_u|", -out[U].Speed, speed, 1e-14)
		}
	}
}
