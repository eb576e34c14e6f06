package npz

import (
	"errors"
	"fmt"
	"math"
	"math/bits"
	"strconv"
	"strings"
)

const (
	magic         = "\x93NUMPY"
	maxDimensions = 64      // numpy's own limit since 2.0, 32 before
	maxHeader     = 1 << 16 // numpy refuses to read more than 10000 bytes
)

// header is what stands before an array's elements.
type header struct {
	descr   string // element type such as "<f8"; "" when it is a list of fields
	fortran bool
	shape   []int
}

// product is the number of elements, ok unless a length is negative or the
// lengths that are not zero overflow.
func product(shape []int) (count int64, ok bool) {
	count = 1
	empty := false
	for _, n := range shape {
		if n < 0 {
			return 0, false
		}
		if n == 0 {
			empty = true
			continue
		}
		hi, lo := bits.Mul64(uint64(count), uint64(n))
		if hi != 0 || lo > math.MaxInt64 {
			return 0, false
		}
		count = int64(lo)
	}
	if empty {
		return 0, true
	}
	return count, true
}

// parseHeader reads the dictionary literal of a header. It knows the few
// Python literals that numpy writes there and evaluates nothing.
func parseHeader(text string) (header, error) {
	p := &literal{rest: text}
	v, err := p.value(0)
	if err != nil {
		return header{}, err
	}
	dict, ok := v.(map[string]any)
	if !ok {
		return header{}, errors.New("it is no dictionary")
	}
	if p.skip(); p.rest != "" {
		return header{}, fmt.Errorf("%q follows the dictionary", clip(p.rest))
	}
	var h header
	for _, key := range []string{"descr", "fortran_order", "shape"} {
		if _, ok := dict[key]; !ok {
			return header{}, fmt.Errorf("the key %q is missing", key)
		}
	}
	if len(dict) != 3 {
		return header{}, fmt.Errorf("there are %d keys, not descr, fortran_order and shape alone", len(dict))
	}
	switch descr := dict["descr"].(type) {
	case string:
		if descr == "" {
			return header{}, errors.New("descr is empty")
		}
		h.descr = descr
	case []any: // fields of a structured array
	default:
		return header{}, errors.New("descr is neither a string nor a list of fields")
	}
	if h.fortran, ok = dict["fortran_order"].(bool); !ok {
		return header{}, errors.New("fortran_order is neither True nor False")
	}
	shape, ok := dict["shape"].([]any)
	if !ok {
		return header{}, errors.New("shape is no tuple")
	}
	if len(shape) > maxDimensions {
		return header{}, fmt.Errorf("shape has %d dimensions, at most %d are allowed", len(shape), maxDimensions)
	}
	h.shape = make([]int, len(shape))
	for i, n := range shape {
		length, ok := n.(int64)
		if !ok || length < 0 || int64(int(length)) != length {
			return header{}, fmt.Errorf("shape has %v as a length; lengths are whole numbers from 0", n)
		}
		h.shape[i] = int(length)
	}
	return h, nil
}

// literal reads Python literals off the front of rest.
type literal struct{ rest string }

func (p *literal) skip() { p.rest = strings.TrimLeft(p.rest, " \t\r\n") }

// take removes s from the front if it is there, past white space.
func (p *literal) take(s string) bool {
	p.skip()
	rest, ok := strings.CutPrefix(p.rest, s)
	p.rest = rest
	return ok
}

// value returns a string, bool, int64, []any (tuple or list) or map[string]any.
func (p *literal) value(depth int) (any, error) {
	const maxDepth = 16
	if depth > maxDepth {
		return nil, fmt.Errorf("it is nested deeper than %d", maxDepth)
	}
	switch {
	case p.take("True"):
		return true, nil
	case p.take("False"):
		return false, nil
	case p.take("{"):
		return p.dict(depth)
	case p.take("("):
		return p.sequence(")", depth)
	case p.take("["):
		return p.sequence("]", depth)
	case p.take("'"):
		return p.text("'")
	case p.take(`"`):
		return p.text(`"`)
	}
	end := strings.IndexFunc(p.rest, func(r rune) bool { return (r < '0' || r > '9') && r != '-' })
	if end < 0 {
		end = len(p.rest)
	}
	n, err := strconv.ParseInt(p.rest[:end], 10, 64)
	if err != nil {
		return nil, fmt.Errorf("%q is no literal that a header may have", clip(p.rest))
	}
	p.rest = strings.TrimPrefix(p.rest[end:], "L") // Python 2 wrote its long integers so
	return n, nil
}

func (p *literal) text(quote string) (any, error) {
	s, rest, ok := strings.Cut(p.rest, quote)
	if !ok || strings.ContainsAny(s, "\\\n") {
		return nil, fmt.Errorf("the string %q is not closed or has escapes", clip(p.rest))
	}
	p.rest = rest
	return s, nil
}

func (p *literal) sequence(end string, depth int) (any, error) {
	items := []any{}
	for !p.take(end) {
		v, err := p.value(depth + 1)
		if err != nil {
			return nil, err
		}
		items = append(items, v)
		if !p.take(",") {
			if !p.take(end) {
				return nil, fmt.Errorf("%q stands where a comma or %q should", clip(p.rest), end)
			}
			break
		}
	}
	return items, nil
}

func (p *literal) dict(depth int) (any, error) {
	dict := map[string]any{}
	for !p.take("}") {
		k, err := p.value(depth + 1)
		if err != nil {
			return nil, err
		}
		key, ok := k.(string)
		if _, taken := dict[key]; !ok || taken {
			return nil, fmt.Errorf("the key %v is no string or occurs twice", k)
		}
		if !p.take(":") {
			return nil, fmt.Errorf("%q stands where a colon should", clip(p.rest))
		}
		if dict[key], err = p.value(depth + 1); err != nil {
			return nil, err
		}
		if !p.take(",") {
			if !p.take("}") {
				return nil, fmt.Errorf("%q stands where a comma or } should", clip(p.rest))
			}
			break
		}
	}
	return dict, nil
}

// clip shortens foreign text for a message.
func clip(s string) string {
	const most = 24
	if len(s) > most {
		return s[:most] + "..."
	}
	return s
}
