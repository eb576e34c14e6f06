package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// tile writes the product of two panels over all rows,
//
//	dst[i·8+j] = Σ_r a[r·8+i] b[r·8+j],  i, j < 8,
//
// for AVX-512 two tiles side by side: b is then a pair of panels, one after the
// other at the distance given, and so is dst.
func (m machine) tile() {
	name := "tile" + m.name
	TEXT(name, NOSPLIT, "func(dst, a, b *float64, rows, next int)")
	Pragma("noescape")
	dst, a, b := Load(Param("dst"), GP64()), Load(Param("a"), GP64()), Load(Param("b"), GP64())
	rows, next := Load(Param("rows"), GP64()), Load(Param("next"), GP64())
	SHLQ(U8(3), next)
	if m.wide {
		m.tileRows(name, dst, a, b, rows, next, 0, 8, []int{0}, 2)
	} else {
		// Sixteen registers: four rows of the tile at a time.
		a2, b2, rows2 := GP64(), GP64(), GP64()
		MOVQ(a, a2)
		MOVQ(b, b2)
		MOVQ(rows, rows2)
		m.tileRows(name+"upper", dst, a, b, rows, next, 0, 4, []int{0, 32}, 1)
		m.tileRows(name+"lower", dst, a2, b2, rows2, next, 4, 4, []int{0, 32}, 1)
	}
	finish(m)
}

// tileRows makes count rows of the tile from the first on, in parts of a row
// at the given byte offsets, of so many panels.
func (m machine) tileRows(label string, dst, a, b, rows, next reg.Register, first, count int, parts []int, panels int) {
	sums := make([][]vec, count)
	for i := range sums {
		for range len(parts) * panels {
			v := m.reg()
			VXORPD(v, v, v)
			sums[i] = append(sums[i], v)
		}
	}
	Label(label)
	var right []vec
	for p := range panels {
		for _, offset := range parts {
			at := Mem{Base: b, Disp: offset}
			if p == 1 {
				at = at.Idx(next, 1)
			}
			right = append(right, m.load(at))
		}
	}
	for i := range sums {
		left := m.spread(Mem{Base: a, Disp: 8 * (first + i)})
		for k, r := range right {
			m.plus(sums[i][k], left, r)
		}
	}
	ADDQ(U8(64), a)
	ADDQ(U8(64), b)
	DECQ(rows)
	JNZ(LabelRef(label))
	for i := range sums {
		for k, v := range sums[i] {
			p, part := k/len(parts), k%len(parts)
			m.store(v, Mem{Base: dst, Disp: 512*p + 64*(first+i) + parts[part]})
		}
	}
}
