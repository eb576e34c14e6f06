// Package shots reads measured shots and takes care of them: it says what was
// read, lays shots on top of each other by the step, rejects odd ones by name,
// looks for drift, and takes out the spread of the atom number.
package shots

import (
	"fmt"
	"math"
)

// Set is a campaign as read. In lab units lengths are in m, densities in atoms
// per m and times in s; with a config in condensate units they are in ξ, atoms
// per ξ and ħ/(m c₀²).
type Set struct {
	Path         string
	Count        int
	Pixels       int
	Density      []float64 // [Count·Pixels], NaN where a pixel is missing
	Pixel        float64   // size of a pixel, at the atoms
	StepPosition []float64 // of each shot, from the first pixel's centre
	Time         float64   // of the picture; NaN if the file does not say
	Kept         []bool    // nil if the file does not say

	Missing  int // pixels
	Negative int
}

// Shot returns the density of shot i.
func (s *Set) Shot(i int) []float64 { return s.Density[i*s.Pixels : (i+1)*s.Pixels] }

// Describe says what was read.
func (s *Set) Describe() string {
	text := fmt.Sprintf("%d shots of %d pixels of %.4g", s.Count, s.Pixels, s.Pixel)
	if s.Missing > 0 {
		text += fmt.Sprintf(", %d pixels missing", s.Missing)
	}
	if s.Negative > 0 {
		text += fmt.Sprintf(", %.2g %% of them negative", 100*float64(s.Negative)/float64(len(s.Density)))
	}
	if !math.IsNaN(s.Time) {
		text += fmt.Sprintf(", taken at %.4g", s.Time)
	}
	if s.Kept != nil {
		n := 0
		for _, k := range s.Kept {
			if k {
				n++
			}
		}
		text += fmt.Sprintf(", %d marked as kept", n)
	}
	return text
}

// Error is a fault of a shots file.
type Error struct {
	Path, Where string // where: an array, or a line
	Found       string
	Allowed     string // what is wrong and allowed, and what to do
}

func (e *Error) Error() string {
	text := e.Path + ": "
	if e.Where != "" {
		text += e.Where + ": "
	}
	if e.Found != "" {
		return text + e.Found + "; " + e.Allowed
	}
	return text + e.Allowed
}

// Units says how numbers are to be judged.
type Units int

// The units of a file.
const (
	Lab Units = iota
	Condensate
)

// check judges what has been read.
func (s *Set) check(units Units) error {
	fault := func(where, found, allowed string, args ...any) error {
		return &Error{s.Path, where, found, fmt.Sprintf(allowed, args...)}
	}
	switch {
	case s.Count == 0 || s.Pixels == 0:
		return fault("density", fmt.Sprintf("it has shape [%d, %d]", s.Count, s.Pixels), "shots and pixels are expected, one shot a row")
	case s.Count < 3:
		return fault("density", fmt.Sprintf("there are %d shots", s.Count), "a correlation needs at least 3, and a few thousand to see a band; one shot a row (transposed?)")
	case s.Pixels < 16:
		return fault("density", fmt.Sprintf("a shot has %d pixels", s.Pixels), "at least 16 are needed, one shot a row (transposed?)")
	case !(s.Pixel > 0) || math.IsInf(s.Pixel, 0):
		return fault("pixel", fmt.Sprintf("it is %v", s.Pixel), "the size of a pixel, above zero, is expected")
	case units == Lab && (s.Pixel < 1e-9 || s.Pixel > 1e-3):
		hint := ""
		for _, u := range []struct {
			name string
			si   float64
		}{{"µm", 1e-6}, {"mm", 1e-3}, {"nm", 1e-9}} {
			if v := s.Pixel * u.si; v >= 1e-8 && v <= 1e-4 {
				hint = "; it looks like a number in " + u.name
				break
			}
		}
		return fault("pixel", fmt.Sprintf("it is %.4g m", s.Pixel), "between 1e-9 and 1e-3 m is expected%s", hint)
	case len(s.StepPosition) != s.Count:
		return fault("step_position", fmt.Sprintf("it has %d values for %d shots", len(s.StepPosition), s.Count), "one for each shot is expected, in the units of pixel from the first pixel's centre")
	}
	width := float64(s.Pixels-1) * s.Pixel
	for i, x := range s.StepPosition {
		if !(x >= 0 && x <= width) {
			return fault("step_position", fmt.Sprintf("in shot %d it is %.4g", i, x), "the step must be inside the picture, between 0 and %.4g, counted from the first pixel's centre in the units of pixel", width)
		}
	}
	if s.Kept != nil && len(s.Kept) != s.Count {
		return fault("kept", fmt.Sprintf("it has %d values for %d shots", len(s.Kept), s.Count), "one for each shot is expected")
	}
	return s.checkDensity(units, fault)
}

func (s *Set) checkDensity(units Units, fault func(where, found, allowed string, args ...any) error) error {
	s.Missing, s.Negative = 0, 0
	var sum float64
	differ := false
	for i, v := range s.Density {
		switch {
		case math.IsNaN(v):
			s.Missing++
			continue
		case math.IsInf(v, 0):
			return fault("density", fmt.Sprintf("shot %d, pixel %d is %v", i/s.Pixels, i%s.Pixels, v), "missing pixels are NaN, and everything else is finite")
		case v < 0:
			s.Negative++
		}
		sum += v
		if i >= s.Pixels && v != s.Density[i%s.Pixels] {
			differ = true
		}
	}
	read := len(s.Density) - s.Missing
	mean := sum / float64(read)
	switch {
	case read == 0:
		return fault("density", "every pixel is missing", "numbers are expected")
	case !differ:
		return fault("density", "all shots are equal", "fluctuations are what is looked for")
	case s.Negative > read/2 || !(mean > 0):
		return fault("density", fmt.Sprintf("%d of %d pixels are negative and the mean is %.4g", s.Negative, read, mean), "densities are expected; noise may be negative here and there (a fluctuation with the mean taken off is no density)")
	case s.Missing > read/4:
		return fault("density", fmt.Sprintf("%d of %d pixels are missing", s.Missing, len(s.Density)), "at most a fifth may be")
	case units == Lab && (mean < 1e4 || mean > 1e11):
		hint := ""
		switch {
		case mean >= 1e-2 && mean < 1e4:
			hint = "; it looks like atoms per µm"
		case mean > 1e11:
			hint = "; it looks like atoms per volume, or per pixel in other units"
		}
		return fault("density", fmt.Sprintf("its mean is %.4g atoms per m", mean), "a line density between 1e4 and 1e11 atoms per m is expected%s", hint)
	case units == Condensate && (mean < 1e-3 || mean > 1e7):
		return fault("density", fmt.Sprintf("its mean is %.4g atoms per healing length", mean), "between 1e-3 and 1e7 is expected")
	}
	return nil
}
