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

// A run made by the very plant and gains is reproduced, with a load or
// without; one made by another plant or other gains is not, and the reason
// names what was changed.
func TestBackTest(t *testing.T) {
	const rows = 500
	noise := fit.Noise{SD: 0.15, CorrelationTime: 2, WhiteSD: 0.1}
	best := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	card := cardOf(t, "linear", noise, best, plausible(t, best, 40, 0.02, 1)...)
	stated := piGains(0.15, 8, 0.5)
	changed := func(change func(g *tune.Gains)) *tune.Gains {
		g := *stated
		change(&g)
		return &g
	}
	moves := map[int]float64{60: 8, 260: -8}
	for _, c := range []struct {
		name       string
		plant      ident.Plant
		gains      *tune.Gains // in force
		load       float64
		moves      map[int]float64
		reproduced bool
		says       string
	}{
		{"as stated", best, stated, 0, moves, true, ""},
		{"gain a quarter lower", mustPlant(t, "chain2", 6, []float64{6, 2}, 1.2), stated, 0, moves, false, "the gain here is about"},
		{"dead time doubled", mustPlant(t, "chain2", 8, []float64{6, 2}, 2.4), stated, 0, moves, false, "the dead time here is about"},
		{"lags half as long again", mustPlant(t, "chain2", 8, []float64{9, 3}, 1.2), stated, 0, moves, false, "the lags here are about"},
		{"twice the gain in force", best, changed(func(g *tune.Gains) { g.Kc *= 2 }), 0, moves, false, "about 2 times"},
		{"another integral time", best, changed(func(g *tune.Gains) { g.Ti = ptr(16) }), 0, moves, false, "look at integral time"},
		{"a lower limit in force", best, changed(func(g *tune.Gains) { g.Limits.Max = ptr(4.3) }), 0, moves, false, "an upper limit of 4.3 V, where the input stays"},
		{"a lower limit and twice the gain", best, changed(func(g *tune.Gains) { g.Limits.Max, g.Kc = ptr(4.9), 2*g.Kc }), 0, moves, false, "times those the gains ask for"},
		{"a load", best, stated, -6, moves, true, "such as a load"},
		{"a load and no move", best, stated, -6, nil, true, "does not test it"},
		{"a load, and gain a quarter lower", mustPlant(t, "chain2", 6, []float64{6, 2}, 1.2), stated, -6, moves, false, "the gain here is about"},
	} {
		t.Run(c.name, func(t *testing.T) {
			right := 0
			const seeds = 10
			for seed := range uint64(seeds) {
				d := noisy(rand.New(rand.NewPCG(seed, 5)), rows, 0.5, noise)
				d[0] = 0
				for i := 330; i < rows; i++ {
					d[i] += c.load * (1 - math.Exp(-float64(i-330)/20))
				}
				run := loggedLoop(t, c.plant, ident.Linear, c.gains, stepsAt(rows, 60, c.moves), d, 4)
				r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, piGains(0.3, 7, 0.5), Options{LoggedGains: stated})
				if err != nil {
					t.Fatal(err)
				}
				b := r.Runs[0].BackTest
				if b.Reproduced == c.reproduced && strings.Contains(strings.Join(b.Differs, "; "), c.says) {
					right++
				} else {
					t.Logf("seed %d: %v: %s", seed, b.Reproduced, strings.Join(b.Differs, "; "))
				}
				if seed == 0 {
					t.Log(strings.Join(b.Differs, "; "))
				}
			}
			if right < seeds-1 {
				t.Errorf("right in %d of %d runs", right, seeds)
			}
		})
	}
}

// In manual the input is its own witness: no controller is tested.
func TestBackTestInManual(t *testing.T) {
	h := inventHeater(t, 1)
	run := h.bump()
	run.Setpoint = stepsAt(len(run.T), 60, nil)
	run.Auto = make([]bool, len(run.T))
	for _, c := range []struct {
		factor     float64
		reproduced bool
	}{{1, true}, {0.8, false}} {
		p := h.plant
		p.Gain *= c.factor
		card := cardOf(t, "linear", h.noise, p, plausible(t, p, 40, 0.01, 1)...)
		r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, piGains(0.1, 9, studyInterval), Options{LoggedGains: piGains(0.1, 9, studyInterval)})
		if err != nil {
			t.Fatal(err)
		}
		b := r.Runs[0].BackTest
		if b.Reproduced != c.reproduced || b.InputInside != nil || !strings.Contains(b.Differs[0], "only the plant is tested") {
			t.Errorf("card of %g × the gain: %+v", c.factor, b)
		}
	}
}

func TestBackTestWithoutSetpoint(t *testing.T) {
	card, runs := many(t, 1, 200)
	runs[0].Setpoint = nil
	r, err := ReplayRuns(context.Background(), card, runs, piGains(0.3, 7, 0.5), Options{Setpoint: ptr(66), LoggedGains: piGains(0.15, 8, 0.5)})
	if err != nil {
		t.Fatal(err)
	}
	if b := r.Runs[0].BackTest; b.InputInside != nil || !strings.Contains(b.Differs[0], "only the plant is tested") {
		t.Errorf("%+v", b)
	}
	if r.Runs[0].Logged.Settling != nil || r.Runs[0].Logged.IAE != nil {
		t.Errorf("logged figures against a setpoint that was not in force: %+v", r.Runs[0].Logged)
	}
}
