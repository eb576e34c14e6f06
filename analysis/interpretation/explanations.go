package interpretation

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"tailrace/analysis/band"
	"tailrace/analysis/horizon"
	"tailrace/analysis/shots"
	"tailrace/gpe/bogoliubov"
)

// Explanation is a duller cause that a band, or its strength, could have, tested.
type Explanation struct {
	Name   string
	Value  float64
	Unit   string // of Value, as a dimension's name: "", "length", "temperature"
	PValue float64
	Found  bool // it is there and matters
	Why    string
}

// certain is the p-value below which an explanation counts as found: one campaign
// in a thousand is blamed for nothing.
const certain = 1e-3

func twoSided(z float64) float64 { return math.Erfc(math.Abs(z) / math.Sqrt2) }

// explain tests them all.
func (r *Interpretation) explain(p horizon.Pictures, sides *band.Sides) error {
	raw, err := r.align(shots.Raw)
	if err != nil {
		return err
	}
	rawSides, err := r.sides(raw)
	if err != nil {
		return err
	}
	r.Explanations = []Explanation{
		r.numberSpread(rawSides), r.jitter(p), r.crossTalk(sides), r.heat(sides), r.ripple(p), r.secondHorizon(p), r.tooFew(),
	}
	return nil
}

// offset returns the mean of the map over the window, and what chance makes of
// it: the mean over shots of the product of the sides' means.
func offset(s *band.Sides) (mean, err float64) {
	products := make([]float64, s.Shots())
	for i := range products {
		products[i] = stat.Mean(s.U.RawRowView(i), nil) * stat.Mean(s.D.RawRowView(i), nil)
	}
	mean, sd := stat.MeanStdDev(products, nil)
	return mean, sd / math.Sqrt(float64(len(products)))
}

// numberSpread asks for a correlation that does not follow the band's line: a
// spread σ of the atom number makes a constant σ².
func (r *Interpretation) numberSpread(raw *band.Sides) Explanation {
	mean, err := offset(raw)
	e := Explanation{Name: "spread of the atom number", Value: math.Sqrt(math.Max(mean, 0)), PValue: twoSided(mean / err)}
	// What is left of it after normalising is what could matter.
	left := 0.0
	for _, v := range r.Systematics {
		if v.What == "what goes with the number projected out" {
			left = (v.Strength - r.Account.Null.Strength) / r.Account.Null.Spread()
		}
	}
	known := r.Input.Camera.NumberSpread
	e.Found = e.PValue < certain && mean > 0 && e.Value > math.Max(1.5*known, 0.01) || math.Abs(left) > 2
	e.Why = fmt.Sprintf("before normalising the window is correlated by %.2g as a whole, as a spread of %.2g %% would make it (%.2g %% are expected); a constant is no band, and projecting the number out instead of rescaling moves the band by %.1f standard deviations",
		mean, 100*e.Value, 100*known, left)
	return e
}

// jitter asks by how much the step moves beyond what alignment knows: where the
// mean density is steep, a step out of place by d changes it by d·n′.
func (r *Interpretation) jitter(p horizon.Pictures) Explanation {
	mean, _ := p.Mean()
	e := Explanation{Name: "the step's position", Unit: "length", PValue: 1}
	n := len(mean)
	slope := make([]float64, n)
	var largest float64
	for k := 1; k < n-1; k++ {
		slope[k] = (mean[k+1] - mean[k-1]) / (p.X[k+1] - p.X[k-1])
		if math.Abs(p.X[k]) > 6 {
			slope[k] = 0
		}
		largest = math.Max(largest, math.Abs(slope[k]))
	}
	var steep float64
	for k := range slope {
		if math.Abs(slope[k]) < 0.2*largest {
			slope[k] = 0
		}
		steep += slope[k] * slope[k]
	}
	if steep == 0 {
		e.Why = "the density has no step"
		return e
	}
	// The same pattern laid elsewhere, where there is no step, is the noise.
	project := func(shift int) (variance float64, ok bool) {
		v := make([]float64, p.Shots.Count())
		for i := range v {
			row := p.Shots.Shot(i)
			for k, s := range slope {
				if s == 0 {
					continue
				}
				if k+shift < 0 || k+shift >= n {
					return 0, false
				}
				v[i] += s * (float64(row[k+shift]) - mean[k+shift]) / math.Sqrt(math.Max(mean[k+shift], 0.05))
			}
			v[i] /= steep
		}
		return stat.Variance(v, nil), true
	}
	here, _ := project(0)
	var elsewhere []float64
	pixel := p.X[1] - p.X[0]
	for _, d := range []float64{-14, -11, -8, 8, 11, 14} {
		if v, ok := project(int(d / pixel)); ok {
			elsewhere = append(elsewhere, v)
		}
	}
	if len(elsewhere) == 0 {
		e.Why = "the picture is too small beside the step"
		return e
	}
	noise, scatter := stat.Mean(elsewhere, nil), 0.0
	if len(elsewhere) > 1 {
		scatter = stat.StdDev(elsewhere, nil)
	}
	var scale float64 // of the pattern in units of √n
	for k, s := range slope {
		scale += s * s / math.Sqrt(math.Max(mean[k], 0.05)) / steep
	}
	moved := (here - noise) / (scale * scale)
	known := r.Rest * r.Rest
	err := math.Hypot(here*math.Sqrt(2/float64(p.Shots.Count())), scatter) / (scale * scale)
	e.Value = math.Sqrt(math.Max(moved-known, 0))
	e.PValue = twoSided(math.Max(moved-known, 0) / err)
	e.Found = e.PValue < certain && e.Value > 0.3*math.Max(r.Input.Camera.Resolution, pixel)
	e.Why = fmt.Sprintf("the density at the step scatters as if it were out of place by %.2g ξ beyond what alignment leaves (%.2g ξ): that blurs the band, and it reads too cold", e.Value, r.Rest)
	return e
}

// crossTalk asks whether places that have nothing to do with each other are
// correlated: both ends of the upstream window, farther apart than sound and
// optics reach.
func (r *Interpretation) crossTalk(s *band.Sides) Explanation {
	e := Explanation{Name: "cross-talk in the pictures", PValue: 1}
	var products []float64
	count := 0
	third := len(s.Xu) / 3
	for i := range s.Shots() {
		row := s.U.RawRowView(i)
		products = append(products, stat.Mean(row[:third], nil)*stat.Mean(row[len(row)-third:], nil))
		count++
	}
	mean, sd := stat.MeanStdDev(products, nil)
	err := sd / math.Sqrt(float64(count))
	e.Value, e.PValue = mean, twoSided(mean/err)
	// Sound waves are correlated there by −1/(2π n c d²), and the number's
	// normalisation makes a small constant.
	apart := (s.Xu[len(s.Xu)-1] - s.Xu[0]) * 2 / 3
	allowed := 1.5 / (2 * math.Pi * r.Input.AtomsPerLength * apart * apart)
	e.Found = e.PValue < certain && math.Abs(mean) > 2*allowed
	e.Why = fmt.Sprintf("the two ends of the upstream window, %.3g ξ apart, are correlated by %.2g ± %.2g, where waves make about %.1g: what is more comes from the camera or from the normalisation", apart, mean, err, allowed)
	return e
}

// heat takes the temperature of the cloud from its own density waves upstream,
// short ones that the horizon hardly emits: their power is coth(ε/2T) times the
// vacuum's.
func (r *Interpretation) heat(s *band.Sides) Explanation {
	e := Explanation{Name: "phonons already there", Unit: "temperature", PValue: 1}
	up := r.Account.Predicted.Upstream
	c := r.Input.Camera
	var ks []float64
	for k := 0.4; k <= 1.2; k += 0.2 {
		if c.Resolution*k < 1.5 {
			ks = append(ks, k*up.SoundSpeed)
		}
	}
	if len(ks) == 0 {
		e.Why = "the resolution hides the waves that would tell"
		return e
	}
	vacuum, photons := r.vacuum(s.Xu, up.Density, up.SoundSpeed, ks)
	// Each shot's mean over the waves of its power over the vacuum's.
	excess := make([]float64, s.Shots())
	for f, k := range ks {
		for i, z := range amplitudes(s.Xu, k, s.Shots(), s.U.RawRowView, vacuum[f]) {
			excess[i] += (square(z) - photons/vacuum[f] - 1) / float64(len(ks))
		}
	}
	mean, sd := stat.MeanStdDev(excess, nil)
	err := sd / math.Sqrt(float64(s.Shots()))
	// The wave k of the density is made of the ingoing mode, with the cloud's own
	// population, and of the outgoing one, with what the horizon sends.
	scatterer, failed := bogoliubov.NewScatterer(r.Input.Predicted)
	if failed != nil {
		e.Why = failed.Error()
		return e
	}
	omega := make([]float64, len(ks))
	for f, k := range ks {
		omega[f] = bogoliubov.Energy(k, up.SoundSpeed) - up.Velocity*k
	}
	rows, failed := scatterer.All(omega)
	if failed != nil {
		e.Why = failed.Error()
		return e
	}
	expected := func(T float64) (sum float64) {
		for f, k := range ks {
			in := 0.0
			if T > 0 {
				in = 1 / math.Expm1(bogoliubov.Energy(k, up.SoundSpeed)/T)
			}
			sum += (in + rows[f].ThermalEmission(T)) / float64(len(ks))
		}
		return sum
	}
	lo, hi := 0.0, 10.0
	for range 60 {
		if m := (lo + hi) / 2; expected(m) < mean {
			lo = m
		} else {
			hi = m
		}
	}
	e.Value = lo
	beyond := (mean - expected(r.Input.Temperature)) / err
	e.PValue = twoSided(math.Max(beyond, 0))
	// The response and the window's ends leave some.
	e.Found = e.PValue < certain && mean-expected(r.Input.Temperature) > 0.15
	e.Why = fmt.Sprintf("short waves upstream have %.2f ± %.2f of the vacuum's power, and at the temperature given they would have %.2f: what is more is heat (in a simulation with few atoms in a healing length, noise that has thermalised), or a camera that is not the one described", 1+mean, err, 1+expected(r.Input.Temperature))
	return e
}

// ripple asks for a standing pattern in the mean density, at wavelengths that
// fit the window.
func (r *Interpretation) ripple(p horizon.Pictures) Explanation {
	e := Explanation{Name: "a ripple in the mean density", PValue: 1}
	mean, meanError := p.Mean()
	_, _, h := r.Input.Predicted.Ends()
	w := r.Account.Window
	for _, side := range []struct{ lo, hi float64 }{{w.UpFar, w.UpNear}, {w.DownNear, w.DownFar}} {
		var x, y, sd []float64
		for k, at := range p.X {
			if at -= h.Position; at >= side.lo && at <= side.hi {
				x, y, sd = append(x, at), append(y, mean[k]), append(sd, meanError[k])
			}
		}
		level := stat.Mean(y, nil)
		intercept, slope := stat.LinearRegression(x, y, nil, false)
		var trials float64
		best, amplitude := 0.0, 0.0
		length := side.hi - side.lo
		for m := 2.0; 2*math.Pi*m/length < math.Pi/(3*(x[1]-x[0])); m++ {
			k := 2 * math.Pi * m / length
			var c, s, variance float64
			for i := range x {
				d := y[i] - intercept - slope*x[i]
				c += d * math.Cos(k*x[i])
				s += d * math.Sin(k*x[i])
				variance += sd[i] * sd[i] / 2
			}
			trials++
			// |c + is|² has an exponential distribution of mean 2·variance.
			if z := (c*c + s*s) / (2 * variance); z > best {
				best, amplitude = z, 2*math.Hypot(c, s)/float64(len(x))/level
			}
		}
		if pv := math.Min(1, 2*trials*math.Exp(-best)); pv < e.PValue {
			e.PValue, e.Value = pv, amplitude
		}
	}
	e.Found = e.PValue < certain && e.Value > 0.01
	e.Why = fmt.Sprintf("the strongest wave in the mean density of the windows has %.2g %% of it; the same in every shot it makes no correlation, but one that wanders from shot to shot does, along lines of its own", 100*e.Value)
	return e
}

// secondHorizon asks whether the flow falls below the speed of sound again
// within the picture.
func (r *Interpretation) secondHorizon(p horizon.Pictures) Explanation {
	e := Explanation{Name: "a second horizon", Unit: "length", PValue: 1}
	mean, meanError := p.Mean()
	up := r.Account.Measured.Upstream
	current := up.Density * up.Velocity
	law := r.Input.Law
	_, _, h := r.Input.Predicted.Ends()
	// The coupling is that of the predicted flow.
	sound := func(x, n float64) float64 {
		expected, _ := r.Input.Predicted.At(x)
		return r.Input.Predicted.SoundSpeed(x) * law.SoundSpeed(n) / law.SoundSpeed(expected)
	}
	run := 0
	for k, at := range p.X {
		if at-h.Position < r.Account.Window.DownNear {
			continue
		}
		n := mean[k] - 3*meanError[k]
		if n > 0 && current/n < sound(at, n) {
			if run++; run == 3 {
				e.Value, e.Found, e.PValue = p.X[k-2], true, distuv.UnitNormal.Survival(3)
				e.Why = fmt.Sprintf("%.3g ξ behind the step the density is so high that the flow, at the current of the upstream side, is slower than sound again: the region between may run away, which cavity tells", e.Value)
				return e
			}
			continue
		}
		run = 0
	}
	e.Why = "at the current of the upstream side the flow stays faster than sound to the end of the picture"
	return e
}

// tooFew asks whether the shots could show a band at all.
func (r *Interpretation) tooFew() Explanation {
	n := r.Account.Null
	reach := 1 / n.Spread()
	e := Explanation{Name: "too few shots", Value: math.Ceil(float64(r.Account.Trajectories) * math.Pow(5/reach, 2)), PValue: n.PValue}
	e.Found = reach < 3
	e.Why = fmt.Sprintf("a band of the predicted height stands %.1f standard deviations above chance in these %d shots; five need about %.0f", reach, r.Account.Trajectories, e.Value)
	return e
}
