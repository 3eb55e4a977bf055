package fit

import (
	"context"
	"slices"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// A log that begins some time after an earlier move of the input is fitted with it,
// although a straight line through all the rows before the bump lies level, and holds
// the gain; one that begins at rest is not.
func TestComesFromElsewhere(t *testing.T) {
	for seed := range uint64(8) {
		l := twoLags()
		// 4 K on the way at the first row, dying away with the lags; rest lasts long.
		l.n, l.steps = 420, []step{{0, 3}, {110, 4.2}, {200, 3}}
		run := l.run(seed)
		y := ident.NewSimulator(run.T, ident.Input{Before: 2, At: []float64{-12}, Value: []float64{3}})
		st, _ := ident.ParseStructure("chain2")
		for k, v := range y.Response(nil, st, l.lags, l.dead) {
			run.Y[k] += l.gain * v
		}
		c := fitted1(t, []*data.Run{run}, Options{Plants: -1})
		if c.Initial != "earlier" {
			t.Errorf("seed %d: the log is fitted from %s", seed, c.Initial)
		}
		m, _ := c.Model(c.Selected)
		if g := m.Parameters[0]; g.Low == nil || g.High == nil || *g.Low > 1.02*l.gain || *g.High < 0.98*l.gain {
			t.Errorf("seed %d: gain %s, true %g", seed, write(g.Value, g.Low, g.High, false), l.gain)
		}
		if c := fitted1(t, []*data.Run{twoLags().run(seed)}, Options{Plants: -1}); c.Initial != "rest" {
			t.Errorf("seed %d: a log at rest is fitted from %s", seed, c.Initial)
		}
	}
}

// What a straight line cannot follow shows in the check already.
func TestCheckWarns(t *testing.T) {
	r, err := Check(context.Background(), staircase(ident.Power), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if !slices.ContainsFunc(r.Warning, func(w Warning) bool { return w.Code == "curvature" }) {
		t.Errorf("no warning of the curvature, but %v", r.Warning)
	}
	if v := r.Verdict[0]; v.Verdict != doubtful || !strings.Contains(v.Reason, "changes over the range") {
		t.Errorf("the gain is %s: %s", v.Verdict, v.Reason)
	}
	clean, err := Check(context.Background(), twoLags().run(2), Options{})
	if err != nil || len(clean.Warning) > 0 {
		t.Errorf("a clean log is warned of: %v %v", clean.Warning, err)
	}
}
