package band

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

// Search is what is found in the cross-horizon window by a search that is not
// told where to look: straight ridges x′ = −r x + b of every angle, offset and
// width that the window can hold, each measured in standard deviations of what
// chance makes of it. The price of looking everywhere is in PValue: the share of
// shuffled campaigns whose own best ridge is at least as strong.
type Search struct {
	Ratio        float64 // r, minus the slope dx′/dx
	Offset       float64 // b
	Width        float64 // standard deviation of the ridge, across x′
	Sign         float64 // −1 for anticorrelation
	Significance float64 // of this ridge alone, in standard deviations
	PValue       float64 // of the best ridge anywhere, (1+n)/(1+all)
	Ridges       int     // that were looked at
	Best         []float64
}

// searchCells is the most cells of the coarse map on a side.
const searchCells = 24

// Find searches the window with so many shuffles of the downstream windows
// between shots, drawn from seed, behind the price.
func Find(s *Sides, shuffles int, seed uint64) *Search {
	cell := func(n int) int { return (n + searchCells - 1) / searchCells }
	c := s.Coarse(cell(len(s.Xu)), cell(len(s.Xd)))
	nu, nd := len(c.Xu), len(c.Xd)
	type ridge struct{ ratio, offset, width float64 }
	var ridges []ridge
	var templates []float64 // [ridge][nu·nd]
	depth, reach := -c.Xu[0], c.Xd[nd-1]
	step := spacing(c.Xd)
	for _, angle := range []float64{10, 20, 30, 40, 50, 60, 65, 70, 74, 77, 80, 83, 86} {
		ratio := math.Tan(angle * math.Pi / 180)
		if ratio*depth < 2*step || ratio*-c.Xu[nu-1] > reach {
			continue // steeper or flatter than the window shows
		}
		for _, width := range []float64{1, 2, 4} {
			w := width * math.Max(step, ratio*spacing(c.Xu)/2)
			for b := -reach / 2; b <= reach/2; b += w {
				template := make([]float64, 0, nu*nd)
				var mean, inside float64
				for _, x := range c.Xu {
					for _, xp := range c.Xd {
						d := (xp + ratio*x - b) / w
						v := math.Exp(-d * d / 2)
						template = append(template, v)
						mean += v
						if v > 0.5 {
							inside++
						}
					}
				}
				if inside < 6 || inside > 0.6*float64(nu*nd) {
					continue
				}
				mean /= float64(nu * nd)
				var norm float64
				for i := range template {
					template[i] -= mean
					norm += template[i] * template[i]
				}
				for i := range template {
					template[i] /= math.Sqrt(norm)
				}
				templates = append(templates, template...)
				ridges = append(ridges, ridge{ratio, b, w})
			}
		}
	}
	result := &Search{Ridges: len(ridges), Significance: math.NaN(), PValue: math.NaN()}
	if len(ridges) == 0 || shuffles < 2 {
		return result
	}
	all := mat.NewDense(len(ridges), nu*nd, templates)
	measure := func(order []int) []float64 {
		d := c.D
		if order != nil {
			d = mat.NewDense(c.Shots(), nd, nil)
			for i, from := range order {
				d.SetRow(i, c.D.RawRowView(from))
			}
		}
		var map_ mat.Dense
		map_.Mul(c.U.T(), d)
		map_.Scale(1/float64(c.Shots()-1), &map_)
		var v mat.VecDense
		v.MulVec(all, mat.NewVecDense(nu*nd, map_.RawMatrix().Data))
		return v.RawVector().Data
	}
	r := rand.New(rand.NewPCG(seed, 0xf1d))
	chance := mat.NewDense(shuffles, len(ridges), nil)
	for i := range shuffles {
		chance.SetRow(i, measure(r.Perm(c.Shots())))
	}
	mean, sd := make([]float64, len(ridges)), make([]float64, len(ridges))
	for k := range ridges {
		mean[k], sd[k] = stat.MeanStdDev(mat.Col(nil, k, chance), nil)
	}
	strongest := func(v []float64) (best int, z float64) {
		for k, x := range v {
			if q := (x - mean[k]) / sd[k]; math.Abs(q) > math.Abs(z) {
				best, z = k, q
			}
		}
		return best, z
	}
	best, z := strongest(measure(nil))
	atLeast := 0
	for i := range shuffles {
		_, q := strongest(chance.RawRowView(i))
		result.Best = append(result.Best, math.Abs(q))
		if math.Abs(q) >= math.Abs(z) {
			atLeast++
		}
	}
	result.Ratio, result.Offset, result.Width = ridges[best].ratio, ridges[best].offset, ridges[best].width
	result.Sign, result.Significance = math.Copysign(1, z), math.Abs(z)
	result.PValue = float64(1+atLeast) / float64(1+shuffles)
	return result
}
