package fit

import (
	"context"
	"math"
	"testing"

	"lagwright/data"
)

// TestIntervalsNest holds the intervals of one log at rising levels inside one
// another, and the weights of the noise shapes to a sum of 1.
func TestIntervalsNest(t *testing.T) {
	for _, name := range []int{0, 2, 14} { // white, ar 0.8, short record
		f := families()[name]
		var last []estimate
		for _, level := range []float64{0.8, 0.95, 0.99, 0.995, 0.999, 0.9999} {
			o, err := Options{Structure: "chain2", Confidence: level, Plants: -1}.withDefaults()
			if err != nil {
				t.Fatal(err)
			}
			recs, err := prepare([]*data.Run{f.make(4)}, o.Law)
			if err != nil {
				t.Fatal(err)
			}
			out, err := find(context.Background(), recs, o)
			if err != nil {
				t.Fatal(err)
			}
			b := out.models[0]
			sum := 0.0
			for _, n := range b.nodes[0] {
				sum += n.weight
			}
			if math.Abs(sum-1) > 1e-9 {
				t.Errorf("%s at %g: the weights sum to %g", f.name, level, sum)
			}
			for i, e := range b.est {
				if last != nil && (e.low > last[i].low || e.high < last[i].high) {
					t.Errorf("%s at %g: parameter %d from %g to %g lies not around %g to %g", f.name, level, i, e.low, e.high, last[i].low, last[i].high)
				}
			}
			last = b.est
		}
	}
}

// TestPlantsOfPoorLogsAreFinite draws plausible plants from logs that hardly tell
// a gain: a few rows after the bump. Every one is finite, of the estimate's sign.
func TestPlantsOfPoorLogsAreFinite(t *testing.T) {
	f := families()[2]
	for after := 4; after < 16; after += 3 {
		run := f.make(uint64(after))
		n := 101 + after
		run.T, run.U, run.Y = run.T[:n], run.U[:n], run.Y[:n]
		card, err := Fit(context.Background(), []*data.Run{run}, Options{})
		if err != nil {
			continue // a refusal is an answer
		}
		m, _ := card.Model(card.Selected)
		for _, p := range card.Plants.Values {
			for _, v := range p {
				if math.IsNaN(v) || math.IsInf(v, 0) || p[0]*m.Parameters[0].Value <= 0 {
					t.Fatalf("%d rows after the bump: plant %v, gain %g", after, p, m.Parameters[0].Value)
				}
			}
		}
		cardBytes(t, card)
	}
}
