package fit

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"math"
	"math/rand/v2"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"lagwright/data"
)

func checked(t testing.TB, run *data.Run, o Options) *CheckReport {
	t.Helper()
	r, err := Check(context.Background(), run, o)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func (r *CheckReport) verdictOn(parameter string) Verdict {
	for _, v := range r.Verdict {
		if v.Parameter == parameter {
			return v
		}
	}
	return Verdict{}
}

func TestCheckOfAGoodLog(t *testing.T) {
	run := twoLags().run(1)
	run.Quality.Missing = map[string]int{"OPEN": 3}
	run.Quality.Notes = []data.Note{{Code: "clock-jump-back", Text: "the clock jumped back an hour", Row: 40}}
	r := checked(t, run, Options{})
	for _, p := range []string{"gain", "lags", "dead_time"} {
		if v := r.verdictOn(p); v.Verdict != good || len(v.Cures) != 0 {
			t.Errorf("%s: %+v, want good and no cure", p, v)
		}
	}
	if r.Rows != 240 || math.Abs(r.Span-167.3) > 1e-9 || r.Sampling.Median != 0.7 || r.Loop.State != "open" || len(r.Bumps) != 2 {
		t.Errorf("seen: %d rows, %g s, every %g s, %s loop, %d bumps", r.Rows, r.Span, r.Sampling.Median, r.Loop.State, len(r.Bumps))
	}
	if b := r.Bumps[0]; math.Abs(b.Time-21) > 1e-9 || b.From != 3 || b.To != 4.2 || !b.SettledBefore || !b.SettledAfter || math.Abs(*b.Rise-7.4*1.2) > 0.1 {
		t.Errorf("first bump %+v", b)
	}
	if r.Noise == nil || math.Abs(r.Noise.SD-0.06) > 0.01 {
		t.Errorf("noise %+v, want sd 0.06", r.Noise)
	}
	if r.Drift == nil || r.Drift.Clear {
		t.Errorf("drift before the bump %+v, want none", r.Drift)
	}
	var text, object bytes.Buffer
	if err := r.WriteText(&text); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"3 cells set aside: OPEN", "jumped back an hour (line 40)", "gain        good", "open loop"} {
		if !strings.Contains(text.String(), want) {
			t.Errorf("the text lacks %q:\n%s", want, text.String())
		}
	}
	if err := r.WriteJSON(&object); err != nil {
		t.Fatal(err)
	}
	var back CheckReport
	if err := json.Unmarshal(object.Bytes(), &back); err != nil || back.Schema != CheckSchema || len(back.Verdict) != 3 {
		t.Errorf("JSON: %v, schema %q, %d verdicts", err, back.Schema, len(back.Verdict))
	}
}

// The log ends early: the cure names how much longer to hold, and a log held
// that much longer is good.
func TestCheckCureHoldLonger(t *testing.T) {
	l := twoLags()
	l.n, l.steps = 56, []step{{0, 3}, {21, 4.2}} // held for 1.3 lags
	r := checked(t, l.run(2), Options{Drift: "none", Initial: "rest"})
	v := r.verdictOn("gain")
	if v.Verdict == good {
		t.Fatalf("gain is good on a log held for 1.3 lags: %+v", v)
	}
	longer := cureNumber(t, v.Cures, `hold the last bump ([0-9.]+) (s|min) longer`)
	l.n += int(math.Ceil(longer / l.every))
	if v := checked(t, l.run(2), Options{Drift: "none", Initial: "rest"}).verdictOn("gain"); v.Bound == nil || *v.Bound > 1.25*100*wanted["gain"][0] {
		t.Errorf("held %g s longer as told, the gain is %+v", longer, v)
	}
}

// The bump is lost in the noise: the cure names a larger one, and it does.
func TestCheckCureBiggerBump(t *testing.T) {
	l := twoLags()
	l.sd = 0.9
	r := checked(t, l.run(5), Options{Drift: "none", Initial: "rest"})
	v := r.verdictOn("dead_time")
	if v.Verdict == good {
		t.Fatalf("dead time is good under noise of 0.9 K: %+v", v)
	}
	volts := cureNumber(t, v.Cures, `bump at least ([0-9.]+) (V) instead of 1.2 V`)
	l.steps = []step{{0, 3}, {21, 3 + volts}, {98, 3}}
	ok := 0
	for seed := range uint64(8) {
		if v := checked(t, l.run(60+seed), Options{Drift: "none", Initial: "rest"}).verdictOn("dead_time"); v.Bound != nil && *v.Bound < 1.5*100*wanted["dead_time"][0] {
			ok++
		}
	}
	if ok < 6 {
		t.Errorf("a bump of %g V as told bounds the dead time on %d of 8 logs", volts, ok)
	}
}

// cureNumber is the number in the cure that matches, in s or V.
func cureNumber(t *testing.T, cures []string, pattern string) float64 {
	t.Helper()
	for _, c := range cures {
		if m := regexp.MustCompile(pattern).FindStringSubmatch(c); m != nil {
			v, err := strconv.ParseFloat(m[1], 64)
			if err != nil {
				t.Fatal(err)
			}
			if m[2] == "min" {
				v *= 60
			}
			return v
		}
	}
	t.Fatalf("no cure matches %q: %q", pattern, cures)
	return 0
}

func TestCheckCureFasterRows(t *testing.T) {
	l := bumpLog{structure: "fopdt", gain: 7, lags: []float64{4}, dead: 1, n: 60, every: 3, steps: []step{{0, 3}, {61, 4}, {121, 3}}, sd: 0.3}
	v := checked(t, l.run(3), Options{Drift: "none", Initial: "rest"}).verdictOn("dead_time")
	if v.Verdict == good {
		t.Fatalf("dead time is good with 3 s rows on a 4 s lag: %+v", v)
	}
	if s := cureNumber(t, v.Cures, `log every ([0-9.]+) (s|ms) or faster`); s <= 0 {
		t.Errorf("log every %g s", s)
	}
	if !strings.Contains(v.Reason, "coarse") {
		t.Errorf("reason %q does not name the coarse rows", v.Reason)
	}
}

func TestCheckOfLogsThatCannotBeFitted(t *testing.T) {
	still := twoLags().run(1)
	for k := range still.U {
		still.U[k] = 3
	}
	dead := twoLags()
	dead.gain = 1e-9
	flat := twoLags().run(1)
	for k := range flat.Y {
		flat.Y[k] = 20
	}
	for _, c := range []struct {
		name string
		run  *data.Run
		want error
	}{{"no bump", still, ErrNoBump}, {"no answer", dead.run(1), ErrNoAnswer}, {"constant", flat, ErrConstant}} {
		r, err := Check(context.Background(), c.run, Options{Initial: "rest", Drift: "none"})
		if !errors.Is(err, c.want) {
			t.Errorf("%s: error %v, want %v", c.name, err, c.want)
			continue
		}
		var text bytes.Buffer
		if r == nil || r.Rows != 240 || r.WriteText(&text) != nil || !strings.Contains(text.String(), "Nothing can be fitted") {
			t.Errorf("%s: the report does not hold what was seen: %s", c.name, text.String())
		}
	}
}

func TestLoopIsRecognised(t *testing.T) {
	closed := families()[13].make(3) // PI control with steps of the setpoint
	if families()[13].name != "closed loop" {
		t.Fatal("the closed-loop family moved")
	}
	noisy := twoLags().run(1) // a held input as a voltmeter reads it
	r := rand.New(rand.NewPCG(1, 2))
	for k := range noisy.U {
		noisy.U[k] += 0.01 * r.NormFloat64()
	}
	telegraph := bumpLog{structure: "fopdt", gain: 7, lags: []float64{4}, dead: 1, n: 400, every: 0.5, sd: 0.05}
	for k := 0.0; k < 200; k += 2 {
		telegraph.steps = append(telegraph.steps, step{k, 3 + float64(r.IntN(2))})
	}
	mode := twoLags().run(1)
	mode.Auto = make([]bool, len(mode.T))
	for k := 50; k < 200; k++ {
		mode.Auto[k] = true
	}
	for _, c := range []struct {
		name, want string
		run        *data.Run
	}{
		{"PI control", "closed", closed},
		{"bump test", "open", twoLags().run(1)},
		{"noisy voltmeter", "open", noisy},
		{"random two-level input", "open", telegraph.run(1)},
		{"two-position control", "closed", thermostat()},
		{"in automatic by its mode", "closed", mode},
	} {
		if got := loopOf(c.run); got.State != c.want {
			t.Errorf("%s: %s (%s), want %s", c.name, got.State, got.Reason, c.want)
		}
	}
	if m := modeChanges(mode); len(m) != 3 || m[0].Auto || !m[1].Auto || m[1].Time != mode.T[50] {
		t.Errorf("mode changes %+v", m)
	}
}

// thermostat switches the input between two levels at 58 and 62 °C.
func thermostat() *data.Run {
	run := &data.Run{Source: data.Source{File: "thermostat.csv"}}
	x, u := 55.0, 5.0
	r := rand.New(rand.NewPCG(3, 3))
	for k := range 400 {
		y := x + 0.05*r.NormFloat64()
		if y > 62 {
			u = 1
		} else if y < 58 {
			u = 5
		}
		run.T, run.U, run.Y = append(run.T, float64(k)), append(run.U, u), append(run.Y, y)
		goal := 40 + 7*u
		x = goal + (x-goal)*math.Exp(-1.0/15)
	}
	return run
}

func TestCheckSeesConditionsAndDrift(t *testing.T) {
	run := twoLags().run(1)
	run.Airflow, run.Inlet = make([]float64, len(run.T)), make([]float64, len(run.T))
	for k := range run.T {
		run.Airflow[k] = 100 + 30*run.T[k]/run.T[len(run.T)-1]
		run.Inlet[k] = 20
		run.Y[k] += 0.03 * run.T[k]
	}
	r := checked(t, run, Options{})
	if r.Airflow == nil || !r.Airflow.Moved || r.Inlet == nil || r.Inlet.Moved {
		t.Errorf("airflow %+v, inlet %+v: want one that moved and one that did not", r.Airflow, r.Inlet)
	}
	if r.Drift == nil || !r.Drift.Clear || math.Abs(r.Drift.Slope-0.03) > 0.01 {
		t.Errorf("drift %+v, want 0.03 K/s", r.Drift)
	}
}

// A very long controller's record is judged on its busiest part.
func TestBusiestPart(t *testing.T) {
	run := &data.Run{}
	r := rand.New(rand.NewPCG(2, 2))
	for k := range 5000 {
		size := 0.1
		if k >= 3000 && k < 3400 {
			size = 2
		}
		run.T, run.U, run.Y = append(run.T, float64(k)), append(run.U, size*r.NormFloat64()), append(run.Y, 0)
	}
	part := busiest(run, 1000)
	if len(part.T) != 1000 || part.T[0] != 0 || part.Source.FromS > 3000 || part.Source.ToS < 3399 {
		t.Errorf("%d rows from %g to %g s", len(part.T), part.Source.FromS, part.Source.ToS)
	}
	if whole := busiest(twoLags().run(1), 100); len(whole.T) != 240 {
		t.Error("a log whose input is held was cut")
	}
}

func BenchmarkCheck(b *testing.B) {
	for _, rows := range []int{1e3, 1e5, 1e6} {
		l := twoLags()
		l.n, l.every = rows, 170/float64(rows)
		run := l.run(1)
		b.Run(strconv.Itoa(rows), func(b *testing.B) {
			for range b.N {
				if _, err := Check(context.Background(), run, Options{}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(rows), "ns/row")
		})
	}
}

// TestQuickFitOwnsUpToTwoStructures: of a slow heater whose bump is cut short a single lag
// will do, and its dead time is not the heater's.
func TestQuickFitOwnsUpToTwoStructures(t *testing.T) {
	log := bumpLog{structure: "chain2", gain: 9, lags: []float64{180, 25}, dead: 12, n: 200, every: 2, steps: []step{{0, 3}, {90, 5}}, sd: 0.5}
	missed, single := 0, 0
	for seed := range uint64(16) {
		r, err := Check(t.Context(), log.run(seed), Options{})
		if err != nil {
			t.Fatal(err)
		}
		if r.Quick.Structure != "fopdt" {
			continue
		}
		single++
		for _, p := range r.Quick.Parameters {
			if p.Name == "dead_time" && (p.Low != nil && *p.Low > log.dead || p.High != nil && *p.High < log.dead) {
				missed++
			}
		}
	}
	if single < 3 || missed > single/4 {
		t.Errorf("of %d logs taken for a single lag the dead time's interval misses in %d", single, missed)
	}
}
