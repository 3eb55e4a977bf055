package fit

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// A log that ends at the beginning of the rise bounds neither gain nor lags,
// and what stands at the limit of the search is no bound.
func TestCheckOfABumpCutShort(t *testing.T) {
	l := twoLags()
	l.n, l.sd, l.steps = 37, 0.02, []step{{0, 3}, {21, 4.2}} // held for 4.2 s, dead time 2.3 s
	run := l.run(3)
	r := checked(t, run, Options{})
	if lag := r.Quick.Parameters[1]; !(lag.Value > 0.9*searchedSpans*r.Span) || lag.Low != nil || lag.High != nil {
		t.Fatalf("the quick fit found %+v, want a lag at the limit without bounds", lag)
	}
	for _, p := range []string{"gain", "lags"} {
		v := r.verdictOn(p)
		if v.Verdict != not || v.Bound != nil || len(v.Cures) != 1 || !strings.Contains(v.Cures[0], "until the temperature levels off") {
			t.Errorf("%s: %+v, want not from this log, and a longer hold", p, v)
		}
	}
	if v := r.verdictOn("dead_time"); v.Verdict == good || len(v.Cures) == 0 {
		t.Errorf("dead time: %+v, want at best doubtful", v)
	}
	var text bytes.Buffer
	if err := r.WriteText(&text); err != nil {
		t.Fatal(err)
	}
	if strings.Contains(text.String(), "would settle near") {
		t.Errorf("a level is foretold from a gain without bound:\n%s", text.String())
	}
}

// An open interval of the gain or of a lag opens both.
func TestUnbounded(t *testing.T) {
	run := &data.Run{T: []float64{0, 100}}
	end := 1.0
	both := func(name string, v float64) Parameter { return Parameter{Name: name, Value: v, Low: &end, High: &end} }
	for _, c := range []struct {
		name string
		p    []Parameter
		want unbounded
	}{
		{"bounded", []Parameter{both("gain", 1), both("lag1", 30), {Name: "dead_time", Value: 2}}, closedEnds},
		{"lag down to zero", []Parameter{both("gain", 1), {Name: "lag1", Value: 30, High: &end}}, closedEnds},
		{"gain open below", []Parameter{{Name: "gain", Value: 1, High: &end}, both("lag1", 30)}, openEnd},
		{"lag open above", []Parameter{both("gain", 1), {Name: "lag1", Value: 30, Low: &end}}, openEnd},
		{"known gain", []Parameter{{Name: "gain", Value: 1, Fixed: true}, both("lag1", 30)}, closedEnds},
		{"limit of the search", []Parameter{both("gain", 1), both("lag1", 20*100)}, atLimit},
	} {
		if got := (&Model{Parameters: c.p}).unbounded(run); got != c.want {
			t.Errorf("%s: %d, want %d", c.name, got, c.want)
		}
	}
}

// What spoils a log keeps its verdict from being good, with the reason and a
// cure.
func TestCheckOfASpoiltLog(t *testing.T) {
	for _, c := range []struct {
		name   string
		spoil  func(*data.Run)
		reason string
	}{
		{"coarse", func(r *data.Run) {
			const q = 2.5
			r.Quality.Quantum = q
			for i := range r.Y {
				r.Y[i] = q * math.Round(r.Y[i]/q)
			}
		}, "steps of the logged resolution"},
		{"clipped", func(r *data.Run) {
			r.Quality.Notes = []data.Note{{Code: "temperature-clipped", Text: "cut off"}}
		}, "cut off at the end of its range"},
		{"unseen", func(r *data.Run) {
			r.Quality.Notes = []data.Note{{Code: "input-change-unseen", Text: "unseen"}}
		}, "not recorded when it was made"},
	} {
		t.Run(c.name, func(t *testing.T) {
			run := twoLags().run(1)
			c.spoil(run)
			r := checked(t, run, Options{})
			told := false
			for _, v := range r.Verdict {
				if v.Verdict == good || len(v.Cures) == 0 {
					t.Errorf("%s: %+v, want doubtful at best, with a cure", v.Parameter, v)
				}
				told = told || strings.Contains(v.Reason, c.reason)
			}
			if !told {
				t.Errorf("nothing says %q: %+v", c.reason, r.Verdict)
			}
		})
	}
}

// A one-sided bound that cannot be told from its value is not written finer.
func TestWriteOneSidedBoundAtTheValue(t *testing.T) {
	v := 3500.0
	near := v - 1.2e-7
	if w := write(v, &near, nil, false); w.value != "3500" || w.interval != "at least 3500" {
		t.Errorf("%+v", w)
	}
	near = v + 1.2e-7
	if w := write(v, nil, &near, false); w.value != "3500" || w.interval != "at most 3500" {
		t.Errorf("%+v", w)
	}
	if far := 2800.0; write(v, &far, nil, false).interval != "at least 2800" {
		t.Errorf("%+v", write(v, &far, nil, false))
	}
}

// TestLoadIsNoDeadTime: of a controller's record that does not give the gain, the dead time
// is none either; of a bump in manual, or with the gain known, it stays what it is.
func TestLoadIsNoDeadTime(t *testing.T) {
	for _, c := range []struct {
		loop, gain, want string
	}{
		{"closed", not, not},
		{"closed", doubtful, good},
		{"open", not, good},
	} {
		j := &judgement{loop: Loop{State: c.loop}, card: &Card{InputLaw: "linear"}, model: &Model{},
			run: &data.Run{T: []float64{0, 1, 2, 3}, U: []float64{1, 1, 2, 2}, Y: []float64{1, 1, 2, 2}}}
		j.plant.Structure, _ = ident.ParseStructure("fopdt")
		j.plant.Gain, j.plant.Lags = 1, []float64{3}
		v := []Verdict{{Parameter: "gain", Verdict: c.gain}, {Parameter: "dead_time", Verdict: good, Reason: "known to ±4 %"}}
		j.loadMistaken(v)
		if v[1].Verdict != c.want {
			t.Errorf("%s loop, gain %s: the dead time is %s, want %s", c.loop, c.gain, v[1].Verdict, c.want)
		}
		if v[1].Verdict == not && (len(v[1].Cures) == 0 || !strings.Contains(v[1].Reason, "load")) {
			t.Errorf("%q, cures %q", v[1].Reason, v[1].Cures)
		}
	}
}
