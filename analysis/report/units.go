// Package report turns an account into what a person or a program reads: the
// summary on the terminal, result.json, the arrays and the figures. Here
// numbers leave the condensate's units, and from here on each carries its own.
package report

import (
	"encoding/json"
	"math"
	"strings"

	"tailrace/gpe/lab"
)

// Dimension is the kind of a quantity.
type Dimension int

// The kinds of quantity that a report has.
const (
	Pure Dimension = iota
	Length
	Speed
	Density
	Time
	Rate
	Temperature
)

// Units is the dictionary of a report: the trade's units with a lab scale, or
// the condensate's own.
type Units struct {
	Lab   bool
	Scale lab.Scale
	PerXi float64 // n₀ξ
}

type unit struct {
	lab, key, condensate string
	factor               func(s lab.Scale) float64
}

var unitsOf = map[Dimension]unit{
	Pure:        {"", "", "", func(lab.Scale) float64 { return 1 }},
	Length:      {"µm", "um", "ξ", func(s lab.Scale) float64 { return s.Metres(1) * 1e6 }},
	Speed:       {"mm/s", "mm_per_s", "c₀", func(s lab.Scale) float64 { return s.MetresPerSecond(1) * 1e3 }},
	Density:     {"µm⁻¹", "per_um", "n₀", func(s lab.Scale) float64 { return s.AtomsPerMetre(1) * 1e-6 }},
	Time:        {"ms", "ms", "ħ/mc₀²", func(s lab.Scale) float64 { return s.Seconds(1) * 1e3 }},
	Rate:        {"s⁻¹", "per_s", "mc₀²/ħ", func(s lab.Scale) float64 { return s.PerSecond(1) }},
	Temperature: {"nK", "nK", "mc₀²/k_B", func(s lab.Scale) float64 { return s.Kelvin(1) * 1e9 }},
}

// Value returns x, given in condensate units, in u's units.
func (u Units) Value(x float64, d Dimension) float64 {
	if u.Lab {
		return x * unitsOf[d].factor(u.Scale)
	}
	return x
}

// Values does so for a slice.
func (u Units) Values(x []float64, d Dimension) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = u.Value(v, d)
	}
	return out
}

// Unit returns the name of the unit as it is printed.
func (u Units) Unit(d Dimension) string {
	if u.Lab {
		return unitsOf[d].lab
	}
	return unitsOf[d].condensate
}

// Axis returns the name of the unit in the markup of figures.
func (u Units) Axis(d Dimension) string {
	return axisMarkup.Replace(u.Unit(d))
}

var axisMarkup = strings.NewReplacer("⁻¹", "^{−1}", "₀", "_{0}", "k_B", "*k*_{B}")

// Key returns a JSON key: with its unit in lab units, bare in the condensate's.
func (u Units) Key(name string, d Dimension) string {
	if u.Lab && d != Pure {
		return name + "_" + unitsOf[d].key
	}
	return name
}

// object is a JSON object that keeps its order.
type object []member

type member struct {
	name  string
	value any
}

// with adds a number of a dimension; what is not finite becomes null.
func (o *object) with(u Units, name string, x float64, d Dimension) {
	o.set(u.Key(name, d), number(u.Value(x, d)))
}

func (o *object) set(name string, v any) { *o = append(*o, member{name, v}) }

func number(x float64) any {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return x
}

// MarshalJSON implements json.Marshaler.
func (o object) MarshalJSON() ([]byte, error) {
	b := []byte{'{'}
	for i, m := range o {
		if i > 0 {
			b = append(b, ',')
		}
		name, err := json.Marshal(m.name)
		if err != nil {
			return nil, err
		}
		value, err := json.Marshal(m.value)
		if err != nil {
			return nil, err
		}
		b = append(append(append(b, name...), ':'), value...)
	}
	return append(b, '}'), nil
}
