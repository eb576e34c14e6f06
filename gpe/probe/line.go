package probe

import (
	"math"

	"gonum.org/v1/gonum/stat"

	"tailrace/gpe/bogoliubov"
)

// Line is the straight line ln(|β|²/|α|²) = Intercept − ω/Temperature. For a
// thermal horizon the intercept vanishes.
type Line struct {
	Temperature float64 // in m c₀²
	Intercept   float64
	Bend        float64 // weighted r.m.s. distance of the points from the line
	Thermal     float64 // temperature of the best line without intercept
}

// FitLine fits the line to |α|² = |S_ud1|² and |β|² = |S_d2d1|² of at least
// three frequencies, with the given weights; nil weights are equal.
func FitLine(rows []*bogoliubov.Scattering, weight []float64) Line {
	if len(rows) < 3 || weight != nil && len(weight) != len(rows) {
		panic("probe: a line needs three frequencies and as many weights")
	}
	omega, ratio := make([]float64, len(rows)), logRatio(rows)
	for i, s := range rows {
		omega[i] = s.Omega
	}
	intercept, slope := stat.LinearRegression(omega, ratio, weight, false)
	var sum, total, square, product float64
	for i, y := range ratio {
		w := 1.0
		if weight != nil {
			w = weight[i]
		}
		off := y - intercept - slope*omega[i]
		sum += w * off * off
		total += w
		square += w * omega[i] * omega[i]
		product += w * omega[i] * y
	}
	return Line{Temperature: -1 / slope, Intercept: intercept, Bend: math.Sqrt(sum / total), Thermal: -square / product}
}

// At returns the line's ln(|β|²/|α|²) at frequency omega.
func (l Line) At(omega float64) float64 { return l.Intercept - omega/l.Temperature }

// logRatio returns ln(|S_d2d1|²/|S_ud1|²).
func logRatio(rows []*bogoliubov.Scattering) []float64 {
	alpha, beta := squares(rows, bogoliubov.U, bogoliubov.D1), squares(rows, bogoliubov.D2, bogoliubov.D1)
	for i := range beta {
		beta[i] = math.Log(beta[i] / alpha[i])
	}
	return beta
}

// squares returns |S_oi|² of each row.
func squares(rows []*bogoliubov.Scattering, out, in int) []float64 {
	x := make([]float64, len(rows))
	for i, s := range rows {
		z := s.S[out][in]
		x[i] = real(z)*real(z) + imag(z)*imag(z)
	}
	return x
}

// Alpha2 returns |α|² = |S_ud1|² at each frequency: quanta of positive norm sent
// upstream for each that came in.
func (r *Response) Alpha2() []float64 { return squares(r.Rows, bogoliubov.U, bogoliubov.D1) }

// Beta2 returns |β|² = |S_d2d1|² at each frequency: quanta of negative norm
// sent downstream for each that came in.
func (r *Response) Beta2() []float64 { return squares(r.Rows, bogoliubov.D2, bogoliubov.D1) }

// Omega returns the frequencies.
func (r *Response) Omega() []float64 {
	omega := make([]float64, len(r.Rows))
	for i, s := range r.Rows {
		omega[i] = s.Omega
	}
	return omega
}

// NormBalance returns |S_uc|² + |S_d1c|² − |S_d2c|² at each frequency for the
// packet of channel c: 1 but for errors, −1 for channel D2.
func (r *Response) NormBalance(c int) []float64 {
	sum := squares(r.Rows, bogoliubov.U, c)
	fast, partner := squares(r.Rows, bogoliubov.D1, c), squares(r.Rows, bogoliubov.D2, c)
	for i := range sum {
		sum[i] += fast[i] - partner[i]
	}
	return sum
}

// Line returns the line of the probe's own amplitudes, each frequency with the
// weight that the packet has there.
func (r *Response) Line() Line { return FitLine(r.Rows, r.Weight) }

// Temperature returns the temperature of the line.
func (r *Response) Temperature() float64 { return r.Line().Temperature }

// Comparison is the probe beside the scattering solver at the same frequencies,
// ready to be drawn: logarithms of |β|²/|α|² and their lines, fitted with the
// same weights.
type Comparison struct {
	Omega, Weight                   []float64
	Alpha2, Beta2                   []float64 // of the probe
	ScatteredAlpha2, ScatteredBeta2 []float64
	LogRatio, ScatteredLogRatio     []float64
	Line, ScatteredLine             Line
	// Emission is |S_ud2|², which is also what a horizon emits on its own, as
	// stimulated by the packet of negative norm.
	Emission, ScatteredEmission []float64
	// Worst is the largest relative difference of |α|² or |β|² where Weight is
	// above a hundredth.
	Worst float64
}

// Compare scatters waves of the same frequencies by the wave equations. The
// error is bogoliubov.ErrNotIntegrated.
func (r *Response) Compare() (*Comparison, error) {
	rows, err := r.scatterer.All(r.Omega())
	if err != nil {
		return nil, err
	}
	c := &Comparison{
		Omega: r.Omega(), Weight: r.Weight, Alpha2: r.Alpha2(), Beta2: r.Beta2(),
		ScatteredAlpha2: squares(rows, bogoliubov.U, bogoliubov.D1),
		ScatteredBeta2:  squares(rows, bogoliubov.D2, bogoliubov.D1),
		LogRatio:        logRatio(r.Rows), ScatteredLogRatio: logRatio(rows),
		Emission: squares(r.Rows, bogoliubov.U, bogoliubov.D2), ScatteredEmission: squares(rows, bogoliubov.U, bogoliubov.D2),
		Line: r.Line(), ScatteredLine: FitLine(rows, r.Weight),
	}
	for i, w := range c.Weight {
		if w > 0.01 {
			c.Worst = math.Max(c.Worst, math.Max(math.Abs(c.Alpha2[i]/c.ScatteredAlpha2[i]-1), math.Abs(c.Beta2[i]/c.ScatteredBeta2[i]-1)))
		}
	}
	return c, nil
}
