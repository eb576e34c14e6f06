package band

import (
	"fmt"
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/fit"
)

// Line is the band as found in the map without holding it to the predicted
// angle: the least-squares fit of
//
//	−A sech²(κ(x/(c_u−v_u) + p x′/(v_d−c_d) − s₀)/2) + offset
//
// to the window, all five free. Its slope is −(v_d−c_d)/((c_u−v_u)p).
type Line struct {
	Amplitude, Kappa, Ratio, Delay, Offset float64 // A, κ, p, s₀, offset
	Slope, SlopeError                      float64 // bootstrap over shots
	Resamples, Failed                      int
}

// cellDelay is the size of a cell of the coarse map in units of 1/κ: the
// band's full width is 3.5/κ.
const cellDelay = 0.6

// FitLine fits the band's line. Kappa is where it starts; resamples is the
// number of bootstrap samples behind the slope's error.
func FitLine(s *Sides, g Geometry, kappa float64, resamples int, seed uint64) (*Line, error) {
	coarse := s.cells(g, kappa)
	m := newLineModel(coarse, g)
	best, err := m.fit(coarse.Correlation(), []float64{m.scale, kappa, 1, 0, 0})
	if err != nil {
		return nil, fmt.Errorf("the band's line could not be fitted: %w", err)
	}
	l := &Line{Amplitude: best[0] * m.unit, Kappa: best[1], Ratio: best[2], Delay: best[3], Offset: best[4] * m.unit}
	l.Slope = g.Slope() / l.Ratio
	r := rand.New(rand.NewPCG(seed, 0x11e))
	weight := make([]float64, s.Shots())
	var slopes []float64
	for range resamples {
		clear(weight)
		for range weight {
			weight[r.IntN(len(weight))]++
		}
		p, err := m.fit(coarse.weighted(weight), best)
		if err != nil {
			l.Failed++
			continue
		}
		slopes = append(slopes, g.Slope()/p[2])
	}
	l.Resamples = resamples
	if len(slopes) < 2 || l.Failed > resamples/4 {
		return l, fmt.Errorf("the band's slope has no error: %d of %d resamples could not be fitted; more trajectories would help", l.Failed, resamples)
	}
	l.SlopeError = stat.StdDev(slopes, nil)
	return l, nil
}

// cells averages the sides over cells in which a band of this κ hardly changes.
func (s *Sides) cells(g Geometry, kappa float64) *Sides {
	cell := cellDelay / kappa
	return s.Coarse(int(cell*g.Up/spacing(s.Xu)), int(cell*g.Down/spacing(s.Xd)))
}

// SlopeOf returns the slope that FitLine finds in a map without noise: the
// pattern at positions xu and xd, row by row of xu. A band that disperses is
// bent, and its slope depends on where it is looked at.
func SlopeOf(s *Sides, g Geometry, kappa float64, pattern func(xu, xd []float64) []float64) (float64, error) {
	coarse := s.cells(g, kappa)
	c := mat.NewDense(len(coarse.Xu), len(coarse.Xd), pattern(coarse.Xu, coarse.Xd))
	m := &lineModel{s: coarse, g: g, scale: 1, unit: mat.Norm(c, 2) / math.Sqrt(float64(len(coarse.Xu)*len(coarse.Xd)))}
	best, err := m.fit(c, []float64{m.scale, kappa, 1, 0, 0})
	if err != nil {
		return math.NaN(), fmt.Errorf("the predicted band's line could not be fitted: %w", err)
	}
	return g.Slope() / best[2], nil
}

// weighted returns the correlation of a bootstrap sample in which shot i
// stands weight[i] times.
func (s *Sides) weighted(weight []float64) *mat.Dense {
	rows, cols := s.U.Dims()
	scaled := mat.NewDense(rows, cols, nil)
	for i, w := range weight {
		for k, u := range s.U.RawRowView(i) {
			scaled.Set(i, k, w*u)
		}
	}
	var g mat.Dense
	g.Mul(scaled.T(), s.D)
	g.Scale(1/float64(rows-1), &g)
	return &g
}

type lineModel struct {
	s     *Sides
	g     Geometry
	unit  float64 // the map is fitted in this unit, so that parameters are of order one
	scale float64
}

func newLineModel(s *Sides, g Geometry) *lineModel {
	m := &lineModel{s: s, g: g, scale: 1}
	c := s.Correlation()
	m.unit = mat.Norm(c, 2) / math.Sqrt(float64(len(s.Xu)*len(s.Xd)))
	return m
}

func (m *lineModel) fit(c *mat.Dense, start []float64) ([]float64, error) {
	nu, nd := len(m.s.Xu), len(m.s.Xd)
	kappa := start[1]
	reach := 8 / kappa
	problem := fit.Problem{
		Count: nu * nd,
		Start: start,
		Scale: []float64{1, kappa, 1, 1 / kappa, 1},
		Lower: []float64{-1e3, kappa / 6, 0.3, start[3] - reach, -1e3},
		Upper: []float64{1e3, kappa * 6, 3, start[3] + reach, 1e3},
		Residuals: func(dst, p []float64) {
			for i, x := range m.s.Xu {
				for j, xp := range m.s.Xd {
					y := p[1] / 2 * (x/m.g.Up + p[2]*xp/m.g.Down - p[3])
					dst[i*nd+j] = -p[0]*Sech2(y) + p[4] - c.At(i, j)/m.unit
				}
			}
		},
		Jacobian: func(dst *mat.Dense, p []float64) {
			for i, x := range m.s.Xu {
				for j, xp := range m.s.Xd {
					s := x/m.g.Up + p[2]*xp/m.g.Down - p[3]
					y := p[1] / 2 * s
					f := Sech2(y)
					d := 2 * p[0] * f * math.Tanh(y) // ∂/∂y
					dst.SetRow(i*nd+j, []float64{-f, d * s / 2, d * p[1] / 2 * xp / m.g.Down, -d * p[1] / 2, 1})
				}
			}
		},
	}
	r, err := fit.Solve(problem, fit.Options{FunctionTolerance: 1e-9, StepTolerance: 1e-7, MaxIterations: 100})
	if err != nil {
		return nil, err
	}
	return r.Params, nil
}
