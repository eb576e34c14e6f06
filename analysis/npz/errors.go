package npz

import (
	"errors"
	"fmt"
	"path"
	"strings"
	"unicode/utf8"
)

// Kinds of failure; every error of the reader that is not one of the file
// system's wraps exactly one of them in an *Error.
var (
	ErrNotArchive = errors.New("not a numpy archive")
	ErrTruncated  = errors.New("cut short or damaged")
	ErrTooLarge   = errors.New("too large")
	ErrName       = errors.New("member name not allowed")
	ErrHeader     = errors.New("array header not understood")
	ErrType       = errors.New("element type not supported")
	ErrInexact    = errors.New("integer too large for a float64")
	ErrMissing    = errors.New("no such array")
)

// Error says what is wrong with an archive.
type Error struct {
	Kind   error  // one of the Err values of this package
	Member string // the array or member it concerns, "" for the whole archive
	Found  string // what was found
	Want   string // what is allowed, or what to do; may be ""
}

func (e *Error) Error() string {
	var b strings.Builder
	if e.Member != "" {
		fmt.Fprintf(&b, "array %q: ", e.Member)
	}
	fmt.Fprintf(&b, "%v: %s", e.Kind, e.Found)
	if e.Want != "" {
		b.WriteString("; " + e.Want)
	}
	return b.String()
}

// Unwrap returns the kind.
func (e *Error) Unwrap() error { return e.Kind }

// checkName refuses names that a careless program would take for a path out of
// its folder. This package makes no paths from names, but what it lets pass
// might be unpacked by another.
func checkName(name string) error {
	want := "a name is a relative path in UTF-8 with no empty, . or .. part, no backslash, colon or control character"
	bad := name == "" || !utf8.ValidString(name) || path.IsAbs(name) || path.Clean(name) != name ||
		name == "." || name == ".." || strings.HasPrefix(name, "../") ||
		strings.ContainsFunc(name, func(r rune) bool { return r < ' ' || r == 0x7f || r == '\\' || r == ':' })
	if bad || len(name) > 1024 {
		return &Error{ErrName, "", fmt.Sprintf("%q", clip(name)), want}
	}
	return nil
}
