package validate

import (
	"context"
	"math"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// stepRun is a run of the plant under the gains whose setpoint rises by 8 K at 30 s.
func stepRun(t *testing.T, plant ident.Plant, gains *tune.Gains, rows int, size float64) *data.Run {
	t.Helper()
	return loggedLoop(t, plant, ident.Linear, gains, stepsAt(rows, 60, map[int]float64{60: size}), make([]float64, rows), 4)
}

// A loop that does nothing has no overshoot: where the record is too short for
// the settling time asked it is not judged, unless something is seen to fail.
func TestRecordTooShort(t *testing.T) {
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	card := cardOf(t, "linear", fit.Noise{}, plant)
	logged := piGains(0.15, 8, 0.5)
	idle, good, hot := piGains(1e-4, 5000, 0.5), piGains(0.15, 8, 0.5), piGains(0.4, 2, 0.5)
	for _, c := range []struct {
		name          string
		gains         *tune.Gains
		move          float64
		settling      float64
		limits        RunLimits
		tempMax       *float64
		judged, meets bool
		says          string
	}{
		{"idle, record too short", idle, 8, 900, RunLimits{}, nil, false, false, tooShort},
		{"idle, record long enough", idle, 8, 100, RunLimits{}, nil, true, false, "settling not reached"},
		{"settles", good, 8, 900, RunLimits{}, nil, true, true, ""},
		{"record too short, too hot", idle, 8, 900, RunLimits{}, ptr(50), true, false, "peak temperature"},
		{"record too short, error area too large", idle, 8, 900, RunLimits{IAE: ptr(1)}, nil, true, false, "error area"},
		{"record too short, overshoot too large", hot, 8, 900, RunLimits{}, nil, true, false, "overshoot"},
		{"no setpoint move", idle, 0, 900, RunLimits{}, nil, false, false, "not judged on this run: settling"},
		{"no setpoint move, not too hot", idle, 0, 900, RunLimits{}, ptr(90), true, true, "not judged on this run: settling"},
	} {
		t.Run(c.name, func(t *testing.T) {
			run := stepRun(t, plant, logged, 400, c.move)
			asked := tune.Requirement{Settling: &c.settling, Overshoot: ptr(10), TempMax: c.tempMax}
			r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, c.gains, Options{Requirement: asked, RunLimits: c.limits})
			if err != nil {
				t.Fatal(err)
			}
			got := r.Runs[0]
			if said := strings.Join(got.Reasons, "\n"); got.Judged != c.judged || got.Meets != c.meets || !strings.Contains(said, c.says) {
				t.Errorf("judged %v, meets %v, %q; want %v, %v, %q", got.Judged, got.Meets, said, c.judged, c.meets, c.says)
			}
			if r.Summary.Meets != c.meets || got.Undecided() != (c.says == tooShort) {
				t.Errorf("summary meets %v, undecided %v", r.Summary.Meets, got.Undecided())
			}
		})
	}
}

// Plants on which the record ends too early count neither way: with enough
// others the run meets all the same, with too many failing it fails.
func TestOpenPlants(t *testing.T) {
	settling := demand{name: "settling", unit: "s", limit: 50, figure: func(f figures) float64 { return f.settling }}
	all := make([]figures, 100)
	for i := range all {
		all[i] = noFigures()
		all[i].moves = 1
		switch {
		case i < 10:
			all[i].cut = 1
		case i < 30:
			all[i].settling = 60
		default:
			all[i].settling = 40
		}
	}
	share, open, _ := judge([]demand{settling}, all, make([]bool, len(all)), 0.95)
	if math.Abs(share-0.8) > 1e-12 || math.Abs(open-0.1) > 1e-12 {
		t.Errorf("share %g, open %g; want 0.8, 0.1", share, open)
	}
}

// A run that speaks against the model shows nothing good of the gains; one that
// fails keeps failing.
func TestDistrustedRunDoesNotMeet(t *testing.T) {
	plant, other := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2), mustPlant(t, "chain2", 5, []float64{9, 3}, 2.4)
	card := cardOf(t, "linear", fit.Noise{SD: 0.02, WhiteSD: 0.02}, plant)
	logged := piGains(0.15, 8, 0.5)
	for _, c := range []struct {
		name     string
		plant    ident.Plant
		settling float64
		judged   bool
		meets    bool
	}{
		{"the card's plant", plant, 100, true, true},
		{"another plant", other, 100, false, false},
		{"another plant, fails", other, 5, true, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			run := stepRun(t, c.plant, logged, 500, 8)
			r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, logged, Options{Requirement: tune.Requirement{Settling: &c.settling}, LoggedGains: logged})
			if err != nil {
				t.Fatal(err)
			}
			got := r.Runs[0]
			if got.BackTest.Plant != (c.name == "the card's plant") {
				t.Fatalf("plant reproduced: %v: %q", got.BackTest.Plant, got.BackTest.Differs)
			}
			if got.Judged != c.judged || got.Meets != c.meets || got.Undecided() == c.judged {
				t.Errorf("judged %v, meets %v, want %v, %v: %q", got.Judged, got.Meets, c.judged, c.meets, got.Reasons)
			}
			var text strings.Builder
			if err := r.WriteText(&text); err != nil {
				t.Fatal(err)
			}
			if head, _, _ := strings.Cut(text.String(), "\n"); strings.HasPrefix(head, "not judged: 1 run") == c.judged {
				t.Errorf("headline %q", head)
			}
		})
	}
}

// No requirement is met below absolute zero.
func TestBelowAbsoluteZero(t *testing.T) {
	for unit, zero := range absoluteZero {
		p := &plan{units: units{temperature: unit}, plants: make([]ident.Plant, 3)}
		all := []figures{noFigures(), noFigures(), noFigures()}
		for i, low := range []float64{zero - 1, zero - 20, zero + 1} {
			all[i].lowTemp = low
		}
		p.gains = piGains(1, 1, 1)
		c := p.impossible(all)
		if !c.fails || !c.misses[0] || !c.misses[1] || c.misses[2] || !strings.Contains(strings.Join(c.reasons, ""), "below absolute zero, on 2 of 3") {
			t.Errorf("%s: %+v", unit, c)
		}
	}
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	run := stepRun(t, plant, piGains(0.15, 8, 0.5), 200, 0)
	for i := range run.T { // far more heat in the log than the gains will give
		run.U[i], run.Y[i] = 4+46*float64(min(i, 50))/50, 60
	}
	card := cardOf(t, "linear", fit.Noise{}, plant)
	r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, piGains(1e-6, 1e4, 0.5), Options{Requirement: tune.Requirement{TempMax: ptr(90)}})
	if err != nil {
		t.Fatal(err)
	}
	if got := r.Runs[0]; !got.Judged || got.Meets || got.Probability != 0 || !strings.Contains(strings.Join(got.Reasons, ""), "below absolute zero") {
		t.Errorf("judged %v, meets %v on %g: %q", got.Judged, got.Meets, got.Probability, got.Reasons)
	}
}

// Logged gains of the wrong sign, and those under which the loop is unstable,
// are named as such, without the numbers of a loop that runs away.
func TestWildLoggedGains(t *testing.T) {
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	card := cardOf(t, "linear", fit.Noise{SD: 0.1, WhiteSD: 0.1}, plant)
	sound := piGains(0.15, 8, 0.5)
	run := stepRun(t, plant, sound, 500, 8)
	free := func(kc float64) *tune.Gains {
		g := piGains(kc, 8, 0.5)
		g.Limits = tune.Limits{}
		return g
	}
	limited := piGains(-0.15, 8, 0.5)
	for _, c := range []struct {
		name  string
		gains *tune.Gains
		says  string
	}{
		{"wrong sign", free(-0.15), "these logged gains act the wrong way for this heater, on "},
		{"wrong sign, limited", limited, "these logged gains act the wrong way for this heater, on "},
		{"unstable", free(5), "under these logged gains the loop is unstable on this model, on "},
	} {
		t.Run(c.name, func(t *testing.T) {
			r, err := ReplayRuns(context.Background(), card, []*data.Run{run}, sound, Options{LoggedGains: c.gains})
			if err != nil {
				t.Fatal(err)
			}
			b := r.Runs[0].BackTest
			said := strings.Join(b.Differs, "; ")
			if b.Controller == nil || *b.Controller || !strings.Contains(said, c.says) || strings.Contains(said, "off by") {
				t.Errorf("reproduced %v: %s", b.Reproduced, said)
			}
		})
	}
}
