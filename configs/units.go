package configs

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"

	"tailrace/gpe/lab"
)

// dimension is what a number measures.
type dimension string

const (
	length      dimension = "length"
	speed       dimension = "speed"
	duration    dimension = "time"
	frequency   dimension = "frequency"
	temperature dimension = "temperature"
	energy      dimension = "energy"
	mass        dimension = "mass"
)

// unit is one unit of a dimension; SI is its size in SI units.
type unit struct {
	name string
	si   float64
}

// units lists the units of each dimension, largest first. A depth may be given
// as a temperature (times k_B) or a frequency (times h).
var units = map[dimension][]unit{
	length:      {{"m", 1}, {"mm", 1e-3}, {"um", 1e-6}, {"nm", 1e-9}, {"a0", lab.BohrRadius}},
	speed:       {{"m/s", 1}, {"cm/s", 1e-2}, {"mm/s", 1e-3}, {"um/ms", 1e-3}, {"um/s", 1e-6}},
	duration:    {{"s", 1}, {"ms", 1e-3}, {"us", 1e-6}},
	frequency:   {{"kHz", 1e3}, {"Hz", 1}},
	temperature: {{"K", 1}, {"mK", 1e-3}, {"uK", 1e-6}, {"nK", 1e-9}, {"pK", 1e-12}},
	energy: {
		{"J", 1},
		{"mK", 1e-3 * lab.Boltzmann}, {"uK", 1e-6 * lab.Boltzmann}, {"nK", 1e-9 * lab.Boltzmann}, {"pK", 1e-12 * lab.Boltzmann},
		{"kHz", 1e3 * lab.Planck}, {"Hz", lab.Planck},
	},
	mass: {{"kg", 1}, {"u", lab.AtomicMass}},
}

// dimensions is the order in which dimensions are listed and searched.
var dimensions = []dimension{length, speed, duration, frequency, temperature, energy, mass}

// unitNames returns the units of a dimension as a list in words.
func unitNames(d dimension) string {
	names := make([]string, len(units[d]))
	for i, u := range units[d] {
		names[i] = u.name
	}
	return strings.Join(names, ", ")
}

// article returns the dimension with its indefinite article.
func (d dimension) article() string {
	if d == energy {
		return "an " + string(d)
	}
	return "a " + string(d)
}

var (
	numberAndUnit = regexp.MustCompile(`^([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)\s*(.*)$`)
	// Both characters that print as µ: micro sign and Greek mu.
	microSigns = strings.NewReplacer("\u00b5", "u", "\u03bc", "u")
)

// parseQuantity returns "0.3 mm/s" in SI units. The error is what is wrong, in
// words.
func parseQuantity(text string, want dimension) (float64, error) {
	text = strings.TrimSpace(text)
	parts := numberAndUnit.FindStringSubmatch(text)
	if parts == nil {
		return 0, fmt.Errorf("%s is a number and a unit", want.article())
	}
	if strings.HasPrefix(parts[2], ",") {
		return 0, errors.New("a decimal point is expected, not a comma")
	}
	// Beyond the range of floating-point numbers this is ±Inf or 0, which the
	// range of the key refuses.
	number, _ := strconv.ParseFloat(parts[1], 64)
	name := microSigns.Replace(parts[2])
	if name == "" {
		return 0, fmt.Errorf("%s needs a unit", want.article())
	}
	for _, u := range units[want] {
		if u.name == name {
			return number * u.si, nil
		}
	}
	for _, other := range dimensions {
		for _, u := range units[other] {
			if u.name == name {
				return 0, fmt.Errorf("%s is expected, and %s is a unit of %s", want.article(), name, other)
			}
		}
	}
	return 0, fmt.Errorf("unknown unit %q, the units of %s are %s", parts[2], want, unitNames(want))
}

// formatQuantity writes an SI number in the largest unit of which it is at
// least one, to three digits.
func formatQuantity(si float64, d dimension) string {
	us := units[d]
	if d == energy { // nK and its kin, not J
		us = us[1:5]
	}
	best := us[len(us)-1]
	if d == length { // not a0
		best = us[len(us)-2]
	}
	for _, u := range us {
		if math.Abs(si) >= u.si {
			best = u
			break
		}
	}
	return fmt.Sprintf("%.3g %s", si/best.si, best.name)
}
