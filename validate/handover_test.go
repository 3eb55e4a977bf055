package validate

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// A recording that begins in the middle of a move is not judged on what is left
// of it, however slow: only the setpoint steps that it shows are, and those as
// if it had begun at rest, limits and all.
func TestHandOverIsNotJudged(t *testing.T) {
	const rows, scan, begin = 900, 0.5, 68
	plant := mustPlant(t, "chain2", 8, []float64{20, 6}, 2)
	noise := fit.Noise{SD: 0.1, CorrelationTime: 2, WhiteSD: 0.05}
	gains := piGains(0.25, 24, scan)
	gains.Limits = tune.Limits{Min: ptr(0), Max: ptr(6)} // the step back up nearly saturates
	logged := piGains(0.1, 26, scan)
	logged.Limits = gains.Limits
	card := cardOf(t, "linear", noise, plant)
	for _, c := range []struct {
		name    string
		changes map[int]float64
		judged  bool
	}{
		{"no change after it", map[int]float64{60: -8}, false},
		{"a later step", map[int]float64{60: -8, 500: 6}, true},
		{"a step before it is over", map[int]float64{60: -8, 110: 6}, true},
		{"a step in its second row", map[int]float64{60: -8, begin + 1: 6}, true},
	} {
		t.Run(c.name, func(t *testing.T) {
			setpoint := stepsAt(rows, 40, c.changes)
			// the truth: without noise, from rest before that step, under the gains
			still := make([]float64, rows)
			later := setpoint[begin]
			fromRest := append([]float64(nil), setpoint...)
			for i := range begin {
				fromRest[i] = later
			}
			truth := ownFigures(t, card, gains, loggedLoop(t, plant, ident.Linear, gains, fromRest, still, 4-8/plant.Gain))
			for seed := range uint64(5) {
				d := noisy(rand.New(rand.NewPCG(seed, 9)), rows, scan, noise)
				d[0] = 0
				log := beginAt(loggedLoop(t, plant, ident.Linear, logged, setpoint, d, 4), begin)
				asked := Options{Requirement: tune.Requirement{Settling: ptr(1.05 * truth.settling), Overshoot: ptr(truth.overshoot + 1)}}
				if !c.judged {
					asked.Requirement = tune.Requirement{Settling: ptr(10), Overshoot: ptr(1)}
				}
				r, err := ReplayRuns(context.Background(), card, []*data.Run{log}, gains, asked)
				if err != nil {
					t.Fatal(err)
				}
				run := r.Runs[0]
				if run.Judged != c.judged || run.Meets != c.judged {
					t.Errorf("seed %d: judged %v, meets %v: %q", seed, run.Judged, run.Meets, run.Reasons)
				}
				if got := run.Proposed.Median; c.judged && (got.Settling == nil || math.Abs(*got.Settling-truth.settling) > 0.03*truth.settling || math.Abs(*got.Overshoot-truth.overshoot) > 0.5) {
					t.Errorf("seed %d: settling %s, overshoot %s; from rest %g and %g", seed, optional(got.Settling), optional(got.Overshoot), truth.settling, truth.overshoot)
				}
				if said := strings.Join(run.Warnings, "\n"); c.changes[begin+1] == 0 && (run.HandOver == nil || run.HandOver.Away > -5 || !strings.Contains(said, "hand-over in mid-move, not judged: it begins ")) {
					t.Errorf("seed %d: hand-over %+v, said %q", seed, run.HandOver, said)
				}
			}
		})
	}
}

// What is left of a move is told with the time it takes, for the replay and
// the log; a run that begins at its setpoint tells nothing, nor does a step
// made for a log without setpoint, which is judged.
func TestHandOverFigure(t *testing.T) {
	const rows, scan = 600, 0.5
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	gains, slow := piGains(0.15, 8, scan), piGains(0.06, 9, scan)
	card := cardOf(t, "linear", fit.Noise{}, plant)
	whole := loggedLoop(t, plant, ident.Linear, slow, stepsAt(rows, 60, map[int]float64{60: 8}), make([]float64, rows), 4)
	replay := func(run *data.Run, o Options) RunReplay {
		t.Helper()
		o.Requirement = tune.Requirement{Settling: ptr(10)}
		r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, gains, o)
		if err != nil {
			t.Fatal(err)
		}
		return r.Runs[0]
	}
	midway := replay(beginAt(whole, 66), Options{}).HandOver
	if midway == nil || midway.Away < 4 || midway.Settling == nil || midway.Logged == nil || !(*midway.Settling < *midway.Logged) {
		t.Errorf("hand-over %+v, want some 7 K that the quicker gains go sooner than the logged ones", midway)
	}
	bare := *whole
	bare.Setpoint = nil
	for _, c := range []struct {
		name     string
		run      *data.Run
		o        Options
		handOver bool
		judged   bool
	}{
		{"begins at its setpoint", whole, Options{}, false, true},
		{"steps in the second row", beginAt(whole, 59), Options{}, false, true},
		{"a setpoint to hold", &bare, Options{Setpoint: ptr(66)}, true, false},
		{"a step made", &bare, Options{SetpointStep: ptr(6)}, false, true},
	} {
		if got := replay(c.run, c.o); (got.HandOver != nil) != c.handOver || got.Judged != c.judged {
			t.Errorf("%s: hand-over %+v, judged %v: %q", c.name, got.HandOver, got.Judged, got.Reasons)
		}
	}
}
