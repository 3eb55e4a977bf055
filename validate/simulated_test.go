package validate

import (
	"context"
	"math"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// A quiet log with a setpoint step put on it is tune's own step test: both
// must measure the same settling, overshoot and peak input.
func TestReplayAgreesWithTheStepOfTune(t *testing.T) {
	pid := piGains(0.35, 11, 0.2)
	pid.Controller, pid.Td, pid.Filter = "pid", ptr(1.2), 0.3
	p := piGains(0.3, 0, 0.2)
	p.Controller, p.Ti, p.Bias = "p", nil, 5
	hot := piGains(0.9, 12, 0.2)
	hot.Limits.Max = ptr(7.5)
	for _, c := range []struct {
		name  string
		plant ident.Plant
		gains *tune.Gains
	}{
		{"pi", mustPlant(t, "chain2", 8, []float64{10, 3}, 1.5), piGains(0.3, 11, 0.2)},
		{"pi with overshoot", mustPlant(t, "chain2", 8, []float64{10, 3}, 1.5), piGains(0.45, 7, 0.2)},
		{"pid", mustPlant(t, "equal3", 8, []float64{4}, 0.5), pid},
		{"at a limit", mustPlant(t, "fopdt", 8, []float64{12}, 1), hot},
		{"p", mustPlant(t, "chain2", 8, []float64{10, 3}, 1.5), p},
	} {
		const step = 10
		want, err := tune.Evaluate(c.plant, c.gains, tune.Requirement{
			SetpointStep: ptr(step), InputMin: c.gains.Limits.Min, InputMax: c.gains.Limits.Max, Scan: c.gains.Scan,
		}, 5, 70)
		if err != nil {
			t.Fatal(err)
		}
		log := &data.Run{}
		for i := range 1500 {
			log.T = append(log.T, float64(i)*0.2)
			log.U, log.Y = append(log.U, 5), append(log.Y, 70)
		}
		asked := *c.gains
		asked.Requirement.SetpointStep = ptr(step)
		r, err := ReplayRuns(context.Background(), cardOf(t, "linear", fit.Noise{}, c.plant), []*data.Run{log}, &asked, Options{})
		if err != nil {
			t.Fatal(err)
		}
		got := r.Runs[0].Proposed.Median
		near := func(what string, got, want *float64, tolerance float64) {
			if got == nil || want == nil || math.Abs(*got-*want) > tolerance {
				t.Errorf("%s: %s %s replayed, %s in tune", c.name, what, optional(got), optional(want))
			}
		}
		near("settling", got.Settling, want.Settling, 0.05) // both interpolate between samples, tune's are finer
		near("overshoot", got.Overshoot, want.Overshoot, 0.05)
		near("peak input", got.PeakInput, want.PeakInput, 1e-6)
	}
}
