package band

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
)

// Bins are equal bins of the delay s.
type Bins struct {
	Low, Width float64
	Count      int
}

// Centre returns the middle of bin b.
func (b Bins) Centre(i int) float64 { return b.Low + (float64(i)+0.5)*b.Width }

// Centres returns all middles.
func (b Bins) Centres() []float64 {
	c := make([]float64, b.Count)
	for i := range c {
		c[i] = b.Centre(i)
	}
	return c
}

// NewBins returns bins that cover |s| < span, no narrower than the delay
// between neighbouring points upstream, where a point is longest in time.
func NewBins(g Geometry, xu, xd []float64, span float64) Bins {
	width := math.Max(spacing(xu)/g.Up, spacing(xd)/g.Down)
	n := max(1, int(span/width))
	return Bins{Low: -(float64(n) + 0.5) * width, Width: width, Count: 2*n + 1}
}

// Cut is the profile of the map across the band, averaged along it: bin b is
// the mean of g₂ − 1 over the pairs of points of the window whose delay s lies
// in it. As it is linear in the map, each shot has a profile of its own, and
// resampling shots is cheap.
type Cut struct {
	Bins  Bins
	S     []float64  // middle of each bin that holds pairs
	Pairs []int      // pairs of points in it
	Shot  *mat.Dense // [shots×bins], a shot's contribution
	Mean  []float64  // g₂ − 1
	Error []float64  // its standard error

	kept   []int     // the bins that hold pairs
	ranges [][2]int  // of downstream points, for each upstream point and bin
	down   int       // downstream points
	base   []float64 // taken off, or nil

	// Block is how many neighbouring shots Resample draws together, so that a
	// slow drift counts; 0 is 1.
	Block int
}

// NewCut averages along the band of geometry g.
func NewCut(s *Sides, g Geometry, bins Bins) *Cut {
	nu, nd := len(s.Xu), len(s.Xd)
	// For each upstream point and bin, the range of downstream points.
	ranges := make([][2]int, nu*bins.Count)
	pairs := make([]int, bins.Count)
	for i, x := range s.Xu {
		for b := range bins.Count {
			lo := firstAtLeast(s.Xd, g, x, bins.Low+float64(b)*bins.Width)
			hi := firstAtLeast(s.Xd, g, x, bins.Low+float64(b+1)*bins.Width)
			ranges[i*bins.Count+b] = [2]int{lo, hi}
			pairs[b] += hi - lo
		}
	}
	var keep []int
	c := &Cut{Bins: bins, ranges: ranges, down: nd}
	for b, n := range pairs {
		if n > 0 {
			keep = append(keep, b)
			c.S = append(c.S, bins.Centre(b))
			c.Pairs = append(c.Pairs, n)
		}
	}
	c.kept = keep
	c.Shot = mat.NewDense(s.Shots(), len(keep), nil)
	prefix := make([]float64, nd+1)
	for m := range s.Shots() {
		u, d, row := s.U.RawRowView(m), s.D.RawRowView(m), c.Shot.RawRowView(m)
		for k, v := range d {
			prefix[k+1] = prefix[k] + v
		}
		for k, b := range keep {
			sum := 0.0
			for i := range nu {
				r := ranges[i*bins.Count+b]
				sum += u[i] * (prefix[r[1]] - prefix[r[0]])
			}
			row[k] = sum / float64(pairs[b])
		}
	}
	c.Mean, c.Error = columnStatistics(c.Shot)
	if s.Noiseless {
		var size float64
		for _, v := range c.Mean {
			size = math.Max(size, math.Abs(v))
		}
		for k := range c.Error {
			c.Error[k] = size / 100
		}
	}
	return c
}

// Project returns the averages of a map over the window, row by row of the
// upstream points, in the cut's bins.
func (c *Cut) Project(pattern []float64) []float64 {
	mean := make([]float64, len(c.S))
	for k, b := range c.kept {
		for i := 0; i < len(pattern)/c.down; i++ {
			r := c.ranges[i*c.Bins.Count+b]
			for _, v := range pattern[i*c.down+r[0] : i*c.down+r[1]] {
				mean[k] += v
			}
		}
		mean[k] /= float64(c.Pairs[k])
	}
	return mean
}

// With returns the cut with another mean, such as a predicted one.
func (c *Cut) With(mean []float64) *Cut {
	o := *c
	o.Mean = mean
	return &o
}

// Less returns the cut with a profile taken off its mean: of what is known to
// lie under the band.
func (c *Cut) Less(profile []float64) *Cut {
	o := *c
	o.Mean = make([]float64, len(c.Mean))
	for k, v := range c.Mean {
		o.Mean[k] = v - profile[k]
	}
	o.base = profile
	return &o
}

// firstAtLeast returns the first index of xd whose delay with x is at least s.
func firstAtLeast(xd []float64, g Geometry, x, s float64) int {
	xp := (s - x/g.Up) * g.Down
	k := int(math.Ceil((xp - xd[0]) / spacing(xd)))
	return max(0, min(len(xd), k))
}

// columnStatistics returns Σ/(M−1) of each column (the covariance, since the
// sides are centred) and the standard error of the mean.
func columnStatistics(f *mat.Dense) (mean, err []float64) {
	rows, cols := f.Dims()
	mean, err = make([]float64, cols), make([]float64, cols)
	m := float64(rows)
	for k := range cols {
		sum, square := 0.0, 0.0
		for i := range rows {
			v := f.At(i, k)
			sum += v
			square += v * v
		}
		mean[k] = sum / (m - 1)
		err[k] = math.Sqrt((square/m - sum*sum/(m*m)) / (m - 1))
	}
	return mean, err
}

// Covariance returns the covariance of the cut's means, [bins×bins].
func (c *Cut) Covariance() *mat.SymDense {
	rows, cols := c.Shot.Dims()
	m := float64(rows)
	cov := mat.NewSymDense(cols, nil)
	cov.SymOuterK(1/(m*(m-1)), c.Shot.T())
	mean := mat.NewVecDense(cols, append([]float64(nil), c.Mean...))
	if c.base != nil {
		mean.AddVec(mean, mat.NewVecDense(cols, c.base))
	}
	cov.SymRankOne(cov, -(m-1)/(m*m), mean)
	return cov
}

// Resample sets dst to the cut of a bootstrap sample: shots drawn with
// replacement, in blocks.
func (c *Cut) Resample(dst []float64, r *rand.Rand) {
	rows, _ := c.Shot.Dims()
	clear(dst)
	block := max(1, c.Block)
	for drawn := 0; drawn < rows; {
		first := r.IntN(rows)
		for i := 0; i < block && drawn < rows; i++ {
			for k, v := range c.Shot.RawRowView((first + i) % rows) {
				dst[k] += v
			}
			drawn++
		}
	}
	for k := range dst {
		dst[k] /= float64(rows - 1)
		if c.base != nil {
			dst[k] -= c.base[k]
		}
	}
}
