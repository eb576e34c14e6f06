// Package band looks, in a set of density profiles, for the band that joins
// the two sides of a horizon: correlated pairs of waves that leave it together,
// one upstream and one downstream, and so lie at every moment on the line
// x′/x = −(v_d − c_d)/(c_u − v_u) of the correlation map.
//
// x < 0 is upstream, x′ > 0 downstream, both measured from the step.
package band

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/moments"
)

// Geometry is the speed at which the partners leave the horizon.
type Geometry struct {
	Up   float64 // c_u − v_u
	Down float64 // v_d − c_d
}

// Slope returns dx′/dx of the band, −(v_d − c_d)/(c_u − v_u).
func (g Geometry) Slope() float64 { return -g.Down / g.Up }

// Delay returns s = x/(c_u − v_u) + x′/(v_d − c_d), the difference of the times
// at which waves now at x and x′ left the horizon; the band is at s = 0 and its
// profile is a function of s.
func (g Geometry) Delay(x, xp float64) float64 { return x/g.Up + xp/g.Down }

// Window is the part of the map that is analysed: UpFar < x < UpNear < 0 and
// 0 < DownNear < x′ < DownFar, in ξ.
type Window struct {
	UpFar, UpNear, DownNear, DownFar float64
}

// AgedWindow returns the window in which a horizon of the given age has had
// time to make a band: from near·ξ off the step, clear of its near field, to
// the given fraction of the way that the partners have come.
func AgedWindow(g Geometry, age, near, fraction float64) Window {
	return Window{UpFar: -fraction * g.Up * age, UpNear: -near, DownNear: near, DownFar: fraction * g.Down * age}
}

// ErrWindow reports a window that holds too few points or no cloud.
type ErrWindow struct {
	Side string
	Why  string
}

func (e *ErrWindow) Error() string {
	return fmt.Sprintf("the %s window cannot be used: %s", e.Side, e.Why)
}

// Sides are the relative density fluctuations δn/n of each shot in the two
// windows, with the mean over shots taken out.
type Sides struct {
	Xu, Xd []float64  // positions, [nu], [nd]
	U, D   *mat.Dense // [shots×nu], [shots×nd]
	Nu, Nd float64    // mean density of each window, in n₀
	// Noiseless marks sides whose rows are no shots (NoiselessSides): there is
	// no chance in their correlation, and no scatter to weigh it by.
	Noiseless bool
}

// minPoints is the least number of points on a side with which a band's
// profile and slope can be fitted at all.
const minPoints = 8

// NewSides cuts the windows out of shots at positions x (from the step). The
// mean density is that of the normally ordered map. It returns *ErrWindow when
// a window has fewer than 8 points, leaves the grid, or holds points with less
// than a tenth of its own mean density.
func NewSides(shots moments.Shots, x, mean []float64, w Window) (*Sides, error) {
	up, err := columns("upstream", x, mean, w.UpFar, w.UpNear)
	if err != nil {
		return nil, err
	}
	down, err := columns("downstream", x, mean, w.DownNear, w.DownFar)
	if err != nil {
		return nil, err
	}
	s := &Sides{}
	s.Xu, s.U, s.Nu = cut(shots, x, mean, up)
	s.Xd, s.D, s.Nd = cut(shots, x, mean, down)
	return s, nil
}

// Check returns the error that NewSides would: whether a window can be used
// with this mean density.
func (w Window) Check(x, mean []float64) error {
	if _, err := columns("upstream", x, mean, w.UpFar, w.UpNear); err != nil {
		return err
	}
	_, err := columns("downstream", x, mean, w.DownNear, w.DownFar)
	return err
}

func columns(side string, x, mean []float64, lo, hi float64) ([]int, error) {
	if lo < x[0] || hi > x[len(x)-1] {
		return nil, &ErrWindow{side, fmt.Sprintf("it reaches from %.4g to %.4g, the grid from %.4g to %.4g", lo, hi, x[0], x[len(x)-1])}
	}
	var c []int
	total := 0.0
	for j, v := range x {
		if v >= lo && v <= hi {
			c = append(c, j)
			total += mean[j]
		}
	}
	if len(c) < minPoints {
		return nil, &ErrWindow{side, fmt.Sprintf("from %.4g to %.4g it has %d points, at least %d are needed; record later, so that the band is longer", lo, hi, len(c), minPoints)}
	}
	for _, j := range c {
		if mean[j] < 0.1*total/float64(len(c)) {
			return nil, &ErrWindow{side, fmt.Sprintf("there is hardly any cloud at %.4g", x[j])}
		}
	}
	return c, nil
}

func cut(shots moments.Shots, x, mean []float64, c []int) (pos []float64, f *mat.Dense, density float64) {
	f = mat.NewDense(shots.Count(), len(c), nil)
	for k, j := range c {
		pos = append(pos, x[j])
		density += mean[j] / float64(len(c))
		sum := 0.0
		for i := range shots.Count() {
			sum += float64(shots.Shot(i)[j])
		}
		sum /= float64(shots.Count())
		for i := range shots.Count() {
			f.Set(i, k, (float64(shots.Shot(i)[j])-sum)/mean[j])
		}
	}
	return pos, f, density
}

// Shots returns the number of shots.
func (s *Sides) Shots() int { n, _ := s.U.Dims(); return n }

// Correlation returns g₂ − 1 between the windows, [nu×nd].
func (s *Sides) Correlation() *mat.Dense {
	var g mat.Dense
	g.Mul(s.U.T(), s.D)
	g.Scale(1/float64(s.Shots()-1), &g)
	return &g
}

// Coarse returns the sides averaged over cells of up and down points.
func (s *Sides) Coarse(up, down int) *Sides {
	o := &Sides{Nu: s.Nu, Nd: s.Nd}
	o.Xu, o.U = coarse(s.Xu, s.U, up)
	o.Xd, o.D = coarse(s.Xd, s.D, down)
	return o
}

func coarse(x []float64, f *mat.Dense, cell int) ([]float64, *mat.Dense) {
	cell = max(1, min(cell, len(x)/minPoints))
	n := len(x) / cell
	rows, _ := f.Dims()
	pos, out := make([]float64, n), mat.NewDense(rows, n, nil)
	for k := range n {
		pos[k] = stat.Mean(x[k*cell:(k+1)*cell], nil)
		for i := range rows {
			out.Set(i, k, stat.Mean(f.RawRowView(i)[k*cell:(k+1)*cell], nil))
		}
	}
	return pos, out
}

// spacing returns the distance of neighbouring positions.
func spacing(x []float64) float64 { return math.Abs(x[1] - x[0]) }
