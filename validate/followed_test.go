package validate

import (
	"context"
	"strings"
	"testing"

	"lagwright/data"
)

// A setpoint that no controller followed judges nothing, unless the caller
// makes a step to judge by; a setpoint to hold is no step.
func TestUnfollowedSetpointIsNotJudged(t *testing.T) {
	mode := func(auto bool) func(*data.Run) {
		return func(r *data.Run) {
			r.Auto = make([]bool, len(r.T))
			for i := range r.Auto {
				r.Auto[i] = auto
			}
		}
	}
	byHand := func(r *data.Run) {
		for i := range r.U {
			r.U[i] = 4
			if i > 50 {
				r.U[i] = 5
			}
		}
	}
	none := func(r *data.Run) { r.Setpoint = nil }
	for _, c := range []struct {
		name   string
		change func(*data.Run)
		o      Options
		judged bool
		reason string
	}{
		{"a controller's run", func(*data.Run) {}, Options{}, true, ""},
		{"automatic", mode(true), Options{}, true, ""},
		{"manual", mode(false), Options{}, false, "not judged: logged in manual"},
		{"manual, step given", mode(false), Options{SetpointStep: ptr(5)}, true, ""},
		{"manual, setpoint given", mode(false), Options{Setpoint: ptr(80)}, false, "not judged on this run: settling"},
		{"manual, setpoint given, area asked", mode(false), Options{Setpoint: ptr(80), RunLimits: RunLimits{IAE: ptr(1e9)}}, true, ""},
		{"set by hand", byHand, Options{}, false, "not judged: the input was set by hand"},
		{"set by hand, gains in force known", byHand, Options{LoggedGains: piGains(0.15, 8, 0.5)}, false, untested},
		{"no setpoint", none, Options{}, false, "not judged: the log has no setpoint"},
		{"no setpoint, step given", none, Options{SetpointStep: ptr(5)}, true, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			card, runs := many(t, 1, 400)
			c.change(runs[0])
			gains := piGains(0.15, 8, 0.5)
			gains.Requirement.Settling, gains.Requirement.SetpointStep = ptr(60), ptr(2)
			r, err := ReplayRuns(context.Background(), card, runs, gains, c.o)
			if err != nil {
				t.Fatal(err)
			}
			run := r.Runs[0]
			if run.Judged != c.judged || !run.Judged && run.Meets {
				t.Errorf("judged %v, meets %v, want judged %v: %q", run.Judged, run.Meets, c.judged, run.Reasons)
			}
			if said := strings.Join(run.Reasons, "\n"); !strings.Contains(said, c.reason) || c.reason == "" && strings.Contains(said, "not judged: ") {
				t.Errorf("reasons %q, want %q", said, c.reason)
			}
		})
	}
}
