package main

import (
	"bytes"
	"encoding/json"
	"io"
	"slices"
	"strings"

	"github.com/rogpeppe/go-internal/testscript"
)

// oneJSON demands that a file, such as stdout, is one JSON object and nothing
// else.
func oneJSON(ts *testscript.TestScript, _ bool, args []string) {
	d := json.NewDecoder(strings.NewReader(ts.ReadFile(args[0])))
	var object map[string]any
	ts.Check(d.Decode(&object))
	if object == nil {
		ts.Fatalf("%s is not an object", args[0])
	}
	if err := d.Decode(new(any)); err != io.EOF {
		ts.Fatalf("after the object in %s: %v", args[0], err)
	}
}

// keys demands that a JSON file has the given keys, in dots: "keys file a a.b".
func keys(ts *testscript.TestScript, _ bool, args []string) {
	var found []string
	d := json.NewDecoder(bytes.NewReader([]byte(ts.ReadFile(args[0]))))
	var top any
	ts.Check(d.Decode(&top))
	var walk func(path string, v any)
	walk = func(path string, v any) {
		found = append(found, path)
		switch v := v.(type) {
		case map[string]any:
			for k, x := range v {
				walk(strings.TrimPrefix(path+"."+k, "."), x)
			}
		case []any:
			for _, x := range v {
				walk(path+"[]", x)
			}
		}
	}
	walk("", top)
	for _, k := range args[1:] {
		if !slices.Contains(found, k) {
			ts.Fatalf("%s has no key %s", args[0], k)
		}
	}
}
