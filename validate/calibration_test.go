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

func inventHeater(t testing.TB, seed uint64) heater {
	rng := rand.New(rand.NewPCG(seed, 404))
	between := func(lo, hi float64) float64 { return lo * math.Pow(hi/lo, rng.Float64()) }
	lag1 := between(5, 15)
	h := heater{seed: seed, plant: mustPlant(t, "chain2", between(4, 14), []float64{lag1, lag1 * between(0.15, 0.6)}, between(0.6, 3))}
	h.noise = fit.Noise{CorrelationTime: between(0.5, 8), WhiteSD: between(0.03, 0.1)}
	h.noise.SD = math.Hypot(h.noise.WhiteSD, between(0.05, 0.3))
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
// heater itself does under the proposed gains with the same disturbance.
func (h heater) loops(t testing.TB, inForce, proposed *tune.Gains) (log, truth *data.Run) {
	const rows = 400
	d := noisy(rand.New(rand.NewPCG(h.seed, 2)), rows, studyInterval, h.noise)
	for i := 250; i < rows; i++ {
		d[i] -= 3 * d[250] // a load, of either sign and any size
	}
	d[0] = 0
	setpoint := stepsAt(rows, 60, map[int]float64{50: 10})
	return loggedLoop(t, h.plant, ident.Linear, inForce, setpoint, d, 4), loggedLoop(t, h.plant, ident.Linear, proposed, setpoint, d, 4)
}

// lambdaGains are internal-model PI gains for the card's best fit with a
// closed-loop time of `slow` dead times.
func lambdaGains(p ident.Plant, slow float64) *tune.Gains {
	ti := p.Lags[0] + p.Lags[1]/2
	dead := p.DeadTime + p.Lags[1]/2
	return piGains(ti/(p.Gain*(slow+1)*dead), ti, studyInterval)
}

// TestCalibration is a study over 300 invented heaters: a bump log makes the
// card, a second log of the heater in closed loop is replayed under other
// gains, and the heater itself, with the very disturbance, says what those
// gains would have done. The 95% band must hold 95% ± 2% of its samples, and
// stated probabilities must come true.
func TestCalibration(t *testing.T) {
	if os.Getenv("LAGWRIGHT_LONG") == "" {
		t.Skip("a study of some minutes: set LAGWRIGHT_LONG=1")
	}
	const heaters = 300
	var samples, inside, open int
	var table [5]struct{ stated, met, runs float64 }
	for seed := range uint64(heaters) {
		h := inventHeater(t, seed)
		card, err := fit.Fit(context.Background(), []*data.Run{h.bump()}, fit.Options{Structure: "chain2", Rand: int64(seed), Drift: "none", Initial: "rest"})
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
		log, truth := h.loops(t, lambdaGains(best, 3), proposed)
		in, all := bandHolds(t, card, log, truth, proposed)
		inside, samples = inside+in, samples+all

		for _, factor := range []float64{0.8, 0.95, 1, 1.05, 1.2} { // a requirement that is met by some
			stated, met, ok := probability(t, card, log, truth, proposed, factor)
			if !ok {
				continue // does not settle: nothing to ask for
			}
			k := min(4, int(5*stated))
			table[k].stated += stated
			table[k].met += met
			table[k].runs++
		}
	}
	share := float64(inside) / float64(samples)
	t.Logf("%d heaters, %d not fitted; the 95%% band holds %.2f%% of %d samples", heaters, open, 100*share, samples)
	var lines []string
	for k, row := range table {
		lines = append(lines, fmt.Sprintf("stated %d–%d%%: %.0f cases, mean stated %.1f%%, met %.1f%%", 20*k, 20*k+20, row.runs, 100*row.stated/row.runs, 100*row.met/row.runs))
	}
	t.Log(strings.Join(lines, "\n"))
	if share < 0.93 || share > 0.97 {
		t.Errorf("the 95%% band holds %.2f%% of the samples, want 93 to 97%%", 100*share)
	}
	for k, row := range table {
		if row.runs < 30 {
			continue
		}
		if gap := math.Abs(row.stated-row.met) / row.runs; gap > 0.1 {
			t.Errorf("row %d of the reliability table: stated and met are %.1f%% apart", k, 100*gap)
		}
	}
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

// probability asks for a settling time of factor × the median of the replay
// and returns the probability stated for it and whether the truth (1 or 0)
// meets it, measured alike. ok is false where the median does not settle.
func probability(t testing.TB, card *fit.Card, log, truth *data.Run, gains *tune.Gains, factor float64) (stated, met float64, ok bool) {
	t.Helper()
	asked := *gains
	asked.Requirement.Settling = ptr(1)
	replay := func(run *data.Run, g *tune.Gains) RunReplay {
		r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, g, Options{})
		if err != nil || len(r.Runs) != 1 {
			t.Fatalf("%v %+v", err, r)
		}
		return r.Runs[0]
	}
	median := replay(log, &asked).Proposed.Median.Settling
	if median == nil {
		return 0, 0, false
	}
	asked.Requirement.Settling = ptr(factor * *median)
	if s := replay(truth, &asked).Logged.Settling; s != nil && *s <= factor**median {
		met = 1
	}
	return replay(log, &asked).Probability, met, true
}
