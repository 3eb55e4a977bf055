package fit

import (
	"context"
	"math"
	"math/rand/v2"
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

// TestExcerptHoldsTheBump looks for the excerpt where the bump is, when the input
// flickers at every row and the bump comes late.
func TestExcerptHoldsTheBump(t *testing.T) {
	f := families()[1] // ar 0.5
	f.n, f.bumps = 30000, []float64{2500}
	run := f.make(2)
	r := rand.New(rand.NewPCG(4, 4))
	for k := range run.U {
		run.U[k] += 0.004 * r.NormFloat64()
	}
	o, err := Options{Structure: "chain2"}.withDefaults()
	if err != nil {
		t.Fatal(err)
	}
	recs, err := prepare([]*data.Run{run}, o.Law)
	if err != nil {
		t.Fatal(err)
	}
	if s := recs[0].root.scope; run.T[s.lo] > 2480 || run.T[min(s.lo+mostRows, s.hi)-1] < 2600 {
		t.Fatalf("the excerpt reaches from %g s to %g s", run.T[s.lo], run.T[s.hi-1])
	}
	out, err := find(context.Background(), recs, o)
	if err != nil {
		t.Fatal(err)
	}
	for i, e := range out.models[0].est {
		if want := f.truth(i, 4); math.Abs(e.value-want) > 4*e.se {
			t.Errorf("parameter %d: %g ± %g, true %g", i, e.value, e.se, want)
		}
	}
}

// TestExcerptJoint fits two long logs together: the order of the logs does not matter,
// holding the gain never lowers the sum of squares, and every value lies in its
// interval, derived ones too.
func TestExcerptJoint(t *testing.T) {
	for _, f := range families() {
		if f.name != "telegraph, beyond one excerpt" {
			continue
		}
		a, b := f.make(1), f.make(2)
		for k := range b.Y {
			b.Y[k] += 7
		}
		fitted := func(o Options, runs ...*data.Run) *Model {
			o.Structure, o.Drift = "chain2", "none"
			card, err := Fit(context.Background(), runs, o)
			if err != nil {
				t.Fatal(err)
			}
			return heldInside(t, card)
		}
		one, other := fitted(Options{}, a, b), fitted(Options{}, b, a)
		held := fitted(Options{Fix: map[string]float64{"gain": f.gain}}, a, b)
		if math.Abs(one.SSE/other.SSE-1) > 1e-9 {
			t.Errorf("sum of squares %.10g, of the logs in the other order %.10g", one.SSE, other.SSE)
		}
		for i, p := range one.Parameters[:4] {
			if d := math.Abs(p.Value-other.Parameters[i].Value) / *p.SE; d > 0.01 {
				t.Errorf("%s moves by %.2g standard errors with the order of the logs", p.Name, d)
			}
		}
		if held.LogLik > one.LogLik+1e-3 {
			t.Errorf("log likelihood %.6f with the true gain held, %.6f with it free", held.LogLik, one.LogLik)
		}
	}
}

// heldInside returns the selected model of a card whose values all lie in their
// intervals.
func heldInside(t *testing.T, card *Card) *Model {
	t.Helper()
	outside := func(value float64, low, high *float64) bool {
		return low != nil && value < *low || high != nil && value > *high
	}
	for _, m := range card.Models {
		for _, p := range m.Parameters {
			if outside(p.Value, p.Low, p.High) {
				t.Errorf("%s of %s: %g lies outside its interval", p.Name, m.Structure, p.Value)
			}
		}
	}
	for _, d := range card.Derived {
		if outside(d.Value, d.Low, d.High) {
			t.Errorf("%s: %g lies outside its interval", d.Name, d.Value)
		}
	}
	m, _ := card.Model(card.Selected)
	return m
}
