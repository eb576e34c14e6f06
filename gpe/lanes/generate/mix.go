package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
)

// mix multiplies real and imaginary part of each point by a real matrix.
func (m machine) mix() {
	name := "mix" + m.name
	TEXT(name, NOSPLIT, m.signature("func(re, im, matrix *NUMBER, points int)"))
	Pragma("noescape")
	re, im, matrix := Load(Param("re"), GP64()), Load(Param("im"), GP64()), Load(Param("matrix"), GP64())
	points := Load(Param("points"), GP64())
	Label(name + "next")
	var w [4]vec
	for i := range w {
		w[i] = m.spread(Mem{Base: matrix, Disp: i * m.size()})
	}
	for _, offset := range m.halves() {
		x, y := m.load(Mem{Base: re, Disp: offset}), m.load(Mem{Base: im, Disp: offset})
		m.store(m.plus(m.mul(w[0], x), w[1], y), Mem{Base: re, Disp: offset})
		m.store(m.plus(m.mul(w[2], x), w[3], y), Mem{Base: im, Disp: offset})
	}
	ADDQ(U8(line), re)
	ADDQ(U8(line), im)
	ADDQ(U8(4*m.size()), matrix)
	DECQ(points)
	JNZ(LabelRef(name + "next"))
	finish(m)
}
