package fit

import (
	"math"
	"testing"

	"lagwright/ident"
)

// TestFeedbackIsNoMisfit tests the true model's residuals of long closed loops, added
// up in groups of rows: the controller answers the noise, and that must not pass for
// a response that the model lacks.
func TestFeedbackIsNoMisfit(t *testing.T) {
	st, err := ident.ParseStructure("chain2")
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range families() {
		if f.name != "closed loop" {
			continue
		}
		f.n = 12000
		f.bumps = nil
		for at := 20.0; at < 1190; at += 60 {
			f.bumps = append(f.bumps, at)
		}
		for seed := range uint64(6) {
			rec, err := newRecord(f.make(seed), ident.Linear)
			if err != nil {
				t.Fatal(err)
			}
			r := rec.whole()
			r.setShape(shape{tc: -f.step / math.Log(f.ar)})
			truth := explained{st, f.gain, f.lags, f.dead, []float64{60}}
			sums, _ := r.walkResiduals(truth, nil)
			group := groupSize(len(rec.t))
			if group < 2 {
				t.Fatal("no groups")
			}
			if p := crossCorrelationP(sums.grouped, changeBasis(groupedChanges(rec, group), 6)); p < 1e-3 {
				t.Errorf("seed %d: p = %.2g", seed, p)
			}
		}
	}
}
