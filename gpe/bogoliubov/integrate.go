package bogoliubov

import (
	"math"

	"tailrace/gpe/flow"
)

// Small departures δψ = ψ₀(U e^{−iωt} + V* e^{iωt}) from a stationary flow obey,
// in D = U+V and P = U−V,
//
//	D″ = 4c²D − 2ωP − 2aD′ − 2ivP′,
//	P″ =      − 2ωD − 2aP′ − 2ivD′,   a = n′/2n,
//
// which is Bogoliubov's equation divided by the flow's own field: nothing but
// the density's logarithmic slope, the velocity and the speed of sound enters.
// The sum and the difference are kept apart because they differ in size by
// √(ε/E) at long wavelengths.

// medium is a flow at a frequency.
type medium struct {
	profile   flow.Profile
	localiser flow.Localiser // the profile, if it is one
	omega     float64
}

func newMedium(p flow.Profile, omega float64) *medium {
	l, _ := p.(flow.Localiser)
	return &medium{p, l, omega}
}

// block is up to four solutions carried together.
type block struct {
	y     [4]solution
	count int
}

// slope sets out to the derivatives of the solutions in b at x.
func (m *medium) slope(out, b *block, x float64) {
	f := m.local(x)
	damp, drift, stiff, omega := -f.Gradient/f.Density, 2*f.Velocity, 4*f.SoundSpeed*f.SoundSpeed, -2*m.omega
	for i := range b.count {
		y, d := &b.y[i], &out.y[i]
		d[0], d[2] = y[1], y[3]
		// −2ivP′ = 2v(Im P′ − i Re P′)
		d[1] = complex(
			stiff*real(y[0])+omega*real(y[2])+damp*real(y[1])+drift*imag(y[3]),
			stiff*imag(y[0])+omega*imag(y[2])+damp*imag(y[1])-drift*real(y[3]))
		d[3] = complex(
			omega*real(y[0])+damp*real(y[3])+drift*imag(y[1]),
			omega*imag(y[0])+damp*imag(y[3])-drift*real(y[1]))
	}
}

// local returns what the equations need of the flow at x.
func (m *medium) local(x float64) flow.Local {
	if m.localiser != nil {
		return m.localiser.Local(x)
	}
	n, v := m.profile.At(x)
	dn, _ := m.profile.Gradient(x)
	return flow.Local{Density: n, Gradient: dn, Velocity: v, SoundSpeed: m.profile.SoundSpeed(x)}
}

// Extrapolation of the modified midpoint rule, whose error goes in even powers
// of its step. W. B. Gragg, SIAM J. Numer. Anal. 2, 384 (1965); R. Bulirsch,
// J. Stoer, Numer. Math. 8, 1 (1966).
const (
	extrapolations = 9 // rows of 2, 4, … 18 substeps: order 18
	fineness       = 1e-12
)

// midpoint makes one step H in n substeps, and returns its end in to.
func (m *medium) midpoint(to, from *block, x, H float64, n int, first *block) {
	h := H / float64(n)
	var before, now, slope block
	before, now = *from, *from
	advance(&now, first, h)
	for k := 1; k < n; k++ {
		m.slope(&slope, &now, x+float64(k)*h)
		next := before
		advance(&next, &slope, 2*h)
		before, now = now, next
	}
	m.slope(&slope, &now, x+H)
	advance(&before, &slope, h)
	*to = now
	for i := range to.count {
		for c := range to.y[i] {
			to.y[i][c] = (now.y[i][c] + before.y[i][c]) / 2
		}
	}
}

func advance(b, slope *block, h float64) {
	for i := range b.count {
		y, d := &b.y[i], &slope.y[i]
		for c := range y {
			y[c] += complex(h*real(d[c]), h*imag(d[c]))
		}
	}
}

// step makes one step H from b at x, and tells how many rows it took; more
// than extrapolations means that they did not suffice and b is unchanged.
func (m *medium) step(b *block, x, H float64) (rows int) {
	var table [extrapolations]block
	var first block
	first.count = b.count
	m.slope(&first, b, x)
	for row := range extrapolations {
		n := 2 * (row + 1)
		previous := table[0]
		m.midpoint(&table[0], b, x, H, n, &first)
		worst := math.Inf(1)
		for k := 1; k <= row; k++ {
			ratio := float64(n) / float64(n-2*k)
			c := 1 / (ratio*ratio - 1)
			kept := table[k]
			table[k] = table[k-1]
			worst = 0
			for i := range b.count {
				worst = max(worst, correct(&table[k].y[i], &table[k-1].y[i], &previous.y[i], c))
			}
			previous = kept
		}
		if row >= 3 && worst <= fineness {
			*b = table[row]
			return row + 1
		}
	}
	return extrapolations + 1
}

// correct sets to += c (to − previous), where to is a copy of latest, and
// returns how large that was: the D's against what drives them, the P's against
// themselves.
func correct(to, latest, previous *solution, c float64) float64 {
	var delta, size [4]float64
	for i := range to {
		re, im := c*(real(latest[i])-real(previous[i])), c*(imag(latest[i])-imag(previous[i]))
		to[i] += complex(re, im)
		delta[i] = math.Abs(re) + math.Abs(im)
		size[i] = math.Abs(real(to[i])) + math.Abs(imag(to[i]))
	}
	return max((delta[0]+delta[1])/(size[0]+size[1]+size[3]), (delta[2]+delta[3])/(size[2]+size[3]))
}

// carry takes b from x to end. After each step tame is called, which may
// replace the solutions by combinations of them. It reports whether it came
// through.
func (m *medium) carry(b *block, x, end float64, tame func(*block)) bool {
	const longest, steps = 4, 100000
	H := math.Copysign(0.5, end-x)
	for range steps {
		if x == end {
			return true
		}
		step := H
		if last := math.Abs(H) >= math.Abs(end-x); last {
			step = end - x
		}
		rows := m.step(b, x, step)
		if rows > extrapolations {
			if H = step / 2; x+H == x {
				return false
			}
			continue
		}
		if x += step; math.Abs(x-end) <= 1e-15*math.Abs(step) {
			x = end
		}
		if tame != nil {
			tame(b)
		}
		switch {
		case rows <= 6:
			H = math.Copysign(math.Min(longest, 1.4*math.Abs(step)), step)
		case rows == extrapolations:
			H = 0.8 * step
		default:
			H = step
		}
	}
	return false
}
