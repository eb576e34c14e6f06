package horizon

import (
	"math"
	"slices"
	"sync"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/band"
	"tailrace/analysis/temperature"
	"tailrace/gpe/bogoliubov"
)

// expected is the band that scattering at the predicted flow gives, over the
// points of both windows.
type expected struct {
	theory     *bogoliubov.Band
	window     *bogoliubov.Window
	pairing    []complex128
	band       []float64 // g₂ − 1 of the partners
	background []float64 // and of what lies under them
}

// Memory keeps what theory says of one flow between accounts of its campaigns,
// for it takes longer to work out than all the rest. All of them must have the
// same response, unless SharedWith makes another. It may be used by several
// goroutines.
type Memory struct {
	mu       sync.Mutex
	xu, xd   []float64
	expect   *expected
	families []*bogoliubov.Family
}

// SharedWith returns a memory for pictures of another response, which knows the
// flow already.
func (m *Memory) SharedWith() *Memory {
	m.mu.Lock()
	defer m.mu.Unlock()
	return &Memory{families: m.families}
}

// fits reports whether what is remembered is of this window, and forgets it
// otherwise. The caller holds mu.
func (m *Memory) fits(s *band.Sides) bool {
	if slices.Equal(m.xu, s.Xu) && slices.Equal(m.xd, s.Xd) {
		return true
	}
	m.xu, m.xd, m.expect = s.Xu, s.Xd, nil
	return false
}

// expected is expect with a memory.
func (a *Account) expected(sides *band.Sides, in Input, span float64) (*expected, error) {
	if in.Memory == nil {
		return a.expect(sides, in, span)
	}
	in.Memory.mu.Lock()
	defer in.Memory.mu.Unlock()
	if in.Memory.fits(sides) && in.Memory.expect != nil {
		return in.Memory.expect, nil
	}
	e, err := a.expect(sides, in, span)
	if err == nil {
		in.Memory.expect = e
	}
	return e, err
}

// family is that of the template fit, with a memory: it depends on the flow and
// the frequencies alone.
func (a *Account) family(sides *band.Sides, e *expected, in Input) (*bogoliubov.Family, *bogoliubov.Profile, error) {
	profile := temperature.TemplateProfile(a.Cut, sides, a.Predicted.Geometry(), e.theory, a.Predicted.Horizon)
	if in.Memory == nil {
		f, err := temperature.NewFamily(a.profile, profile.Frequencies(), in.Problem.Temperature)
		return f, profile, err
	}
	in.Memory.mu.Lock()
	defer in.Memory.mu.Unlock()
	for _, f := range in.Memory.families {
		if slices.Equal(f.Omega, profile.Frequencies()) {
			return f, profile, nil
		}
	}
	f, err := temperature.NewFamily(a.profile, profile.Frequencies(), in.Problem.Temperature)
	if err == nil {
		in.Memory.families = append(in.Memory.families, f)
	}
	return f, profile, err
}

// expect puts the prediction together. A delay up to span will be asked for.
func (a *Account) expect(sides *band.Sides, in Input, span float64) (*expected, error) {
	e := &expected{theory: bogoliubov.NewBand(a.Predicted.Upstream, a.Predicted.Downstream, in.Problem.AtomsPerLength)}
	e.theory.SetResponse(in.Response)
	e.window = e.theory.Over(sides.Xu, sides.Xd, a.Scattered/2, span)
	var err error
	if e.pairing, err = e.window.Pairing(a.scatterer, in.Problem.Temperature); err != nil {
		return nil, err
	}
	e.band = e.window.Paired(nil, e.pairing, 0)
	e.background, err = a.scatterer.Background(sides.Xu, sides.Xd, in.Problem.AtomsPerLength, in.Problem.Temperature, in.Response)
	return e, err
}

// read measures the band in the window in every way there is, and judges.
func (a *Account) read(sides *band.Sides, in Input) error {
	s, g := in.Settings, a.Predicted.Geometry()
	kappa := 2 * math.Pi * a.Scattered
	// A hot horizon's band is spread by the dispersion rather than by 1/κ.
	span := math.Max(s.Span/kappa, s.Span/2/a.OmegaMax)
	e, err := a.expected(sides, in, span)
	if err != nil {
		return err
	}
	a.findStrength(sides, e, s)
	if !s.TemplateOnly {
		a.findLine(sides, e, kappa, s)
	}
	a.Cut = band.NewCut(sides, g, band.NewBins(g, sides.Xu, sides.Xd, span))
	a.Cut.Block = s.Block
	a.PredictedCut = a.Cut.Project(e.band)
	under := a.Cut.Project(e.background)
	for b := range under {
		a.PredictedCut[b] += under[b]
	}
	how := temperature.Sampling{Resamples: s.Resamples, Seed: s.Seed, HeightError: s.HeightError, Block: s.Block}
	if sides.Noiseless {
		how.Resamples = 0
	}
	a.Bias = map[string]float64{}
	if !s.TemplateOnly {
		if err := a.readSimply(sides, e, in, kappa, how); err != nil {
			return err
		}
	}
	if err := a.fitTemplate(sides, e, under, in, how); err != nil {
		return err
	}
	a.judge(in)
	return nil
}

// readSimply takes the temperatures that need no family of flows, and what each
// makes of the predicted band.
func (a *Account) readSimply(sides *band.Sides, e *expected, in Input, kappa float64, how temperature.Sampling) (err error) {
	s, g := in.Settings, a.Predicted.Geometry()
	ideal := a.Cut.With(a.PredictedCut)

	if a.Width, err = temperature.FitWidth(a.Cut, kappa, how.Resamples, s.Seed); err != nil {
		a.warn("%v", err)
	}
	if bias := temperature.WidthBias(a.Cut, a.PredictedCut, kappa) / a.Scattered; bias > 0 {
		a.Bias["width"] = bias
	}
	if a.Dispersive, err = temperature.FitDispersive(a.Cut, sides, g, e.theory, a.Scattered, how); err != nil {
		a.warn("%v", err)
	}
	if d, err := temperature.FitDispersive(ideal, sides, g, e.theory, a.Scattered, temperature.Sampling{}); err == nil {
		a.Bias["dispersive"] = d.T / a.Scattered
	}
	if a.Coherence, err = temperature.FitCoherence(sides, g, e.theory, a.OmegaMax, a.Scattered, how); err != nil {
		a.warn("%v", err)
	} else if err := a.expectCoherence(in); err != nil {
		return err
	}
	return nil
}

// findStrength measures how much of the predicted band is in the map, beyond
// what lies under it, and what chance makes of it.
func (a *Account) findStrength(sides *band.Sides, e *expected, s Settings) {
	template := band.Template(sides, e.band)
	shuffles := s.Shuffles
	if sides.Noiseless {
		shuffles = 0
	}
	a.Null = band.Shuffle(sides, template, shuffles, s.Seed)
	under := mat.NewDense(len(sides.Xu), len(sides.Xd), e.background)
	var product mat.Dense
	product.MulElem(template, under)
	a.Null.Strength -= mat.Sum(&product)
}

// findLine measures the band's slope.
func (a *Account) findLine(sides *band.Sides, e *expected, kappa float64, s Settings) {
	g := a.Predicted.Geometry()
	resamples := s.Resamples / 4
	if sides.Noiseless {
		resamples = 0
	}
	var err error
	if a.Line, err = band.FitLine(sides, g, kappa, resamples, s.Seed); err != nil && !sides.Noiseless {
		a.warn("%v", err)
	}
	a.BentSlope, err = band.SlopeOf(sides, g, kappa, func(xu, xd []float64) []float64 {
		w := e.theory.Over(xu, xd, a.Scattered/2, 1)
		pairing, err := w.Pairing(a.scatterer, 0)
		if err != nil {
			return w.Map(nil, a.Scattered, 0)
		}
		return w.Paired(nil, pairing, 0)
	})
	if err != nil {
		a.warn("%v", err)
	}
}

// expectCoherence finds what the coherence thermometer should show.
func (a *Account) expectCoherence(in Input) error {
	rows, err := a.scatterer.All(a.Coherence.Frequencies())
	if err != nil {
		return err
	}
	pairing := make([]complex128, len(rows))
	for i, r := range rows {
		pairing[i] = r.Pairing(in.Problem.Temperature)
	}
	a.PredictedCoherence = a.Coherence.Paired(pairing)
	if t, err := a.Coherence.Reads(pairing); err == nil {
		a.Bias["coherence"] = t / a.Scattered
	}
	return nil
}

// fitTemplate fits the family of the predicted flow, first with what lies under
// the band of the predicted flow and then with that of the flow found.
func (a *Account) fitTemplate(sides *band.Sides, e *expected, under []float64, in Input, how temperature.Sampling) error {
	family, profile, err := a.family(sides, e, in)
	if err != nil {
		return err
	}
	first, err := temperature.FitTemplate(a.Cut.Less(under), family, profile, temperature.Sampling{})
	if err == nil && math.Abs(math.Log(first.Factor)) > 0.1 {
		var background []float64
		if background, err = first.Background(a.profile, sides, in.Problem.AtomsPerLength, in.Problem.Temperature, in.Response); err != nil {
			return err
		}
		under = a.Cut.Project(background)
	}
	if err == nil {
		a.Template, err = temperature.FitTemplate(a.Cut.Less(under), family, profile, how)
	}
	if err != nil {
		a.warn("%v", err)
		return nil
	}
	a.TemplateCut = a.Template.Model()
	for b, v := range under {
		a.TemplateCut[b] += v
	}
	return nil
}
