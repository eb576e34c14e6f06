// Package interpretation says what measured shots show of a horizon: whether
// there is a band, what temperature it has in which thermometer, how that depends
// on choices, what duller causes it could have and whether the partners are
// entangled.
package interpretation

import (
	"fmt"
	"math"

	"tailrace/analysis/band"
	"tailrace/analysis/camera"
	"tailrace/analysis/horizon"
	"tailrace/analysis/shots"
	"tailrace/gpe"
	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

// Input is shots and what is known about them. Lengths are in ξ, densities in n₀
// and temperatures in m c₀²/k_B, but for the set's own, which Length and Density
// turn into those.
type Input struct {
	Set             *shots.Set
	Length, Density float64 // ξ and n₀ in the set's units

	Predicted      flow.Profile
	Law            fluid.Law
	AtomsPerLength float64 // n₀ξ
	Temperature    float64 // of the cloud
	Camera         camera.Camera
	Age            float64 // how long the horizon has emitted; NaN for as long as the picture shows

	Settings      horizon.Settings
	Normalisation shots.Normalisation
	Window        band.Window // empty: as the band's age allows
}

// Interpretation is what the shots say.
type Interpretation struct {
	Input    *Input
	Rejected []shots.Rejection
	Drifts   []shots.Drift
	Block    int // of the bootstrap
	Aligned  *shots.Aligned
	Rest     float64 // r.m.s. rest of the alignment, in ξ

	Account *horizon.Account
	Search  *band.Search
	Along   *Along // nil where the picture does not reach far enough

	memory       *horizon.Memory
	Systematics  []Variation
	Explanations []Explanation
	Separability *Separability
}

// Interpret goes the whole way. Its errors are those of aligning and of
// horizon.Interpret: a window that holds too few pixels.
func Interpret(in *Input) (*Interpretation, error) {
	r, pictures, err := read(in, new(horizon.Memory))
	if err != nil {
		return nil, err
	}
	in.Window = r.Account.Window
	sides, err := r.sides(pictures)
	if err != nil {
		return nil, err
	}
	r.Search = band.Find(sides, in.Settings.Shuffles, in.Settings.Seed)
	if r.Along, err = r.along(pictures); err != nil {
		return nil, err
	}
	if err := r.vary(); err != nil {
		return nil, err
	}
	if err := r.explain(pictures, sides); err != nil {
		return nil, err
	}
	r.Separability = r.separate(sides)
	return r, nil
}

// Account is the first part of Interpret alone: shots rejected and aligned, the
// band and its temperatures. Memory serves all campaigns of one flow and camera.
func Account(in *Input, memory *horizon.Memory) (*horizon.Account, error) {
	r, _, err := read(in, memory)
	if err != nil {
		return nil, err
	}
	return r.Account, nil
}

// read draws up the account.
func read(in *Input, memory *horizon.Memory) (*Interpretation, horizon.Pictures, error) {
	r := &Interpretation{Input: in, Rejected: in.Set.Odd(), Drifts: in.Set.Drifts(), memory: memory}
	r.Block = shots.BlockLength(r.Drifts, in.Set.Count)
	in.Settings.Block = r.Block
	pictures, err := r.align(in.Normalisation)
	if err != nil {
		return nil, pictures, err
	}
	h := r.flowInput(in.Camera)
	h.Memory = memory
	// How far the density is from the predicted one is how far the height of
	// the prediction can be trusted.
	h.Settings.HeightError, err = horizon.HeightError(h, pictures)
	if err != nil {
		return nil, pictures, err
	}
	r.Account, err = horizon.Interpret(h, pictures)
	return r, pictures, err
}

// align lays the shots on top of each other.
func (r *Interpretation) align(n shots.Normalisation) (horizon.Pictures, error) {
	low, high := r.view()
	a, err := r.Input.Set.Align(r.Rejected, n, r.Input.Density, low*r.Input.Length, high*r.Input.Length)
	if err != nil {
		return horizon.Pictures{}, err
	}
	if n == r.Input.Normalisation {
		r.Aligned, r.Rest = a, a.Rest/r.Input.Length
	}
	p := horizon.Pictures{Shots: a.Shots}
	for _, x := range a.X {
		p.X = append(p.X, x/r.Input.Length)
	}
	c := r.Input.Camera
	p.Granularity, p.Overlap = c.Granularity(r.Input.AtomsPerLength)
	return p, nil
}

// view is the part of the picture that is looked at: some more than the band can
// have reached, and all of it (0, 0) where that is not known.
func (r *Interpretation) view() (low, high float64) {
	up, down, _ := r.Input.Predicted.Ends()
	reach := 1.4*r.Input.Age + 40
	if math.IsNaN(reach) {
		return 0, 0
	}
	return -reach * (up.SoundSpeed - up.Velocity) * 1.5, reach * (down.Velocity - down.SoundSpeed)
}

// flowInput is what horizon.Interpret needs.
func (r *Interpretation) flowInput(c camera.Camera) horizon.Input {
	in := r.Input
	age := in.Age
	if math.IsNaN(age) {
		age = 1e6 // the window ends with the picture
	}
	return horizon.Input{
		Problem:   &gpe.Problem{AtomsPerLength: in.AtomsPerLength, Temperature: in.Temperature, Law: in.Law},
		Predicted: in.Predicted, Frame: horizon.Frame{Age: age}, Settings: in.Settings, Window: in.Window,
		Response: c.Response(r.Rest), Time: in.Set.Time,
	}
}

func (r *Interpretation) sides(p horizon.Pictures) (*band.Sides, error) {
	_, _, h := r.Input.Predicted.Ends()
	x := make([]float64, len(p.X))
	for j := range x {
		x[j] = p.X[j] - h.Position
	}
	mean, _ := p.Mean()
	return band.NewSides(p.Shots, x, mean, r.Account.Window)
}

// reading returns the reading of a method.
func reading(a *horizon.Account, method string) float64 {
	for _, t := range a.Readings {
		if t.Method == method {
			return t.Value
		}
	}
	return math.NaN()
}

// Variation is what a choice of the analysis does to the result.
type Variation struct {
	What                 string
	Strength             float64
	Dispersive, Template float64 // temperatures; NaN where the fit fails
}

// vary makes the choices differently, one at a time.
func (r *Interpretation) vary() error {
	in := r.Input
	w := r.Account.Window
	c := in.Camera
	for _, v := range []struct {
		what          string
		normalisation shots.Normalisation
		change        func(*horizon.Input)
	}{
		{"as reported", in.Normalisation, nil},
		{"atom number left as it is", shots.Raw, nil},
		{"each shot rescaled to the mean number", shots.Rescale, nil},
		{"what goes with the number projected out", shots.Project, nil},
		{"window from half as far again", in.Normalisation, func(h *horizon.Input) { h.Window.UpNear, h.Window.DownNear = 1.5*w.UpNear, 1.5*w.DownNear }},
		{"window to three quarters", in.Normalisation, func(h *horizon.Input) { h.Window.UpFar, h.Window.DownFar = 0.75*w.UpFar, 0.75*w.DownFar }},
		{"resolution a tenth coarser", in.Normalisation, func(h *horizon.Input) {
			coarse := c
			coarse.Resolution *= 1.1
			h.Response = coarse.Response(r.Rest)
		}},
		{"resolution a tenth finer", in.Normalisation, func(h *horizon.Input) {
			fine := c
			fine.Resolution *= 0.9
			h.Response = fine.Response(r.Rest)
		}},
		{"a cut half as wide", in.Normalisation, func(h *horizon.Input) { h.Settings.Span *= 0.5 }},
		{"a cut half as wide again", in.Normalisation, func(h *horizon.Input) { h.Settings.Span *= 1.5 }},
	} {
		p, err := r.align(v.normalisation)
		if err != nil {
			return err
		}
		h := r.flowInput(c)
		h.Settings.Resamples, h.Settings.Shuffles = 0, 0
		h.Memory = r.memory.SharedWith()
		if v.change != nil {
			v.change(&h)
		}
		row := Variation{What: v.what, Strength: math.NaN(), Dispersive: math.NaN(), Template: math.NaN()}
		if a, err := horizon.Interpret(h, p); err == nil {
			row.Strength, row.Dispersive, row.Template = a.Null.Strength, reading(a, "dispersive"), reading(a, "template")
		}
		r.Systematics = append(r.Systematics, row)
	}
	return nil
}

// Spread returns by how much choices move a temperature: half the range over
// all variations in which it could be found.
func (r *Interpretation) Spread(get func(Variation) float64) float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range r.Systematics {
		if x := get(v); !math.IsNaN(x) {
			lo, hi = math.Min(lo, x), math.Max(hi, x)
		}
	}
	return (hi - lo) / 2
}

// trusted returns the trusted reading that rests on least, or nil.
func (r *Interpretation) trusted() (method string, value, low, high float64, ok bool) {
	for _, m := range []string{"template", "dispersive", "coherence", "width"} {
		for _, t := range r.Account.Readings {
			if t.Method == m && t.Trusted {
				return m, t.Value, t.Low, t.High, true
			}
		}
	}
	return "", 0, 0, 0, false
}

// Claim is what stands behind a claim that there is a band: standard deviations
// above chance where the prediction says it is, and the search's own p-value.
const (
	claimSigma  = 3
	claimPValue = 0.003
)

// Seen reports whether the shots show a band: where theory predicts it, in the
// direction that it predicts, and found by a search that was not told.
func (r *Interpretation) Seen() bool {
	return r.Account.Null.Significance >= claimSigma && r.Account.Null.Strength > 0
}

// Verdict puts it in words; say prints a temperature.
func (r *Interpretation) Verdict(say func(T float64) string) string {
	a := r.Account
	text := fmt.Sprintf("There is no band: %.1f standard deviations above chance where theory puts it", a.Null.Significance)
	if r.Seen() {
		text = fmt.Sprintf("There is a band across the horizon: %.1f standard deviations above chance where theory puts it, with %.2f ± %.2f of the height predicted",
			a.Null.Significance, a.Null.Strength, a.Null.Spread())
	}
	switch {
	case r.Search.PValue <= claimPValue && r.Seen():
		text += fmt.Sprintf("; a search that was not told where to look finds it too (p = %.2g)", r.Search.PValue)
	case r.Search.PValue <= claimPValue:
		text += fmt.Sprintf("; a search that was not told where to look finds a ridge elsewhere (p = %.2g), which is not the horizon's", r.Search.PValue)
	case r.Seen():
		text += fmt.Sprintf("; a search that was not told where to look would not have found it (p = %.2g)", r.Search.PValue)
	}
	text += ". "
	if !r.Seen() {
		return text + r.need()
	}
	if m, v, lo, hi, ok := r.trusted(); ok {
		text += fmt.Sprintf("Its temperature is %s (%s to %s, by the %s), %.2f of what scattering gives for the flow. ", say(v), say(lo), say(hi), m, v/a.Scattered)
	} else {
		text += "No thermometer is to be trusted on it: the reasons are given with each. "
	}
	var found []string
	for _, e := range r.Explanations {
		if e.Found {
			found = append(found, e.Name)
		}
	}
	switch len(found) {
	case 0:
		text += "Of the duller explanations none is seen."
	case 1:
		text += "To be dealt with first: " + found[0] + "."
	default:
		text += "To be dealt with first:"
		for i, f := range found {
			if i > 0 {
				text += ","
			}
			text += " " + f
		}
		text += "."
	}
	return text
}

// need says how many shots would do.
func (r *Interpretation) need() string {
	return fmt.Sprintf("A band of the predicted height stands %.1f standard deviations above chance in %d shots; about %.0f would make it %d.",
		1/r.Account.Null.Spread(), r.Account.Trajectories, math.Ceil(float64(r.Account.Trajectories)*math.Pow(5*r.Account.Null.Spread(), 2)/100)*100, 5)
}
