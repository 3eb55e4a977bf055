package report

import (
	"strings"
	"testing"
)

// A P controller that meets settling and overshoot still rests off its
// setpoint: the answer says so, and the reason given is not the load's area.
func TestOffsetOfPControl(t *testing.T) {
	for _, c := range []struct {
		controller string
		offset     *float64
		says       bool
	}{{"p", ptr(1.93), true}, {"p", nil, false}, {"pi", ptr(0), false}} {
		b := sampleBundle()
		b.Gains.Controller, b.Gains.Nominal.SteadyOffset = c.controller, c.offset
		said := strings.Join(gainsAnswer(&b).Sure, " ")
		if got := strings.Contains(said, "a setpoint step of 10 K ends 1.9 K away from the setpoint"); got != c.says {
			t.Errorf("%s, offset %v: %q", c.controller, c.offset, said)
		}
		if got := strings.Contains(ruleWords(b.Gains), "IAE"); got == (c.controller == "p") {
			t.Errorf("%s: %s", c.controller, ruleWords(b.Gains))
		}
	}
}
