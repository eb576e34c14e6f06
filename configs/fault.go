package configs

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
)

// Error is one fault of a scenario file.
type Error struct {
	File string
	// Line counts from 1; 0 where the fault is not on a line.
	Line int
	// Key is the dotted key, such as "step.speed"; empty for a fault of the
	// file as a whole.
	Key string
	// Found is the value as the file writes it, or a section's header; empty
	// where the key is missing.
	Found string
	// Allowed says what is wrong and what is allowed.
	Allowed string
	// Hint says what to do, for example `for example "0.3 mm/s"`.
	Hint string

	cause error
}

// Error returns `file:line: key = found: allowed, hint`, leaving out what is
// empty.
func (e *Error) Error() string {
	var b strings.Builder
	b.WriteString(e.File)
	if e.Line > 0 {
		fmt.Fprintf(&b, ":%d", e.Line)
	}
	b.WriteString(": ")
	switch {
	case e.Key != "" && strings.Trim(e.Found, "[]") == e.Key: // a section, which stands for itself
		fmt.Fprintf(&b, "%s: ", e.Found)
	case e.Key != "" && e.Found != "":
		fmt.Fprintf(&b, "%s = %s: ", e.Key, e.Found)
	case e.Key != "":
		fmt.Fprintf(&b, "%s: ", e.Key)
	}
	b.WriteString(e.Allowed)
	if e.Hint != "" {
		b.WriteString(", ")
		b.WriteString(e.Hint)
	}
	return b.String()
}

// Unwrap returns the error of the file system or of another package behind
// this one, if there is one.
func (e *Error) Unwrap() error { return e.cause }

// Errors is every fault found in one file, in the order of its lines. Use
// errors.As to get at an *Error.
type Errors []*Error

// Error returns one fault a line.
func (es Errors) Error() string {
	lines := make([]string, len(es))
	for i, e := range es {
		lines[i] = e.Error()
	}
	return strings.Join(lines, "\n")
}

// Unwrap lets errors.Is and errors.As see each fault.
func (es Errors) Unwrap() []error {
	all := make([]error, len(es))
	for i, e := range es {
		all[i] = e
	}
	return all
}

// inOrder sorts faults by line, those without a line last, and returns nil as
// an error where there is none.
func (es Errors) inOrder() error {
	if len(es) == 0 {
		return nil
	}
	line := func(e *Error) int {
		if e.Line == 0 {
			return math.MaxInt
		}
		return e.Line
	}
	slices.SortStableFunc(es, func(a, b *Error) int { return cmp.Compare(line(a), line(b)) })
	return es
}
