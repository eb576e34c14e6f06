package gpe

import "fmt"

// Scheme is a symmetric splitting of the propagator into kinetic flows
// exp(−i a dt T) and local flows exp(−i b dt (V + g f)), which begins and ends
// with a kinetic flow. Time runs with the kinetic flow, so a local flow sees
// the potential at the time that the kinetic flows before it have reached.
type Scheme struct {
	Name    string
	Order   int
	kinetic []float64 // a_1 … a_{m+1}, symmetric, sum 1
	local   []float64 // b_1 … b_m, symmetric, sum 1
}

// Strang is the splitting of second order, ½T V ½T. G. Strang, SIAM J. Numer.
// Anal. 5, 506 (1968).
func Strang() Scheme {
	return Scheme{Name: "strang", Order: 2, kinetic: []float64{0.5, 0.5}, local: []float64{1}}
}

// Quartic is a splitting of fourth order in six stages with small error
// constants: S. Blanes, P. C. Moan, J. Comput. Appl. Math. 142, 313 (2002),
// the method they call S6. The coefficients are typed from memory; that they
// are right to the last digit shows in the measured order (see the tests).
func Quartic() Scheme {
	const (
		a1 = 0.0792036964311957
		a2 = 0.353172906049774
		a3 = -0.0420650803577195
		a4 = 1 - 2*(a1+a2+a3)
		b1 = 0.209515106613362
		b2 = -0.143851773179818
		b3 = 0.5 - (b1 + b2)
	)
	return Scheme{
		Name: "quartic", Order: 4,
		kinetic: []float64{a1, a2, a3, a4, a3, a2, a1},
		local:   []float64{b1, b2, b3, b3, b2, b1},
	}
}

// SchemeNamed returns the scheme of that name.
func SchemeNamed(name string) (Scheme, error) {
	for _, s := range []Scheme{Strang(), Quartic()} {
		if s.Name == name {
			return s, nil
		}
	}
	return Scheme{}, fmt.Errorf("no splitting is called %q; there are strang and quartic", name)
}
