package validate

import (
	"context"
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// A run made by the very plant and gains is reproduced; one made by another
// plant or other gains is not, and the reason names what was changed.
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
	for _, c := range []struct {
		name  string
		plant ident.Plant
		gains *tune.Gains // in force
		load  float64
		want  string // "" where the run is reproduced
	}{
		{"as stated", best, stated, 0, ""},
		{"gain a quarter lower", mustPlant(t, "chain2", 6, []float64{6, 2}, 1.2), stated, 0, "the gain here is about"},
		{"dead time doubled", mustPlant(t, "chain2", 8, []float64{6, 2}, 2.4), stated, 0, "the dead time here is about"},
		{"lags half as long again", mustPlant(t, "chain2", 8, []float64{9, 3}, 1.2), stated, 0, "the lags here are about"},
		{"twice the gain in force", best, changed(func(g *tune.Gains) { g.Kc *= 2 }), 0, "about 2"},
		{"another integral time", best, changed(func(g *tune.Gains) { g.Ti = ptr(16) }), 0, "look at integral time"},
		{"a lower limit in force", best, changed(func(g *tune.Gains) { g.Limits.Max = ptr(4.3) }), 0, "the logged gains give another input"},
		{"a load", best, stated, -6, "that the input did not cause"},
	} {
		t.Run(c.name, func(t *testing.T) {
			reproduced, seeds := 0, uint64(4)
			if c.want == "" {
				seeds = 20
			}
			for seed := range seeds {
				d := noisy(rand.New(rand.NewPCG(seed, 5)), rows, 0.5, noise)
				d[0] = 0
				for i := 330; i < 360; i++ {
					d[i] += c.load
				}
				run := loggedLoop(t, c.plant, ident.Linear, c.gains, stepsAt(rows, 60, map[int]float64{60: 8, 260: -8}), d, 4)
				r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, piGains(0.3, 7, 0.5), Options{LoggedGains: stated})
				if err != nil {
					t.Fatal(err)
				}
				b := r.Runs[0].BackTest
				if b.Reproduced {
					reproduced++
					continue
				}
				if seed == 0 {
					t.Log(strings.Join(b.Differs, "; "))
				}
				if c.want != "" && !strings.Contains(fmt.Sprint(b.Differs), c.want) {
					t.Errorf("seed %d: %q, want something with %q", seed, b.Differs, c.want)
				}
			}
			if c.want == "" && reproduced < 18 || c.want != "" && reproduced > 0 {
				t.Errorf("reproduced in %d of %d runs", reproduced, seeds)
			}
		})
	}
}

func TestBackTestNeedsASetpoint(t *testing.T) {
	card, runs := many(t, 1, 200)
	runs[0].Setpoint = nil
	r, err := ReplayRuns(context.Background(), card, runs, piGains(0.3, 7, 0.5), Options{Setpoint: ptr(66), LoggedGains: piGains(0.15, 8, 0.5)})
	if err != nil {
		t.Fatal(err)
	}
	if b := r.Runs[0].BackTest; b.Reproduced || !strings.Contains(fmt.Sprint(b.Differs), "no setpoint") {
		t.Errorf("%+v", b)
	}
	if r.Runs[0].Logged.Settling != nil || r.Runs[0].Logged.IAE != nil {
		t.Errorf("logged figures against a setpoint that was not in force: %+v", r.Runs[0].Logged)
	}
}
