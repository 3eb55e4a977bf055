package report

import (
	"context"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// A run that should show the requirement and cannot be judged is told apart from
// one that shows nothing of it.
func TestUndecidedRun(t *testing.T) {
	for _, c := range []struct{ move, want string }{
		{"a move", "the requirement could not be judged"},
		{"none", "it shows nothing that the requirement asks for"},
	} {
		r := shortReplay(t, c.move == "a move")
		if r.Summary.Judged != 0 {
			t.Fatalf("%s: judged: %q", c.move, r.Runs[0].Reasons)
		}
		if got := replayPhrase(r); !strings.Contains(got, c.want) {
			t.Errorf("%s: %q, want %q", c.move, got, c.want)
		}
		if got := replayAnswer(&Bundle{Replay: r}); got.Verdict != nil || got.Headline != "These runs cannot judge the requirement" {
			t.Errorf("%s: headline %q", c.move, got.Headline)
		}
	}
}

// shortReplay replays a record of 50 s, in which the setpoint may move, under
// gains that do nearly nothing.
func shortReplay(t *testing.T, moves bool) *validate.Replay {
	t.Helper()
	run := &data.Run{Source: data.Source{File: "a.csv"}, Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	for i := range 100 {
		setpoint := 60.0
		if moves && i >= 20 {
			setpoint = 70
		}
		run.T, run.U, run.Y, run.Setpoint = append(run.T, float64(i)/2), append(run.U, 4), append(run.Y, 60), append(run.Setpoint, setpoint)
	}
	card := &fit.Card{
		Schema: fit.CardSchema, Units: fit.CardUnits{Time: "s", Input: "V", Temperature: "degC"}, InputLaw: "linear", Confidence: 0.95, Selected: "fopdt",
		Models: []fit.Model{{Structure: "fopdt", Parameters: []fit.Parameter{{Name: "gain", Value: 8}, {Name: "lag1", Value: 6}, {Name: "dead_time", Value: 1}}}},
		Plants: fit.Plants{Structure: "fopdt", Parameters: []string{"gain", "lag1", "dead_time"}, Values: [][]float64{{8, 6, 1}}},
	}
	ti, settling, overshoot := 5000.0, 900.0, 10.0
	gains := &tune.Gains{Schema: tune.GainsSchema, Controller: "pi", Form: "ideal", Kc: 1e-4, Ti: &ti, SetpointWeight: 1, Scan: 0.5}
	r, err := validate.ReplayRuns(context.Background(), card, []*data.Run{run}, gains, validate.Options{Requirement: tune.Requirement{Settling: &settling, Overshoot: &overshoot}})
	if err != nil {
		t.Fatal(err)
	}
	return r
}
