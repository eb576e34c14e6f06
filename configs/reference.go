package configs

import (
	"fmt"
	"strings"
)

// Reference returns a description of every section, key and unit of a scenario
// file, in Markdown. It is made from the table that the decoder checks against.
func Reference() string {
	var b strings.Builder
	table := func(section string) {
		b.WriteString("| key | meaning | with `units = \"lab\"` | with `units = \"condensate\"` | default |\n|---|---|---|---|---|\n")
		for _, leaf := range keysOf(section) {
			name := leaf
			if section != "" {
				name = section + "." + leaf
			}
			k := byName[name]
			fmt.Fprintf(&b, "| `%s` | %s | %s | %s | %s |\n", leaf, k.meaning, k.describe(Lab), k.describe(Condensate), k.describeDefault())
		}
	}
	b.WriteString("## Above the sections\n\n")
	table("")
	for _, s := range sections {
		fmt.Fprintf(&b, "\n## `[%s]`\n\n%s\n\n", s.name, s.meaning)
		table(s.name)
	}
	b.WriteString("\n## Units\n\n| dimension | units |\n|---|---|\n")
	for _, d := range dimensions {
		fmt.Fprintf(&b, "| %s | %s |\n", d, unitNames(d))
	}
	b.WriteString("\n`um` may be written `µm`. A depth in kelvin stands for k_B times it, one in hertz for h times it.\n")
	return b.String()
}

// describe says what a key takes, with an example.
func (k *key) describe(u Units) string {
	switch {
	case !k.exists(u):
		return "–"
	case k.kind == text:
		return "text"
	case k.kind == choice:
		return "one of " + quoted(k.choices)
	}
	s, dim := k.span(u)
	what := s.String()
	switch {
	case k.kind == count:
		what = "whole number, " + what
	case dim != "":
		what = string(dim) + ", " + what
	}
	return what + "; `" + k.sample(u) + "`"
}

func (k *key) describeDefault() string {
	switch {
	case k.fallback != "":
		return "`" + k.fallback + "`"
	case k.automatic != "":
		return k.automatic
	case k.optional:
		return "0"
	}
	return "–"
}
