package configs

import (
	"errors"
	"math"
	"strings"
	"testing"
)

const twoEdges = `units = "condensate"
[flow]
kind = "uniform"
velocity = 0.75
sound_speed_up = 1
sound_speed_down = 0.5
width = 0
[cavity]
length = 12
`

const twoEdgesLab = `units = "lab"
[atom]
species = "Rb-87"
[flow]
kind = "uniform"
velocity = "0.525 mm/s"
sound_speed_up = "0.7 mm/s"
sound_speed_down = "0.35 mm/s"
width = "0.5 um"
[cavity]
length = "12 um"
`

func TestTwoHorizons(t *testing.T) {
	h, err := decode(t, twoEdges).TwoHorizons()
	if err != nil {
		t.Fatal(err)
	}
	if h.InLab || h.Velocity != 0.75 || h.Outside != 1 || h.Inside != 0.5 || h.Length != 12 || h.Width != 0 {
		t.Errorf("%+v", h)
	}
	// In the laboratory the sound speed outside is the unit, whatever it is:
	// ħ/mc for rubidium 87 (CODATA 2018; mass of G. Audi et al. from memory).
	if h, err = decode(t, twoEdgesLab).TwoHorizons(); err != nil {
		t.Fatal(err)
	}
	xi := 1.054571817e-34 / (86.909180531 * 1.66053906660e-27 * 0.7e-3)
	for _, v := range []struct{ got, want float64 }{{h.Velocity, 0.75}, {h.Outside, 1}, {h.Inside, 0.5}, {h.Length, 12e-6 / xi}, {h.Width, 0.5e-6 / xi}, {h.Scale.HealingLength, xi}} {
		if math.Abs(v.got/v.want-1) > 1e-8 {
			t.Errorf("%g, want %g", v.got, v.want)
		}
	}
	if !h.InLab {
		t.Error("not in lab units")
	}
}

func TestNoTwoHorizons(t *testing.T) {
	for _, row := range []struct{ name, text, want string }{
		{"no cavity", strings.Replace(strings.Replace(twoEdges, "[cavity]\nlength = 12\n", "", 1), "width = 0", "width = 1", 1),
			`q.toml: cavity.length = nothing: the distance between the two horizons, for example length = 12 in a section [cavity]`},
		{"a waterfall", "units = \"condensate\"\n[flow]\nkind = \"waterfall\"\nmach_up = 0.6\n[cavity]\nlength = 12\n",
			`q.toml:3: flow.kind = "waterfall": the modes of a cavity are those of a uniform flow, kind = "uniform", with velocity, sound_speed_up, sound_speed_down and width; the example lock shows how`},
		{"a sweep", sound + "[cavity]\nlength = \"12 um\"\n",
			`q.toml: flow.kind = nothing: the modes of a cavity are those of a uniform flow, kind = "uniform", with velocity, sound_speed_up, sound_speed_down and width; the example lock shows how`},
		{"too long", strings.Replace(twoEdges, "length = 12", "length = 2000", 1),
			`q.toml:9: cavity.length = 2000: at most 1126 is allowed in this flow, with edges of this width, sharp ones may be as far apart as 400 modes need, whose rates nobody could tell apart`},
		{"edges too wide", strings.Replace(twoEdges, "width = 0", "width = 40", 1),
			`q.toml:7: flow.width = 40: at most 35.17 is allowed in this flow, waves take minutes to follow through wider edges, and hardly grow`},
		{"too long in the laboratory", strings.Replace(twoEdgesLab, `"12 um"`, `"12 mm"`, 1),
			`q.toml:11: cavity.length = "12 mm": at most 1.16 mm is allowed in this flow, with edges of this width, sharp ones may be as far apart as 400 modes need, whose rates nobody could tell apart`},
	} {
		t.Run(row.name, func(t *testing.T) {
			_, err := decode(t, row.text).TwoHorizons()
			var fault *Error
			if !errors.As(err, &fault) || fault.Error() != row.want {
				t.Errorf("%v, want %s", err, row.want)
			}
		})
	}
	// An ensemble with one horizon is not passed off for one with two.
	_, err := decode(t, twoEdges).Scenario()
	if want := "q.toml:8: [cavity]: an ensemble has one horizon, and this section asks for two, leave it out, or see the modes between the two with tailrace cavity"; err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
}

func TestSpan(t *testing.T) {
	plain, inLab := decode(t, twoEdges), decode(t, twoEdgesLab)
	for _, row := range []struct {
		config *Config
		text   string
		want   []float64
	}{
		{plain, "length=1:14:3", []float64{1, 7.5, 14}},
		{plain, " cavity.length = 14 : 1 : 2", []float64{14, 1}},
		{inLab, "length=4um:0.05 mm:2", []float64{4e-6, 50e-6}},
	} {
		got, err := row.config.Span("cavity.length", row.text)
		if err != nil || len(got) != len(row.want) {
			t.Errorf("%s: %v, %v", row.text, got, err)
			continue
		}
		for i := range got {
			if math.Abs(got[i]/row.want[i]-1) > 1e-14 {
				t.Errorf("%s: %v", row.text, got)
			}
		}
	}
	for _, row := range []struct {
		config     *Config
		text, want string
	}{
		{plain, "", `what can be scanned is length, for example length=6:12:60`},
		{plain, "1:14:60", `what can be scanned is length, for example length=6:12:60`},
		{plain, "width=1:14:60", `what can be scanned is length, for example length=6:12:60`},
		{plain, "length=1:14", `first value, last value and their number are expected, with colons between, for example length=6:12:60`},
		{plain, "length=1:14:60:2", `first value, last value and their number are expected, with colons between, for example length=6:12:60`},
		{plain, "length=one:14:60", `"one" is not a number, for example length=6:12:60`},
		{plain, "length=1um:14um:60", `"1um" is not a number, for example length=6:12:60`},
		{plain, "length=0:14:60", `"0": it must be above 0 and at most 1e6, for example length=6:12:60`},
		{plain, "length=nan:14:60", `"nan": it must be above 0 and at most 1e6, for example length=6:12:60`},
		{plain, "length=1:14:1", `"1": a whole number of values from 2 to 2000 is expected, for example length=6:12:60`},
		{plain, "length=1:14:2.5", `"2.5": a whole number of values from 2 to 2000 is expected, for example length=6:12:60`},
		{plain, "length=1:14:2001", `"2001": a whole number of values from 2 to 2000 is expected, for example length=6:12:60`},
		{plain, "length=2:2:60", `first and last value are the same, for example length=6:12:60`},
		{inLab, "length=4:60:30", `"4": a length needs a unit, for example length=6um:12um:60`},
		{inLab, "length=4ms:60um:30", `"4ms": a length is expected, and ms is a unit of time, for example length=6um:12um:60`},
	} {
		if got, err := row.config.Span("cavity.length", row.text); err == nil || err.Error() != row.want {
			t.Errorf("%q: %v, %v, want %s", row.text, got, err, row.want)
		}
	}
}
