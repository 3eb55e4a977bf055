package main

import (
	"strings"
	"testing"

	"lagwright/tune"
	"lagwright/validate"
)

// TestSettlingWords: the times of a run are in one unit.
func TestSettlingWords(t *testing.T) {
	at := func(v float64) *float64 { return &v }
	for _, c := range []struct {
		run  validate.RunReplay
		want string
	}{
		{validate.RunReplay{Judged: true, Proposed: validate.BandMetrics{Median: validate.RunMetrics{Settling: at(80.8)}}, Logged: validate.RunMetrics{Settling: at(220)}}, "; settles in 80.8 s (logged 220 s)"},
		{validate.RunReplay{Judged: true, Proposed: validate.BandMetrics{Median: validate.RunMetrics{Settling: at(540)}}, WithNoise: validate.StepMetrics{Settling: at(570)}, Logged: validate.RunMetrics{Settling: at(1030)}},
			"; settles in 9 min (with noise 9.5 min, logged 17.2 min)"},
		{validate.RunReplay{Proposed: validate.BandMetrics{Median: validate.RunMetrics{Settling: at(7200)}}}, "; a step of the setpoint would settle in 2 h"},
		{validate.RunReplay{Logged: validate.RunMetrics{Settling: at(5)}}, ""},
	} {
		if got := settlingWords(&c.run); got != c.want {
			t.Errorf("%q, want %q", got, c.want)
		}
	}
}

// TestGainsWordsFahrenheit: of a log in °F the output holds the gain for either
// controller.
func TestGainsWordsFahrenheit(t *testing.T) {
	g := &tune.Gains{Controller: "pi", Form: "ideal", Action: "reverse", Entry: []tune.Entry{{Name: "gain", Value: 1.3012, Unit: "%/K"}, {Name: "integral time", Value: 673.6, Unit: "s"}}}
	if got := gainsWords(g, true); !strings.HasSuffix(got, "gain 1.301 %/K (controller in °C) or 0.7229 %/°F (controller in °F), integral time 673.6 s") {
		t.Errorf("in °F: %q", got)
	}
	if got := gainsWords(g, false); !strings.HasSuffix(got, "gain 1.301 %/K, integral time 673.6 s") {
		t.Errorf("in °C: %q", got)
	}
}
