package cavity

import (
	"fmt"
	"math"
	"sort"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// grown returns the eigenvalues λ = −iω with Im λ ≥ 0 that grow fastest, of the
// equations on a periodic Fourier grid. With S = U + V and U − V = iP they are
// real,
//
//	∂S/∂t = −v∂S − ½∂²P,  ∂P/∂t = −v∂P + ½∂²S − 2c²S,
//
// and both fields are damped far from the cavity, gently enough to send little
// back.
func grown(c Cavity, points int, length, quiet float64) []Mode {
	n, dx := points, length/float64(points)
	first, second := mat.NewDense(n, n, nil), mat.NewDense(n, n, nil)
	for i := range n {
		for j := range n {
			// The derivatives of the trigonometric interpolant on an even number
			// of points: L. N. Trefethen, Spectral Methods in MATLAB, SIAM 2000.
			h := 2 * math.Pi / float64(n)
			if i == j {
				second.Set(i, j, -math.Pi*math.Pi/(3*h*h)-1./6)
				continue
			}
			d := float64(i-j) * h / 2
			sign := 1.0
			if (i-j)%2 != 0 {
				sign = -1
			}
			first.Set(i, j, sign/2/math.Tan(d))
			second.Set(i, j, -sign/2/(math.Sin(d)*math.Sin(d)))
		}
	}
	unit := 2 * math.Pi / length
	m := mat.NewDense(2*n, 2*n, nil)
	for i := range n {
		x := c.Length/2 + (float64(i)-float64(n)/2)*dx
		edge := math.Abs(x-c.Length/2) - c.Length/2 // how far outside
		damping := 0.0
		if far := length/2 - c.Length/2; edge > quiet {
			damping = 0.25 * math.Pow((edge-quiet)/(far-quiet), 4)
		}
		s := c.SoundSpeed(x)
		for j := range n {
			drift := -c.Velocity * unit * first.At(i, j)
			bend := unit * unit * second.At(i, j) / 2
			m.Set(i, j, drift)
			m.Set(n+i, n+j, drift)
			m.Set(i, n+j, -bend)
			m.Set(n+i, j, bend)
		}
		m.Set(i, i, m.At(i, i)-damping)
		m.Set(n+i, n+i, m.At(n+i, n+i)-damping)
		m.Set(n+i, i, m.At(n+i, i)-2*s*s)
	}
	var e mat.Eigen
	if !e.Factorize(m, mat.EigenNone) {
		return nil
	}
	var modes []Mode
	for _, l := range e.Values(nil) {
		if imag(l) >= 0 {
			modes = append(modes, Mode{imag(l), real(l)})
		}
	}
	sort.Slice(modes, func(i, j int) bool { return modes[i].GrowthRate > modes[j].GrowthRate })
	return modes
}

// The same modes from a method that knows nothing of waves, planes and
// contours.
func TestDenseEigenproblem(t *testing.T) {
	for _, row := range []struct {
		c      Cavity
		points int
		length float64
	}{
		{Cavity{0.75, 1, 0.5, 3, 0.5}, 192, 100},
		{Cavity{0.75, 1, 0.5, 5, 0.5}, 400, 240},
		{Cavity{0.75, 1, 0.5, 12, 0.5}, 400, 240},
	} {
		t.Run(fmt.Sprintf("%+v", row.c), func(t *testing.T) {
			if testing.Short() && row.points > 200 {
				t.Skip("a few seconds")
			}
			want, err := row.c.Modes()
			if err != nil {
				t.Fatal(err)
			}
			got := grown(row.c, row.points, row.length, 15)
			if len(got) <= len(want) {
				t.Fatalf("%d eigenvalues", len(got))
			}
			for i, w := range want {
				// What the damped ends send back: 0.3 % at most in these rows.
				near(t, "growth rate", got[i].GrowthRate/w.GrowthRate, 1, 0.01)
				near(t, "frequency", got[i].Frequency, w.Frequency, 0.01*size(w.Omega()))
			}
			if next := got[len(want)]; next.GrowthRate > 0 {
				t.Errorf("another mode grows, %v", next)
			}
		})
	}
}
