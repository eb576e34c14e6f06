package configs

import (
	"fmt"
	"strconv"
	"strings"
)

// mostScanned is the largest number of values of a span.
const mostScanned = 2000

// Span reads even values of one given key of the file, "length=1:14:60" for 60
// values of cavity.length from 1 to 14, with units where the file has them,
// "length=4um:60um:30". It returns the values in the units of Config. The error
// says what is wrong and what is allowed.
func (c *Config) Span(key, values string) ([]float64, error) {
	k := byName[key]
	if k == nil || k.kind == text || k.kind == choice || k.kind == quantities {
		panic("configs: " + key + " is no number that can be scanned")
	}
	sample := strings.Trim(k.sample(c.Units), `"`)
	hint := fmt.Sprintf("for example %s=%s:%s:60", k.leaf(), strings.ReplaceAll(half(sample), " ", ""), strings.ReplaceAll(sample, " ", ""))
	name, values, ok := strings.Cut(values, "=")
	if name = strings.TrimSpace(name); !ok || name != k.leaf() && name != k.name {
		return nil, fmt.Errorf("what can be scanned is %s, %s", k.leaf(), hint)
	}
	parts := strings.Split(values, ":")
	if len(parts) != 3 {
		return nil, fmt.Errorf("first value, last value and their number are expected, with colons between, %s", hint)
	}
	var ends [2]float64
	for i := range ends {
		part := strings.TrimSpace(parts[i])
		var v any = part
		if _, dim := k.span(c.Units); dim == "" {
			x, err := strconv.ParseFloat(part, 64)
			if err != nil {
				return nil, fmt.Errorf("%q is not a number, %s", part, hint)
			}
			v = x
		}
		var problem string
		if ends[i], problem = c.number(k, v); problem != "" {
			return nil, fmt.Errorf("%q: %s, %s", part, problem, hint)
		}
	}
	n, err := strconv.Atoi(strings.TrimSpace(parts[2]))
	if err != nil || n < 2 || n > mostScanned {
		return nil, fmt.Errorf("%q: a whole number of values from 2 to %d is expected, %s", strings.TrimSpace(parts[2]), mostScanned, hint)
	}
	if ends[0] == ends[1] {
		return nil, fmt.Errorf("first and last value are the same, %s", hint)
	}
	out := make([]float64, n)
	for i := range out {
		out[i] = ends[0] + (ends[1]-ends[0])*float64(i)/float64(n-1)
	}
	out[n-1] = ends[1]
	return out, nil
}

// half returns a number with its unit, if it has one, divided by two.
func half(sample string) string {
	number, unit, _ := strings.Cut(sample, " ")
	x, err := strconv.ParseFloat(number, 64)
	if err != nil {
		panic("configs: an example begins with no number: " + sample)
	}
	return strconv.FormatFloat(x/2, 'g', -1, 64) + unit
}
