package bogoliubov

import (
	"math"
	"math/cmplx"

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
	profile flow.Profile
	omega   float64
}

// block is up to four solutions carried together.
type block struct {
	y     [4]solution
	count int
}

// slope sets out to the derivatives of the solutions in b at x.
func (m *medium) slope(out, b *block, x float64) {
	n, v := m.profile.At(x)
	dn, _ := m.profile.Gradient(x)
	c := m.profile.SoundSpeed(x)
	damp, drift, stiff, omega := complex(-dn/n, 0), complex(0, -2*v), complex(4*c*c, 0), complex(-2*m.omega, 0)
	for i := range b.count {
		y, d := &b.y[i], &out.y[i]
		d[0], d[2] = y[1], y[3]
		d[1] = stiff*y[0] + omega*y[2] + damp*y[1] + drift*y[3]
		d[3] = omega*y[0] + damp*y[3] + drift*y[1]
	}
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
	s := complex(h, 0)
	for i := range b.count {
		for c := range b.y[i] {
			b.y[i][c] += s * slope.y[i][c]
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
			c := complex(1/(ratio*ratio-1), 0)
			kept := table[k]
			table[k] = table[k-1]
			worst = 0
			for i := range b.count {
				worst = math.Max(worst, correct(&table[k].y[i], &table[k-1].y[i], &previous.y[i], c))
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
func correct(to, latest, previous *solution, c complex128) float64 {
	var delta [4]float64
	for i := range to {
		d := c * (latest[i] - previous[i])
		to[i] += d
		delta[i] = cmplx.Abs(d)
	}
	p := cmplx.Abs(to[2]) + cmplx.Abs(to[3])
	d := cmplx.Abs(to[0]) + cmplx.Abs(to[1]) + cmplx.Abs(to[3])
	return math.Max((delta[0]+delta[1])/d, (delta[2]+delta[3])/p)
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
