package configs

import (
	"embed"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"strings"
)

//go:embed examples/*.toml
var examples embed.FS

// Examples returns the names of the scenarios that come with the program.
func Examples() []string {
	entries, err := examples.ReadDir("examples")
	if err != nil {
		panic("configs: " + err.Error()) // they are compiled in
	}
	var names []string
	for _, e := range entries { // sorted by name
		names = append(names, strings.TrimSuffix(e.Name(), ".toml"))
	}
	return names
}

// Load decodes the example of that name, such as "quay", or the file at that
// path. A name without a slash or an ending is an example's; a file of the
// same name in the working folder is reached as ./name.
func Load(nameOrPath string) (*Config, error) {
	if !strings.ContainsAny(nameOrPath, `/\.`) {
		text, err := examples.ReadFile(path.Join("examples", nameOrPath+".toml"))
		if err != nil {
			hint := nearest(nameOrPath, Examples())
			if hint != "" {
				hint += "; "
			}
			if nameOrPath == "" {
				nameOrPath = `""`
			}
			return nil, &Error{File: nameOrPath, Allowed: "there is no example of this name",
				Hint: hint + "the examples are " + strings.Join(Examples(), ", ") + "; a file is given by its path, such as ./scenario.toml", cause: fs.ErrNotExist}
		}
		return Decode(nameOrPath, text)
	}
	info, err := os.Stat(nameOrPath)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, &Error{File: nameOrPath, Allowed: "there is no such file", Hint: "the examples, which need no file, are " + strings.Join(Examples(), ", "), cause: err}
	case err != nil:
		return nil, &Error{File: nameOrPath, Allowed: "it cannot be read: " + err.Error(), cause: err}
	case info.IsDir():
		return nil, &Error{File: nameOrPath, Allowed: "this is a folder", Hint: "give the scenario file in it"}
	case info.Size() > maxSize:
		return nil, &Error{File: nameOrPath, Allowed: fmt.Sprintf("the file has %d bytes, at most %d are read", info.Size(), maxSize), Hint: "a scenario is a page of text"}
	}
	text, err := os.ReadFile(nameOrPath)
	if err != nil {
		return nil, &Error{File: nameOrPath, Allowed: "it cannot be read: " + err.Error(), cause: err}
	}
	return Decode(nameOrPath, text)
}

// Name returns a short name for the scenario's results: the example's, or the
// file's without folder and ending.
func (c *Config) Name() string {
	base := filepath.Base(c.Source)
	return strings.TrimSuffix(base, filepath.Ext(base))
}
