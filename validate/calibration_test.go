package validate

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// A heater of the calibration study: its plant, its noise and the seed of
// both logs.
type heater struct {
	plant ident.Plant
	noise fit.Noise
	seed  uint64
}

const studyInterval = 0.5 // s

// inventHeater draws the times of a heater by ratio, its second lag at most 0.6
// of the first. A log does not say so; the plausible plants, drawn from the
// likelihood alone, therefore have more nearly equal lags and longer dead times
// than the heater in more than half of the cases, and settle a little later.
func inventHeater(t testing.TB, seed uint64) heater {
	rng := rand.New(rand.NewPCG(seed, 404))
	lag1 := between(rng, 5, 15)
	plant := mustPlant(t, "chain2", between(rng, 4, 14), []float64{lag1, lag1 * between(rng, 0.15, 0.6)}, between(rng, 0.6, 3))
	return noisyHeater(rng, seed, plant)
}

// inventEvenly draws lags and dead time evenly, as the plausible plants are.
func inventEvenly(t testing.TB, seed uint64) heater {
	rng := rand.New(rand.NewPCG(seed, 405))
	a, b := 0.0, 0.0
	for max(a, b) < 5 {
		a, b = 15*rng.Float64(), 15*rng.Float64()
	}
	return noisyHeater(rng, seed, mustPlant(t, "chain2", between(rng, 4, 14), []float64{max(a, b), min(a, b)}, 3*rng.Float64()))
}

// between draws a number by ratio.
func between(rng *rand.Rand, lo, hi float64) float64 { return lo * math.Pow(hi/lo, rng.Float64()) }

func noisyHeater(rng *rand.Rand, seed uint64, plant ident.Plant) heater {
	h := heater{seed: seed, plant: plant}
	h.noise = fit.Noise{CorrelationTime: between(rng, 0.5, 8), WhiteSD: between(rng, 0.03, 0.1)}
	h.noise.SD = math.Hypot(h.noise.WhiteSD, between(rng, 0.05, 0.3))
	return h
}

// bump is the heater's bump test: 4 V to 6 V after a minute, ten response times on.
func (h heater) bump() *data.Run {
	rows := int((60 + 10*response(h.plant)) / studyInterval)
	run := &data.Run{
		Source: data.Source{File: fmt.Sprintf("bump%d.csv", h.seed), SHA256: "00", Rows: rows},
		Units:  data.Units{Time: "s", Input: "V", Temperature: "degC"},
	}
	for i := range rows {
		run.T = append(run.T, float64(i)*studyInterval)
		run.U = append(run.U, 4+2*float64(min(1, i/120)))
	}
	run.Source.ToS, run.Quality.MedianInterval = run.T[rows-1], studyInterval
	d := noisy(rand.New(rand.NewPCG(h.seed, 1)), rows, studyInterval, h.noise)
	rise := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, h.plant.Structure, h.plant.Lags, h.plant.DeadTime)
	for i := range rise {
		run.Y = append(run.Y, 60+h.plant.Gain*rise[i]+d[i])
	}
	return run
}

// loops are the second log, made under the gains in force, and what the
// heater itself does under the proposed gains: with the same disturbance, and
// without noise and load.
func (h heater) loops(t testing.TB, inForce, proposed *tune.Gains) (log, truth, clean *data.Run) {
	const rows = 400
	d := noisy(rand.New(rand.NewPCG(h.seed, 2)), rows, studyInterval, h.noise)
	for i := 250; i < rows; i++ {
		d[i] -= 3 * d[250] // a load, of either sign and any size
	}
	d[0] = 0
	setpoint := stepsAt(rows, 60, map[int]float64{50: 10})
	loop := func(g *tune.Gains, d []float64) *data.Run {
		return loggedLoop(t, h.plant, ident.Linear, g, setpoint, d, 4)
	}
	return loop(inForce, d), loop(proposed, d), loop(proposed, make([]float64, rows))
}

// lambdaGains are internal-model PI gains for the card's best fit, reduced to
// one lag by the half rule, with a closed-loop time of `slow` dead times.
func lambdaGains(p ident.Plant, slow float64) *tune.Gains {
	lags := append(p.Elements(), 0, 0)
	ti := lags[0] + lags[1]/2
	dead := p.DeadTime + lags[1]/2
	for _, tau := range lags[2:] {
		dead += tau
	}
	return piGains(ti/(p.Gain*(slow+1)*dead), ti, studyInterval)
}

// A reliability table: cases by stated probability in fifths, and how many of
// them were met.
type reliability [5]struct{ stated, met, runs float64 }

func (r *reliability) add(stated, met float64) {
	row := &r[min(4, int(5*stated))]
	row.stated, row.met, row.runs = row.stated+stated, row.met+met, row.runs+1
}

// check logs the table. In rows of 30 cases or more what was stated must come
// true to 10%; with promise it may come true more often than that, but no more
// seldom.
func (r *reliability) check(t *testing.T, name string, promise bool) {
	var lines []string
	for k, row := range r {
		if row.runs == 0 {
			continue
		}
		stated, met := row.stated/row.runs, row.met/row.runs
		lines = append(lines, fmt.Sprintf("%s, stated %d–%d%%: %.0f cases, mean stated %.1f%%, met %.1f%%", name, 20*k, 20*k+20, row.runs, 100*stated, 100*met))
		if row.runs >= 30 && (stated-met > 0.1 || met-stated > 0.1 && !promise) {
			t.Errorf("%s, row %d: stated and met are %.1f%% apart", name, k, 100*math.Abs(stated-met))
		}
	}
	t.Log(strings.Join(lines, "\n"))
}

// TestCalibration is a study over 300 invented heaters: a bump log makes the
// card, a second log of the heater in closed loop is replayed under other
// gains, and the heater itself says what those gains would have done: with the
// very disturbance for the band, which must hold 95% ± 2% of its samples, and
// without it for settling and overshoot, whose stated probabilities must come
// true. Where the heaters are drawn as the plausible plants are, the heater's own
// settling time lies below the plants' median in half of the cases. With
// structure, drift and start found by the fit the same is asked of 150 heaters,
// except that probabilities may be told too small: of the settling times that 20
// to 40% of the plants meet, more than half of the heaters do.
func TestCalibration(t *testing.T) {
	if os.Getenv("LAGWRIGHT_LONG") == "" {
		t.Skip("a study of some minutes: set LAGWRIGHT_LONG=1")
	}
	known := fit.Options{Structure: "chain2", Drift: "none", Initial: "rest"}
	for _, c := range []struct {
		name    string
		heaters uint64
		invent  func(testing.TB, uint64) heater
		options fit.Options
		promise bool
		half    bool // the heater settles before the plants' median in half of the cases
	}{
		{"structure known", 300, inventHeater, known, false, false},
		{"structure known, heaters drawn evenly", 300, inventEvenly, known, false, true},
		{"all found by the fit", 150, inventHeater, fit.Options{}, true, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			sooner := calibrate(t, c.heaters, c.invent, c.options, c.promise)
			t.Logf("the heater settles before the plants' median in %.1f%% of the cases", 100*sooner)
			if error := 1 / (2 * math.Sqrt(float64(c.heaters))); c.half && math.Abs(sooner-0.5) > 2.5*error {
				t.Errorf("that is %.1f standard errors from half", (sooner-0.5)/error)
			}
		})
	}
}

// calibrate returns the share of the heaters that settle before the median of
// their plausible plants.
func calibrate(t *testing.T, heaters uint64, invent func(testing.TB, uint64) heater, o fit.Options, promise bool) (sooner float64) {
	var samples, inside, open, before, moved int
	var settling, overshoot reliability
	for seed := range heaters {
		h := invent(t, seed)
		o.Rand = int64(seed)
		card, err := fit.Fit(context.Background(), []*data.Run{h.bump()}, o)
		if err != nil {
			t.Logf("heater %d: %v", seed, err)
			open++
			continue
		}
		best, err := card.Plant()
		if err != nil {
			t.Fatal(err)
		}
		proposed := lambdaGains(best, 1)
		log, truth, clean := h.loops(t, lambdaGains(best, 3), proposed)
		in, all := bandHolds(t, card, log, truth, proposed)
		inside, samples = inside+in, samples+all

		replay := newStudy(t, card, log, clean, proposed)
		for _, factor := range []float64{0.8, 0.95, 1, 1.05, 1.2} { // a requirement that is met by some
			if m := replay.median.Settling; m != nil {
				if factor == 1 {
					moved++
					count(&before, replay.truth.settling < *m)
				}
				replay.ask(&settling, tune.Requirement{Settling: ptr(factor * *m)})
			}
			if m := replay.median.Overshoot; m != nil && *m > 1 {
				replay.ask(&overshoot, tune.Requirement{Overshoot: ptr(factor * *m)})
			}
		}
	}
	share := float64(inside) / float64(samples)
	t.Logf("%d heaters, %d not fitted; the 95%% band holds %.2f%% of %d samples", heaters, open, 100*share, samples)
	if share < 0.93 || share > 0.97 {
		t.Errorf("the 95%% band holds %.2f%% of the samples, want 93 to 97%%", 100*share)
	}
	settling.check(t, "settling", promise)
	overshoot.check(t, "overshoot", promise)
	return float64(before) / float64(moved)
}

// bandHolds counts the samples of the truth inside the band. Samples at which
// the band has no width, before the new gains act, are not counted.
func bandHolds(t testing.TB, card *fit.Card, log, truth *data.Run, gains *tune.Gains) (inside, all int) {
	t.Helper()
	r, err := ReplayRuns(context.Background(), card, []*data.Run{log}, gains, Options{Traces: true})
	if err != nil {
		t.Fatal(err)
	}
	tr := r.Runs[0].Trace
	if len(tr.T) != len(truth.T) {
		t.Fatalf("trace of %d rows for %d", len(tr.T), len(truth.T))
	}
	for i, y := range truth.Y {
		if *tr.High[i]-*tr.Low[i] < 1e-6 {
			continue
		}
		all++
		if y >= *tr.Low[i] && y <= *tr.High[i] {
			inside++
		}
	}
	return inside, all
}

// A studied replay: the figures on all plausible plants, and those of the
// heater itself without noise and load, measured alike.
type studied struct {
	plan   *plan
	all    []figures
	median RunMetrics
	truth  figures
}

func newStudy(t testing.TB, card *fit.Card, log, clean *data.Run, gains *tune.Gains) studied {
	t.Helper()
	p, err := newPlan(card, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	courses, _, err := p.courses(log)
	if err != nil {
		t.Fatal(err)
	}
	e, err := p.ensemble(context.Background(), courses, p.yardstick(log), p.teams(1)[0])
	if err != nil {
		t.Fatal(err)
	}
	return studied{p, e.figures, bandMetrics(e.figures, p.options.Confidence).Median, ownFigures(t, card, gains, clean)}
}

// ask adds what the replay states for a requirement, and whether the heater
// itself meets it.
func (s studied) ask(r *reliability, asked tune.Requirement) {
	ds := demands(asked, s.plan.units)
	stated, _, _ := judge(ds, s.all, s.plan.loop.misses, s.plan.assurance())
	met, _, _ := judge(ds, []figures{s.truth}, []bool{false}, s.plan.assurance())
	r.add(stated, met)
}
