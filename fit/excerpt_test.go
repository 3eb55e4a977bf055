package fit

import (
	"context"
	"math"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// TestExcerpt holds the optimum of a log whose input never rests, longer than the rows
// in use at a time, to that of one descent on all rows, and its standard errors to
// those there.
func TestExcerpt(t *testing.T) {
	for _, f := range families() {
		if f.name != "telegraph, beyond one excerpt" {
			continue
		}
		run := f.make(3)
		o, err := Options{Structure: "chain2", Noise: "white", Drift: "none", Initial: "rest"}.withDefaults()
		if err != nil {
			t.Fatal(err)
		}
		recs, err := prepare([]*data.Run{run}, o.Law)
		if err != nil {
			t.Fatal(err)
		}
		out, err := find(context.Background(), recs, o)
		if err != nil {
			t.Fatal(err)
		}
		m := out.models[0]
		if m.full == nil || !m.e.recs[0].excerpt() {
			t.Fatalf("%d of %d rows in use", m.e.recs[0].used, len(run.T))
		}
		rec, err := newRecord(run, ident.Linear)
		if err != nil {
			t.Fatal(err)
		}
		all := rec.window(len(rec.t))
		all.model(rest, false)
		e := newEngine(m.st, []*record{all})
		p := e.descend([]float64{f.lags[0], f.lags[1], f.dead}, finalTol)
		cov := invert(p.normal)
		s2 := p.s / float64(len(run.T)-5)
		for i, v := range append([]float64{p.gain}, p.eta...) {
			se := math.Sqrt(s2 * cov[i][i])
			if d := math.Abs(m.est[i].value-v) / se; d > 1e-4 {
				t.Errorf("parameter %d is %.2g standard errors from the optimum on all rows", i, d)
			}
			if r := m.est[i].se / se; math.Abs(r-1) > 0.03 { // the variance is that of the excerpt
				t.Errorf("parameter %d: standard error %.3f of that on all rows", i, r)
			}
		}
	}
}
