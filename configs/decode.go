package configs

import (
	"bytes"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2"
)

// maxSize is the largest file that is read as a scenario.
const maxSize = 1 << 16

// Decode decodes a scenario file; name stands for it in errors. Every fault is
// an *Error, and all that are found come together as Errors in the order of
// their lines. A file that is not TOML has only that one fault.
//
// Names are matched exactly. The decoder of package toml, even a strict one,
// takes Speed for speed, and stops at the first value of a wrong type; so it
// serves here for syntax and values alone.
func Decode(name string, text []byte) (*Config, error) {
	tree, fault := parse(name, text)
	if fault != nil {
		return nil, Errors{fault}
	}
	return fromTree(name, text, tree, nil)
}

// fromTree reads a tree of values, of which some are overridden.
func fromTree(name string, text []byte, tree map[string]any, override map[string]any) (*Config, error) {
	c := &Config{Source: name, Text: text, places: findPlaces(clean(text))}
	d := decoder{c: c, values: map[string]any{}, bad: map[string]bool{}}
	d.flatten("", tree)
	for key, v := range override {
		d.values[key] = v
		at := c.places[key]
		at.written = fmt.Sprint(v)
		c.places[key] = at
	}
	if d.units() {
		d.fill()
		d.require()
	}
	if err := d.faults.inOrder(); err != nil {
		return nil, err
	}
	return c, nil
}

// clean takes off the mark that some editors put before UTF-8.
func clean(text []byte) []byte { return bytes.TrimPrefix(text, []byte("\ufeff")) }

// parse reads the text as TOML.
func parse(name string, text []byte) (map[string]any, *Error) {
	fault := func(line int, key, allowed, hint string) *Error {
		return &Error{File: name, Line: line, Key: key, Allowed: allowed, Hint: hint}
	}
	switch {
	case len(text) > maxSize:
		return nil, fault(0, "", fmt.Sprintf("more than %d bytes", maxSize), "a scenario is a page of text")
	case !utf8.Valid(text) || bytes.IndexByte(text, 0) >= 0:
		return nil, fault(0, "", "this is not text", "a scenario file is TOML in UTF-8")
	}
	text = clean(text)
	tree := map[string]any{}
	if err := toml.Unmarshal(text, &tree); err != nil {
		const hint = "each line is a [section], a key = value or a # comment"
		var syntax *toml.DecodeError
		if !errors.As(err, &syntax) {
			return nil, fault(0, "", "this is not TOML: "+strings.TrimPrefix(err.Error(), "toml: "), hint)
		}
		line, _ := syntax.Position()
		message := strings.TrimPrefix(syntax.Error(), "toml: ")
		if strings.Contains(message, "out of range") || strings.Contains(message, "too large") {
			return nil, overflow(name, text, line)
		}
		return nil, fault(line, "", "this is not TOML: "+message, hint)
	}
	if len(tree) == 0 {
		return nil, fault(0, "", "the file says nothing", "start from one of the examples: "+strings.Join(Examples(), ", "))
	}
	return tree, nil
}

// overflow is the fault of a number that TOML cannot hold, which package toml
// reports without its key.
func overflow(name string, text []byte, line int) *Error {
	e := &Error{File: name, Line: line, Allowed: "the number is too large for any key"}
	for key, at := range findPlaces(text) {
		if at.line == line && !isSection(key) {
			e.Key, e.Found = key, at.written
		}
	}
	return e
}

// decoder fills a Config from the values of a file.
type decoder struct {
	c      *Config
	values map[string]any  // by dotted key
	bad    map[string]bool // keys and sections that have a fault of their own
	faults Errors
}

func (d *decoder) fault(key, allowed, hint string) {
	d.bad[key] = true
	d.faults = append(d.faults, d.c.places.fault(d.c.Source, key, "", allowed, hint))
}

// missing is the fault of a key that should be there.
func (d *decoder) missing(key, why string) {
	section, leaf, ok := strings.Cut(key, ".")
	if ok && d.bad[section] {
		return // the section itself cannot be read
	}
	if !ok {
		leaf = key
	}
	hint := "for example " + leaf + " = " + byName[key].sample(d.c.Units)
	if ok && !d.c.Given(section) {
		hint += " in a section [" + section + "]"
	}
	d.faults = append(d.faults, &Error{File: d.c.Source, Line: d.c.Line(section), Key: key, Allowed: "missing: " + why, Hint: hint})
}

// flatten collects the values by dotted key and refuses what is not known.
func (d *decoder) flatten(section string, table map[string]any) {
	for _, name := range slices.Sorted(maps.Keys(table)) {
		v := table[name]
		full := part(name)
		if section != "" {
			full = section + "." + full
		}
		sub, isTable := v.(map[string]any)
		switch {
		case byName[full] != nil:
			d.values[full] = v
		case section == "" && isSection(name) && isTable:
			d.flatten(name, sub)
		case section == "" && isSection(name):
			d.fault(full, "a section is expected, once", "write ["+name+"] on a line of its own and its keys below")
		case section == "" && (isTable || strings.HasPrefix(d.c.places[full].written, "[[")):
			d.fault(full, "unknown section, allowed are "+strings.Join(sectionNames(), ", "), nearest(name, sectionNames()))
		default:
			d.unknown(section, name, full)
		}
	}
}

// unknown is the fault of a key that no section, or only another one, has.
func (d *decoder) unknown(section, name, full string) {
	known := keysOf(section)
	where := "in [" + section + "]"
	if section == "" {
		where = "above the sections"
	}
	hint := nearest(name, known)
	if hint == "" {
		var elsewhere []string
		for _, k := range keys {
			if k.leaf() == name {
				elsewhere = append(elsewhere, k.name)
			}
		}
		if elsewhere != nil {
			hint = "perhaps " + strings.Join(elsewhere, " or ") + " is meant"
		}
	}
	d.fault(full, "unknown key, allowed "+where+" are "+strings.Join(known, ", "), hint)
}

func sectionNames() []string {
	var names []string
	for _, s := range sections {
		names = append(names, s.name)
	}
	return names
}

// nearest suggests the known name that is fewest edits away, if it is near.
func nearest(name string, known []string) string {
	best, least := "", 3
	for _, k := range known {
		if e := edits(strings.ToLower(name), k); e < least && e < len(k) {
			best, least = k, e
		}
	}
	if best == "" {
		return ""
	}
	return "perhaps " + best + " is meant"
}

// edits is the number of letters to insert, delete or change that turns a into
// b: V. I. Levenshtein, Sov. Phys. Dokl. 10, 707 (1966).
func edits(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diagonal := row[0]
		row[0] = i
		for j := 1; j <= len(b); j++ {
			change := diagonal
			if a[i-1] != b[j-1] {
				change++
			}
			diagonal = row[j]
			row[j] = min(row[j]+1, row[j-1]+1, change)
		}
	}
	return row[len(b)]
}

// units reads the one key on which the reading of all others depends, and
// reports whether it could.
func (d *decoder) units() bool {
	const example = `for example units = "lab"`
	v, ok := d.values["units"]
	if !ok {
		d.faults = append(d.faults, &Error{File: d.c.Source, Key: "units", Allowed: `missing: "lab" or "condensate"`, Hint: example})
		return false
	}
	s, _ := v.(string)
	if u := Units(s); u == Lab || u == Condensate {
		d.c.Units = u
		return true
	}
	d.fault("units", `"lab" or "condensate" is expected`, example)
	return false
}

// fill reads every key that is there and gives the others their defaults.
func (d *decoder) fill() {
	for _, k := range keys {
		v, ok := d.values[k.name]
		if !ok {
			d.fallback(k)
			continue
		}
		if problem, hint := d.read(k, v); problem != "" {
			d.fault(k.name, problem, hint)
		}
	}
}

func (d *decoder) fallback(k *key) {
	if k.fallback == "" {
		return
	}
	var err error
	switch field := k.field(d.c).(type) {
	case *string:
		*field, err = strconv.Unquote(k.fallback)
	case *int:
		*field, err = strconv.Atoi(k.fallback)
	case *uint64:
		*field, err = strconv.ParseUint(k.fallback, 10, 64)
	case *float64:
		*field, err = strconv.ParseFloat(k.fallback, 64)
	}
	if err != nil {
		panic(fmt.Sprintf("configs: default of %s: %v", k.name, err))
	}
}
