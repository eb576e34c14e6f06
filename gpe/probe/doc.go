// Package probe sends classical waves at a sonic horizon in the full
// Gross–Pitaevskii equation and reads what comes out: stimulated emission.
//
// A wave of frequency ω that meets the horizon comes out as waves of positive
// and of negative norm. For the short wave d1, which runs against the flow
// downstream, |α|² = |S_ud1|² is what gets away upstream and |β|² = |S_d2d1|² the
// negative norm that stays downstream, and for a thermal horizon
//
//	ln(|β|²/|α|²) = −ω/T.
//
// The slope of that line is what is measured with classical waves:
// S. Weinfurtner, E. W. Tedford, M. C. J. Penrice, W. G. Unruh,
// G. A. Lawrence, Phys. Rev. Lett. 106, 021302 (2011), from memory. The
// scattering is that of package bogoliubov, found here without its equations:
// from the field itself. The two share the uniform waves' dispersion and
// amplitudes and the profile of the flow, and nothing of what happens between.
//
// # How
//
// The flow is put on a ring (gpe.Stationary). One batch carries packets of all
// three ingoing channels, each with both signs, and the flow alone; half the
// difference of the signs over the flow alone is the departure χ to third order
// in the packet's amplitude. The packets have a whole band of frequencies, all
// of which meet at the horizon at one time. When the outgoing waves are clear of
// the horizon and of each other, a window is laid over each kind; its Fourier
// transform at the wavenumber k(ω) gives the Bogoliubov amplitude, and over the
// ingoing one an element of the scattering matrix, with its phase.
//
// # What is left of errors
//
// The time step shifts the frequency of the short ingoing waves; amplitudes are
// read at the wavenumbers that they then have, after which nothing is left of it
// in a uniform flow and, at the horizon, something that falls as dt². The grid
// rounds the flow where it is sharper than the grid. And packets have tails,
// about exp(−Concentration) of their peak, that are still at the horizon, or cut
// by a window's edge, when all is read; they matter where the packet is weak. By
// default |α|² and |β|² are right to 0.5 % where the packet has at least a
// hundredth of its peak norm, and the line's temperature to 10⁻³.
//
// # What the slope means
//
// Horizons are not quite thermal: T(ω) changes with ω when it is not far below
// the scale of dispersion, and at low frequency part of the wave is thrown
// back. Then the line has an intercept and its slope is not the low-frequency
// temperature, neither here nor by scattering: for the flow of a sweep at
// (v_s, V₀, w) = (0.5, 1, 0.5) it is 0.108, where ω/ln(|α|²/|β|²) rises from
// 0.079 at ω = 0.07 to 0.103 at ω = 0.56 and emission at low frequency is that
// of 0.0702.
package probe
