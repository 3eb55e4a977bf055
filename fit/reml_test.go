package fit

import (
	"math"
	"testing"

	"lagwright/ident"
)

// TestBestShapeIsTheBest holds the noise shape found, from nothing and from a shape far
// off, against every node of a fine lattice: none is better by more than 0.02 in -2L.
// Wrong structures leave slow residuals. Their best shape may have next to no white
// part, or lie at the end of a flat valley, a correlation as long as the log: there 0.5.
func TestBestShapeIsTheBest(t *testing.T) {
	for _, c := range []struct {
		family    string
		structure string
		within    float64
	}{
		{"ar 0.5", "chain2", 0.02}, {"ar 0.9 and white", "chain2", 0.02}, {"coarse quantum", "chain2", 0.02},
		{"jittered", "chain2", 0.02}, {"ar 0.8", "fopdt", 0.02}, {"ar 0.95", "equal8", 0.02},
		{"ar 0.8", "ipdt", 0.02}, {"ar 0.5", "ipdt", 0.02}, {"white", "equal5", 0.5},
	} {
		for seed := range uint64(3) {
			var log family
			for _, f := range families() {
				if f.name == c.family {
					log = f
				}
			}
			if log.n == 0 {
				t.Fatalf("there is no family %q", c.family)
			}
			rec, err := newRecord(log.make(seed), ident.Linear)
			if err != nil {
				t.Fatal(err)
			}
			st, err := ident.ParseStructure(c.structure)
			if err != nil {
				t.Fatal(err)
			}
			whole := rec.whole()
			whole.model(rest, true)
			s := &study{recs: []*record{whole}, white: true, unscored: true, rival: math.Inf(1), tau: 2, dead: log.dead}
			f := s.fit(st, nil)
			tan := f.tangents()[0]
			lo, hi := tan.tcRange()
			least := tan.judge(whiteShape).dev
			for i := range 61 {
				for _, w := range []float64{0, 0.001, 0.003, 0.006, 0.01, 0.02, 0.04, 0.07, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.99} {
					least = math.Min(least, tan.judge(shape{tc: lo * math.Pow(hi/lo, float64(i)/60), white: w}).dev)
				}
			}
			for _, near := range []*shape{nil, {tc: 0.1, white: 0.5}, {tc: 1, white: 0.02}, {tc: lo, white: 0.3}, {tc: hi}, {tc: hi / 4, white: 0.9}} {
				if got := tan.bestShape(near); got.dev > least+c.within {
					t.Errorf("%s, %s, seed %d, from %v: -2L %.3f at %v, and %.3f on the lattice", c.family, c.structure, seed, near, got.dev, got.shape, least)
				}
			}
		}
	}
}
