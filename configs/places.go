package configs

import (
	"bytes"
	"strconv"
	"strings"

	"github.com/pelletier/go-toml/v2/unstable"
)

// findPlaces finds the line and the written value of every key and section of
// a text that is known to be TOML.
func findPlaces(text []byte) places {
	f := finder{text: text, at: places{}}
	f.parser.Reset(text)
	section := ""
	for f.parser.NextExpression() {
		e := f.parser.Expression()
		switch e.Kind {
		case unstable.Table, unstable.ArrayTable:
			name, first, _ := f.dotted(e.Key())
			section = name
			brackets := "[" + name + "]"
			if e.Kind == unstable.ArrayTable {
				brackets = "[" + brackets + "]"
			}
			f.section(name, f.line(first))
			f.note(name, place{line: f.line(first), written: brackets})
		case unstable.KeyValue:
			f.keyValue(section, e)
		}
	}
	return f.at
}

type finder struct {
	text   []byte
	parser unstable.Parser
	at     places
}

// note keeps the first place of a name: a second can only be a section that
// opens again for another of its sub-tables.
func (f *finder) note(name string, p place) {
	if _, ok := f.at[name]; !ok {
		f.at[name] = p
	}
}

// section notes the section that a dotted name makes by itself.
func (f *finder) section(name string, line int) {
	if head, _, ok := strings.Cut(name, "."); ok && !strings.Contains(head, `"`) {
		f.note(head, place{line: line, written: "[" + head + "]"})
	}
}

func (f *finder) line(offset uint32) int { return 1 + bytes.Count(f.text[:offset], []byte("\n")) }

// dotted returns a key's name with the offset of its first byte and of the
// first byte after it.
func (f *finder) dotted(it unstable.Iterator) (name string, first, after uint32) {
	var parts []string
	for it.Next() {
		raw := it.Node().Raw
		if parts == nil {
			first = raw.Offset
		}
		after = raw.Offset + raw.Length
		parts = append(parts, part(string(it.Node().Data)))
	}
	return strings.Join(parts, "."), first, after
}

// part returns one part of a key as it stands in a dotted name: in quotes
// unless it is bare, so that "step.depth" in quotes is not the depth in [step].
func part(s string) string {
	for _, r := range s {
		if !(r == '_' || r == '-' || r >= '0' && r <= '9' || r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z') {
			return strconv.Quote(s)
		}
	}
	if s == "" {
		return `""`
	}
	return s
}

func (f *finder) keyValue(section string, e *unstable.Node) {
	name, first, after := f.dotted(e.Key())
	line := f.line(first)
	if section != "" {
		name = section + "." + name
	}
	f.section(name, line)
	end := e.Raw.Offset + e.Raw.Length
	written := ""
	if after <= end && int(end) <= len(f.text) {
		_, value, _ := strings.Cut(string(f.text[after:end]), "=")
		written = shorten(value)
	}
	f.note(name, place{line: line, written: written})
	if v := e.Value(); v.Kind == unstable.InlineTable {
		for it := v.Children(); it.Next(); {
			f.keyValue(name, it.Node())
		}
	}
}

// shorten puts a value, less the comments between its lines, on one line of at
// most 60 characters.
func shorten(value string) string {
	var b strings.Builder
	quote, comment := rune(0), false
	for _, r := range value {
		switch {
		case r == '\n':
			comment = false
		case comment:
			continue
		case quote == 0 && r == '#':
			comment = true
			continue
		case quote == 0 && (r == '"' || r == '\''):
			quote = r
		case r == quote:
			quote = 0
		}
		b.WriteRune(r)
	}
	short := strings.Join(strings.Fields(b.String()), " ")
	if r := []rune(short); len(r) > 60 {
		short = string(r[:57]) + "..."
	}
	return short
}
