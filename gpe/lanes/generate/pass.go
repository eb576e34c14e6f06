package main

import (
	"fmt"
	"math"
	"slices"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// radices for which passes are made. Eight numbers and what is in between do
// not fit the 16 registers of AVX2.
func (m machine) radices() []int {
	if m.wide {
		return []int{2, 3, 4, 5, 8}
	}
	return []int{2, 3, 4, 5}
}

// sqrtHalf returns a register with √½ where a radix needs it.
func (m machine) sqrtHalf(radix int) vec {
	if radix != 8 {
		return nil
	}
	return m.spread(m.number(math.Sqrt2 / 2))
}

// legs is the addresses of the legs of a butterfly in one array.
type legs struct {
	base, far      reg.GPVirtual // legs 0 and 4
	stride, thrice reg.GPVirtual
}

// at returns the address of leg q.
func (l legs) at(q, offset int) Mem {
	base := l.base
	if q >= 4 {
		base = l.far
	}
	a := Mem{Base: base, Disp: offset}
	switch q % 4 {
	case 1:
		return a.Idx(l.stride, 1)
	case 2:
		return a.Idx(l.stride, 2)
	case 3:
		return a.Idx(l.thrice, 1)
	}
	return a
}

// passes writes the twiddled passes.
func (m machine) passes() {
	for _, radix := range m.radices() {
		for _, forward := range []bool{true, false} {
			m.pass(radix, forward)
		}
	}
}

func (m machine) pass(radix int, forward bool) {
	name := "backward"
	if forward {
		name = "forward"
	}
	TEXT(fmt.Sprintf("%s%d%s", name, radix, m.name), NOSPLIT, m.signature("func(re, im, twiddle *NUMBER, blocks, span int)"))
	Pragma("noescape")
	re, im, twiddle := Load(Param("re"), GP64()), Load(Param("im"), GP64()), Load(Param("twiddle"), GP64())
	blocks, span := Load(Param("blocks"), GP64()), Load(Param("span"), GP64())
	stride, thrice := GP64(), GP64()
	MOVQ(span, stride)
	SHLQ(U8(6), stride)
	LEAQ(Mem{Base: stride}.Idx(stride, 2), thrice)
	half := m.sqrtHalf(radix)
	reFar, imFar := GP64(), GP64()
	at, j := GP64(), GP64()

	label := fmt.Sprintf("%s%d%s", name, radix, m.name)
	Label(label + "block")
	MOVQ(twiddle, at)
	MOVQ(span, j)
	Label(label + "next")
	if radix > 4 {
		LEAQ(Mem{Base: re}.Idx(stride, 4), reFar)
		LEAQ(Mem{Base: im}.Idx(stride, 4), imFar)
	}
	r := legs{base: re.(reg.GPVirtual), far: reFar, stride: stride, thrice: thrice}
	i := legs{base: im.(reg.GPVirtual), far: imFar, stride: stride, thrice: thrice}
	for _, offset := range m.halves() {
		x := make([]z, radix)
		if forward {
			for q := range x {
				x[q] = z{m.load(r.at(q, offset)), m.load(i.at(q, offset))}
			}
			for q, y := range m.dft(x, half) {
				if q > 0 {
					y = m.turn(y, m.twiddle(at, q))
				}
				m.store(y.re, r.at(q, offset))
				m.store(y.im, i.at(q, offset))
			}
			continue
		}
		for q := range x {
			x[q] = z{m.load(r.at(q, offset)), m.load(i.at(q, offset))}
			if q > 0 {
				x[q] = m.unturn(x[q], m.twiddle(at, q))
			}
		}
		for q, y := range m.backward(x, half) {
			m.store(y.re, r.at(q, offset))
			m.store(y.im, i.at(q, offset))
		}
	}
	ADDQ(U8(line), re)
	ADDQ(U8(line), im)
	ADDQ(U32(2*m.size()*(radix-1)), at)
	DECQ(j)
	JNZ(LabelRef(label + "next"))
	// On to the next block: past the other legs.
	for range radix - 1 {
		ADDQ(stride, re)
		ADDQ(stride, im)
	}
	DECQ(blocks)
	JNZ(LabelRef(label + "block"))
	finish(m)
}

func (m machine) twiddle(at reg.GPVirtual, q int) factor {
	return m.factor(Mem{Base: at, Disp: 2 * m.size() * (q - 1)}, Mem{Base: at, Disp: m.size() * (2*q - 1)})
}

func finish(machine) {
	VZEROUPPER()
	RET()
}

// middles writes the sweep of the last forward pass, the kinetic factor and
// the first backward pass on neighbouring places.
func (m machine) middles() {
	for _, radix := range []int{4, 8} {
		if !slices.Contains(m.radices(), radix) {
			continue
		}
		name := fmt.Sprintf("middle%d%s", radix, m.name)
		TEXT(name, NOSPLIT, m.signature("func(re, im, kinRe, kinIm *NUMBER, groups int)"))
		re, im := Load(Param("re"), GP64()), Load(Param("im"), GP64())
		kinRe, kinIm := Load(Param("kinRe"), GP64()), Load(Param("kinIm"), GP64())
		groups := Load(Param("groups"), GP64())
		half := m.sqrtHalf(radix)
		Label(name + "next")
		for _, offset := range m.halves() {
			x := make([]z, radix)
			for q := range x {
				d := line*q + offset
				x[q] = z{m.load(Mem{Base: re, Disp: d}), m.load(Mem{Base: im, Disp: d})}
			}
			y := m.dft(x, half)
			for q := range y {
				y[q] = m.turn(y[q], m.factor(Mem{Base: kinRe, Disp: m.size() * q}, Mem{Base: kinIm, Disp: m.size() * q}))
			}
			for q, v := range m.backward(y, half) {
				d := line*q + offset
				m.store(v.re, Mem{Base: re, Disp: d})
				m.store(v.im, Mem{Base: im, Disp: d})
			}
		}
		ADDQ(U32(line*radix), re)
		ADDQ(U32(line*radix), im)
		ADDQ(U8(m.size()*radix), kinRe)
		ADDQ(U8(m.size()*radix), kinIm)
		DECQ(groups)
		JNZ(LabelRef(name + "next"))
		finish(m)
	}
}
