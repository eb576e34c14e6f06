package interpretation

import (
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/band"
	"tailrace/analysis/horizon"
	"tailrace/gpe/bogoliubov"
)

// Along is the band's strength along its length: a slice for each stretch of
// time since the partners left the horizon. A band of a horizon starts there and
// ends where the first pairs have come, at the horizon's age.
type Along struct {
	Age    float64 // of the horizon; NaN if it is not known
	Slices []Slice
	// Front is the age at which the strength falls through a half for good, NaN
	// where it does not within the picture.
	Front float64
}

// Slice is one stretch: From to To is the age of the pairs in it.
type Slice struct {
	From, To        float64
	Strength, Error float64 // over the prediction, and its standard error
}

// along measures it in a window that reaches past the band's end.
func (r *Interpretation) along(p horizon.Pictures) (*Along, error) {
	const slices, past = 10, 1.3
	a := r.Account
	g := a.Predicted.Geometry()
	age := r.Input.Age
	x := make([]float64, len(p.X))
	for j := range x {
		x[j] = p.X[j] - a.Predicted.Horizon.Position
	}
	reach := math.Min(-x[0]/g.Up, x[len(x)-1]/g.Down)
	if !math.IsNaN(age) {
		reach = math.Min(reach, past*age)
	}
	near := math.Max(-a.Window.UpNear/g.Up, a.Window.DownNear/g.Down)
	if reach < 1.5*near {
		return nil, nil
	}
	mean, _ := p.Mean()
	s, err := band.NewSides(p.Shots, x, mean, band.Window{UpFar: -reach * g.Up, UpNear: a.Window.UpNear, DownNear: a.Window.DownNear, DownFar: reach * g.Down})
	if err != nil {
		return nil, err
	}
	theory := bogoliubov.NewBand(a.Predicted.Upstream, a.Predicted.Downstream, r.Input.AtomsPerLength)
	theory.SetResponse(r.Input.Camera.Response(r.Rest))
	w := theory.Over(s.Xu, s.Xd, a.Scattered/2, 1)
	scatterer, err := bogoliubov.NewScatterer(r.Input.Predicted)
	if err != nil {
		return nil, err
	}
	pairing, err := w.Pairing(scatterer, r.Input.Temperature)
	if err != nil {
		return nil, err
	}
	pattern := w.Paired(nil, pairing, 0)
	out := &Along{Age: age, Front: math.NaN()}
	for i := range slices {
		from, to := near+(reach-near)*float64(i)/slices, near+(reach-near)*float64(i+1)/slices
		template := mat.NewDense(len(s.Xu), len(s.Xd), nil)
		var mean, norm, count float64
		inside := func(j, k int) bool {
			t := (-s.Xu[j]/g.Up + s.Xd[k]/g.Down) / 2
			return t >= from && t < to
		}
		for j := range s.Xu {
			for k := range s.Xd {
				if inside(j, k) {
					mean += pattern[j*len(s.Xd)+k]
					count++
				}
			}
		}
		if count < 16 {
			continue
		}
		mean /= count
		for j := range s.Xu {
			for k := range s.Xd {
				if inside(j, k) {
					v := pattern[j*len(s.Xd)+k] - mean
					template.Set(j, k, v)
					norm += v * v
				}
			}
		}
		var weighted mat.Dense
		weighted.Mul(s.U, template)
		values := make([]float64, s.Shots())
		for m := range values {
			for k, v := range s.D.RawRowView(m) {
				values[m] += weighted.At(m, k) * v / norm
			}
		}
		m, sd := stat.MeanStdDev(values, nil)
		out.Slices = append(out.Slices, Slice{from, to, m, sd / math.Sqrt(float64(len(values)))})
	}
	for i := len(out.Slices) - 1; i > 0; i-- {
		before, after := out.Slices[i-1], out.Slices[i]
		if before.Strength >= 0.5 && after.Strength < 0.5 {
			f := (before.Strength - 0.5) / (before.Strength - after.Strength)
			out.Front = (before.From+before.To)/2*(1-f) + (after.From+after.To)/2*f
			break
		}
	}
	return out, nil
}
