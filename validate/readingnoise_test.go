package validate

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// ownReading is a log whose controller read the temperature without the white
// noise, or with its own, that the logger puts on it and then rounds.
func ownReading(t testing.TB, p ident.Plant, g *tune.Gains, setpoint []float64, seed uint64, white, controllerWhite, quantum float64) *data.Run {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 11))
	n := len(setpoint)
	slow := noisy(rng, n, g.Scan, fit.Noise{SD: 0.08, CorrelationTime: 6})
	slow[0] = 0
	own := make([]float64, n)
	for i := range own {
		own[i] = controllerWhite * rng.NormFloat64()
	}
	read := append([]float64(nil), slow...)
	for i := 1; i < n; i++ {
		read[i] += own[i]
	}
	run := loggedLoop(t, p, ident.Linear, g, setpoint, read, 4)
	for i := range run.Y {
		if i > 0 {
			run.Y[i] -= own[i]
		}
		run.Y[i] += white * rng.NormFloat64()
		if quantum > 0 {
			run.Y[i] = quantum * math.Round(run.Y[i]/quantum)
		}
	}
	run.Quality.Quantum = quantum
	return run
}

// The noise of the logger, which the controller never saw, does not speak
// against the gains that were in force, however large it is and whatever the
// derivative makes of it; other gains are found. What the hint says of them is
// true: the factor where it names one, and PI's, whose moves stand out of the
// noise, it does name.
func TestLoggerNoiseIsNotTheController(t *testing.T) {
	const rows, scan, seeds = 500, 1.0, 3
	plant := mustPlant(t, "chain2", 11.6, []float64{26, 8.5}, 4.4)
	pi, pid := piGains(0.11, 28, scan), piGains(0.2, 40, scan)
	pid.Controller, pid.Td, pid.Filter = "pid", ptr(4.0), 0.8
	readings := []struct{ logger, controller, quantum float64 }{{0.03, 0.03, 0}, {0.1, 0, 0.1}, {0.2, 0, 0}, {0.2, 0.2, 0.1}}
	for _, stated := range []*tune.Gains{pi, pid} {
		for _, c := range []struct {
			name   string
			kc, ti float64 // in force, over those stated
			factor float64 // that may be named
			hint   string
		}{
			{"as stated", 1, 1, 0, ""},
			{"1.8 times the gain", 1.8, 1, 1.8, "times those the gains ask for"},
			{"the gain over 1.8", 1 / 1.8, 1, 1 / 1.8, "times those the gains ask for"},
			{"twice the integral time", 1, 2, 0, "look at integral time"},
			{"half the integral time", 1, 0.5, 0, "look at integral time"},
		} {
			t.Run(stated.Controller+", "+c.name, func(t *testing.T) {
				inForce := *stated
				inForce.Kc, inForce.Ti = c.kc*stated.Kc, ptr(c.ti**stated.Ti)
				right, named, all := 0, 0, 0
				for _, w := range readings {
					noise := fit.Noise{SD: math.Hypot(0.08, w.logger), CorrelationTime: 6, WhiteSD: w.logger}
					card := cardOf(t, "linear", noise, plant, plausible(t, plant, 10, 0.02, 1)...)
					for seed := range uint64(seeds) {
						run := ownReading(t, plant, &inForce, stepsAt(rows, 60, map[int]float64{60: 8, 280: -8}), seed, w.logger, w.controller, w.quantum)
						r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, stated, Options{LoggedGains: stated})
						if err != nil {
							t.Fatal(err)
						}
						b := r.Runs[0].BackTest
						said := strings.Join(b.Differs, "; ")
						all++
						if b.Plant && *b.Controller == (c.hint == "") {
							right++
						} else {
							t.Logf("%+v, seed %d: plant %v, controller %v: %s", w, seed, b.Plant, *b.Controller, said)
						}
						if strings.Contains(said, c.hint) {
							named++
						}
						if f, ok := factorIn(said); ok && math.Abs(f-c.factor) > 0.15*c.factor {
							t.Errorf("%+v, seed %d: says %g times, in force is %g: %s", w, seed, f, c.factor, said)
						}
					}
				}
				if right < all-1 {
					t.Errorf("right in %d of %d", right, all)
				}
				if stated == pi && named < all-2 {
					t.Errorf("%q in %d of %d", c.hint, named, all)
				}
			})
		}
	}
}

// factorIn is the factor that a hint names.
func factorIn(said string) (f float64, ok bool) {
	_, after, found := strings.Cut(said, "moves of the input are about ")
	n, _ := fmt.Sscan(after, &f)
	return f, found && n == 1
}
