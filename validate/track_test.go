package validate

import (
	"bytes"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"lagwright/fit"
)

// A shift is what a history's parameters do, as logarithms of factors (of
// the dead time: seconds), from one run on, or in all over the history.
type shift struct{ gain, lags, dead float64 }

// tableHistory draws the parameter table of n monthly runs, without logs: a
// gain with a 95% interval of ±5%, lags of ±8 and ±15%, a dead time of ±0.1 s.
func tableHistory(seed uint64, n, from int, step, slope shift) []estimate {
	const z = 1.959964
	rng := rand.New(rand.NewPCG(seed, 77))
	start := time.Date(2025, 1, 6, 9, 0, 0, 0, time.UTC)
	out := make([]estimate, n)
	for i := range out {
		s := shift{slope.gain * float64(i) / float64(n-1), slope.lags * float64(i) / float64(n-1), slope.dead * float64(i) / float64(n-1)}
		if i >= from {
			s.gain, s.lags, s.dead = s.gain+step.gain, s.lags+step.lags, s.dead+step.dead
		}
		at := start.AddDate(0, 0, 30*i)
		factor := func(name, unit string, value, shift, half float64) fit.Parameter {
			v := value * math.Exp(shift+half/z*rng.NormFloat64())
			low, high := v*math.Exp(-half), v*math.Exp(half)
			if v < 0 {
				low, high = high, low
			}
			return fit.Parameter{Name: name, Unit: unit, Value: v, Low: &low, High: &high}
		}
		dead := 1.2 + s.dead + 0.1/z*rng.NormFloat64()
		low, high := dead-0.1, dead+0.1
		out[i] = estimate{
			run: DriftRun{File: at.Format("20060102") + ".csv", Start: startText(at)}, start: at, selected: "chain2",
			parameters: []fit.Parameter{
				factor("gain", "K/V", 8.2, s.gain, 0.05),
				factor("lag1", "s", 6, s.lags, 0.08),
				factor("lag2", "s", 2, s.lags, 0.15),
				{Name: "dead_time", Unit: "s", Value: dead, Low: &low, High: &high},
				{Name: "baseline", Unit: "degC", Value: 20},
			},
		}
	}
	return out
}

func judged(fitted []estimate) *Drift {
	d := &Drift{Schema: DriftSchema, Structure: "chain2", Confidence: 0.95, FalseAlarm: 0.05, Cautions: driftCautions(), Failed: []FailedRun{}}
	d.judge(fitted, 1)
	return d
}

// What was put into the history is found, worded and hinted at.
func TestTrackWords(t *testing.T) {
	less := math.Log(0.88)
	for _, c := range []struct {
		name        string
		step, slope shift
		text        string // on the parameter named first
		hint        string
	}{
		{"nothing", shift{}, shift{}, "gain: no change seen", ""},
		{"element", shift{gain: less}, shift{}, "gain fell 1", "look at the element and its supply, not at the airflow"},
		{"less air", shift{gain: -less, lags: 0.2, dead: 0.5}, shift{}, "gain rose 1", "as with less air"},
		{"more air", shift{gain: less, lags: -0.2, dead: -0.5}, shift{}, "gain fell 1", "as with more air"},
		{"fouled well", shift{lags: 0.4}, shift{}, "lag 1 rose", "look at the thermocouple and its well"},
		{"moved thermocouple", shift{dead: 0.6}, shift{}, "dead time rose 0.", "moved along the duct"},
		{"ageing", shift{}, shift{gain: 2 * less}, "gain falls by ", "look at the element"},
	} {
		t.Run(c.name, func(t *testing.T) {
			d := judged(tableHistory(4, 24, 12, c.step, c.slope))
			var all []string
			for _, p := range d.Parameters {
				all = append(all, p.Text)
			}
			words := strings.Join(all, "\n")
			t.Log(words)
			if !strings.Contains(words, c.text) {
				t.Errorf("want something with %q", c.text)
			}
			if got := strings.Join(d.Hints, "\n"); c.hint == "" && got != "" || !strings.Contains(got, c.hint) {
				t.Errorf("hint %q, want %q", got, c.hint)
			}
			if d.Alarm == (c.hint == "") {
				t.Errorf("alarm is %v", d.Alarm)
			}
		})
	}
}

// A history of 200 runs without change must raise an alarm in at most 7% of
// 500 histories: designed for 5%, over all runs and parameters together.
func TestTrackFalseAlarms(t *testing.T) {
	alarms := 0
	for seed := range uint64(500) {
		if judged(tableHistory(seed, 200, 200, shift{}, shift{})).Alarm {
			alarms++
		}
	}
	t.Logf("%d alarms in 500 histories without change", alarms)
	if alarms > 35 {
		t.Errorf("%d alarms in 500 histories without change, want at most 35", alarms)
	}
}

// A loss of 10% of the gain must be found in at least 90% of the histories
// where one run's gain interval is ±5%.
func TestTrackFindsTenPercentLoss(t *testing.T) {
	for _, c := range []struct{ n, from, histories int }{{200, 100, 10}, {200, 196, 20}, {24, 12, 50}, {24, 21, 100}, {12, 6, 100}} {
		found := 0
		for seed := range uint64(c.histories) {
			if judged(tableHistory(seed, c.n, c.from, shift{gain: math.Log(0.9)}, shift{})).Parameters[0].Alarm {
				found++
			}
		}
		t.Logf("%d runs, lost from run %d on: found in %d of %d", c.n, c.from+1, found, c.histories)
		if 10*found < 9*c.histories {
			t.Errorf("%d runs, lost from run %d on: found in %d of %d, want 90%%", c.n, c.from+1, found, c.histories)
		}
	}
}

// The step is dated to the run before it happened, and its percentage and
// chart go with it.
func TestTrackStep(t *testing.T) {
	d := judged(tableHistory(7, 24, 12, shift{gain: math.Log(0.85)}, shift{}))
	g := d.Parameters[0]
	if !g.Step.Alarm || math.Abs(float64(*g.Step.Run-12)) > 1 || math.Abs(*g.Step.Percent+15) > 4 || !(*g.Step.PercentLow < -15 && -15 < *g.Step.PercentHigh) {
		t.Errorf("step %+v at run %d by %g%%, want run 12 by −15%%", g.Step, *g.Step.Run, *g.Step.Percent)
	}
	before, after := *g.Points[0].Centre, *g.Points[23].Centre
	if math.Abs(after/before-0.85) > 0.04 || !(*g.Points[0].Least < before && before < *g.Points[0].Most) {
		t.Errorf("chart goes from %g to %g within %g to %g", before, after, *g.Points[0].Least, *g.Points[0].Most)
	}
	if p := d.Parameters[3]; p.Name != "dead_time" || p.Alarm || p.Step.Percent != nil {
		t.Errorf("dead time: %+v", p)
	}
}

// A negative gain that loses size falls.
func TestTrackNegativeGain(t *testing.T) {
	fitted := tableHistory(9, 24, 12, shift{gain: math.Log(0.85)}, shift{})
	for _, e := range fitted {
		g := &e.parameters[0]
		g.Value, *g.Low, *g.High = -g.Value, -*g.High, -*g.Low
	}
	g := judged(fitted).Parameters[0]
	if !g.Alarm || !strings.Contains(g.Text, "gain fell 1") || *g.Points[0].Centre > 0 || !(g.Step.SizeLow < g.Step.Size && g.Step.Size < g.Step.SizeHigh) {
		t.Errorf("%s: %+v", g.Text, g.Step)
	}
}

// Intervals without an end are shown but not tested.
func TestTrackOneSided(t *testing.T) {
	fitted := tableHistory(3, 12, 12, shift{}, shift{})
	for i := range fitted {
		fitted[i].parameters[2].Low = nil
		if i > 0 {
			fitted[i].parameters[0].High = nil
		}
	}
	d := judged(fitted)
	if g, l := d.Parameters[0], d.Parameters[2]; g.Tested != 1 || g.Step != nil || l.Tested != 0 || l.Alarm || !strings.Contains(l.Text, "too few to test") {
		t.Errorf("gain %+v, lag 2 %+v", g, l)
	}
}

func TestDriftRoundTrip(t *testing.T) {
	d := judged(tableHistory(4, 24, 12, shift{gain: math.Log(0.88)}, shift{}))
	var first, second bytes.Buffer
	if err := d.WriteJSON(&first); err != nil {
		t.Fatal(err)
	}
	back, err := ReadDrift(bytes.NewReader(first.Bytes()), "drift.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := back.WriteJSON(&second); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(first.Bytes(), second.Bytes()) {
		t.Error("a drift read and written again has other bytes")
	}
	again := judged(tableHistory(4, 24, 12, shift{gain: math.Log(0.88)}, shift{}))
	second.Reset()
	if err := again.WriteJSON(&second); err != nil || !bytes.Equal(first.Bytes(), second.Bytes()) {
		t.Error("the same history judged twice has other bytes")
	}
	if _, err := ReadDrift(strings.NewReader(`{"schema":"lagwright/drift/9"}`), "new.json"); err == nil || !strings.Contains(err.Error(), "lagwright/drift/9") {
		t.Errorf("a later version: %v", err)
	}
	var text bytes.Buffer
	if err := d.WriteText(&text); err != nil || !strings.Contains(text.String(), "gain fell") {
		t.Errorf("text %q, %v", text.String(), err)
	}
}
