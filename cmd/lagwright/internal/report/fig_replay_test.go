package report

import (
	"strings"
	"testing"

	"lagwright/tune"
)

// A limit near the run is drawn; one far off is named with its value and does
// not flatten the run.
func TestReplayLimits(t *testing.T) {
	run := &sampleBundle().Replay.Runs[0] // about 73 to 78 °C, 3.6 to 4 V
	for _, c := range []struct {
		name         string
		tempMax      *float64
		limits       tune.Limits
		says         string
		stretches    bool // the axis of temperature reaches the limit
		silentOutput bool
	}{
		{"no limits", nil, tune.Limits{}, "", false, true},
		{"near", ptr(79), tune.Limits{}, "highest allowed 79 °C", true, true},
		{"passed", ptr(77), tune.Limits{}, "highest allowed 77 °C", true, true},
		{"far", ptr(240), tune.Limits{}, "highest allowed 240 °C, above the scale", false, true},
		{"outputs", nil, tune.Limits{Min: ptr(0), Max: ptr(10)}, "highest output 10 V, above the scale", false, false},
		{"outputs, below", nil, tune.Limits{Min: ptr(0), Max: ptr(4.2)}, "lowest output 0 V, below the scale", false, false},
		{"outputs, near", nil, tune.Limits{Max: ptr(4)}, "highest output 4 V", false, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			g := sampleGains()
			g.Limits = c.limits
			f := ReplayFigure(run, g, tune.Requirement{TempMax: c.tempMax})
			svg := string(written(t, f, "x.svg"))
			if c.says != "" && !strings.Contains(svg, ">"+c.says+"</text>") {
				t.Errorf("%q is not in the drawing", c.says)
			}
			if c.silentOutput == strings.Contains(svg, "est output ") {
				t.Errorf("limits of the output named: %v", !c.silentOutput)
			}
			y := f.panels[0].y
			if c.tempMax != nil && c.stretches != (y.max >= *c.tempMax) {
				t.Errorf("limit %g °C, axis up to %g °C", *c.tempMax, y.max)
			}
			if y.max > 82 || y.min < 68 {
				t.Errorf("axis from %g to %g °C for a run of 73 to 78 °C", y.min, y.max)
			}
		})
	}
}
