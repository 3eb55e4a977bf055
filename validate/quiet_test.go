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

// Settling and overshoot are judged on what the heater does without noise and
// load, whatever noise and load the log holds: here known, by ident's own
// simulator. What misses a limit by a hair fails for every seed of the noise.
func TestNoiseAndLoadsDoNotDecideSettling(t *testing.T) {
	const rows, scan = 700, 0.5
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.3)
	noise := fit.Noise{SD: 0.3, CorrelationTime: 3, WhiteSD: 0.1}
	setpoint := stepsAt(rows, 60, map[int]float64{100: 10})
	gains := piGains(0.3, 7, scan)
	clean := loggedLoop(t, plant, ident.Linear, gains, setpoint, make([]float64, rows), 4)
	card := cardOf(t, "linear", noise, plant)
	truth := ownFigures(t, card, gains, clean)
	for seed := range uint64(20) {
		d := noisy(rand.New(rand.NewPCG(seed, 9)), rows, scan, noise)
		for i := 130; i < rows; i++ {
			d[i] -= 4 // a load while the move is being followed
		}
		d[0] = 0
		log := loggedLoop(t, plant, ident.Linear, piGains(0.1, 9, scan), setpoint, d, 4)
		for _, c := range []struct {
			factor float64
			meets  bool
		}{{0.999, false}, {1.001, true}} {
			for _, asked := range []tune.Requirement{
				{Settling: ptr(c.factor * truth.settling)}, {Overshoot: ptr(c.factor * truth.overshoot)},
			} {
				r, err := ReplayRuns(context.Background(), card, []*data.Run{log}, gains, Options{Requirement: asked})
				if err != nil {
					t.Fatal(err)
				}
				if run := r.Runs[0]; run.Meets != c.meets || !run.Judged {
					t.Errorf("seed %d, %g of the true figures: meets %v, judged %v: %q", seed, c.factor, run.Meets, run.Judged, run.Reasons)
				}
			}
		}
	}
}

// ownFigures measures a log without noise.
func ownFigures(t testing.TB, card *fit.Card, gains *tune.Gains, clean *data.Run) figures {
	t.Helper()
	p, err := newPlan(card, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	f := noFigures()
	f.add(signal{t: clean.T, y: clean.Y, u: clean.U, r: clean.Setpoint, r0: clean.Setpoint[0]}, p.yardstick(clean).quiet())
	return f
}

// A bump in manual with a step put on it is judged like the step alone.
func TestStepOnABumpLog(t *testing.T) {
	const rows, scan = 900, 0.5
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.3)
	noise := fit.Noise{SD: 0.2, CorrelationTime: 4, WhiteSD: 0.05}
	gains := piGains(0.3, 7, scan)
	flat := &data.Run{}
	bump := &data.Run{}
	d := noisy(rand.New(rand.NewPCG(2, 2)), rows, scan, noise)
	for i := range rows {
		flat.T, flat.U, flat.Y = append(flat.T, float64(i)*scan), append(flat.U, 4), append(flat.Y, 60)
		bump.U = append(bump.U, 4+float64(min(1, i/200)))
	}
	bump.T = flat.T
	rise := ident.NewSimulator(bump.T, ident.HeldInput(bump.T, bump.U, ident.Linear)).Response(nil, plant.Structure, plant.Lags, plant.DeadTime)
	for i, v := range rise {
		bump.Y = append(bump.Y, 60+plant.Gain*v+d[i])
	}
	r, err := ReplayRuns(context.Background(), cardOf(t, "linear", noise, plant), []*data.Run{flat, bump}, gains,
		Options{SetpointStep: ptr(5), Requirement: tune.Requirement{Settling: ptr(60)}})
	if err != nil {
		t.Fatal(err)
	}
	a, b := r.Runs[0].Proposed.Median, r.Runs[1].Proposed.Median
	if math.Abs(*a.Settling-*b.Settling) > 1e-6 || math.Abs(*a.Overshoot-*b.Overshoot) > 1e-6 {
		t.Errorf("settling %s and %s, overshoot %s and %s", optional(a.Settling), optional(b.Settling), optional(a.Overshoot), optional(b.Overshoot))
	}
	if r.Runs[1].Logged.Overshoot != nil {
		t.Errorf("a log made by hand is measured against a step it did not follow: %+v", r.Runs[1].Logged)
	}
}

// Limits of a run's error area and largest deviation are judged with its loads.
func TestRunLimits(t *testing.T) {
	card, runs := many(t, 1, 400)
	gains := piGains(0.15, 8, 0.5)
	replay := func(l RunLimits) RunReplay {
		r, err := ReplayRuns(context.Background(), card, runs, gains, Options{RunLimits: l})
		if err != nil {
			t.Fatal(err)
		}
		if r.RunLimits != l {
			t.Errorf("limits %+v are not in the result", l)
		}
		return r.Runs[0]
	}
	seen := replay(RunLimits{}).Proposed.Median
	for _, c := range []struct {
		name   string
		limits RunLimits
		meets  bool
		reason string
	}{
		{"deviation kept", RunLimits{Deviation: ptr(1.2 * *seen.Deviation)}, true, ""},
		{"deviation missed", RunLimits{Deviation: ptr(0.8 * *seen.Deviation)}, false, "largest deviation"},
		{"area kept", RunLimits{IAE: ptr(1.2 * *seen.IAE)}, true, ""},
		{"area missed", RunLimits{IAE: ptr(0.8 * *seen.IAE)}, false, "error area"},
	} {
		run := replay(c.limits)
		if run.Judged != true || run.Meets != c.meets || !strings.Contains(strings.Join(run.Reasons, " "), c.reason) {
			t.Errorf("%s: judged %v, meets %v: %q", c.name, run.Judged, run.Meets, run.Reasons)
		}
	}
}

// Under P control a heater moves less than its setpoint. A move that is then too
// small to show in the noise is not judged, and a warning says why.
func TestSmallMoveUnderPControl(t *testing.T) {
	const rows, scan = 700, 0.5
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.3)
	noise := fit.Noise{SD: 0.5, CorrelationTime: 3, WhiteSD: 0.2}
	d := noisy(rand.New(rand.NewPCG(3, 9)), rows, scan, noise)
	log := loggedLoop(t, plant, ident.Linear, piGains(0.1, 9, scan), stepsAt(rows, 60, map[int]float64{100: 6}), d, 4)
	gains := piGains(0.05, 1, scan)
	gains.Ti, gains.Controller, gains.Bias = nil, "p", 4
	r, err := ReplayRuns(context.Background(), cardOf(t, "linear", noise, plant), []*data.Run{log}, gains,
		Options{Requirement: tune.Requirement{Settling: ptr(60), TempMax: ptr(90)}})
	if err != nil {
		t.Fatal(err)
	}
	run := r.Runs[0]
	said := strings.Join(run.Warnings, "; ")
	if run.Proposed.Median.Settling != nil || !strings.Contains(said, "1 setpoint move too small against the noise") || strings.Contains(said, "no setpoint move") {
		t.Errorf("settling %s, warnings %q", optional(run.Proposed.Median.Settling), run.Warnings)
	}
}
