package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// machine is a vector unit: registers of 8 lanes (AVX-512) or of 4, two of
// which make a point (AVX2).
type machine struct {
	wide bool
	name string
}

// line is the size in bytes of a point of all lanes in one array.
const line = 64

// halves lists the byte offsets of the registers that make a point.
func (m machine) halves() []int {
	if m.wide {
		return []int{0}
	}
	return []int{0, 32}
}

type vec = reg.VecVirtual

func (m machine) reg() vec {
	if m.wide {
		return ZMM()
	}
	return YMM()
}

func (m machine) load(at Mem) vec {
	v := m.reg()
	VMOVUPD(at, v)
	return v
}

// spread loads one number into all lanes.
func (m machine) spread(at Mem) vec {
	v := m.reg()
	VBROADCASTSD(at, v)
	return v
}

func (m machine) add(a, b vec) vec { v := m.reg(); VADDPD(b, a, v); return v }
func (m machine) sub(a, b vec) vec { v := m.reg(); VSUBPD(b, a, v); return v }
func (m machine) mul(a, b vec) vec { v := m.reg(); VMULPD(b, a, v); return v }

// plus returns c + a·b in c's register, minus c − a·b.
func plus(c, a, b vec) vec  { VFMADD231PD(b, a, c); return c }
func minus(c, a, b vec) vec { VFNMADD231PD(b, a, c); return c }

// horner sets x to x·z + the number at c.
func (m machine) horner(x, z vec, c Mem) {
	if m.wide {
		VFMADD213PD_BCST(c, z, x)
		return
	}
	VFMADD213PD(m.spread(c), z, x)
}

// z is a complex number in all lanes.
type z struct{ re, im vec }

func (a z) swap() z { return z{a.im, a.re} }

func (m machine) zadd(a, b z) z { return z{m.add(a.re, b.re), m.add(a.im, b.im)} }
func (m machine) zsub(a, b z) z { return z{m.sub(a.re, b.re), m.sub(a.im, b.im)} }

// both returns a+b and a−b.
func (m machine) both(a, b z) (sum, difference z) {
	difference = m.zsub(a, b)
	return m.zadd(a, b), difference
}

// factor is a complex number shared by all lanes: in memory, or in registers
// where the unit cannot take it from there as it multiplies.
type factor struct {
	reAt, imAt Mem
	re, im     vec
}

func (m machine) factor(re, im Mem) factor {
	f := factor{reAt: re, imAt: im}
	if !m.wide {
		f.re, f.im = m.spread(re), m.spread(im)
	}
	return f
}

// turn returns a·f.
func (m machine) turn(a z, f factor) z {
	re, im := m.reg(), m.reg()
	if m.wide {
		VMULPD_BCST(f.reAt, a.re, re)
		VMULPD_BCST(f.imAt, a.re, im)
		VFNMADD231PD_BCST(f.imAt, a.im, re)
		VFMADD231PD_BCST(f.reAt, a.im, im)
		return z{re, im}
	}
	VMULPD(f.re, a.re, re)
	VMULPD(f.im, a.re, im)
	return z{minus(re, a.im, f.im), plus(im, a.im, f.re)}
}

// unturn returns a times the conjugate of f.
func (m machine) unturn(a z, f factor) z {
	re, im := m.reg(), m.reg()
	if m.wide {
		VMULPD_BCST(f.reAt, a.re, re)
		VMULPD_BCST(f.reAt, a.im, im)
		VFMADD231PD_BCST(f.imAt, a.im, re)
		VFNMADD231PD_BCST(f.imAt, a.re, im)
		return z{re, im}
	}
	VMULPD(f.re, a.re, re)
	VMULPD(f.re, a.im, im)
	return z{plus(re, a.im, f.im), minus(im, a.re, f.im)}
}
