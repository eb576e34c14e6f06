package report

import (
	"fmt"
	"math"

	"tailrace/analysis/figure"
)

// SpaceTime is the noise-free density during the sweep: Density[i] at Time[i]
// on the run's grid, in condensate units.
type SpaceTime struct {
	Time    []float64
	X       []float64 // in the laboratory, from the middle of the cloud
	Density [][]float64
	Step    []float64 // its position at each time; nil for a flow at rest
	// Wave is the front of the simple wave, nil for a flow at rest.
	Wave []float64
}

// Figures writes the run's figures into folder, which must exist, as PNG and
// SVG, and returns their names.
func (r *Run) Figures(folder string) ([]string, error) {
	pages := []struct {
		name string
		page *figure.Page
	}{
		{"flow", r.flowFigure()}, {"map", r.mapFigure()}, {"cut", r.cutFigure()},
		{"coherence", r.coherenceFigure()}, {"space-time", r.spaceTimeFigure()}, {"null", r.nullFigure()},
		{"difference", r.differenceFigure()},
	}
	var names []string
	for _, p := range pages {
		if p.page == nil {
			continue
		}
		if err := p.page.Save(folder, p.name); err != nil {
			return names, err
		}
		names = append(names, p.name)
	}
	return names, nil
}

// view is how far from the horizon figures reach: the window and some more.
func (r *Run) view() (lo, hi float64) {
	w := r.Account.Window
	return 2.2*w.UpFar - 10, 1.25*w.DownFar + 5
}

func (r *Run) span(lo, hi float64) figure.Range {
	return figure.Range{Min: r.Units.Value(lo, Length), Max: r.Units.Value(hi, Length)}
}

func (r *Run) flowFigure() *figure.Page {
	a, u := r.Account, r.Units
	lo, hi := r.view()
	f := figure.Flow{
		Horizon: 0, Upstream: r.span(a.Window.UpFar, a.Window.UpNear), Downstream: r.span(a.Window.DownNear, a.Window.DownFar),
		LengthUnit: u.Axis(Length), DensityUnit: u.Axis(Density),
		Density: figure.Points{Name: "ensemble"}, Mach: figure.Points{Name: "ensemble"},
		PredictedDensity: figure.Curve{Name: "without noise"}, PredictedMach: figure.Curve{Name: "without noise"},
	}
	for j, x := range a.Map.X {
		if x < lo || x > hi || math.IsNaN(a.MeanField.Velocity[j]) {
			continue
		}
		v := u.Value(x, Length)
		f.Density.X = append(f.Density.X, v)
		f.Density.Y = append(f.Density.Y, u.Value(a.Map.MeanDensity[j], Density))
		f.Mach.X = append(f.Mach.X, v)
		f.Mach.Y = append(f.Mach.Y, a.Ensemble.Velocity[j]/a.Ensemble.SoundSpeed[j])
		f.PredictedDensity.X = append(f.PredictedDensity.X, v)
		f.PredictedDensity.Y = append(f.PredictedDensity.Y, u.Value(a.MeanField.Density[j], Density))
		f.PredictedMach.X = append(f.PredictedMach.X, v)
		f.PredictedMach.Y = append(f.PredictedMach.Y, a.MeanField.Velocity[j]/a.MeanField.SoundSpeed[j])
	}
	return f.Page()
}

func (r *Run) mapFigure() *figure.Page {
	return r.mapWith(r.Problem.Grid.Dx)
}

// mapWith shows the map on pixels of the given size.
func (r *Run) mapWith(pixel float64) *figure.Page {
	return r.mapOf(func(i, j int) float64 { return r.Account.Map.G2.At(i, j) }, "", pixel)
}

// differenceFigure shows by how many standard errors the ensemble's map differs
// from the exact one.
func (r *Run) differenceFigure() *figure.Page {
	if r.Beside == nil {
		return nil
	}
	n := len(r.Account.Map.X)
	return r.mapOf(func(i, j int) float64 { return r.Beside.Difference[i*n+j] }, "(ensemble − exact)/standard error", r.Problem.Grid.Dx)
}

// mapOf shows a function of pairs of grid points.
func (r *Run) mapOf(at func(i, j int) float64, quantity string, dx float64) *figure.Page {
	a, u := r.Account, r.Units
	lo, hi := r.view()
	var columns []int
	f := figure.Map{Quantity: quantity, LengthUnit: u.Axis(Length), WindowX: r.span(a.Window.UpFar, a.Window.UpNear), WindowXPrime: r.span(a.Window.DownNear, a.Window.DownFar)}
	for j, x := range a.Map.X {
		if x >= lo && x <= hi {
			columns = append(columns, j)
		}
	}
	cell := max(1, len(columns)/200)
	n := len(columns) / cell
	values := make([]float64, n*n)
	for i := range n {
		f.Position = append(f.Position, u.Value((a.Map.X[columns[i*cell]]+a.Map.X[columns[i*cell+cell-1]])/2, Length))
		for j := range n {
			sum := 0.0
			for _, p := range columns[i*cell : (i+1)*cell] {
				for _, q := range columns[j*cell : (j+1)*cell] {
					sum += at(p, q)
				}
			}
			values[i*n+j] = sum / float64(cell*cell)
		}
	}
	// Single points show their own noise: smoothing over a healing length or so
	// shows the band, which is wider.
	f.Value = smooth(values, n, mapSmoothing/(float64(cell)*dx))
	f.Limit = figure.OffDiagonalLimit(f.Value, n, int(8*mapSmoothing/(float64(cell)*dx)), 0.98)
	g := a.Predicted.Geometry()
	f.Band = figure.Curve{Name: fmt.Sprintf("predicted band; map smoothed, σ = %.2g %s", u.Value(mapSmoothing, Length), u.Axis(Length)),
		X: []float64{0, u.Value(a.Window.UpFar*1.5, Length)},
		Y: []float64{0, u.Value(a.Window.UpFar*1.5*g.Slope(), Length)}}
	return f.Page()
}

// mapSmoothing is the standard deviation, in ξ, of the Gaussian with which the
// map is smoothed in its figure (not in the numbers).
const mapSmoothing = 1.2

// smooth returns an n×n map smoothed by a Gaussian of sigma cells; NaN cells
// stay NaN and do not count.
func smooth(v []float64, n int, sigma float64) []float64 {
	reach := int(3*sigma) + 1
	kernel := make([]float64, 2*reach+1)
	for k := range kernel {
		d := float64(k-reach) / sigma
		kernel[k] = math.Exp(-d * d / 2)
	}
	along := func(dst, src []float64, next, line int) {
		for a := range n {
			for b := range n {
				sum, weight := 0.0, 0.0
				for k, w := range kernel {
					if c := b + k - reach; c >= 0 && c < n {
						if x := src[a*line+c*next]; !math.IsNaN(x) {
							sum += w * x
							weight += w
						}
					}
				}
				at := a*line + b*next
				dst[at] = sum / weight
				if math.IsNaN(src[at]) {
					dst[at] = math.NaN()
				}
			}
		}
	}
	once, twice := make([]float64, n*n), make([]float64, n*n)
	along(once, v, 1, n)
	along(twice, once, n, 1)
	return twice
}

func (r *Run) cutFigure() *figure.Page {
	a, u := r.Account, r.Units
	if a.Cut == nil {
		return nil
	}
	// The delay s is shown as a distance at the upstream partner's speed.
	up := a.Predicted.Geometry().Up
	place := func(s float64) float64 { return u.Value(s*up, Length) }
	f := figure.Cut{Across: "distance across the band, upstream", Unit: u.Axis(Length), Measured: figure.Points{Name: a.Source()}}
	for b, s := range a.Cut.S {
		f.Measured.X = append(f.Measured.X, place(s))
		f.Measured.Y = append(f.Measured.Y, a.Cut.Mean[b])
		if !a.Noiseless {
			f.Measured.Error = append(f.Measured.Error, a.Cut.Error[b])
		}
	}
	if a.Template != nil {
		f.Predicted = append(f.Predicted, figure.Curve{Name: "template", X: f.Measured.X, Y: a.TemplateCut})
	}
	if a.Width != nil {
		f.Fit.Name = "fit of sech²"
		first, last := a.Cut.S[0], a.Cut.S[len(a.Cut.S)-1]
		const fine = 200
		for i := range fine + 1 {
			s := first + (last-first)*float64(i)/fine
			f.Fit.X, f.Fit.Y = append(f.Fit.X, place(s)), append(f.Fit.Y, a.Width.Model(s))
			if !a.Noiseless {
				lo, hi := a.Width.Limits(s)
				f.Low, f.High = append(f.Low, lo), append(f.High, hi)
			}
		}
	}
	if a.Dispersive != nil {
		f.Predicted = append(f.Predicted,
			figure.Curve{Name: "fit with dispersion", X: f.Measured.X, Y: a.Dispersive.Model()},
			figure.Curve{Name: "scattering, nothing free", X: f.Measured.X, Y: a.PredictedCut})
	}
	return f.Page()
}

// coherenceFigure shows |⟨b_u b_d2⟩| against frequency.
func (r *Run) coherenceFigure() *figure.Page {
	a, u := r.Account, r.Units
	c := a.Coherence
	if c == nil {
		return nil
	}
	omega := u.Values(c.Omega, Rate)
	f := figure.Cut{Ordinate: "coherence of the partners, |*b*_{u} *b*_{d2}|", Across: "frequency ω", Unit: u.Axis(Rate),
		Measured:  figure.Points{Name: a.Source(), X: omega, Y: c.Value},
		Fit:       figure.Curve{Name: "thermal, fitted", X: omega, Y: c.Model(c.T)},
		Predicted: []figure.Curve{{Name: "scattering, nothing free", X: omega, Y: a.PredictedCoherence}}}
	if !a.Noiseless {
		f.Measured.Error = c.Error
	}
	return f.Page()
}

func (r *Run) spaceTimeFigure() *figure.Page {
	s, u := r.SpaceTime, r.Units
	if len(s.Time) == 0 {
		return nil
	}
	// Up to a little past the window: farther out the tail of the outflow
	// comes to the end of the grid.
	_, reach := r.view()
	end := len(s.X)
	if s.Step != nil {
		reach += s.Step[len(s.Step)-1]
		for end > 1 && s.X[end-1] > reach {
			end--
		}
	}
	f := figure.SpaceTime{Position: u.Values(s.X[:end], Length), Time: u.Values(s.Time, Time),
		LengthUnit: u.Axis(Length), TimeUnit: u.Axis(Time), DensityUnit: u.Axis(Density)}
	for _, row := range s.Density {
		f.Density = append(f.Density, u.Values(row[:end], Density)...)
	}
	if s.Step != nil {
		f.Step = figure.Curve{Name: "step", X: u.Values(s.Step, Length), Y: f.Time}
	}
	if s.Wave != nil {
		f.Characteristics = []figure.Curve{{Name: "front of the wave, at *c*_{0}", X: u.Values(s.Wave, Length), Y: f.Time}}
	}
	return f.Page()
}

func (r *Run) nullFigure() *figure.Page {
	n := r.Account.Null
	if len(n.Shuffled) == 0 {
		return nil
	}
	return figure.Null{Shuffled: n.Shuffled, Measured: n.Strength,
		Strength: "strength of the band over its prediction",
		Note:     fmt.Sprintf("%.1f standard deviations", n.Significance)}.Page()
}
