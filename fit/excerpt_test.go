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

// A fit with everything known, and one of two logs of which the second hardly says
// anything, end in a card.
func TestNothingToFind(t *testing.T) {
	for _, o := range []Options{
		{Structure: "fopdt", Fix: map[string]float64{"gain": 7.4, "lag1": 14, "dead_time": 3}},
		{Fix: map[string]float64{"gain": 7.4, "lag1": 14, "dead_time": 3}},
		{Structure: "ipdt", Fix: map[string]float64{"gain": 0.5, "dead_time": 3}},
		{Structure: "fopdt", Initial: "free", Fix: map[string]float64{"gain": 7.4, "lag1": 14, "dead_time": 3}},
	} {
		o.Plants = 20
		c := fitted1(t, []*data.Run{twoLags().run(3)}, o)
		m, _ := c.Model(c.Selected)
		if p := m.Parameters[0]; p.Value != o.Fix["gain"] {
			t.Errorf("%v: the gain is %v", o, p.Value)
		}
	}
	short := twoLags()
	short.steps, short.n = []step{{0, 3}, {18, 4.2}}, 30
	fitted1(t, []*data.Run{twoLags().run(3), short.run(4)}, Options{Plants: 20})
}

// The best shortest lag of a chain is found on every row also where the search ends
// with none: there the sum of squares is level.
func TestOffZero(t *testing.T) {
	l := twoLags()
	l.structure, l.lags, l.dead, l.every = "chain3", []float64{11, 3.5, 0.5}, 2.3, 0.1
	l.n, l.sd, l.steps = 1600, 0.01, []step{{0, 3}, {21, 4.2}, {98, 3}}
	recs, err := prepare([]*data.Run{l.run(5)}, ident.Linear)
	if err != nil {
		t.Fatal(err)
	}
	r := recs[0].focus(l.dead, 3*recs[0].step)
	st, _ := ident.ParseStructure("chain3")
	f := &fitted{st: st, e: newEngine(st, []*record{r}), groups: []int{0, 1, 2}}
	best := f.e.descend([]float64{11, 3.5, 0.5, 2.3}, finalTol)
	f.e.upper[2] = 1e-9 // no third lag
	f.p = f.e.descend([]float64{11, 3.5, 0, 2.8}, finalTol)
	f.e.upper[2] = f.e.upper[0]
	if !(f.p.s > 1.001*best.s) {
		t.Fatalf("without the third lag %v is left, with it %v: no test", f.p.s, best.s)
	}
	p := f.polish()
	if p == nil || math.Abs(p.eta[2]-best.eta[2]) > 0.02 {
		t.Errorf("the third lag is %v, want %v", p.eta[2], best.eta[2])
	}
}
