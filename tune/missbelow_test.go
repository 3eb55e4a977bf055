package tune

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The search leaves out what cannot change its answer; the answer is that of
// judging everything.
func TestMissBelow(t *testing.T) {
	for _, c := range []struct {
		name string
		q    Requirement
	}{
		{"ms", Requirement{Ms: ptr(1.6)}},
		{"settling", Requirement{Settling: ptr(90)}},
		{"damping", Requirement{Damping: ptr(0.7)}},
		{"everything", Requirement{Ms: ptr(1.5), Settling: ptr(80), Overshoot: ptr(4), Damping: ptr(0.6), InputMax: ptr(8), InputMin: ptr(0), InputRate: ptr(1), TempMax: ptr(75)}},
		{"scanned", Requirement{Ms: ptr(1.5), Settling: ptr(80), Damping: ptr(0.6), Scan: 1}},
		{"out of reach", Requirement{Settling: ptr(80), InputMax: ptr(4.2)}},
	} {
		t.Run(c.name, func(t *testing.T) {
			rng := rand.New(rand.NewPCG(8, 1))
			c.q.SetpointStep = ptr(6)
			task := newTask(c.q, 4, 65)
			var list []*scenario
			for card := range 2 {
				for range 20 {
					around := func(v float64) float64 { return v * (1 + 0.2*(rng.Float64()-0.5)) }
					list = append(list, newScenario(plant(t, "chain2", around(10), []float64{around(25), around(8)}, around(5)), &task, card))
				}
			}
			e := newEnsemble(list, 2)
			bound, below := math.Inf(1), 0
			for range 60 {
				ti := 10 * math.Pow(8, rng.Float64())
				l := law{kc: 0.02 * math.Pow(40, rng.Float64()), ti: ti, td: ti * 0.2 * rng.Float64(), b: 1}
				l.tf = filterShare * l.td
				out := e.outcomes(l, searchStep)
				want, _ := e.worstCard(func(i int) float64 { return out[i].violation }, func(v []float64) float64 {
					return quantile(v, float64(toHold(len(v), 0.9))/float64(len(v)))
				})
				if got := e.miss(l, 0.9); got != want {
					t.Errorf("%+v: miss %v, judged %v", l, got, want)
				}
				got := e.missBelow(l, 0.9, bound)
				if want < bound && got != want || want >= bound && got < bound {
					t.Errorf("%+v: below %v: %v, judged %v", l, bound, got, want)
				}
				if want < bound {
					bound = want
					below++
				}
			}
			if below == 0 {
				t.Errorf("none of the controllers came below the best before")
			}
		})
	}
}
