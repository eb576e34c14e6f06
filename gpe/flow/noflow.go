package flow

import (
	"fmt"
	"math"
)

// Condition names a requirement that a requested flow failed.
type Condition string

// The conditions a transonic flow has to meet.
const (
	BadNumber         Condition = "not a usable number"
	NoSubsonicPlateau Condition = "no subsonic plateau"
	TooShallow        Condition = "step too shallow"
	TooSlow           Condition = "step too slow"
	TooFast           Condition = "step too fast"
	DenserThanCloud   Condition = "upstream denser than the cloud"
	SonicEverywhere   Condition = "no change from subsonic to supersonic"
	NotFound          Condition = "no stationary flow found"
)

// NoFlow says why there is no transonic flow for the values asked for, and
// which way to turn the dial.
type NoFlow struct {
	Condition Condition
	Found     string // the values that failed, with what is allowed
	Turn      string // what to change
}

// Error implements error.
func (e *NoFlow) Error() string {
	return fmt.Sprintf("%s: %s; %s", e.Condition, e.Found, e.Turn)
}

func noFlow(c Condition, turn, format string, args ...any) error {
	return &NoFlow{Condition: c, Found: fmt.Sprintf(format, args...), Turn: turn}
}

// quantity is a dial with its name, for error messages.
type quantity struct {
	name  string
	value float64
}

// positive checks that every quantity is a finite number above zero.
func positive(qs ...quantity) error {
	for _, q := range qs {
		if !(q.value > 0) || math.IsInf(q.value, 0) {
			return noFlow(BadNumber, "give a finite number above zero", "%s = %g", q.name, q.value)
		}
	}
	return nil
}
