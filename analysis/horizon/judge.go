package horizon

import (
	"fmt"
	"math"

	"tailrace/analysis/temperature"
)

// Limits of trust. The significance is common practice, no source; the bias is
// a third of the interval a good run reaches.
const (
	significant = 5
	fairBias    = 0.1  // of a method on the predicted band
	fairTop     = 0.5  // T_H/ω_max beyond which a thermal spectrum is cut off
	fairFlow    = 0.03 // how far densities and velocities may be from the theory's
)

// offFlow says how the flow in the windows differs from the one on which the
// reading of the band rests, or nothing.
func (a *Account) offFlow(in Input) string {
	if in.Predicted == nil {
		return "along a harmonic cloud density, speeds and temperature change while the band is made, and it is read as if they did not"
	}
	for _, p := range []struct {
		what             string
		measured, theory float64
	}{
		{"density upstream", a.Measured.Upstream.Density, a.Predicted.Upstream.Density},
		{"velocity upstream", a.Measured.Upstream.Velocity, a.Predicted.Upstream.Velocity},
		{"density downstream", a.Measured.Downstream.Density, a.Predicted.Downstream.Density},
		{"velocity downstream", a.Measured.Downstream.Velocity, a.Predicted.Downstream.Velocity},
	} {
		if off := p.measured/p.theory - 1; !(math.Abs(off) <= fairFlow) {
			return fmt.Sprintf("the %s is %.1f %% from the theory's, and the band's speeds with it", p.what, 100*off)
		}
	}
	return ""
}

// judge turns fits into readings and says which to trust.
func (a *Account) judge(in Input) {
	weak := ""
	if !a.Noiseless && !(a.Null.Significance >= significant) {
		weak = fmt.Sprintf("the band stands out by %.1f standard deviations only, %d are asked for", a.Null.Significance, significant)
		a.warn("%s: about %.0f trajectories would do", weak, math.Ceil(float64(a.Trajectories)*math.Pow(significant/math.Max(a.Null.Significance, 0.5), 2)/100)*100)
	}
	off := a.offFlow(in)
	ratio := a.Scattered / a.OmegaMax
	add := func(method string, value, low, high float64, doubt, praise string) {
		r := temperature.Reading{Method: method, Value: value, Low: low, High: high}
		bias, known := a.Bias[method]
		switch {
		case method != "template" && !known:
			r.Why = "what it makes of the predicted band could not be found out"
		case method != "template" && math.Abs(bias-1) > fairBias:
			r.Why = fmt.Sprintf("%s: on the predicted band in this window it reads %.2f of the temperature", doubt, bias)
		case method == "template" && a.Template.Saturated():
			r.Why = doubt
		case weak != "":
			r.Why = weak
		case off != "":
			r.Why = off
		case ratio > fairTop:
			r.Why = fmt.Sprintf("T_H is %.2f of ω_max: so much of the thermal spectrum is cut off that its temperature is not defined", ratio)
		case !a.Noiseless && math.IsNaN(low):
			r.Why = "the bootstrap failed"
		default:
			r.Trusted, r.Why = true, praise
			if known {
				r.Why += fmt.Sprintf("; on the predicted band in this window it reads %.2f of the temperature", bias)
			}
		}
		a.Readings = append(a.Readings, r)
	}
	if a.Width != nil {
		t, low, high := a.Width.Temperature()
		add("width", t, low, high, fmt.Sprintf("dispersion spreads the band on its way, T_H being %.2f of ω_max", ratio), "T_H is far enough below ω_max")
	}
	if a.Dispersive != nil {
		t, low, high := a.Dispersive.Temperature()
		add("dispersive", t, low, high, "it takes the spectrum for thermal, and that of this flow is not", "keeps the dispersion, with the height given by the density, and takes the spectrum for thermal")
	}
	if c := a.Coherence; c != nil {
		t, low, high := c.Temperature()
		resolves := fmt.Sprintf("the window is as long as a frequency of %.2f ω_max", c.Resolution/a.OmegaMax)
		add("coherence", t, low, high, resolves+" and the spectrum of this flow not thermal", "from the sizes at each frequency, whatever their phases; "+resolves)
	}
	if f := a.Template; f != nil {
		t, low, high := f.Temperature()
		add("template", t, low, high, "the band is as steep as these flows make it, and sharper ones are no hotter: the temperature is a bound from above only in so far as the flow is right",
			fmt.Sprintf("the exact band of the predicted flow, drawn out by %.2f", f.Factor))
	}
	for _, r := range a.Ripples {
		if w := r.Warning(in.Cure); w != "" {
			a.Warnings = append(a.Warnings, w)
		}
	}
}
