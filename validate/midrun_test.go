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

// beginAt is the run from a row on.
func beginAt(run *data.Run, row int) *data.Run {
	cut := *run
	cut.T, cut.U, cut.Y, cut.Setpoint = run.T[row:], run.U[row:], run.Y[row:], run.Setpoint[row:]
	return &cut
}

// rowsBetweenScans is the run of a controller that scans every row, with rows
// filled in between: its input is held there, its temperature that of the plant.
func rowsBetweenScans(run *data.Run, p ident.Plant, every int) *data.Run {
	out := *run
	n := (len(run.T)-1)*every + 1
	out.T, out.U, out.Y, out.Setpoint = make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range n {
		k, part := i/every, float64(i%every)/float64(every)
		out.T[i], out.U[i], out.Setpoint[i] = run.T[k], run.U[k], run.Setpoint[k]
		if part > 0 {
			out.T[i] += part * (run.T[k+1] - run.T[k])
		}
	}
	in := ident.HeldInput(run.T, run.U, ident.Linear)
	there := ident.NewSimulator(run.T, in).Response(nil, p.Structure, p.Lags, p.DeadTime)
	here := ident.NewSimulator(out.T, in).Response(nil, p.Structure, p.Lags, p.DeadTime)
	for i := range n {
		k := i / every
		out.Y[i] = run.Y[k] + p.Gain*(here[i]-there[k])
	}
	return &out
}

// everyRow is the run logged at every so many rows only.
func everyRow(run *data.Run, n int) *data.Run {
	out := *run
	out.T, out.U, out.Y, out.Setpoint = nil, nil, nil, nil
	for i := 0; i < len(run.T); i += n {
		out.T, out.U = append(out.T, run.T[i]), append(out.U, run.U[i])
		out.Y, out.Setpoint = append(out.Y, run.Y[i]), append(out.Setpoint, run.Setpoint[i])
	}
	return &out
}

// A recording that begins in the middle of a move, at a limit or off it, is
// reproduced by the plant and the gains that made it, whatever the controller
// remembers; made by others it is not.
func TestBackTestFromTheMiddle(t *testing.T) {
	const rows, seeds = 400, 5
	noise := fit.Noise{SD: 0.15, CorrelationTime: 2, WhiteSD: 0.1}
	best := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	plant := func(structure string, gain float64, lags ...float64) ident.Plant {
		return mustPlant(t, structure, gain, lags, 1.2)
	}
	pi, pid, p := piGains(0.15, 8, 0.5), piGains(0.25, 8, 0.5), piGains(0.15, 8, 0.5)
	pid.Controller, pid.Td, pid.Filter = "pid", ptr(1.2), 0.3
	p.Controller, p.Ti, p.Bias = "p", nil, 4
	bare := *pid
	bare.Filter, bare.Kc, bare.Td = 0, 0.15, ptr(0.6)
	series := *pid
	series.Form = tune.Series
	slewing := *pi
	slewing.Limits.Rate = ptr(0.2)
	other := func(kc, ti float64) *tune.Gains {
		g := *pi
		g.Kc, g.Ti = kc, &ti
		return &g
	}
	for _, c := range []struct {
		name            string
		card, plant     ident.Plant
		stated, inForce *tune.Gains
		size            float64 // of the move
		every           int     // rows a scan; negative: scans a row
		begin           []int   // rows, of a move made at 60 and one back at 260
		reproduced      bool
		says            string
	}{
		{"pi", best, best, pi, pi, 8, 1, []int{62, 70, 264}, true, ""},
		{"pi at a limit", best, best, pi, pi, 60, 1, []int{62, 66, 264}, true, ""},
		{"pi slewing", best, best, &slewing, &slewing, 30, 1, []int{62, 66, 264}, true, ""},
		{"pid", best, best, pid, pid, 8, 1, []int{62, 70, 264}, true, ""},
		{"pid at a limit", best, best, pid, pid, 60, 1, []int{62, 64, 264}, true, ""},
		{"pid without filter", best, best, &bare, &bare, 8, 1, []int{62, 70}, true, ""},
		{"pid, series", best, best, &series, &series, 8, 1, []int{62, 70}, true, ""},
		{"p", best, best, p, p, 8, 1, []int{62, 70, 264}, true, ""},
		{"one lag", plant("fopdt", 8, 6), plant("fopdt", 8, 6), pi, pi, 8, 1, []int{62, 264}, true, ""},
		{"four lags", plant("chain4", 8, 4, 2, 1, 0.5), plant("chain4", 8, 4, 2, 1, 0.5), pi, pi, 8, 1, []int{62, 264}, true, ""},
		{"equal lags", plant("equal3", 8, 2.5), plant("equal3", 8, 2.5), pi, pi, 8, 1, []int{62, 264}, true, ""},
		{"between two scans", best, best, pi, pi, 20, 4, []int{63, 67, 262}, true, ""},
		{"two scans a row", best, best, pi, pi, 20, -2, []int{62, 68}, true, ""},
		{"twice the gain in force", best, best, pi, other(0.3, 8), 8, 1, []int{62, 70}, false, "times those the gains ask for"},
		{"another integral time", best, best, pi, other(0.15, 16), 8, 1, []int{62, 70}, false, "look at integral time"},
		{"another integral time, at a limit", best, best, pi, other(0.15, 16), 60, 1, []int{62}, false, "look at integral time"},
		{"a plant of lower gain", best, plant("chain2", 6, 6, 2), pi, pi, 8, 1, []int{62, 70}, false, "the gain here is about"},
	} {
		t.Run(c.name, func(t *testing.T) {
			card := cardOf(t, "linear", noise, c.card, plausible(t, c.card, 40, 0.02, 1)...)
			right := 0
			for seed := range uint64(seeds) {
				d := noisy(rand.New(rand.NewPCG(seed, 5)), rows, 0.5, noise)
				d[0] = 0
				run := loggedLoop(t, c.plant, ident.Linear, c.inForce, stepsAt(rows, 60, map[int]float64{60: c.size, 260: -c.size}), d, 4)
				if c.every > 1 {
					run = rowsBetweenScans(run, c.plant, c.every)
				}
				for _, row := range c.begin {
					from := beginAt(run, row*max(1, c.every)+max(0, c.every/2))
					if c.every < 0 {
						from = everyRow(from, -c.every)
					}
					r, err := ReplayRuns(context.Background(), card, []*data.Run{from}, piGains(0.3, 7, 0.5), Options{LoggedGains: c.stated})
					if err != nil {
						t.Fatal(err)
					}
					b := r.Runs[0].BackTest
					if said := strings.Join(b.Differs, "; "); b.Reproduced == c.reproduced && strings.Contains(said, c.says) && (c.says == "") == (said == "") {
						right++
					} else {
						t.Logf("seed %d, from row %d: %v, input inside %.3f, temperature %.3f: %s", seed, row, b.Reproduced, *b.InputInside, b.ShareInside, said)
					}
				}
			}
			if n := seeds * len(c.begin); right < n-1 {
				t.Errorf("right in %d of %d recordings", right, n)
			}
		})
	}
}

// What an unknown start is given does not take from a load that comes later:
// its size and time are told, from rest and from the middle of a move.
func TestLoadBesideTheStart(t *testing.T) {
	const rows, at, load = 500, 330, -6.0
	noise := fit.Noise{SD: 0.15, CorrelationTime: 2, WhiteSD: 0.1}
	best := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	gains := piGains(0.15, 8, 0.5)
	p, err := newPlan(cardOf(t, "linear", noise, best), gains, Options{LoggedGains: gains})
	if err != nil {
		t.Fatal(err)
	}
	for _, move := range []float64{0, 8} {
		for _, begin := range []int{0, 62, 70} {
			d := noisy(rand.New(rand.NewPCG(3, 5)), rows, 0.5, noise)
			d[0] = 0
			for i := at; i < rows; i++ {
				d[i] += load
			}
			run := loggedLoop(t, best, ident.Linear, gains, stepsAt(rows, 60, map[int]float64{60: move}), d, 4)
			courses, err := p.automatic(beginAt(run, begin))
			if err != nil {
				t.Fatal(err)
			}
			if _, _, far := p.insideBand(courses[0]); math.Abs(far.size-load) > 1 || far.at < run.T[at] {
				t.Errorf("move of %g K, from row %d: %.2f K at %g s, want %g K from %g s on", move, begin, far.size, far.at, load, run.T[at])
			}
		}
	}
}
