package fit

import (
	"testing"

	"lagwright/ident"
)

// A chain of three can do whatever a chain of two does, and so must its sum of squares
// under a held dead time, from an optimum whose shortest lag is next to nothing.
func TestProfileFromALagJustAboveZero(t *testing.T) {
	chain2, err := ident.ParseStructure("chain2")
	if err != nil {
		t.Fatal(err)
	}
	chain3, err := ident.ParseStructure("chain3")
	if err != nil {
		t.Fatal(err)
	}
	held := 0
	for seed := range uint64(120) {
		run, st := randomLog(seed)
		if st != chain2 {
			continue
		}
		rec, err := newRecord(run, ident.Linear)
		if err != nil {
			t.Fatal(err)
		}
		r := rec.whole()
		r.model(rest, false)
		two, three := newEngine(chain2, []*record{r}), newEngine(chain3, []*record{r})
		best := two.search([][]float64{{0.2 * r.span, 0.05 * r.span, 2 * r.step}, {0.05 * r.span, 0.02 * r.span, 0}})
		lags, dead := best.eta[:2], best.eta[2]
		tiny := three.eval([]float64{lags[0], lags[1], 1e-6 * r.step, dead}, true)
		s2 := best.s / float64(len(r.t)-5)
		for _, more := range []float64{0.1, 0.3, 0.6} {
			at := dead + more*lags[1]
			want := (&profiler{e: two, best: best, s2: s2}).hold(3, at, best).s
			got := (&profiler{e: three, best: tiny, s2: s2}).hold(4, at, tiny).s
			held++
			if got > want*(1+1e-4) {
				t.Errorf("log %d: dead time held %g s beyond its best: sum of squares %.8g with three lags, %.8g with two", seed, more*lags[1], got, want)
			}
		}
	}
	if held == 0 {
		t.Error("no log to hold the dead time in")
	}
}
