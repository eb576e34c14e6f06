package bogoliubov

import (
	"math"

	"tailrace/gpe/flow"
)

// PlaneWave is a wave exp(ikx − iωt) in a uniform flow.
type PlaneWave struct {
	K     float64
	Speed float64 // dω/dk at fixed flow, in the frame of the step
	Norm  int     // the sign of |U|²−|V|²; 0 where there is no such wave
}

// Channels returns the ingoing and the outgoing waves of frequency omega > 0 of
// a flow with the given ends, subsonic upstream and supersonic downstream, in
// the order U, D1, D2. Above ω_max those of D2 are zero. Waves of negative norm
// are given as Scattering counts them: at their frequency ω > 0, so that in the
// fluid's own frame they are the wave −k of energy ε(k).
func Channels(omega float64, up, down flow.State) (in, out [3]PlaneWave) {
	inU, outU, _ := upstreamWaves(omega, up)
	in1, in2, out1, out2 := downstreamWaves(omega, down)
	if out2.norm == 0 {
		in2, out2 = wave{}, wave{}
	}
	for i, w := range [3]wave{inU, in1, in2} {
		in[i] = w.plane([3]flow.State{up, down, down}[i])
	}
	for i, w := range [3]wave{outU, out1, out2} {
		out[i] = w.plane([3]flow.State{up, down, down}[i])
	}
	return in, out
}

func (w wave) plane(s flow.State) PlaneWave {
	if w.norm == 0 {
		return PlaneWave{}
	}
	k := real(w.k)
	group := math.Copysign(groupSpeed(math.Abs(k), s.SoundSpeed), k) * float64(w.norm)
	return PlaneWave{k, s.Velocity + group, w.norm}
}
