package main

import (
	"strings"
	"testing"
)

// Faults of a scan: `tailrace spectrum` says exactly this, ends with status 2
// and prints nothing on stdout.
func TestBadScan(t *testing.T) {
	const form = "; the form is key=from:to:count or key=from:to:count:log, for example width=0.1:4:24:log"
	for _, c := range []struct{ config, scan, want string }{
		{"sluice", "width", "there is no = in it" + form},
		{"sluice", "width=1:2", "after the = three parts are expected, with colons between, and perhaps :log" + form},
		{"sluice", "width=1:2:3:lin", "after the = three parts are expected, with colons between, and perhaps :log" + form},
		{"sluice", "width=2:1:4", "from must be less than to" + form},
		{"sluice", "width=1:1:4", "from must be less than to" + form},
		{"sluice", "wid=1:2:3", `there is no key "wid"; of this config flow.width, flow.depth, flow.speed can be scanned` + form},
		{"sluice", "width=0:1:4:log", "a logarithmic scan starts above zero" + form},
		{"sluice", "width=a:1:4", `"a" is no number` + form},
		{"sluice", "width=nan:1:4", `"nan" is no number` + form},
		{"sluice", "width=1:1e999:4", `"1e999" is no number` + form},
		{"sluice", "width=1:2:1", `the count is "1", a whole number from 2 to 10000 is expected` + form},
		{"sluice", "width=1:2:1000000000", `the count is "1000000000", a whole number from 2 to 10000 is expected` + form},
		{"sluice", "width=1 um:2 um:3", `flow.width is a plain number here, without "um"` + form},
		{"sluice", "title=1:2:3", "title is not a number that can be scanned" + form},
		{"quay", "length=1 um:2 um:3", `"length" may be trap.length or cavity.length or grid.length: say which` + form},
		{"quay", "step.speed=0.1:0.2:3", "step.speed: a speed needs a unit" + form},
		{"quay", "step.speed=0.1 mm/s:200 um/s:3", `from is in "mm/s" and to in "um/s": give both in one unit` + form},
		{"quay", "step.speed=0.1 um:0.2 um:3", "step.speed: a speed is expected, and um is a unit of length" + form},
	} {
		o := tailrace(t, t.TempDir(), "spectrum", c.config, "--scan", c.scan)
		if want := "tailrace: --scan " + c.scan + ": " + c.want + "\n"; o.status != inputFault || o.stdout != "" || o.stderr != want {
			t.Errorf("%s %s: status %d, stdout %q, message\n%s\nwant\n%s", c.config, c.scan, o.status, o.stdout, o.stderr, want)
		}
	}
	for _, list := range []string{"1", "0", "x", "0.1,0", "0.1,nan", "1e9", "0.5,2000"} {
		if o := tailrace(t, t.TempDir(), "spectrum", "weir", "--frequencies", list); o.status != inputFault || !strings.Contains(o.stderr, "a number of them is expected, from 2 to 100000") {
			t.Errorf("--frequencies %s: status %d, %s", list, o.status, o.stderr)
		}
	}
	if o := tailrace(t, t.TempDir(), "spectrum", "sluice", "--scan", "width=1:2:2", "--scan", "flow.width=1:2:2"); o.status != inputFault || !strings.Contains(o.stderr, "flow.width is scanned twice") {
		t.Errorf("status %d, %s", o.status, o.stderr)
	}
}
