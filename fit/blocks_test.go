package fit

import (
	"math"
	"testing"

	"lagwright/ident"
)

// TestJitteredBlocks holds the optimum on averaged rows to that on every row, on
// logs whose sampling scatters by up to ±20 % of the interval and on even ones:
// the standard error agrees to half a percent, and the values to what a percent of
// information lost would scatter them by (√0.01 standard errors), half as much again.
func TestJitteredBlocks(t *testing.T) {
	st, err := ident.ParseStructure("chain2")
	if err != nil {
		t.Fatal(err)
	}
	for _, jitter := range []float64{0, 0.05, 0.4} {
		f := families()[2] // ar 0.8
		f.n, f.step, f.jitter, f.ar = 4000, 0.02, jitter, 0.95
		for seed := range uint64(5) {
			rec, err := newRecord(f.make(seed), ident.Linear)
			if err != nil {
				t.Fatal(err)
			}
			whole := rec.whole()
			whole.model(rest, false)
			s := shape{tc: 0.4, white: 0.05}
			whole.setShape(s)
			blocks := whole.focus(f.dead, 3*f.step)
			if len(blocks.t) > len(whole.t)/4 {
				t.Fatalf("jitter %g: %d rows became %d", jitter, len(whole.t), len(blocks.t))
			}
			start := []float64{f.lags[0], f.lags[1], f.dead}
			a := newEngine(st, []*record{whole}).descend(start, finalTol)
			b := newEngine(st, []*record{blocks}).descend(start, finalTol)
			ca, cb := invert(a.normal), invert(b.normal)
			sd := math.Sqrt(a.part[0] / float64(len(whole.t)))
			for i := range ca {
				va, vb := a.gain, b.gain
				if i > 0 {
					va, vb = a.eta[i-1], b.eta[i-1]
				}
				se := sd * math.Sqrt(ca[i][i])
				if d := math.Abs(va-vb) / se; d > 0.15 {
					t.Errorf("jitter %g, seed %d: parameter %d is %.3f standard errors off", jitter, seed, i, d)
				}
				if r := math.Sqrt(cb[i][i] / ca[i][i]); math.Abs(r-1) > 0.005 {
					t.Errorf("jitter %g, seed %d: standard error of parameter %d is %.4f of that on every row", jitter, seed, i, r)
				}
			}
		}
	}
}
