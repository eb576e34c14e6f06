package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// together is how many points one sweep over the coefficients makes.
const together = 4

// combine writes dst[j] = Σ_m f[j·count+m] beta[m] for groups of points: each
// coefficient is loaded once for all points of a group.
func (m machine) combine() {
	name := "combine" + m.name
	TEXT(name, NOSPLIT, "func(dst, f, beta *float64, groups, count int)")
	Pragma("noescape")
	dst, f, beta := Load(Param("dst"), GP64()), Load(Param("f"), GP64()), Load(Param("beta"), GP64())
	groups, count := Load(Param("groups"), GP64()), Load(Param("count"), GP64())
	stride, thrice := GP64(), GP64()
	MOVQ(count, stride)
	SHLQ(U8(3), stride)
	LEAQ(Mem{Base: stride}.Idx(stride, 2), thrice)
	at, left := GP64(), GP64()
	row := legs{base: f.(reg.GPVirtual), stride: stride, thrice: thrice}
	Label(name + "group")
	MOVQ(beta, at)
	MOVQ(count, left)
	sums := make([][]vec, together)
	for q := range sums {
		for range m.halves() {
			v := m.reg()
			VXORPD(v, v, v)
			sums[q] = append(sums[q], v)
		}
	}
	Label(name + "next")
	var b []vec
	for _, offset := range m.halves() {
		b = append(b, m.load(Mem{Base: at, Disp: offset}))
	}
	for q := range sums {
		if m.wide {
			VFMADD231PD_BCST(row.at(q, 0), b[0], sums[q][0])
			continue
		}
		coefficient := m.spread(row.at(q, 0))
		for h := range b {
			m.plus(sums[q][h], coefficient, b[h])
		}
	}
	ADDQ(U8(8), f)
	ADDQ(U8(line), at)
	DECQ(left)
	JNZ(LabelRef(name + "next"))
	for q := range sums {
		for h, offset := range m.halves() {
			m.store(sums[q][h], Mem{Base: dst, Disp: line*q + offset})
		}
	}
	// f has gone through one row; the group's others are behind it.
	ADDQ(thrice, f)
	ADDQ(U32(line*together), dst)
	DECQ(groups)
	JNZ(LabelRef(name + "group"))
	finish(m)
}
