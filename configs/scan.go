package configs

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// Scan is a range of values of one key of a config.
type Scan struct {
	Key    string // dotted
	Unit   string // of Values, empty for plain numbers
	Values []float64
	Log    bool // evenly spaced in the logarithm

	dim dimension
}

// ScanError says what is wrong with the text of a scan.
type ScanError struct{ Text, Why string }

func (e *ScanError) Error() string {
	return fmt.Sprintf("--scan %s: %s; the form is key=from:to:count or key=from:to:count:log, for example width=0.1:4:24:log", e.Text, e.Why)
}

// maxScan bounds the values of a scan.
const maxScan = 10000

// Scan reads "key=from:to:count", evenly spaced, or "key=from:to:count:log",
// evenly spaced in the logarithm. The key is dotted, such as step.width, or its
// last part where that names one key that this config has. In lab units from
// and to have units. The error is a *ScanError.
func (c *Config) Scan(text string) (*Scan, error) {
	wrong := func(format string, args ...any) (*Scan, error) {
		return nil, &ScanError{text, fmt.Sprintf(format, args...)}
	}
	name, rest, ok := strings.Cut(text, "=")
	if !ok {
		return wrong("there is no = in it")
	}
	k, why := c.scanned(strings.TrimSpace(name))
	if why != "" {
		return wrong("%s", why)
	}
	parts := strings.Split(rest, ":")
	logarithmic := len(parts) == 4 && strings.TrimSpace(parts[3]) == "log"
	if len(parts) != 3 && !logarithmic {
		return wrong("after the = three parts are expected, with colons between, and perhaps :log")
	}
	count, err := strconv.Atoi(strings.TrimSpace(parts[2]))
	if err != nil || count < 2 || count > maxScan {
		return wrong("the count is %q, a whole number from 2 to %d is expected", parts[2], maxScan)
	}
	s := &Scan{Key: k.name, Log: logarithmic, dim: k.dim}
	var ends [2]float64
	for i, part := range parts[:2] {
		value, unit := strings.TrimSpace(part), ""
		if m := numberAndUnit.FindStringSubmatch(value); m != nil {
			value, unit = m[1], microSigns.Replace(m[2])
		}
		v, err := strconv.ParseFloat(value, 64)
		if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
			return wrong("%q is no number", part)
		}
		if _, dim := k.span(c.Units); dim == "" {
			if unit != "" {
				return wrong("%s is a plain number here, without %q", k.name, unit)
			}
		} else if i == 0 {
			if _, err := parseQuantity(part, dim); err != nil {
				return wrong("%s: %v", k.name, err)
			}
			s.Unit = unit
		} else if unit != s.Unit {
			return wrong("from is in %q and to in %q: give both in one unit", s.Unit, unit)
		}
		ends[i] = v
	}
	switch {
	case !(ends[0] < ends[1]):
		return wrong("from must be less than to")
	case logarithmic && ends[0] <= 0:
		return wrong("a logarithmic scan starts above zero")
	}
	for i := range count {
		f := float64(i) / float64(count-1)
		v := ends[0] + (ends[1]-ends[0])*f
		if logarithmic {
			v = ends[0] * math.Pow(ends[1]/ends[0], f)
		}
		s.Values = append(s.Values, v)
	}
	s.Values[count-1] = ends[1]
	return s, nil
}

// scanned finds the key of a scan, or says why there is none.
func (c *Config) scanned(name string) (*key, string) {
	numeric := func(k *key) bool { return (k.kind == number || k.kind == quantity) && k.exists(c.Units) }
	if k := byName[name]; k != nil {
		if !numeric(k) {
			return nil, name + " is not a number that can be scanned"
		}
		return k, ""
	}
	var here, all []*key
	var names []string
	for _, k := range keys {
		if k.leaf() != name || !numeric(k) {
			continue
		}
		all, names = append(all, k), append(names, k.name)
		if c.Given(k.name) {
			here = append(here, k)
		}
	}
	switch {
	case len(here) == 1:
		return here[0], ""
	case len(all) == 1:
		return all[0], ""
	case len(all) > 1:
		return nil, fmt.Sprintf("%q may be %s: say which", name, strings.Join(names, " or "))
	}
	var known []string
	for _, k := range keys {
		if numeric(k) && c.Given(k.name) {
			known = append(known, k.name)
		}
	}
	return nil, fmt.Sprintf("there is no key %q; of this config %s can be scanned", name, strings.Join(known, ", "))
}

// With returns the config with the scans' keys at the given values, one for
// each, with everything checked as if the file said so.
func (c *Config) With(scans []*Scan, values []float64) (*Config, error) {
	tree, fault := parse(c.Source, c.Text)
	if fault != nil {
		return nil, Errors{fault}
	}
	override := map[string]any{}
	for i, s := range scans {
		override[s.Key] = values[i]
		if s.Unit != "" {
			override[s.Key] = strconv.FormatFloat(values[i], 'g', -1, 64) + " " + s.Unit
		}
	}
	return fromTree(c.Source, c.Text, tree, override)
}

var trailing = regexp.MustCompile(`^.*\.`)

// UnitName returns the unit of Values as it is printed: that of the text, or the
// condensate's own.
func (s *Scan) UnitName() string {
	if s.Unit != "" {
		return strings.Replace(s.Unit, "um", "µm", 1)
	}
	return map[dimension]string{length: "ξ", speed: "c₀", duration: "ħ/mc₀²", energy: "mc₀²", temperature: "mc₀²/k_B", frequency: "mc₀²/ħ"}[s.dim]
}

// Label returns the scan's key without its section, in words.
func (s *Scan) Label() string {
	return strings.ReplaceAll(trailing.ReplaceAllString(s.Key, ""), "_", " ")
}

// ParseTemperature reads a temperature: with its unit, into K, in lab units, and
// as a plain number else.
func ParseTemperature(text string, inLab bool) (float64, error) {
	if inLab {
		return parseQuantity(text, temperature)
	}
	v, err := strconv.ParseFloat(strings.TrimSpace(text), 64)
	if err == nil && !(v > 0 && v < 100) {
		err = fmt.Errorf("%v is out of range", v)
	}
	return v, err
}
