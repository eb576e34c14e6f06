package shots

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"tailrace/analysis/npz"
)

// limit is the most memory that a file's numbers may take, in bytes.
const limit = 768 << 20

// Read reads the shots at path: an archive of numpy (.npz) with density
// [shots, pixels], pixel, step_position [shots] and perhaps time and kept
// [shots]; a text file (.csv) with a shot a line; or a run's folder, of which it
// takes shots.npz. Its errors are *Error and those of the file system.
func Read(path string, units Units) (*Set, error) {
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, &Error{Path: path, Allowed: "there is no such file; give shots as .npz or .csv, or the folder of a run"}
	case err != nil:
		return nil, err
	case info.IsDir():
		inside := filepath.Join(path, "shots.npz")
		if _, err := os.Stat(inside); err != nil {
			return nil, &Error{Path: path, Allowed: "this folder holds no shots.npz; a run that has ended writes one (an exact map has no shots)"}
		}
		path = inside
	case !info.Mode().IsRegular():
		return nil, &Error{Path: path, Allowed: "a file is expected, not a device"}
	}
	var s *Set
	if strings.EqualFold(filepath.Ext(path), ".csv") || strings.EqualFold(filepath.Ext(path), ".txt") {
		s, err = readText(path)
	} else {
		s, err = readArchive(path)
	}
	if err != nil {
		return nil, err
	}
	return s, s.check(units)
}

func readArchive(path string) (*Set, error) {
	f, err := npz.Limit(limit).ReadFile(path)
	if err != nil {
		var damaged *npz.Error
		if errors.As(err, &damaged) {
			return nil, &Error{Path: path, Where: damaged.Member, Allowed: strings.TrimPrefix(err.Error(), path+": ")}
		}
		return nil, err
	}
	s := &Set{Path: path, Time: math.NaN()}
	get := func(name string, optional bool) ([]float64, []int, error) {
		v, shape, err := f.Float64(name)
		if errors.Is(err, npz.ErrMissing) {
			if optional {
				return nil, nil, nil
			}
			return nil, nil, &Error{path, name, "", fmt.Sprintf("it is missing; the archive holds %s, and density [shots, pixels], pixel and step_position [shots] are needed", strings.Join(f.Names(), ", "))}
		}
		if err != nil {
			return nil, nil, &Error{Path: path, Where: name, Allowed: err.Error()}
		}
		return v, shape, nil
	}
	density, shape, err := get("density", false)
	if err != nil {
		return nil, err
	}
	if len(shape) != 2 {
		return nil, &Error{path, "density", fmt.Sprintf("its shape is %v", shape), "[shots, pixels] is expected"}
	}
	s.Density, s.Count, s.Pixels = density, shape[0], shape[1]
	pixel, _, err := get("pixel", false)
	if err != nil {
		return nil, err
	}
	if len(pixel) != 1 {
		return nil, &Error{path, "pixel", fmt.Sprintf("it has %d values", len(pixel)), "one is expected, the size of a pixel"}
	}
	s.Pixel = pixel[0]
	if s.StepPosition, _, err = get("step_position", false); err != nil {
		return nil, err
	}
	if len(s.StepPosition) == 1 && s.Count > 1 {
		for len(s.StepPosition) < s.Count {
			s.StepPosition = append(s.StepPosition, s.StepPosition[0])
		}
	}
	times, _, err := get("time", true)
	if err != nil {
		return nil, err
	}
	if times != nil {
		if len(times) != 1 && len(times) != s.Count {
			return nil, &Error{path, "time", fmt.Sprintf("it has %d values for %d shots", len(times), s.Count), "one, or one for each shot is expected"}
		}
		s.Time = times[0]
		for i, t := range times {
			if t != s.Time {
				return nil, &Error{path, "time", fmt.Sprintf("shot 0 was taken at %.6g and shot %d at %.6g", s.Time, i, t), "all shots of a file are of one time; give one file for each time"}
			}
		}
	}
	kept, _, err := get("kept", true)
	if err != nil {
		return nil, err
	}
	for _, k := range kept {
		s.Kept = append(s.Kept, k != 0)
	}
	return s, nil
}

// lengths are the units that a text file may use.
var lengths = map[string]float64{"": 1, "m": 1, "mm": 1e-3, "um": 1e-6, "µm": 1e-6, "μm": 1e-6, "nm": 1e-9, "xi": 1, "ξ": 1}

var seconds = map[string]float64{"": 1, "s": 1, "ms": 1e-3, "us": 1e-6}

// readText reads lines of densities, separated by commas, semicolons or blanks.
// Above them stand "# pixel = 0.6 um", "# step_position = 31 um" for all shots
// or "# step_position = first column", and perhaps "# time = 120 ms".
func readText(path string) (*Set, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	s := &Set{Path: path, Time: math.NaN()}
	line := 0
	fault := func(found, allowed string, args ...any) error {
		return &Error{path, fmt.Sprintf("line %d", line), found, fmt.Sprintf(allowed, args...)}
	}
	column, common := false, math.NaN()
	r := bufio.NewReaderSize(f, 1<<20)
	for {
		text, err := readLine(r)
		if err == io.EOF {
			break
		} else if err != nil {
			line++
			return nil, fault("", "%v", err)
		}
		line++
		if text = strings.TrimSpace(strings.TrimPrefix(text, "\ufeff")); text == "" {
			continue
		}
		if rest, ok := strings.CutPrefix(text, "#"); ok {
			name, value, ok := strings.Cut(rest, "=")
			if !ok {
				continue // a remark
			}
			switch name, value := strings.TrimSpace(name), strings.TrimSpace(value); name {
			case "pixel":
				if s.Pixel, err = measure(value, lengths); err != nil {
					return nil, fault("pixel = "+value, "%v, for example # pixel = 0.6 um", err)
				}
			case "step_position":
				if column = value == "first column"; column {
					continue
				}
				if common, err = measure(value, lengths); err != nil {
					return nil, fault("step_position = "+value, `%v, for example # step_position = 31 um, or # step_position = first column, which is then in m`, err)
				}
			case "time":
				if s.Time, err = measure(value, seconds); err != nil {
					return nil, fault("time = "+value, "%v, for example # time = 120 ms", err)
				}
			}
			continue
		}
		fields := strings.FieldsFunc(text, func(r rune) bool { return r == ',' || r == ';' || r == ' ' || r == '\t' })
		if column && len(fields) > 0 {
			x, err := strconv.ParseFloat(fields[0], 64)
			if err != nil {
				return nil, fault(fmt.Sprintf("%q", fields[0]), "the step's position is expected in the first column")
			}
			s.StepPosition, fields = append(s.StepPosition, x), fields[1:]
		}
		if s.Count == 0 {
			s.Pixels = len(fields)
		} else if len(fields) != s.Pixels {
			return nil, fault(fmt.Sprintf("%d pixels", len(fields)), "the shots above have %d", s.Pixels)
		}
		if (int64(len(s.Density))+int64(len(fields)))*8 > limit {
			return nil, fault("", "the numbers take more than %d MiB; give them as .npz, or in parts", limit>>20)
		}
		for _, field := range fields {
			v, err := strconv.ParseFloat(field, 64)
			if err != nil && !math.IsInf(v, 0) {
				return nil, fault(fmt.Sprintf("%q", field), "a number is expected (NaN for a missing pixel; decimal points, not commas)")
			}
			s.Density = append(s.Density, v)
		}
		s.Count++
	}
	if s.Count == 0 {
		return nil, &Error{Path: path, Allowed: "there are no shots in it; a shot a line is expected"}
	}
	if s.Pixel == 0 {
		return nil, &Error{Path: path, Where: "pixel", Allowed: "it is missing; a line # pixel = 0.6 um is expected above the shots"}
	}
	if !column {
		if math.IsNaN(common) {
			return nil, &Error{Path: path, Where: "step_position", Allowed: "it is missing; a line # step_position = 31 um, or # step_position = first column, is expected above the shots"}
		}
		for range s.Count {
			s.StepPosition = append(s.StepPosition, common)
		}
	}
	return s, nil
}

// maxLine bounds a line of text.
const maxLine = 16 << 20

func readLine(r *bufio.Reader) (string, error) {
	var b strings.Builder
	for {
		part, isPrefix, err := r.ReadLine()
		if err != nil {
			return "", err
		}
		b.Write(part)
		if !isPrefix {
			return b.String(), nil
		}
		if b.Len() > maxLine {
			return "", fmt.Errorf("the line is longer than %d bytes", maxLine)
		}
	}
}

// measure reads a number with one of the units.
func measure(text string, units map[string]float64) (float64, error) {
	end := strings.IndexFunc(text, func(r rune) bool { return !strings.ContainsRune("0123456789.+-eE", r) })
	number, unit := text, ""
	if end >= 0 {
		number, unit = text[:end], strings.TrimSpace(text[end:])
	}
	v, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
	si, known := units[unit]
	if err != nil || !known {
		return 0, errors.New("a number and its unit are expected")
	}
	return v * si, nil
}

// Write writes a set as an archive that Read and numpy read, whole or not at
// all.
func Write(path string, s *Set) error {
	arrays := []npz.Array{
		{Name: "density", Shape: []int{s.Count, s.Pixels}, Data: s.Density},
		npz.Scalar("pixel", s.Pixel),
		npz.Vector("step_position", s.StepPosition),
	}
	if !math.IsNaN(s.Time) {
		arrays = append(arrays, npz.Scalar("time", s.Time))
	}
	if s.Kept != nil {
		arrays = append(arrays, npz.Array{Name: "kept", Shape: []int{len(s.Kept)}, Data: s.Kept})
	}
	return npz.WriteFile(path, arrays...)
}
