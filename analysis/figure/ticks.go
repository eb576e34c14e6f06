package figure

import (
	"math"
	"strconv"
	"strings"
)

// Range is an interval of an axis. It is empty unless Min < Max.
type Range struct{ Min, Max float64 }

func (r Range) empty() bool { return !(r.Min < r.Max) }

// span is the range of all finite values, widened by a fraction on both sides.
func span(widen float64, values ...[]float64) Range {
	r := Range{math.Inf(1), math.Inf(-1)}
	for _, list := range values {
		for _, v := range list {
			if finite(v) {
				r.Min, r.Max = min(r.Min, v), max(r.Max, v)
			}
		}
	}
	switch {
	case r.Min > r.Max:
		return Range{0, 1}
	case r.Max-r.Min < 1e-3*max(math.Abs(r.Min), math.Abs(r.Max)) || r.Min == r.Max:
		// Level to a part in a thousand: no use for digits that differ later.
		d := max(math.Abs(r.Min), math.Abs(r.Max)) / 10
		if d == 0 {
			d = 1
		}
		return Range{r.Min - d, r.Max + d}
	}
	d := widen * (r.Max - r.Min)
	return Range{r.Min - d, r.Max + d}
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

// tick is a mark on an axis; a minor one has no label.
type tick struct {
	at    float64
	label string
}

// ticks puts about n labelled marks at multiples of 1, 2 or 5 times a power of
// ten, with minor ones between.
func ticks(r Range, n int) (marks []tick) {
	raw := (r.Max - r.Min) / float64(n)
	power := math.Floor(math.Log10(raw))
	unit := math.Pow(10, power)
	step, parts := 10*unit, 5
	for _, s := range []struct {
		times float64
		parts int
	}{{1, 5}, {2, 4}, {5, 5}} {
		if s.times*unit >= raw*(1-1e-9) {
			step, parts = s.times*unit, s.parts
			break
		}
	}
	decimals := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	small := step / float64(parts)
	slack := 1e-9 * (r.Max - r.Min)
	for i := int(math.Ceil((r.Min - slack) / small)); float64(i)*small <= r.Max+slack; i++ {
		t := tick{at: float64(i) * small}
		if i%parts == 0 {
			t.label = number(float64(i/parts)*step, decimals)
		}
		marks = append(marks, t)
	}
	return marks
}

// axisTicks are those of a linear or a logarithmic axis.
func axisTicks(r Range, n int, logarithmic bool) []tick {
	if logarithmic {
		return decades(r, n)
	}
	return ticks(r, n)
}

// decades puts marks on an axis of decadic logarithms: at the powers of ten,
// every so many of them labelled, with minor marks at their multiples; where
// there are hardly two powers the multiples 2 and 5 have labels too.
func decades(r Range, n int) (marks []tick) {
	first, last := int(math.Floor(r.Min)), int(math.Ceil(r.Max))
	every := max(1, int(math.Ceil((r.Max-r.Min)/float64(n))))
	few := r.Max-r.Min < 1.8
	label := func(power, times int) string {
		v := float64(times) * math.Pow(10, float64(power))
		if few && v >= 1e-3 && v < 1e4 {
			return number(v, max(0, -power))
		}
		if times != 1 {
			return number(float64(times), 0) + "·10^{" + number(float64(power), 0) + "}"
		}
		return "10^{" + number(float64(power), 0) + "}"
	}
	for power := first; power <= last; power++ {
		for times := 1; times < 10; times++ {
			t := tick{at: float64(power) + math.Log10(float64(times))}
			if t.at < r.Min-1e-9 || t.at > r.Max+1e-9 || times > 1 && every > 1 {
				continue
			}
			if times == 1 && power%every == 0 || few && (times == 2 || times == 5) {
				t.label = label(power, times)
			}
			marks = append(marks, t)
		}
	}
	return marks
}

// logarithms returns decadic logarithms, NaN where there is none.
func logarithms(values []float64) []float64 {
	out := make([]float64, len(values))
	for i, v := range values {
		out[i] = math.NaN()
		if v > 0 {
			out[i] = math.Log10(v)
		}
	}
	return out
}

// number writes with a proper minus sign.
func number(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return strings.Replace(s, "-", "−", 1)
}

// exponent is the multiple of three by which values up to limit are divided,
// 10^exponent, for readable labels, and how a label tells it: "×10^{−3}", or ""
// for zero.
func exponent(limit float64) (e int, unit string) {
	if !(limit > 0) || limit >= 0.1 && limit < 10000 {
		return 0, ""
	}
	e = 3 * int(math.Floor(math.Log10(limit*(1+1e-9))/3))
	return e, "×10^{" + number(float64(e), 0) + "}"
}

// scaled returns the values divided by 10^e.
func scaled(values []float64, e int) []float64 {
	if values == nil {
		return nil
	}
	out := make([]float64, len(values))
	for i, v := range values {
		out[i] = v / math.Pow(10, float64(e))
	}
	return out
}
