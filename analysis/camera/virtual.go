package camera

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/moments"
	"tailrace/gpe"
)

// Virtual draws shots of a cloud whose mean density and fluctuations are known
// (gpe.Moments): Gaussian fluctuations with the exact covariance, seen through a
// camera. In the limit of weak noise that is what an experiment measures.
type Virtual struct {
	Camera Camera
	X      []float64 // pixels' centres from the step's mean position, rising

	perXi float64
	phase []phase // of the step within a pixel
}

// phase is the picture for one place of the step within a pixel.
type phase struct {
	shift float64   // of the step to the right, as a share of a pixel
	mean  []float64 // in n₀
	root  *mat.TriDense
}

// phases is how many places of the step within a pixel are told apart: a
// fiftieth of a pixel is the largest error.
const phases = 25

// Choice says what of the fluctuations is drawn.
type Choice int

// The choices.
const (
	Everything Choice = iota
	// Uncorrelated leaves out what joins the two sides of the step: the map
	// across the horizon is then empty.
	Uncorrelated
)

// ErrNoCovariance means that the covariance of the pixels is not positive.
var ErrNoCovariance = errors.New("the covariance of the pixels is not positive")

// NewVirtual prepares shots of pixels from lo to hi. Positions x of the moments'
// grid are from the step. With a jitter there is a picture for each place of the
// step within a pixel.
func NewVirtual(m *gpe.Moments, x []float64, atomsPerLength float64, c Camera, lo, hi float64, choice Choice) (*Virtual, error) {
	v := &Virtual{Camera: c, perXi: atomsPerLength}
	first := math.Ceil(lo / c.Pixel)
	for i := first; i*c.Pixel <= hi; i++ {
		v.X = append(v.X, i*c.Pixel)
	}
	if len(v.X) < 2 {
		return nil, fmt.Errorf("a picture from %.4g to %.4g has %d pixels of %.4g, at least 2 are needed", lo, hi, len(v.X), c.Pixel)
	}
	count := 1
	if c.Jitter > 0 {
		count = phases
	}
	for k := range count {
		p := phase{}
		if count > 1 {
			p.shift = (float64(k)+0.5)/float64(count) - 0.5
		}
		if err := v.expose(&p, m, x, choice); err != nil {
			return nil, err
		}
		v.phase = append(v.phase, p)
	}
	return v, nil
}

// expose finds mean and covariance of the pixels.
func (v *Virtual) expose(p *phase, m *gpe.Moments, x []float64, choice Choice) error {
	n, pixels, count := len(x), len(v.X), m.Count()
	dx := x[1] - x[0]
	sees := mat.NewDense(n, pixels, nil)
	p.mean = make([]float64, pixels)
	reach := v.Camera.Pixel/2 + dx + 6*v.Camera.Resolution
	for i, centre := range v.X {
		for j, at := range x {
			if d := at + p.shift*v.Camera.Pixel - centre; math.Abs(d) < reach {
				w := v.Camera.share(d, dx)
				sees.Set(j, i, w)
				p.mean[i] += w * m.Density[j]
			}
		}
	}
	var seen mat.Dense
	seen.Mul(mat.NewDense(count, n, m.Directions), sees)
	cov := mat.NewSymDense(pixels, nil)
	cov.SymOuterK(1, seen.T())
	var worst float64
	for i := range pixels {
		noise := v.Camera.ReadNoise * v.Camera.ReadNoise
		if v.Camera.PhotonsPerAtom > 0 {
			noise += math.Max(p.mean[i], 0) / (v.Camera.PhotonsPerAtom * v.perXi * v.Camera.Pixel)
		}
		cov.SetSym(i, i, cov.At(i, i)+noise)
		worst = math.Max(worst, cov.At(i, i))
		for j := range i {
			if choice == Uncorrelated && v.X[i] > 0 && v.X[j] <= 0 {
				cov.SetSym(i, j, 0)
			}
		}
	}
	for i := range pixels {
		cov.SetSym(i, i, cov.At(i, i)+1e-12*worst+1e-24) // rounding
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		return ErrNoCovariance
	}
	p.root = new(mat.TriDense)
	chol.LTo(p.root)
	return nil
}

// Shots is a campaign: shots as a camera gives them, and where the step was in
// each, from the first pixel's centre.
type Shots struct {
	moments.Shots
	StepPosition []float64
}

// Draw takes a campaign of count shots. The same seed gives the same shots.
func (v *Virtual) Draw(count int, seed uint64) *Shots {
	r := rand.New(rand.NewPCG(seed, 0xca3e))
	pixels := len(v.X)
	s := &Shots{Shots: moments.Shots{Pixels: pixels, Data: make([]float32, count*pixels)}, StepPosition: make([]float64, count)}
	y := make([]float64, pixels)
	for i := range count {
		step := 0.0
		if v.Camera.Jitter > 0 {
			step = v.Camera.Jitter * r.NormFloat64()
		}
		whole := math.Round(step / v.Camera.Pixel)
		p := &v.phase[min(len(v.phase)-1, int((step/v.Camera.Pixel-whole+0.5)*float64(len(v.phase))))]
		s.StepPosition[i] = step - v.X[0]
		for k := range y {
			y[k] = r.NormFloat64()
		}
		raw := p.root.RawTriangular()
		blas64.Trmv(blas.NoTrans, raw, blas64.Vector{N: pixels, Inc: 1, Data: y})
		scale := 1 + v.Camera.NumberSpread*r.NormFloat64()
		row := s.Shot(i)
		for k := range row {
			// A step by whole pixels moves the picture; its ends repeat.
			from := min(max(k-int(whole), 0), pixels-1)
			row[k] = float32((p.mean[from] + y[from]) * scale)
		}
	}
	return s
}
