package validate

import (
	"context"
	"encoding/json"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
)

// A bump logged in manual, replayed with the true plant under new gains, is
// the run that the true heater would have made under those gains: the same
// disturbance, another input.
func TestReplayIsTheCounterfactual(t *testing.T) {
	const n, dt = 500, 0.5
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.3)
	noise := fit.Noise{SD: 0.3, CorrelationTime: 3, WhiteSD: 0.1}
	d := noisy(rand.New(rand.NewPCG(3, 4)), n, dt, noise)
	d[0] = 0
	setpoint := stepsAt(n, 60, map[int]float64{100: 10})
	gains := piGains(0.3, 7, dt)

	truth := loggedLoop(t, plant, ident.Linear, gains, setpoint, d, 4)

	// the same heater and disturbance, with a bump of the input instead
	log := &data.Run{Source: data.Source{File: "bump.csv"}, T: truth.T, U: make([]float64, n), Y: make([]float64, n), Setpoint: setpoint}
	for i := range n {
		log.U[i] = 4
		if i >= 60 {
			log.U[i] = 6
		}
	}
	rise := ident.NewSimulator(log.T, ident.HeldInput(log.T, log.U, ident.Linear)).Response(nil, plant.Structure, plant.Lags, plant.DeadTime)
	for i := range n {
		log.Y[i] = 60 + plant.Gain*rise[i] + d[i]
	}

	p, err := newPlan(cardOf(t, "linear", noise, plant), gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	c, err := newCourse(log, segment{0, n, 0}, p)
	if err != nil {
		t.Fatal(err)
	}
	y, u := make([]float64, n), make([]float64, n)
	if err := newRunner(p.law, p.gains, p.plants).replay(c, 0, y, u); err != nil {
		t.Fatal(err)
	}
	for i := range y {
		if math.Abs(y[i]-truth.Y[i]) > 1e-9 || math.Abs(u[i]-truth.U[i]) > 1e-9 {
			t.Fatalf("row %d: replay %.12g, %.12g; the heater itself %.12g, %.12g", i, y[i], u[i], truth.Y[i], truth.U[i])
		}
	}
}

// Scans ten times as fast as the rows, exactly and by the way for rows that
// scans do not meet, agree to what the straight line between rows differs.
func TestScansBetweenRows(t *testing.T) {
	const n, dt = 300, 1.0
	plant := mustPlant(t, "chain2", 8, []float64{12, 4}, 2.3)
	d := noisy(rand.New(rand.NewPCG(8, 4)), n, dt, fit.Noise{SD: 0.1, CorrelationTime: 20})
	d[0] = 0
	log := loggedLoop(t, plant, ident.Linear, piGains(0.2, 14, dt), stepsAt(n, 60, map[int]float64{100: 10}), d, 4)
	gains := piGains(0.3, 12, 0.1)
	p, err := newPlan(cardOf(t, "linear", fit.Noise{}, plant), gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	c, err := newCourse(log, segment{0, n, 0}, p)
	if err != nil {
		t.Fatal(err)
	}
	if !c.even || c.lattice.row != 10 || c.lattice.scan != 1 {
		t.Fatalf("lattice %+v, want ten steps a row", c.lattice)
	}
	r := newRunner(p.law, p.gains, p.plants)
	y1, u1, y2, u2 := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	if err := r.replay(c, 0, y1, u1); err != nil {
		t.Fatal(err)
	}
	c.even = false
	if err := c.layScans(); err != nil {
		t.Fatal(err)
	}
	if err := r.replay(c, 0, y2, u2); err != nil {
		t.Fatal(err)
	}
	for i := range y1 {
		if math.Abs(y1[i]-y2[i]) > 1e-9 || math.Abs(u1[i]-u2[i]) > 1e-9 {
			t.Fatalf("row %d: %.12g, %.12g on the lattice; %.12g, %.12g scan by scan", i, y1[i], u1[i], y2[i], u2[i])
		}
	}
}

func TestFindLattice(t *testing.T) {
	even := func(n int, dt float64) []float64 {
		t := make([]float64, n)
		for i := range t {
			t[i] = float64(i) * dt
		}
		return t
	}
	jitter := even(100, 1)
	jitter[50] += 0.01
	for _, c := range []struct {
		name      string
		t         []float64
		scan      float64
		row, scat int
	}{
		{"scan and rows alike", even(100, 0.1), 0.1, 1, 1},
		{"ten scans a row", even(100, 1), 0.1, 10, 1},
		{"a scan every fourth row", even(100, 0.25), 1, 1, 4},
		{"two rows in three scans", even(100, 0.3), 0.2, 3, 2},
		{"no common measure", even(100, math.Sqrt2), 0.2, 0, 0},
		{"uneven rows", jitter, 0.5, 0, 0},
	} {
		l, ok := findLattice(c.t, c.scan)
		if ok != (c.row > 0) || ok && (l.row != c.row || l.scan != c.scat) {
			t.Errorf("%s: %+v %v, want %d steps a row, %d a scan", c.name, l, ok, c.row, c.scat)
		}
	}
}

// plausible draws plants about one.
func plausible(t testing.TB, p ident.Plant, n int, spread float64, seed uint64) []ident.Plant {
	rng := rand.New(rand.NewPCG(seed, 9))
	var out []ident.Plant
	for range n {
		lags := append([]float64(nil), p.Lags...)
		for i := range lags {
			lags[i] *= math.Exp(spread * rng.NormFloat64())
		}
		out = append(out, mustPlant(t, p.Structure.String(), p.Gain*math.Exp(spread*rng.NormFloat64()), lags, p.DeadTime*math.Exp(spread*rng.NormFloat64())))
	}
	return out
}

// many makes logs of one heater on different days.
func many(t testing.TB, runs, rows int) (*fit.Card, []*data.Run) {
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	noise := fit.Noise{SD: 0.15, CorrelationTime: 2, WhiteSD: 0.1}
	card := cardOf(t, "linear", noise, plant, plausible(t, plant, 40, 0.05, 1)...)
	var out []*data.Run
	for k := range runs {
		d := noisy(rand.New(rand.NewPCG(uint64(k), 5)), rows, 0.5, noise)
		d[0] = 0
		run := loggedLoop(t, plant, ident.Linear, piGains(0.15, 8, 0.5), stepsAt(rows, 60, map[int]float64{rows / 8: 8 + float64(k%5)}), d, 4)
		run.Source.File = "day" + string(rune('a'+k%26)) + ".csv"
		out = append(out, run)
	}
	return card, out
}

func TestSameBytesAtAnyWorkers(t *testing.T) {
	card, runs := many(t, 5, 200)
	gains := piGains(0.3, 7, 0.5)
	gains.Requirement.Settling, gains.Requirement.Overshoot = ptr(40), ptr(5)
	var first []byte
	for _, workers := range []int{1, 2, 3, 16} {
		r, err := ReplayRuns(context.Background(), card, runs, gains, Options{Workers: workers, Traces: true, LoggedGains: piGains(0.15, 8, 0.5)})
		if err != nil {
			t.Fatal(err)
		}
		b, err := json.Marshal(r)
		if err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first = b
		} else if string(first) != string(b) {
			t.Errorf("%d workers give other bytes than one", workers)
		}
	}
}

func TestBrokenRuns(t *testing.T) {
	card, runs := many(t, 1, 400)
	gains := piGains(0.3, 7, 0.5)
	replay := func(change func(r *data.Run)) *Replay {
		t.Helper()
		r := *runs[0]
		r.T, r.Y, r.U = append([]float64(nil), r.T...), append([]float64(nil), r.Y...), append([]float64(nil), r.U...)
		change(&r)
		out, err := ReplayRuns(context.Background(), card, []*data.Run{&r}, gains, Options{Traces: true})
		if err != nil {
			t.Fatal(err)
		}
		return out
	}
	missing := func(lo, hi int) func(*data.Run) {
		return func(r *data.Run) {
			for i := lo; i < hi; i++ {
				r.Y[i] = math.NaN()
			}
		}
	}
	has := func(r *Replay, want string) {
		t.Helper()
		if len(r.Runs) != 1 || !strings.Contains(strings.Join(r.Runs[0].Warnings, "\n"), want) {
			t.Errorf("no warning with %q in %+v", want, r)
		}
	}
	has(replay(missing(100, 103)), "3 missing temperatures are bridged")
	has(replay(missing(100, 110)), "2 parts are replayed each for itself")
	has(replay(missing(100, 110)), "10 of 400 rows are left out")
	has(replay(func(r *data.Run) {
		for i := 200; i < 400; i++ {
			r.T[i] += 60
		}
		r.Quality.Gaps = []data.Gap{{After: 199, Duration: 60}}
	}), "2 parts are replayed")
	has(replay(func(r *data.Run) {
		for i := range r.U {
			r.U[i] += 20
		}
	}), "outside the card's 0 to 10 V")

	broken := replay(missing(100, 110))
	if got := len(broken.Runs[0].Trace.T); got != 391 { // 390 rows and one break
		t.Errorf("the trace has %d rows, want 391", got)
	}
	if dead := replay(missing(0, 400)); len(dead.Failed) != 1 || !strings.Contains(dead.Failed[0].Reason, "no unbroken part") {
		t.Errorf("a run without temperature: %+v", dead.Failed)
	}
	if none := replay(func(r *data.Run) { r.Setpoint = nil }); len(none.Failed) != 1 || !strings.Contains(none.Failed[0].Reason, "--setpoint-step") {
		t.Errorf("a run without setpoint: %+v", none.Failed)
	}
}

// A loop that runs away is said to, and fails.
func TestRunaway(t *testing.T) {
	card, runs := many(t, 1, 400)
	gains := piGains(30, 1, 0.5)
	gains.Limits.Min, gains.Limits.Max = nil, nil
	gains.Requirement.Settling = ptr(40)
	r, err := ReplayRuns(context.Background(), card, runs, gains, Options{Traces: true})
	if err != nil {
		t.Fatal(err)
	}
	run := r.Runs[0]
	if run.Meets || run.Probability != 0 || run.Proposed.Median.PeakTemp != nil || !strings.Contains(strings.Join(run.Warnings, "\n"), "runs away on 40 of 40") {
		t.Errorf("a loop that runs away: %+v", run)
	}
	if _, err := json.Marshal(r); err != nil {
		t.Error(err)
	}
}

// A requirement between what the plants reach: the probability is the share
// of plants that meet it, and the reasons name the numbers.
func TestProbability(t *testing.T) {
	card, runs := many(t, 1, 400)
	gains := piGains(0.3, 7, 0.5)
	gains.Requirement.Settling = ptr(1)
	r, err := ReplayRuns(context.Background(), card, runs, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	median := *r.Runs[0].Proposed.Median.Settling
	gains.Requirement.Settling = &median
	r, err = ReplayRuns(context.Background(), card, runs, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	run := r.Runs[0]
	if run.Meets || run.Probability < 0.4 || run.Probability > 0.6 || len(run.Reasons) != 1 || !strings.Contains(run.Reasons[0], "of 40 plausible plants") {
		t.Errorf("settling asked at the median %g s: probability %g, meets %v, reasons %q", median, run.Probability, run.Meets, run.Reasons)
	}
	if run.Logged.Settling == nil {
		t.Error("the log shows a settled setpoint step, but has no settling time")
	}
}
