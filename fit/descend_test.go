package fit

import (
	"math"
	"slices"
	"testing"

	"lagwright/ident"
)

// TestDescentIsNotCutShort descends from far off, where the first step would carry the dead
// time far below zero: what the bound leaves of it leads uphill, and must not be taken for
// the end of the way.
func TestDescentIsNotCutShort(t *testing.T) {
	log := bumpLog{structure: "chain2", gain: 8.2, lags: []float64{2.1, 0.65}, dead: 0.22, n: 3000, every: 0.05,
		steps: []step{{0, 1}, {10, 1.5}}, sd: 0.12}
	rec, err := newRecord(log.run(1), ident.Linear)
	if err != nil {
		t.Fatal(err)
	}
	for _, structure := range []string{"equal2", "equal3", "equal6"} {
		st, err := ident.ParseStructure(structure)
		if err != nil {
			t.Fatal(err)
		}
		e := newEngine(st, []*record{rec.whole()})
		n := float64(st.Order())
		best := e.descend([]float64{2.5 / n, 0.1}, finalTol)
		for _, start := range [][]float64{{11.7, 2.9}, {8.8, 3.2}, {20 / n, 4}, {40 / n, 0.5}} {
			if p := e.descend(start, searchTol); p.s > best.s*(1+1e-4) {
				t.Errorf("%s from %v: sum of squares %.6g at %v, from near the optimum %.6g at %v", structure, start, p.s, p.eta, best.s, best.eta)
			}
		}
	}
}

// A profile along the second of three lags, from an optimum whose third lag is nothing: held
// shorter, the second wants the third to grow, though at zero no slope says so.
func TestProfileLetsALagGrow(t *testing.T) {
	st, err := ident.ParseStructure("chain3")
	if err != nil {
		t.Fatal(err)
	}
	log := bumpLog{structure: "chain2", gain: 8.2, lags: []float64{2.1, 0.75}, dead: 0.2, n: 1000, every: 0.05,
		steps: []step{{0, 1}, {8.3, 1.3}, {16.7, 1.6}, {25, 1}, {33, 1.3}, {41, 1.6}}, sd: 0.2}
	grown := 0
	for seed := range uint64(50) {
		rec, err := newRecord(log.run(seed), ident.Linear)
		if err != nil {
			t.Fatal(err)
		}
		r := rec.whole()
		e := newEngine(st, []*record{r})
		best := e.search([][]float64{{2.1, 0.75, 0.01, 0.2}})
		if best.eta[2] > r.step/10 {
			continue
		}
		grown++
		q := &profiler{e: e, best: best, s2: best.s / float64(len(r.t)-6)}
		end := q.end(2, -1, 2, 0.05, e.lower[1])
		if math.IsNaN(end) {
			continue
		}
		// At the end, the third lag of any length must not do better than it says.
		least := math.Inf(1)
		for share := 0.0; share <= 1; share += 0.1 {
			least = min(least, held(e, best, end, share*end))
		}
		if root := math.Sqrt((least - best.s) / q.s2); root < 2*0.97 {
			t.Errorf("seed %d: the profile ends at %g s, but there the root is %.3g, not 2", seed, end, root)
		}
	}
	if grown == 0 {
		t.Error("no log has its third lag at zero")
	}
}

// held is the sum of squares with the second and third lag held.
func held(e *engine, from point, second, third float64) float64 {
	lower, upper, is := e.lower, e.upper, e.held
	defer func() { e.lower, e.upper, e.held = lower, upper, is }()
	e.lower, e.upper, e.held = slices.Clone(lower), slices.Clone(upper), slices.Clone(is)
	start := slices.Clone(from.eta)
	for j, v := range map[int]float64{1: second, 2: math.Max(third, lower[2])} {
		start[j], e.lower[j], e.upper[j], e.held[j] = v, v, v, true
	}
	best := math.Inf(1)
	for _, dead := range []float64{0, 0.1, 0.2, 0.3, 0.4} {
		s := slices.Clone(start)
		s[3] = dead
		best = min(best, e.descend(s, finalTol).s)
	}
	return best
}
