package validate

import (
	"context"
	"math"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
)

// A loop that swings up, or acts the wrong way, fails on every run, whatever
// the requirement asks and however little the run shows of it.
func TestUnsoundLoopFailsEveryRun(t *testing.T) {
	plant := mustPlant(t, "chain2", 12, []float64{20, 6}, 4)
	logged := piGains(0.06, 25, 1)
	setpoint := stepsAt(300, 70, map[int]float64{60: 5})
	run := loggedLoop(t, plant, 0, logged, setpoint, make([]float64, 300), 4)
	direct := piGains(-0.1, 25, 1)
	direct.Action = "direct"
	for _, tc := range []struct {
		name  string
		gains *tune.Gains
		q     tune.Requirement
		says  string // "" for a sound loop
	}{
		{"sound", piGains(0.1, 25, 1), tune.Requirement{Ms: ptr(1.6), Damping: ptr(0.3)}, ""},
		{"unstable", piGains(0.8, 25, 1), tune.Requirement{}, "unstable on 1 of 1"},
		{"wrong way", direct, tune.Requirement{Ms: ptr(1.6)}, "wrong way"},
		{"ms", piGains(0.2, 25, 1), tune.Requirement{Ms: ptr(1.6)}, "Ms is above the 1.6 asked"},
		{"damping", piGains(0.2, 25, 1), tune.Requirement{Damping: ptr(0.7)}, "damping ratio is below the 0.7 asked"},
	} {
		t.Run(tc.name, func(t *testing.T) {
			r, err := ReplayRuns(context.Background(), cardOf(t, "linear", fit.Noise{SD: 0.01, WhiteSD: 0.01}, plant), []*data.Run{run}, tc.gains, Options{Requirement: tc.q})
			if err != nil {
				t.Fatal(err)
			}
			got := r.Runs[0]
			if tc.says == "" {
				if len(got.Reasons) > 0 && strings.Contains(strings.Join(got.Reasons, " "), "asked") {
					t.Errorf("a sound loop has reasons %q", got.Reasons)
				}
				return
			}
			if !got.Judged || got.Meets || got.Probability != 0 || r.Summary.Meets {
				t.Errorf("judged %v, meets %v, probability %g, summary %+v", got.Judged, got.Meets, got.Probability, r.Summary)
			}
			if text := strings.Join(got.Reasons, "; "); !strings.Contains(text, tc.says) {
				t.Errorf("reasons %q do not say %q", text, tc.says)
			}
		})
	}
}

// What a record ends too soon to show is not held against the gains.
func TestSettlingOfAShortRecord(t *testing.T) {
	for _, tc := range []struct {
		name  string
		rows  int // of a temperature that enters the band at 40 s
		limit float64
		cut   int
		want  float64
	}{
		{"ends outside, before the limit", 30, 60, 1, math.NaN()},
		{"ends outside, after the limit", 30, 20, 0, math.Inf(1)},
		{"ends inside, entered in time", 45, 60, 1, math.NaN()},
		{"ends inside, entered late", 45, 30, 0, math.Inf(1)},
		{"long enough", 80, 60, 0, 40},
	} {
		t.Run(tc.name, func(t *testing.T) {
			s := signal{r0: 0}
			for i := range tc.rows {
				y := 0.0
				if i >= 40 {
					y = 1
				}
				s.t, s.y, s.u, s.r = append(s.t, float64(i)), append(s.y, y), append(s.u, 0), append(s.r, 1)
			}
			f := noFigures()
			f.add(s, yardstick{band: 0.02, response: 10, limit: ptr(tc.limit)})
			same := f.settling == tc.want || math.Abs(f.settling-tc.want) < 1 || math.IsNaN(f.settling) && math.IsNaN(tc.want)
			if f.cut != tc.cut || !same {
				t.Errorf("settling %g with %d cut, want %g with %d", f.settling, f.cut, tc.want, tc.cut)
			}
		})
	}
}
