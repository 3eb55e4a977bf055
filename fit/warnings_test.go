package fit

import (
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// Each warning code, on a log that deserves it, and what its words must name.
func TestWarnings(t *testing.T) {
	short := twoLags()
	short.n, short.steps = 50, []step{{0, 3}, {21, 4.2}}
	weak := twoLags()
	weak.sd, weak.steps = 3, []step{{0, 3}, {21, 3.02}}
	slow := bumpLog{structure: "fopdt", gain: 7, lags: []float64{0.05}, dead: 1.2, n: 160, every: 1, steps: []step{{0, 3}, {41, 4}}, sd: 0.05}
	instant := twoLags()
	instant.structure, instant.lags, instant.dead = "fopdt", []float64{9}, 0
	alike := twoLags()
	alike.sd = 0.8

	for _, c := range []struct {
		code, parameter string
		runs            []*data.Run
		o               Options
		says            string // pattern in the text
	}{
		{"short-record", "lag1", []*data.Run{short.run(1)}, Options{Structure: "fopdt", Initial: "rest", Drift: "none"}, `no upper bound on lag 1.*hold the next bump longer`},
		{"weak-bump", "gain", []*data.Run{weak.run(1)}, Options{Structure: "fopdt", Noise: "white", Initial: "rest", Drift: "none"}, `larger bump`},
		{"weak-bump", "gain", []*data.Run{weak.run(4)}, Options{Structure: "fopdt", Noise: "white", Initial: "rest", Drift: "none"}, `larger bump`}, // both ends are open
		{"lag-unresolved", "lag1", []*data.Run{slow.run(3)}, Options{Structure: "fopdt", Initial: "rest", Drift: "none"}, `log at .* or faster`},
		{"dead-time-unresolved", "dead_time", []*data.Run{instant.run(1)}, Options{Structure: "fopdt", Initial: "rest", Drift: "none"}, `one-sided`},
		{"structures-alike", "", []*data.Run{alike.run(1)}, Options{Plants: -1, Drift: "none", Initial: "rest"}, `cannot tell \w+ from`},
		{"white-intervals", "", []*data.Run{coloured(twoLags(), 0.9)}, Options{Structure: "chain2", Noise: "white"}, `--noise auto`},
		{"residual-correlation", "", []*data.Run{humming(twoLags())}, Options{Structure: "chain2"}, `Ljung-Box p (= |below )`},
		{"coarse-quantum", "", []*data.Run{quantised(twoLags(), 0.5)}, Options{Structure: "chain2"}, `steps of 0.5`},
		{"input-correlation", "", []*data.Run{wrongWay(twoLags())}, Options{Structure: "chain2", Initial: "rest", Drift: "none"}, `after a bump.*(ahead of|behind) the model`},
		{"up-down-differ", "lag1", []*data.Run{coolingSlower(twoLags(), 1.4)}, Options{Structure: "fopdt", Initial: "rest", Drift: "none"}, `lags of steps up are \d+ % shorter`},
		{"up-down-differ", "gain", []*data.Run{gainUp(twoLags(), 1.15)}, Options{Structure: "chain2", Initial: "rest", Drift: "none"}, `gain of steps up is 1\d % larger`},
		{"curvature", "gain", []*data.Run{staircase(ident.Power)}, Options{Structure: "chain2", Initial: "rest", Drift: "none"}, `fit with --input-law power`},
		{"logs-differ", "", differing(), Options{Structure: "chain2"}, `fouled.csv differs most, in the gain: [5-6]\.\d+ K/V ± .* against 7`},
		{"not-at-rest", "", []*data.Run{midway(twoLags())}, Options{Structure: "chain2", Initial: "earlier"}, `steady state`},
		{"drift", "drift", []*data.Run{drifting(twoLags(), 0.02)}, Options{Structure: "chain2"}, `drifts by 3\.\d+ K`},
		{"bump-instant", "dead_time", []*data.Run{twoLags().run(1)}, Options{Structure: "chain2", BumpInstant: "unknown"}, `700 ms wider`},
		{"closed-loop", "gain", []*data.Run{quietLoop()}, Options{Structure: "fopdt", Initial: "rest"}, `bump in manual`},
		{"closed-loop-white", "gain", []*data.Run{quietLoop()}, Options{Structure: "fopdt", Initial: "rest", Noise: "white"}, `--noise auto`},
	} {
		t.Run(c.code, func(t *testing.T) {
			t.Parallel()
			if c.o.Plants == 0 {
				c.o.Plants = -1
			}
			card := fitted1(t, c.runs, c.o)
			for _, w := range card.Warnings {
				if w.Code == c.code && w.Parameter == c.parameter {
					if !regexp.MustCompile(c.says).MatchString(w.Text) {
						t.Errorf("%q does not match %q", w.Text, c.says)
					}
					return
				}
			}
			t.Errorf("no warning %s on %q, but %v", c.code, c.parameter, card.Warnings)
		})
	}
}

// A clean test of a linear plant deserves no warning.
func TestNoWarningOnACleanLog(t *testing.T) {
	for seed := range uint64(12) {
		c := fitted1(t, []*data.Run{twoLags().run(20 + seed)}, Options{Structure: "chain2", Initial: "rest", Drift: "none", Plants: -1})
		for _, w := range c.Warnings {
			// The Ljung-Box test is at 1 %: one of these logs may trip it.
			if w.Code != "residual-correlation" {
				t.Errorf("seed %d: %s: %s", seed, w.Code, w.Text)
			}
		}
	}
}

// Logs of one plant agree; the test of their agreement must not cry wolf.
func TestLogsOfOnePlantAgree(t *testing.T) {
	for seed := range uint64(10) {
		runs := []*data.Run{twoLags().run(100 + 2*seed), twoLags().run(101 + 2*seed)}
		c := fitted1(t, runs, Options{Structure: "chain2", Initial: "rest", Drift: "none", Plants: -1})
		for _, w := range c.Warnings {
			if w.Code == "logs-differ" {
				t.Errorf("seed %d: %s", seed, w.Text)
			}
		}
	}
}

// Every code in the list is documented in full, and none in the tests above is
// missing from it.
func TestWarningCodesAreDocumented(t *testing.T) {
	var codes []string
	for _, d := range WarningCodes() {
		if d.Seen == "" || d.Means == "" || d.Do == "" {
			t.Errorf("%s is not documented in full", d.Code)
		}
		if slices.Contains(codes, d.Code) {
			t.Errorf("%s is there twice", d.Code)
		}
		if strings.ToLower(d.Code) != d.Code || strings.ContainsAny(d.Code, " _") {
			t.Errorf("%s is not kebab-case", d.Code)
		}
		codes = append(codes, d.Code)
	}
	for _, code := range codesInSource(t) {
		if !slices.Contains(codes, code) {
			t.Errorf("code %s is used and not documented", code)
		}
	}
}

// coloured is the log with first-order correlated noise on top.
func coloured(l bumpLog, rho float64) *data.Run {
	run := l.run(8)
	r := rand.New(rand.NewPCG(8, 8))
	c := 0.0
	for k := range run.Y {
		c = rho*c + math.Sqrt(1-rho*rho)*r.NormFloat64()
		run.Y[k] += 0.2 * c
	}
	return run
}

// humming is the log with a hum of four rows, which no first-order noise has.
func humming(l bumpLog) *data.Run {
	run := l.run(8)
	for k := range run.Y {
		run.Y[k] += 0.15 * math.Sin(2*math.Pi*float64(k)/4.3)
	}
	return run
}

func quantised(l bumpLog, step float64) *data.Run {
	run := l.run(8)
	for k := range run.Y {
		run.Y[k] = step * math.Round(run.Y[k]/step)
	}
	run.Quality.Quantum = step
	return run
}

// wrongWay first answers the wrong way after each step, which a lag chain
// cannot do.
func wrongWay(l bumpLog) *data.Run {
	run := l.run(8)
	st, _ := ident.ParseStructure("fopdt")
	in := ident.HeldInput(run.T, run.U, l.law)
	fast := ident.NewSimulator(run.T, in).Response(nil, st, []float64{1.5}, 0.2)
	slow := ident.NewSimulator(run.T, in).Response(nil, st, []float64{5}, 0.2)
	for k := range run.Y {
		run.Y[k] -= 5 * (fast[k] - slow[k])
	}
	return run
}

// coolingSlower is a single lag that is longer by a factor when the
// temperature falls, integrated exactly from row to row.
func coolingSlower(l bumpLog, factor float64) *data.Run {
	run := l.run(8)
	r := rand.New(rand.NewPCG(8, 9))
	x := l.gain * run.U[0]
	for k := range run.Y {
		if k > 0 {
			goal := l.gain * run.U[k-1]
			tau := 9.0
			if goal < x {
				tau *= factor
			}
			x = goal + (x-goal)*math.Exp(-l.every/tau)
		}
		run.Y[k] = 40 + x + l.sd*r.NormFloat64()
	}
	return run
}

// gainUp answers steps up with a gain larger by a factor.
func gainUp(l bumpLog, factor float64) *data.Run {
	run := l.run(8)
	st, _ := ident.ParseStructure(l.structure)
	up, _ := rises(ident.HeldInput(run.T, run.U, l.law))
	y := ident.NewSimulator(run.T, up).Response(nil, st, l.lags, l.dead)
	for k := range run.Y {
		run.Y[k] += (factor - 1) * l.gain * y[k]
	}
	return run
}

// staircase is a log of several levels under a law of the input.
func staircase(law ident.Law) *data.Run {
	l := twoLags()
	l.law, l.n = law, 560
	if law == ident.Power {
		l.gain /= 8
	}
	l.steps = []step{{0, 2}, {21, 4}, {98, 6}, {175, 8}, {252, 4}, {322, 2}}
	return l.run(8)
}

// differing are three logs of which the last is of a heater that lost gain.
func differing() []*data.Run {
	l := twoLags()
	a, b := l.run(1), l.run(2)
	l.gain, l.name = 0.8*l.gain, "fouled.csv"
	return []*data.Run{a, b, l.run(3)}
}

// midway starts on the way from an earlier input.
func midway(l bumpLog) *data.Run {
	run := l.run(8)
	st, _ := ident.ParseStructure(l.structure)
	y := ident.NewSimulator(run.T, ident.Input{At: run.T[:1], Value: []float64{1}}).Response(nil, st, l.lags, l.dead)
	for k := range run.Y {
		run.Y[k] -= 12 * (1 - y[k])
	}
	return run
}

func drifting(l bumpLog, slope float64) *data.Run {
	run := l.run(8)
	for k := range run.Y {
		run.Y[k] += slope * run.T[k]
	}
	return run
}

// quietLoop is a controller's record without a step of the setpoint: it only
// answers its own noise.
func quietLoop() *data.Run {
	r := rand.New(rand.NewPCG(4, 4))
	run := &data.Run{Source: data.Source{File: "quiet.csv"}, Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	const every, gain, tau = 0.5, 6.0, 10.0
	x, integral, noise := 0.0, 0.0, 0.0
	last := 0.0
	for k := range 500 {
		noise = 0.9*noise + 0.05*r.NormFloat64()
		y := 60 + x + noise
		integral += (60 - y) * every / 8
		u := 4 + 0.1*(60-y+integral)
		run.T, run.U, run.Y = append(run.T, every*float64(k)), append(run.U, u), append(run.Y, y)
		x = gain*last + (x-gain*last)*math.Exp(-every/tau)
		last = u - 4
	}
	return run
}

// codesInSource lists the codes that the package's own files warn with.
func codesInSource(t *testing.T) []string {
	files, err := filepath.Glob("*.go")
	if err != nil {
		t.Fatal(err)
	}
	call := regexp.MustCompile(`\badd\("([a-z-]+)"`)
	var codes []string
	for _, f := range files {
		if strings.HasSuffix(f, "_test.go") {
			continue
		}
		text, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range call.FindAllStringSubmatch(string(text), -1) {
			codes = append(codes, m[1])
		}
	}
	if len(codes) < 15 {
		t.Fatalf("only %d codes found in the source", len(codes))
	}
	return codes
}
