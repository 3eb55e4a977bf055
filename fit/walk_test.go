package fit

import (
	"math"
	"testing"

	"lagwright/ident"
)

// TestWalkIsToldByAveragedRows holds what a walk adds to the restricted likelihood,
// as the averaged rows tell it, to what every row tells, on logs that wander and
// on logs that do not: to 1 in -2L, or a tenth of it where it is large, or where it lies far
// above that of the best walk. (2.6 is the most that was seen.)
func TestWalkIsToldByAveragedRows(t *testing.T) {
	st, err := ident.ParseStructure("chain2")
	if err != nil {
		t.Fatal(err)
	}
	for _, wander := range []float64{0, 0.3, 0.8} {
		for seed := range uint64(4) {
			f := families()[2]
			f.n, f.step, f.wander = 26000, 80.0/26000, wander
			f.ar = math.Exp(-f.step / 0.06)
			rec, err := newRecord(f.make(seed), ident.Linear)
			if err != nil {
				t.Fatal(err)
			}
			whole := rec.whole()
			whole.model(rest, true)
			r := whole.focus(f.dead, 3*f.step)
			r.parts = []part{{0, f.n, rec.sim.Clone()}} // every row
			e := newEngine(st, []*record{r})
			p := e.descend([]float64{f.lags[0], f.lags[1], f.dead}, finalTol)
			tan := e.tangents(p)[0]
			if tan.sampled() {
				t.Fatal("not every row")
			}
			plain := tan.bestShape(nil).shape
			plain = shape{tc: math.Min(plain.tc, 0.1), white: plain.white}
			still := tan.judge(plain).dev
			sds := []float64{0.3, 1, 4}
			var got, want []float64
			best := 0.0
			for _, sd := range sds {
				s := plain
				s.walk = sd * sd / r.span
				got, want = append(got, tan.judgeWalk(s).dev-still), append(want, tan.judge(s).dev-still)
				best = math.Min(best, want[len(want)-1])
			}
			for i, sd := range sds {
				if math.Abs(got[i]-want[i]) > 1+0.1*math.Max(math.Abs(want[i]), want[i]-best) {
					t.Errorf("wander %g, seed %d, walk of sd %g: the averaged rows say %.2f, every row %.2f, the best of them %.2f", wander, seed, sd, got[i], want[i], best)
				}
			}
		}
	}
}
