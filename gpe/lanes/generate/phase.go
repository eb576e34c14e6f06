package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// The polynomials of rotate.go, highest term first.
var (
	sine = []float64{
		7.408584124510002e-07, -2.1872378330766814e-05, 0.00046628604345404966, -0.0073704272753377644,
		0.08214588614216695, -0.5992645292863936, 2.550164039875999, -5.167712780049946, 3.141592653589793,
	}
	cosine = []float64{
		4.147269028728277e-06, -0.00010456453928528452, 0.0019295555721679475, -0.02580688861695975,
		0.2353306301195154, -1.3352627688431513, 4.058712126416504, -4.934802200544677, 1,
	}
	// Those of rotate_single.go: there, cos − 1 over the square of the argument.
	sineSingle   = []float64{0.0764338076115, -0.597625374794, 2.54995775223, -5.16770219803, 3.14159250259}
	cosineSingle = []float64{-0.0239638742059, 0.234683766961, -1.33516156673, 4.0587053299, -4.93480205536}
)

type law int

const (
	cubic law = iota
	shifted
	swollen
)

// phases writes the local phases of the three laws.
func (m machine) phases() {
	for _, l := range []struct {
		law       law
		name, sig string
	}{
		{cubic, "phaseCubic", "func(re, im, potential, coupling *NUMBER, points int)"},
		{shifted, "phaseShifted", "func(re, im, potential, coupling, density *NUMBER, points int)"},
		{swollen, "phaseSwollen", "func(re, im, potential, coupling, density *NUMBER, swelling, scale NUMBER, points int)"},
	} {
		m.phase(l.name+m.name, l.sig, l.law)
	}
}

// phase is a sweep in which each point's phase t = v + g f is reduced by its
// nearest whole number n, and the field turned by (−1)^n exp(−iπ(t−n)).
func (m machine) phase(name, sig string, l law) {
	TEXT(name, NOSPLIT, m.signature(sig))
	Pragma("noescape")
	re, im := Load(Param("re"), GP64()), Load(Param("im"), GP64())
	v, g := Load(Param("potential"), GP64()), Load(Param("coupling"), GP64())
	var s reg.Register
	if l != cubic {
		s = Load(Param("density"), GP64())
	}
	var swelling, scale vec
	if l == swollen {
		swelling, scale = m.argument("swelling"), m.argument("scale")
	}
	points := Load(Param("points"), GP64())
	// What added leaves the whole part in the lowest bits of the mantissa.
	magic := m.spread(m.number(3 << 51))
	if m.single {
		magic = m.spread(m.number(3 << 22))
	}
	sines, cosines := sine, cosine
	if m.single {
		sines, cosines = sineSingle, cosineSingle
	}
	Label(name + "next")
	for _, offset := range m.halves() {
		x := z{m.load(Mem{Base: re, Disp: offset}), m.load(Mem{Base: im, Disp: offset})}
		rho := m.mul(x.re, x.re)
		m.plus(rho, x.im, x.im)
		f := rho
		coupling := m.spread(Mem{Base: g})
		if l != cubic {
			f = m.sub(rho, m.spread(Mem{Base: s}))
		}
		if l == swollen {
			// scale·y(4+9y)/(r(1+3y+r)), r = √(1+2y), y = ηn.
			one := m.spread(m.number(1))
			y := m.mul(swelling, f)
			root := m.add(y, y)
			root = m.add(root, one)
			m.do(VSQRTPD, VSQRTPS, root, root)
			over := m.spread(m.number(4))
			m.plus(over, y, m.spread(m.number(9)))
			over = m.mul(over, y)
			under := m.add(one, root)
			m.plus(under, y, m.spread(m.number(3)))
			under = m.mul(under, root)
			m.do(VDIVPD, VDIVPS, under, over, over)
			f = m.mul(over, scale)
		}
		t := m.spread(Mem{Base: v})
		m.plus(t, coupling, f)
		n := m.add(t, magic)
		part := m.sub(t, m.sub(n, magic))
		sign := m.reg()
		m.do(VPSLLQ, VPSLLD, U8(8*m.size()-1), n, sign)
		square := m.mul(part, part)
		sin, cos := m.spread(m.number(sines[0])), m.spread(m.number(cosines[0]))
		for i := 1; i < max(len(sines), len(cosines)); i++ {
			if i < len(sines) {
				m.horner(sin, square, m.number(sines[i]))
			}
			if i < len(cosines) {
				m.horner(cos, square, m.number(cosines[i]))
			}
		}
		sin = m.mul(sin, part)
		// (re + i im)(cos − i sin)
		var newRe, newIm vec
		if m.single {
			// With cos − 1 a small phase turns to the full precision of x.
			less := m.mul(cos, square)
			newRe = m.plus(m.plus(m.copy(x.re), x.im, sin), x.re, less)
			newIm = m.plus(m.minus(m.copy(x.im), x.re, sin), x.im, less)
			m.flip(newRe, sign)
			m.flip(newIm, sign)
		} else {
			m.flip(sin, sign)
			m.flip(cos, sign)
			newRe, newIm = m.mul(x.re, cos), m.mul(x.im, cos)
			m.plus(newRe, x.im, sin)
			m.minus(newIm, x.re, sin)
		}
		m.store(newRe, Mem{Base: re, Disp: offset})
		m.store(newIm, Mem{Base: im, Disp: offset})
	}
	ADDQ(U8(line), re)
	ADDQ(U8(line), im)
	ADDQ(U8(m.size()), v)
	ADDQ(U8(m.size()), g)
	if l != cubic {
		ADDQ(U8(m.size()), s)
	}
	DECQ(points)
	JNZ(LabelRef(name + "next"))
	finish(m)
}

// flip changes the sign of x where the sign bit of s is set.
func (m machine) flip(x, s vec) {
	if m.wide {
		m.do(VPXORQ, VPXORD, s, x, x)
		return
	}
	m.do(VXORPD, VXORPS, s, x, x)
}

// argument returns a parameter in all lanes.
func (m machine) argument(name string) vec {
	p, err := Param(name).Resolve()
	if err != nil {
		panic(err)
	}
	return m.spread(p.Addr)
}

// damp writes the multiplication of each point by a real number.
func (m machine) damp() {
	name := "damp" + m.name
	TEXT(name, NOSPLIT, m.signature("func(re, im, d *NUMBER, points int)"))
	Pragma("noescape")
	re, im, d := Load(Param("re"), GP64()), Load(Param("im"), GP64()), Load(Param("d"), GP64())
	points := Load(Param("points"), GP64())
	Label(name + "next")
	by := m.spread(Mem{Base: d})
	for _, offset := range m.halves() {
		for _, base := range []reg.Register{re, im} {
			at := Mem{Base: base, Disp: offset}
			m.store(m.mul(by, m.load(at)), at)
		}
	}
	ADDQ(U8(line), re)
	ADDQ(U8(line), im)
	ADDQ(U8(m.size()), d)
	DECQ(points)
	JNZ(LabelRef(name + "next"))
	finish(m)
}
