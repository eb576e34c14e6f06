package shots

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"gonum.org/v1/gonum/stat/distuv"

	"tailrace/analysis/moments"
)

// Rejection is a shot that is left out, and why.
type Rejection struct {
	Shot  int
	Why   string
	Value float64 // in robust standard deviations from the median, or what else Why says
}

// odd is how many robust standard deviations a shot may be from the median; of
// Gaussian shots 6·10⁻⁷ are farther.
const odd = 5

// Odd finds the shots that are to be left out: those that the file does not
// mark as kept, those with many pixels missing, and those whose atom number,
// centre or noise lies more than 5 robust standard deviations (1.4826 times the
// median of distances) from the median of all.
func (s *Set) Odd() []Rejection {
	var out []Rejection
	gone := make([]bool, s.Count)
	reject := func(i int, why string, value float64) {
		if !gone[i] {
			gone[i] = true
			out = append(out, Rejection{i, why, value})
		}
	}
	number, centre, noise := make([]float64, s.Count), make([]float64, s.Count), make([]float64, s.Count)
	for i := range s.Count {
		if s.Kept != nil && !s.Kept[i] {
			reject(i, "the file does not mark it as kept", 0)
		}
		missing := 0
		var first, differences, count float64
		before := math.NaN()
		for k, v := range s.Shot(i) {
			if math.IsNaN(v) {
				missing++
				before = v
				continue
			}
			number[i] += v
			first += v * float64(k)
			if !math.IsNaN(before) {
				differences += (v - before) * (v - before)
				count++
			}
			before = v
		}
		centre[i] = first/number[i] - s.StepPosition[i]/s.Pixel
		noise[i] = math.Log(math.Max(differences/math.Max(count, 1), 1e-300))
		if missing > s.Pixels/10 {
			reject(i, fmt.Sprintf("%d of %d pixels are missing", missing, s.Pixels), float64(missing))
		}
	}
	for _, q := range []struct {
		what   string
		values []float64
	}{{"atom number", number}, {"centre from the step", centre}, {"noise between neighbouring pixels", noise}} {
		var left []float64
		for i, v := range q.values {
			if !gone[i] {
				left = append(left, v)
			}
		}
		middle, spread := robust(left)
		if spread == 0 {
			continue
		}
		for i, v := range q.values {
			if d := (v - middle) / spread; !(math.Abs(d) <= odd) {
				reject(i, fmt.Sprintf("its %s is %.1f robust standard deviations from the median", q.what, d), d)
			}
		}
	}
	sort.Slice(out, func(a, b int) bool { return out[a].Shot < out[b].Shot })
	return out
}

// robust returns the median and 1.4826 times the median of distances from it,
// which is the standard deviation of a Gaussian.
func robust(values []float64) (median, spread float64) {
	if len(values) == 0 {
		return math.NaN(), 0
	}
	v := slices.Clone(values)
	slices.Sort(v)
	median = v[len(v)/2]
	for i := range v {
		v[i] = math.Abs(v[i] - median)
	}
	slices.Sort(v)
	return median, 1.4826 * v[len(v)/2]
}

// Drift is how a property of shots goes with their order.
type Drift struct {
	What        string
	Correlation float64 // Spearman's rank correlation with the order
	PValue      float64
	// Neighbours is the correlation of each shot with the next.
	Neighbours float64
}

// Drifts looks at atom number and step position. C. Spearman, Am. J. Psychol.
// 15, 72 (1904); ties have their mean rank.
func (s *Set) Drifts() []Drift {
	number := make([]float64, s.Count)
	for i := range number {
		for _, v := range s.Shot(i) {
			if !math.IsNaN(v) {
				number[i] += v
			}
		}
	}
	var out []Drift
	for _, q := range []struct {
		what   string
		values []float64
	}{{"atom number", number}, {"step position", s.StepPosition}} {
		d := Drift{What: q.what, PValue: 1}
		if rho, ok := spearman(q.values); ok {
			d.Correlation = rho
			n := float64(s.Count)
			t := rho * math.Sqrt((n-2)/math.Max(1-rho*rho, 1e-15))
			d.PValue = 2 * distuv.StudentsT{Mu: 0, Sigma: 1, Nu: n - 2}.Survival(math.Abs(t))
			d.Neighbours = neighbours(q.values)
		}
		out = append(out, d)
	}
	return out
}

// spearman is the rank correlation of values with their order.
func spearman(values []float64) (float64, bool) {
	n := len(values)
	index := make([]int, n)
	for i := range index {
		index[i] = i
	}
	sort.SliceStable(index, func(a, b int) bool { return values[index[a]] < values[index[b]] })
	rank := make([]float64, n)
	for i := 0; i < n; {
		j := i
		for j < n && values[index[j]] == values[index[i]] {
			j++
		}
		for k := i; k < j; k++ {
			rank[index[k]] = float64(i+j-1) / 2
		}
		i = j
	}
	middle := float64(n-1) / 2
	var xy, xx, yy float64
	for i, r := range rank {
		x := float64(i) - middle
		xy += x * (r - middle)
		xx += x * x
		yy += (r - middle) * (r - middle)
	}
	if yy == 0 {
		return 0, false
	}
	return xy / math.Sqrt(xx*yy), true
}

func neighbours(v []float64) float64 {
	var mean float64
	for _, x := range v {
		mean += x / float64(len(v))
	}
	var near, all float64
	for i, x := range v {
		all += (x - mean) * (x - mean)
		if i > 0 {
			near += (x - mean) * (v[i-1] - mean)
		}
	}
	return near / all
}

// BlockLength returns how many shots belong together in a bootstrap: 1 where
// neighbours are independent, else long enough for a correlation r from shot to
// shot to have died, 2/(1−r), at most a fiftieth of all.
func BlockLength(drifts []Drift, count int) int {
	length := 1.0
	for _, d := range drifts {
		if d.Neighbours > 3/math.Sqrt(float64(count)) {
			length = math.Max(length, 2/math.Max(1-d.Neighbours, 1e-3))
		}
	}
	return int(math.Max(1, math.Min(length, float64(count)/50)))
}

// Normalisation is what is done about the spread of the atom number.
type Normalisation int

// The normalisations.
const (
	// Rescale divides each shot by its number over the mean number. Number that
	// comes and goes by itself, through the ends of a picture that does not show
	// the whole cloud, is taken for spread, and part of a band with it: 3 % of
	// its height for a picture 44 ξ long around a window of 32 ξ, 1 % for one of
	// 140 ξ (measured). Where the whole cloud is in the picture nothing is lost.
	Rescale Normalisation = iota
	// Raw does nothing.
	Raw
	// Project takes out of each pixel what goes with the number: its regression
	// on the number over all shots.
	Project
)

func (n Normalisation) String() string { return [...]string{"rescale", "none", "project"}[n] }

// Aligned is shots laid on top of each other by whole pixels.
type Aligned struct {
	X     []float64 // pixels from the step
	Shots moments.Shots
	Index []int   // of each shot in the set
	Rest  float64 // r.m.s. distance of the steps from where X has them, in the set's unit
}

// Align lays the shots on top of each other by the step, to whole pixels, over
// all pixels that every shot has, and leaves the rejected ones out. Whole pixels
// keep the noise of each pixel its own, which interpolation would not; what is
// left, up to half a pixel, is in Rest and in the response of pictures. A missing
// pixel takes the mean over the other shots. Densities are divided by unit. Pixels
// outside low to high from the step are not kept, though they count for the
// number; both 0 keep all.
func (s *Set) Align(rejected []Rejection, n Normalisation, unit, low, high float64) (*Aligned, error) {
	gone := map[int]bool{}
	for _, r := range rejected {
		gone[r.Shot] = true
	}
	a := &Aligned{}
	var at []int
	left, right := math.MaxInt, math.MaxInt
	var rest, rest2 float64
	for i := range s.Count {
		if gone[i] {
			continue
		}
		place := s.StepPosition[i] / s.Pixel
		whole := int(math.Round(place))
		rest += place - float64(whole)
		rest2 += (place - float64(whole)) * (place - float64(whole))
		a.Index, at = append(a.Index, i), append(at, whole)
		left, right = min(left, whole), min(right, s.Pixels-1-whole)
	}
	if len(a.Index) < 3 {
		return nil, &Error{s.Path, "", fmt.Sprintf("%d of %d shots are left", len(a.Index), s.Count), "at least 3 are needed"}
	}
	if left+right < 16 {
		return nil, &Error{s.Path, "step_position", fmt.Sprintf("the step moves so far that only %d pixels are in every shot", left+right+1), "at least 17 are needed"}
	}
	// The part of the rest that all share is known.
	rest /= float64(len(a.Index))
	a.Rest = math.Sqrt(math.Max(rest2/float64(len(a.Index))-rest*rest, 0)) * s.Pixel
	all := [2]int{left, right}
	if low < high {
		left, right = min(left, int(math.Ceil(-low/s.Pixel))), min(right, int(math.Ceil(high/s.Pixel)))
		if left+right < 16 {
			return nil, &Error{s.Path, "", fmt.Sprintf("%d pixels are between %.4g and %.4g from the step", left+right+1, low, high), "at least 17 are needed"}
		}
	}
	for k := -left; k <= right; k++ {
		a.X = append(a.X, (float64(k)-rest)*s.Pixel)
	}
	pixels := len(a.X)
	a.Shots = moments.Shots{Pixels: pixels, Data: make([]float32, len(a.Index)*pixels)}
	sum, count := make([]float64, pixels), make([]float64, pixels)
	number := make([]float64, len(a.Index))
	for i, shot := range a.Index {
		for _, v := range s.Shot(shot)[at[i]-all[0] : at[i]+all[1]+1] {
			if !math.IsNaN(v) {
				number[i] += v
			}
		}
		for k, v := range s.Shot(shot)[at[i]-left : at[i]+right+1] {
			if !math.IsNaN(v) {
				sum[k] += v / unit
				count[k]++
			}
			a.Shots.Data[i*pixels+k] = float32(v / unit)
		}
	}
	for i, v := range a.Shots.Data {
		if math.IsNaN(float64(v)) {
			k := i % pixels
			a.Shots.Data[i] = float32(sum[k] / math.Max(count[k], 1))
		}
	}
	a.normalise(n, number)
	return a, nil
}

// normalise deals with the spread of the number, which is that of all pixels
// that every shot has.
func (a *Aligned) normalise(n Normalisation, number []float64) {
	if n == Raw {
		return
	}
	count, pixels := a.Shots.Count(), a.Shots.Pixels
	var mean float64
	for _, x := range number {
		mean += x / float64(count)
	}
	if n == Rescale {
		for i := range number {
			row := a.Shots.Shot(i)
			for k := range row {
				row[k] *= float32(mean / number[i])
			}
		}
		return
	}
	var variance float64
	slope := make([]float64, pixels)
	for i, x := range number {
		variance += (x - mean) * (x - mean)
		for k, v := range a.Shots.Shot(i) {
			slope[k] += (x - mean) * float64(v)
		}
	}
	if variance == 0 {
		return
	}
	for i, x := range number {
		row := a.Shots.Shot(i)
		for k := range row {
			row[k] -= float32(slope[k] / variance * (x - mean))
		}
	}
}
