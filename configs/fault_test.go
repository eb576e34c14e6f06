package configs

import (
	"errors"
	"strings"
	"testing"
)

// sound is a sweep in lab units without fault.
const sound = `title = "t"
units = "lab"
[atom]
species = "Rb-87"
[trap]
radial_frequency = "260 Hz"
shape = "box"
length = "150 um"
wall_width = "1 um"
[cloud]
atoms = 5500
[step]
depth = "5 nK"
width = "0.5 um"
speed = "0.3 mm/s"
`

// ring is a uniform flow in condensate units without fault.
const ring = `units = "condensate"
[flow]
kind = "uniform"
velocity = 0.75
sound_speed_up = 1
sound_speed_down = 0.5
width = 1
`

// replace returns text with its only old replaced by new.
func replace(t testing.TB, text, old, new string) string {
	t.Helper()
	if strings.Count(text, old) != 1 {
		t.Fatalf("%d times %q", strings.Count(text, old), old)
	}
	return strings.Replace(text, old, new, 1)
}

func TestBadInput(t *testing.T) {
	for _, c := range []struct {
		name, base, old, new string
		want                 string
	}{
		{"unknown key", sound, `title = "t"`, `titel = "t"`,
			`q.toml:1: titel = "t": unknown key, allowed above the sections are title, units, perhaps title is meant`},
		{"misspelt key", sound, `speed = "0.3 mm/s"`, `spead = "0.3 mm/s"`,
			`q.toml:12: step.speed: missing: a sweep needs it, for example speed = "0.3 mm/s"
q.toml:15: step.spead = "0.3 mm/s": unknown key, allowed in [step] are depth, width, speed, start, ramp, perhaps speed is meant`},
		{"key in capitals", sound, `title =`, `Title =`,
			`q.toml:1: Title = "t": unknown key, allowed above the sections are title, units, perhaps title is meant`},
		{"key of another section", sound, `title = "t"`, `seed = 1`,
			`q.toml:1: seed = 1: unknown key, allowed above the sections are title, units, perhaps ensemble.seed is meant`},
		{"dotted key in quotes", sound, `title = "t"`, `"step.ramp" = "1 ms"`,
			`q.toml:1: "step.ramp" = "1 ms": unknown key, allowed above the sections are title, units`},
		{"unknown section", sound, `[cloud]`, "[grip]\npoints = 64\n[cloud]",
			`q.toml:10: [grip]: unknown section, allowed are atom, trap, cloud, step, flow, cavity, grid, ensemble, record, imaging, perhaps grid is meant`},
		{"section of a section", sound, `[cloud]`, "[trap.box]\n[cloud]",
			`q.toml:10: [trap.box]: unknown key, allowed in [trap] are radial_frequency, shape, length, wall_width, wall_height, axial_frequency`},
		{"section twice in brackets", sound, `[step]`, `[[step]]`,
			`q.toml:12: [[step]]: a section is expected, once, write [step] on a line of its own and its keys below`},
		{"section as a value", sound, `title = "t"`, `grid = 3`,
			`q.toml:1: grid = 3: a section is expected, once, write [grid] on a line of its own and its keys below`},
		{"no unit", sound, `"0.3 mm/s"`, `"0.3"`,
			`q.toml:15: step.speed = "0.3": a speed needs a unit, for example "0.3 mm/s"`},
		{"plain number", sound, `"0.3 mm/s"`, `0.3`,
			`q.toml:15: step.speed = 0.3: a speed needs a unit, for example "0.3 mm/s"`},
		{"wrong dimension", sound, `"0.3 mm/s"`, `"0.3 um"`,
			`q.toml:15: step.speed = "0.3 um": a speed is expected, and um is a unit of length, for example "0.3 mm/s"`},
		{"temperature for a time", sound, `"0.3 mm/s"`, "\"0.3 mm/s\"\nramp = \"3 nK\"",
			`q.toml:16: step.ramp = "3 nK": a time is expected, and nK is a unit of temperature, for example "5 ms"`},
		{"unknown unit", sound, `"5 nK"`, `"5 eV"`,
			`q.toml:13: step.depth = "5 eV": unknown unit "eV", the units of energy are J, mK, uK, nK, pK, kHz, Hz, for example "5 nK"`},
		{"decimal comma", sound, `"0.3 mm/s"`, `"0,3 mm/s"`,
			`q.toml:15: step.speed = "0,3 mm/s": a decimal point is expected, not a comma, for example "0.3 mm/s"`},
		{"no number", sound, `"0.3 mm/s"`, `"fast"`,
			`q.toml:15: step.speed = "fast": a speed is a number and a unit, for example "0.3 mm/s"`},
		{"negative", sound, `"0.3 mm/s"`, `"-0.3 mm/s"`,
			`q.toml:15: step.speed = "-0.3 mm/s": it must be above 0 mm/s and at most 1 m/s, for example "0.3 mm/s"`},
		{"zero", sound, `"0.5 um"`, `"0 um"`,
			`q.toml:14: step.width = "0 um": it must be above 0 um and at most 1 mm, for example "0.5 um"`},
		{"NaN", sound, `5500`, `nan`,
			`q.toml:11: cloud.atoms = nan: it must be at least 1 and at most 1e10, for example 5500`},
		{"infinity", sound, `5500`, `inf`,
			`q.toml:11: cloud.atoms = inf: it must be at least 1 and at most 1e10, for example 5500`},
		{"NaN in quotes", sound, `"5 nK"`, `"nan nK"`,
			`q.toml:13: step.depth = "nan nK": an energy is a number and a unit, for example "5 nK"`},
		{"overflow", sound, `5500`, `1e999`,
			`q.toml:11: cloud.atoms = 1e999: the number is too large for any key`},
		{"overflow of a whole number", sound, `5500`, `99999999999999999999`,
			`q.toml:11: cloud.atoms = 99999999999999999999: the number is too large for any key`},
		{"overflow in quotes", sound, `"5 nK"`, `"1e400 nK"`,
			`q.toml:13: step.depth = "1e400 nK": it must be above 0 nK and at most 1 mK, for example "5 nK"`},
		{"underflow in quotes", sound, `"5 nK"`, `"1e-400 nK"`,
			`q.toml:13: step.depth = "1e-400 nK": it must be above 0 nK and at most 1 mK, for example "5 nK"`},
		{"number in quotes", sound, `5500`, `"5500"`,
			`q.toml:11: cloud.atoms = "5500": a plain number is expected, without quotes, for example 5500`},
		{"boolean", sound, `5500`, `true`,
			`q.toml:11: cloud.atoms = true: a number is expected, for example 5500`},
		{"date", sound, `"5 nK"`, `2026-12-01`,
			`q.toml:13: step.depth = 2026-12-01: an energy is a number and a unit, in quotes, for example "5 nK"`},
		{"number for a string", sound, `"t"`, `3`,
			`q.toml:1: title = 3: a string is expected, for example "a step swept through rubidium"`},
		{"unknown choice", sound, `"box"`, `"boxx"`,
			`q.toml:7: trap.shape = "boxx": allowed are "box", "harmonic", perhaps "box" is meant`},
		{"unknown species", sound, `"Rb-87"`, `"Rb87"`,
			`q.toml:4: atom.species = "Rb87": allowed are "Rb-87", "Na-23", "K-39", "K-41", "Cs-133", "Li-7", "Yb-174", perhaps "Rb-87" is meant`},
		{"species that needs a field", sound, `"Rb-87"`, `"K-39"`,
			`q.toml:3: atom.scattering_length: missing: K-39 has no scattering length of its own (attractive in a weak field; repulsive near a Feshbach resonance only): give the one at the field in use, for example scattering_length = "100 a0"`},
		{"attractive", sound, `"Rb-87"`, "\"K-39\"\nscattering_length = \"-33 a0\"",
			`q.toml:5: atom.scattering_length = "-33 a0": it must be above 0 a0 and at most 100000 a0, for example "100 a0"`},
		{"no atom", sound, "[atom]\nspecies = \"Rb-87\"\n", "",
			`q.toml: atom.species: missing: an atom is given by its species, or by mass and scattering_length, for example species = "Rb-87" in a section [atom]`},
		{"no cloud", sound, "[cloud]\natoms = 5500\n", "",
			`q.toml: cloud.atoms: missing: it sets the density and so the size of the quantum noise, for example atoms = 5500 in a section [cloud]`},
		{"no length of the box", sound, "length = \"150 um\"\n", "",
			`q.toml:5: trap.length: missing: a box needs it, for example length = "150 um"`},
		{"walls of another trap", sound, `"box"`, `"harmonic"`,
			`q.toml:5: trap.axial_frequency: missing: a harmonic trap needs it, for example axial_frequency = "2 Hz"
q.toml:8: trap.length = "150 um": it has no meaning here: the trap is harmonic, leave it out
q.toml:9: trap.wall_width = "1 um": it has no meaning here: the trap is harmonic, leave it out`},
		{"walls without a plateau", sound, `"1 um"`, `"30 um"`,
			`q.toml:9: trap.wall_width = "30 um": at most an eighth of trap.length is allowed, or the walls leave no plateau`},
		{"trap not long", sound, "\"box\"\nlength = \"150 um\"\nwall_width = \"1 um\"", "\"harmonic\"\naxial_frequency = \"100 Hz\"",
			`q.toml:8: trap.axial_frequency = "100 Hz": at most a fifth of trap.radial_frequency is allowed, the cloud must be long and thin`},
		{"lab numbers in condensate units", sound, `"lab"`, `"condensate"`,
			`q.toml:4: atom.species = "Rb-87": it has no meaning here: condensate units know neither atom nor radial trap, leave it out or give everything with units = "lab"
q.toml:6: trap.radial_frequency = "260 Hz": this key does not exist with units = "condensate", leave it out
q.toml:8: trap.length = "150 um": with units = "condensate" a plain number is expected, without quotes, for example 150
q.toml:9: trap.wall_width = "1 um": with units = "condensate" a plain number is expected, without quotes, for example 1
q.toml:13: step.depth = "5 nK": with units = "condensate" a plain number is expected, without quotes, for example 1
q.toml:14: step.width = "0.5 um": with units = "condensate" a plain number is expected, without quotes, for example 0.5
q.toml:15: step.speed = "0.3 mm/s": with units = "condensate" a plain number is expected, without quotes, for example 0.5`},
		{"no units", sound, "units = \"lab\"\n", "",
			`q.toml: units: missing: "lab" or "condensate", for example units = "lab"`},
		{"unknown units", sound, `"lab"`, `"si"`,
			`q.toml:2: units = "si": "lab" or "condensate" is expected, for example units = "lab"`},
		{"times not a list", sound, `[step]`, "[record]\ntimes = \"40 ms\"\n[step]",
			`q.toml:13: record.times = "40 ms": a list is expected, for example ["90 ms", "170 ms"]`},
		{"no times", sound, `[step]`, "[record]\ntimes = []\n[step]",
			`q.toml:13: record.times = []: a list of 1 to 64 is expected, for example ["90 ms", "170 ms"]`},
		{"times backwards", sound, `[step]`, "[record]\ntimes = [\"40 ms\", # then\n  \"30 ms\"]\n[step]",
			`q.toml:13: record.times = ["40 ms", "30 ms"]: the times must increase, and number 2 is not later than the one before, for example ["90 ms", "170 ms"]`},
		{"a time without unit", sound, `[step]`, "[record]\ntimes = [\"40 ms\", 50]\n[step]",
			`q.toml:13: record.times = ["40 ms", 50]: number 2 of the list: a time needs a unit, for example ["90 ms", "170 ms"]`},
		{"a time of zero", sound, `[step]`, "[record]\ntimes = [\"0 ms\", \"50 ms\"]\n[step]",
			`q.toml:13: record.times = ["0 ms", "50 ms"]: number 1 of the list: it must be above 0 ms and at most 1000 s, for example ["90 ms", "170 ms"]`},
		{"part of a shot", sound, `[step]`, "[imaging]\nresolution = \"1 um\"\npixel = \"1 um\"\nphotons_per_atom = 10\nshots = 1.5\n[step]",
			`q.toml:16: imaging.shots = 1.5: a whole number is expected, for example 2000`},
		{"seed with a point", sound, `[step]`, "[ensemble]\nseed = 3.0\n[step]",
			`q.toml:13: ensemble.seed = 3.0: a whole number is expected, for example 1`},
		{"negative seed", sound, `[step]`, "[ensemble]\nseed = -1\n[step]",
			`q.toml:13: ensemble.seed = -1: it must be at least 0 and at most 9223372036854775807, for example 1`},
		{"too many trajectories", sound, `[step]`, "[ensemble]\ntrajectories = 65537\n[step]",
			`q.toml:13: ensemble.trajectories = 65537: it must be at least 1 and at most 65536, for example 1024`},
		{"too few points", sound, `[step]`, "[grid]\npoints = 7\n[step]",
			`q.toml:13: grid.points = 7: it must be at least 16 and at most 1048576, or zero for an automatic choice, for example 1024`},
		{"a waterfall in the lab", sound, `[step]`, "[flow]\nkind = \"waterfall\"\n[step]",
			`q.toml:13: flow.kind = "waterfall": a waterfall has no scale of its own, so it needs units = "condensate", in lab units give a [step] instead`},
		{"a flow of no kind", sound, `[step]`, "[flow]\n[step]",
			`q.toml:12: flow.kind: missing: a flow is one of "step", "waterfall", "uniform", for example kind = "uniform"`},
		{"no horizon", ring, `velocity = 0.75`, `velocity = 1.25`,
			`q.toml:4: flow.velocity = 1.25: a horizon needs sound_speed_down < velocity < sound_speed_up, change one of the three`},
		{"no horizon, too slow", ring, `velocity = 0.75`, `velocity = 0.5`,
			`q.toml:4: flow.velocity = 0.5: a horizon needs sound_speed_down < velocity < sound_speed_up, change one of the three`},
		{"subsonic inside a cavity", ring + "[cavity]\nlength = 12\n", `velocity = 0.75`, `velocity = 0.5`,
			`q.toml:4: flow.velocity = 0.5: the flow is subsonic inside the cavity, so there are no horizons: a horizon needs sound_speed_down < velocity < sound_speed_up, change one of the three`},
		{"supersonic outside a cavity", ring + "[cavity]\nlength = 12\n", `velocity = 0.75`, `velocity = 1.25`,
			`q.toml:4: flow.velocity = 1.25: the flow is supersonic outside the cavity, so there are no horizons: a horizon needs sound_speed_down < velocity < sound_speed_up, change one of the three`},
		{"quantity in condensate units", ring, `0.75`, `"0.75 mm/s"`,
			`q.toml:4: flow.velocity = "0.75 mm/s": with units = "condensate" a plain number is expected, without quotes, for example 0.75`},
		{"sharp edge without cavity", ring, `width = 1`, `width = 0`,
			`q.toml:7: flow.width = 0: a sharp edge is allowed with a [cavity] only: alone it has no temperature, for example 1`},
		{"uniform flow without width", ring, "width = 1\n", "",
			`q.toml:2: flow.width: missing: a uniform flow needs it, for example width = 1`},
		{"step in a uniform flow", ring, `[flow]`, "[step]\nramp = 3\nspeed = 0.5\n[flow]",
			`q.toml:4: step.speed = 0.5: it has no meaning here: the flow is uniform, leave it out`},
		{"a run without atoms", ring, `[flow]`, "[record]\ntimes = [60]\n[flow]",
			`q.toml: cloud.atoms: missing: it sets the size of the quantum noise, for example atoms = 5500 in a section [cloud]`},
		{"a ring without length", ring, `[flow]`, "[cloud]\natoms = 25600\n[flow]",
			`q.toml: grid.length: missing: with the atom number it gives the density on the ring, for example length = 512 in a section [grid]`},
		{"swollen in condensate units", ring, `[flow]`, "[cloud]\nradial = \"swollen\"\n[flow]",
			`q.toml:3: cloud.radial = "swollen": a swollen profile depends on atom and radial trap, so it needs units = "lab", write "frozen" or give the scenario in lab units`},
		{"a cavity without length", ring, `[flow]`, "[cavity]\n[flow]",
			`q.toml:2: cavity.length: missing: a cavity needs it, for example length = 12`},
		{"not TOML", sound, `title = "t"`, `title = `,
			`q.toml:1: this is not TOML: unexpected character U+000A at start of value, each line is a [section], a key = value or a # comment`},
		{"key given twice", sound, `title = "t"`, "title = \"t\"\ntitle = \"u\"",
			`q.toml:2: this is not TOML: key title is already defined, each line is a [section], a key = value or a # comment`},
		{"quantity without quotes", sound, `"5 nK"`, `5 nK`,
			`q.toml:13: this is not TOML: expected newline but got U+006E 'n', each line is a [section], a key = value or a # comment`},
		{"empty file", sound, sound, "",
			`q.toml: the file says nothing, start from one of the examples: basin, harbour, lock, quay, sluice, uniform, weir`},
		{"comments only", sound, sound, "# to do\n",
			`q.toml: the file says nothing, start from one of the examples: basin, harbour, lock, quay, sluice, uniform, weir`},
		{"binary file", sound, sound, "PK\x03\x04\x00\x00",
			`q.toml: this is not text, a scenario file is TOML in UTF-8`},
		{"another encoding", sound, `"t"`, "\"\xe9\"",
			`q.toml: this is not text, a scenario file is TOML in UTF-8`},
		{"endless file", sound, sound, strings.Repeat("#\n", 40000),
			`q.toml: more than 65536 bytes, a scenario is a page of text`},
	} {
		t.Run(c.name, func(t *testing.T) {
			config, err := Decode("q.toml", []byte(replace(t, c.base, c.old, c.new)))
			if err == nil {
				t.Fatal("accepted")
			}
			if config != nil {
				t.Error("a config came with the error")
			}
			if err.Error() != c.want {
				t.Errorf("got\n%v\nwant\n%s", err, c.want)
			}
			var fault *Error
			if !errors.As(err, &fault) || fault.File != "q.toml" {
				t.Errorf("not an *Error: %#v", err)
			}
		})
	}
}

// The fields of an error stand for themselves, and all faults of a file come
// at once, in the order of its lines.
func TestErrorFields(t *testing.T) {
	text := replace(t, replace(t, sound, `"0.3 mm/s"`, `"0.3"`), `5500`, `0`)
	_, err := Decode("q.toml", []byte(text))
	var all Errors
	if !errors.As(err, &all) || len(all) != 2 {
		t.Fatalf("want two faults: %v", err)
	}
	want := Error{File: "q.toml", Line: 15, Key: "step.speed", Found: `"0.3"`,
		Allowed: "a speed needs a unit", Hint: `for example "0.3 mm/s"`}
	if *all[1] != want {
		t.Errorf("got %#v, want %#v", *all[1], want)
	}
	if all[0].Line != 11 {
		t.Errorf("first fault on line %d", all[0].Line)
	}
}
