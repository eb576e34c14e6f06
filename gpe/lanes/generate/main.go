// Generate writes the assembly kernels of package lanes. It is a module of its
// own, so that whoever builds the program does not need what it needs. Run it
// by go generate in the folder above.
package main

import (
	. "github.com/mmcloughlin/avo/build"
)

func main() {
	ConstraintExpr("amd64,!purego")
	for _, m := range machines {
		m.passes()
		m.middles()
		m.phases()
		m.damp()
		if !m.single {
			m.mix()
			m.combine()
			m.tile()
		}
	}
	Generate()
}
