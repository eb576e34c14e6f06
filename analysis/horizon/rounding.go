package horizon

import (
	"fmt"
	"math"

	"tailrace/analysis/band"
	"tailrace/analysis/moments"
	"tailrace/gpe/lab"
)

// RoundingTrial returns how many of an ensemble's trajectories are carried in
// both precisions to see what single precision does to the map: one in 128, so
// that neither the share of time that it takes nor the share of chance in the
// answer depends on the ensemble, and 32 at least.
func RoundingTrial(trajectories int) int {
	return min(trajectories, max(32, trajectories/128))
}

// roundingLimit is how far single precision may move the map, in units of its
// statistical error: a fifth adds 2 % to it where both add in squares.
const roundingLimit = 0.2

// Rounding is how far time steps in single precision move the map between the
// windows.
//
// From m trajectories carried twice, with the same noise, come at each pixel
// the products p = δn(x)δn(x′)/(n(x)n(x′)) in double precision and what they
// change by in single, d. The map of M trajectories is a mean of products: its
// error is sd(p)/√M, and single precision moves it by the mean of d over the M.
// Shift is the rms over the window of the mean of d over the m, in units of the
// rms of sd(p)/√M. Its square is, in the mean, D² + var(d)/m, with D the part of
// d that all trajectories share, whereas the map of M ≥ m trajectories moves by
// D² + var(d)/M: Shift errs upwards, by Chance, the rms of sd(d)/√m in the same
// unit, where single precision does no more than roll dice. Being an rms over
// many pixels it is itself good to some ten per cent.
type Rounding struct {
	Trial        int     // m
	Trajectories int     // M
	Shift        float64 // of the map, in units of its error
	Chance       float64 // the share of so short a trial in Shift
}

// NewRounding compares shots of the same trajectories in both precisions, at
// the time of the account, for a map of so many trajectories. Its error is
// *band.ErrWindow.
func (a *Account) NewRounding(double, single moments.Shots, trajectories int) (*Rounding, error) {
	m := double.Count()
	if m < 2 || single.Count() != m || single.Pixels != double.Pixels || trajectories < m {
		panic("horizon: the trial of single precision does not match")
	}
	x := a.fromHorizon()
	before, err := band.NewSides(double, x, a.MeanField.Density, a.Window)
	if err != nil {
		return nil, err
	}
	after, err := band.NewSides(single, x, a.MeanField.Density, a.Window)
	if err != nil {
		return nil, err
	}
	var moved, chance, noise float64 // sums of squares over the window
	for i := range before.Xu {
		for j := range before.Xd {
			var p, pp, d, dd float64
			for k := range m {
				product := before.U.At(k, i) * before.D.At(k, j)
				change := after.U.At(k, i)*after.D.At(k, j) - product
				p += product
				pp += product * product
				d += change
				dd += change * change
			}
			n := float64(m)
			moved += d * d / (n * n)
			chance += (dd - d*d/n) / (n - 1) / n
			noise += (pp - p*p/n) / (n - 1) / float64(trajectories)
		}
	}
	return &Rounding{Trial: m, Trajectories: trajectories, Shift: math.Sqrt(moved / noise), Chance: math.Sqrt(chance / noise)}, nil
}

// Check is the rounding as a check.
func (r *Rounding) Check() lab.Check {
	return finish(lab.Check{Name: "single precision", Value: r.Shift, Limit: roundingLimit,
		Why: fmt.Sprintf("it moves the map by %.2g of the statistical error of %d trajectories, by %d of them carried in both precisions; of that %.2g is chance in so few", r.Shift, r.Trajectories, r.Trial, r.Chance)})
}
