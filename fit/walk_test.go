package fit

import (
	"math"
	"testing"

	"lagwright/ident"
)

// TestWalkIsToldByAveragedRows holds what a walk adds to the restricted likelihood,
// as the averaged rows tell it, to what every row tells, on logs that wander and
// on logs that do not: to 1 in -2L, or a tenth of it where it is large.
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
			rec.parts = []part{{0, f.n, rec.sim.Clone()}} // every row
			whole := rec.whole()
			whole.model(rest, true)
			r := whole.focus(f.dead, 3*f.step)
			e := newEngine(st, []*record{r})
			p := e.descend([]float64{f.lags[0], f.lags[1], f.dead}, finalTol)
			tan := e.tangents(p)[0]
			plain := tan.bestShape(nil).shape
			plain = shape{tc: math.Min(plain.tc, 0.1), white: plain.white}
			for _, sd := range []float64{0.3, 1, 4} {
				s := plain
				s.walk = sd * sd / r.span
				want := tan.judge(s).dev - tan.judge(plain).dev
				got := tan.judgeWalk(s).dev - tan.judge(plain).dev
				if math.Abs(got-want) > 1+0.1*math.Abs(want) {
					t.Errorf("wander %g, seed %d, walk of sd %g: the averaged rows say %.2f, every row %.2f", wander, seed, sd, got, want)
				}
			}
		}
	}
}
