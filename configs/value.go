package configs

import (
	"fmt"
	"slices"
	"strings"
)

// maxTimes bounds the recorded times: each keeps moments of its own.
const maxTimes = 64

// read puts the value of a key into its field, or says what is wrong with it
// and what to do.
func (d *decoder) read(k *key, v any) (problem, hint string) {
	sample := k.sample(d.c.Units)
	if !k.exists(d.c.Units) {
		return fmt.Sprintf("this key does not exist with units = %q", d.c.Units), "leave it out"
	}
	hint = "for example " + sample
	switch k.kind {
	case text, choice:
		s, ok := v.(string)
		if !ok {
			return "a string is expected", hint
		}
		if k.kind == choice && !slices.Contains(k.choices, s) {
			return "allowed are " + quoted(k.choices), nearestChoice(s, k.choices)
		}
		*k.field(d.c).(*string) = s
	case quantities:
		list, ok := v.([]any)
		if !ok {
			return "a list is expected", hint
		}
		if len(list) == 0 || len(list) > maxTimes {
			return fmt.Sprintf("a list of 1 to %d is expected", maxTimes), hint
		}
		out := make([]float64, len(list))
		for i, item := range list {
			if out[i], problem = d.c.number(k, item); problem != "" {
				return fmt.Sprintf("number %d of the list: %s", i+1, problem), hint
			}
		}
		*k.field(d.c).(*[]float64) = out
	default:
		x, problem := d.c.number(k, v)
		if problem != "" {
			return problem, hint
		}
		switch field := k.field(d.c).(type) {
		case *float64:
			*field = x
		case *int:
			*field = int(v.(int64))
		case *uint64:
			*field = uint64(v.(int64))
		}
	}
	return "", ""
}

func quoted(names []string) string {
	q := make([]string, len(names))
	for i, n := range names {
		q[i] = fmt.Sprintf("%q", n)
	}
	return strings.Join(q, ", ")
}

func nearestChoice(found string, choices []string) string {
	for _, c := range choices {
		if edits(strings.ToLower(found), strings.ToLower(c)) <= 2 {
			return fmt.Sprintf("perhaps %q is meant", c)
		}
	}
	return ""
}

// number returns a number of key k in SI or condensate units, or what is wrong
// with it. What it returns is finite and in the key's range.
func (c *Config) number(k *key, v any) (x float64, problem string) {
	span, dim := k.span(c.Units)
	if n, ok := v.(int64); ok {
		x = float64(n)
	} else if n, ok := v.(float64); ok {
		x = n
		if k.kind == count {
			return 0, "a whole number is expected"
		}
	} else if s, ok := v.(string); ok {
		switch {
		case dim != "":
			var err error
			if x, err = parseQuantity(s, dim); err != nil {
				return 0, err.Error()
			}
		case k.dim != "":
			return 0, `with units = "condensate" a plain number is expected, without quotes`
		default:
			return 0, "a plain number is expected, without quotes"
		}
	} else if dim != "" {
		return 0, dim.article() + " is a number and a unit, in quotes"
	} else {
		return 0, "a number is expected"
	}
	if _, ok := v.(string); !ok && dim != "" {
		return 0, dim.article() + " needs a unit"
	}
	if k.automatic != "" && x == 0 {
		return 0, ""
	}
	if !span.holds(x, dim) {
		problem = "it must be " + span.String()
		if k.automatic != "" {
			problem += ", or zero for " + k.automatic
		}
		return 0, problem
	}
	return x, ""
}
