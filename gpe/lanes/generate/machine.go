package main

import (
	"fmt"
	"strings"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// machine is a vector unit and the precision of its numbers. A point of all
// lanes is one register of AVX-512, two of AVX2.
type machine struct {
	wide   bool
	single bool
	name   string
}

// machines lists all that kernels are written for.
var machines = []machine{
	{wide: true, name: "AVX512"},
	{name: "AVX2"},
	{wide: true, single: true, name: "SingleAVX512"},
	{single: true, name: "SingleAVX2"},
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

// size is the size of a number in bytes.
func (m machine) size() int {
	if m.single {
		return 4
	}
	return 8
}

// signature replaces NUMBER by the Go type of a number.
func (m machine) signature(s string) string {
	return strings.ReplaceAll(s, "NUMBER", fmt.Sprintf("float%d", 8*m.size()))
}

// constant returns a number for a data section.
func (m machine) constant(v float64) Constant {
	if m.single {
		return F32(v)
	}
	return F64(v)
}

var numbers = map[string]Mem{}

// number returns the address of a constant.
func (m machine) number(v float64) Mem {
	c := m.constant(v)
	key := fmt.Sprintf("%T %v", c, v)
	at, ok := numbers[key]
	if !ok {
		at = ConstData(fmt.Sprintf("number%d", len(numbers)), c)
		numbers[key] = at
	}
	return at
}

type vec = reg.VecVirtual

func (m machine) reg() vec {
	if m.wide {
		return ZMM()
	}
	return YMM()
}

// do issues the instruction of this machine's precision.
func (m machine) do(double, single func(...Op), operands ...Op) {
	if m.single {
		single(operands...)
		return
	}
	double(operands...)
}

func (m machine) load(at Mem) vec {
	v := m.reg()
	m.do(VMOVUPD, VMOVUPS, at, v)
	return v
}

func (m machine) store(v vec, at Mem) { m.do(VMOVUPD, VMOVUPS, v, at) }

// spread loads one number into all lanes.
func (m machine) spread(at Mem) vec {
	v := m.reg()
	m.do(VBROADCASTSD, VBROADCASTSS, at, v)
	return v
}

// copy returns a copy of v.
func (m machine) copy(v vec) vec {
	c := m.reg()
	m.do(VMOVAPD, VMOVAPS, v, c)
	return c
}

func (m machine) add(a, b vec) vec { v := m.reg(); m.do(VADDPD, VADDPS, b, a, v); return v }
func (m machine) sub(a, b vec) vec { v := m.reg(); m.do(VSUBPD, VSUBPS, b, a, v); return v }
func (m machine) mul(a, b vec) vec { v := m.reg(); m.do(VMULPD, VMULPS, b, a, v); return v }

// plus returns c + a·b in c's register, minus c − a·b.
func (m machine) plus(c, a, b vec) vec  { m.do(VFMADD231PD, VFMADD231PS, b, a, c); return c }
func (m machine) minus(c, a, b vec) vec { m.do(VFNMADD231PD, VFNMADD231PS, b, a, c); return c }

// horner sets x to x·z + the number at c.
func (m machine) horner(x, z vec, c Mem) {
	if m.wide {
		m.do(VFMADD213PD_BCST, VFMADD213PS_BCST, c, z, x)
		return
	}
	m.do(VFMADD213PD, VFMADD213PS, m.spread(c), z, x)
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

// times returns a times the number that f keeps at at or in v.
func (m machine) times(a vec, at Mem, v vec) vec {
	if m.wide {
		product := m.reg()
		m.do(VMULPD_BCST, VMULPS_BCST, at, a, product)
		return product
	}
	return m.mul(a, v)
}

// timesPlus adds that product to c, timesMinus subtracts it.
func (m machine) timesPlus(c, a vec, at Mem, v vec) vec {
	if m.wide {
		m.do(VFMADD231PD_BCST, VFMADD231PS_BCST, at, a, c)
		return c
	}
	return m.plus(c, a, v)
}

func (m machine) timesMinus(c, a vec, at Mem, v vec) vec {
	if m.wide {
		m.do(VFNMADD231PD_BCST, VFNMADD231PS_BCST, at, a, c)
		return c
	}
	return m.minus(c, a, v)
}

// turn returns a·f.
func (m machine) turn(a z, f factor) z {
	re, im := m.times(a.re, f.reAt, f.re), m.times(a.re, f.imAt, f.im)
	return z{m.timesMinus(re, a.im, f.imAt, f.im), m.timesPlus(im, a.im, f.reAt, f.re)}
}

// unturn returns a times the conjugate of f.
func (m machine) unturn(a z, f factor) z {
	re, im := m.times(a.re, f.reAt, f.re), m.times(a.im, f.reAt, f.re)
	return z{m.timesPlus(re, a.im, f.imAt, f.im), m.timesMinus(im, a.re, f.imAt, f.im)}
}
