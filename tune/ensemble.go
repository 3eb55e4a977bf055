package tune

import (
	"context"
	"math"
	"sync"
	"sync/atomic"
)

// ensemble is a set of scenarios judged together by several workers. Results
// do not depend on their number.
type ensemble struct {
	scenarios []*scenario
	cards     int // how many cards the scenarios come from, at least 1
	workers   int
	order     []int // likely failures first: saves time, changes nothing
}

func newEnsemble(scenarios []*scenario, workers int) *ensemble {
	e := &ensemble{scenarios: scenarios, cards: 1, workers: max(1, workers), order: make([]int, len(scenarios))}
	for i, s := range scenarios {
		e.order[i] = i
		e.cards = max(e.cards, s.card+1)
	}
	return e
}

// each calls f for every scenario, spread over the workers.
func (e *ensemble) each(f func(i int, s *scenario)) {
	var next atomic.Int64
	var wg sync.WaitGroup
	for range min(e.workers, len(e.scenarios)) {
		wg.Go(func() {
			for {
				k := int(next.Add(1)) - 1
				if k >= len(e.scenarios) {
					return
				}
				i := e.order[k]
				f(i, e.scenarios[i])
			}
		})
	}
	wg.Wait()
}

// holds tells whether the task is met on at least the share of the scenarios
// of every card (see toHold). It stops as soon as that is out of reach.
func (e *ensemble) holds(c law, share float64) bool {
	counts := e.counts()
	failures := make([]atomic.Int64, e.cards)
	failed := make([]bool, len(e.scenarios))
	var out atomic.Bool
	e.each(func(i int, s *scenario) {
		if out.Load() || s.task.meets(s, c) {
			return
		}
		failed[i] = true
		n := counts[s.card]
		if int(failures[s.card].Add(1)) > n-toHold(n, share) {
			out.Store(true)
		}
	})
	e.promote(failed)
	return !out.Load()
}

// toHold is on how many of n plants a design must hold so that one more plant
// of the same kind, the real one, is expected among those it holds on with the
// wanted share: ceil(share·(n+1)), the rank of conformal prediction (Vovk,
// Gammerman and Shafer, Algorithmic Learning in a Random World, 2005, citation
// from memory), n at most.
func toHold(n int, share float64) int { return min(n, needed(n+1, share)) }

// counts returns the number of scenarios of every card.
func (e *ensemble) counts() []int {
	n := make([]int, e.cards)
	for _, s := range e.scenarios {
		n[s.card]++
	}
	return n
}

// promote moves the scenarios that failed to the front of the order.
func (e *ensemble) promote(failed []bool) {
	front, back := make([]int, 0, len(e.order)), make([]int, 0, len(e.order))
	for _, i := range e.order {
		if failed[i] {
			front = append(front, i)
		} else {
			back = append(back, i)
		}
	}
	e.order = append(front, back...)
}

// outcomes judges every scenario.
func (e *ensemble) outcomes(c law, fine float64) []outcome {
	out := make([]outcome, len(e.scenarios))
	e.each(func(i int, s *scenario) { out[i] = s.task.judge(s, c, fine) })
	return out
}

// share is the least share of a card's scenarios on which the task is met.
func (e *ensemble) share(out []outcome) float64 {
	met := make([]int, e.cards)
	for i, s := range e.scenarios {
		if out[i].met() {
			met[s.card]++
		}
	}
	least := 1.0
	for card, n := range e.counts() {
		if n > 0 {
			least = min(least, float64(met[card])/float64(n))
		}
	}
	return least
}

// miss is the quantile, over the scenarios, of the worst violation: ≤ 0 (but
// for a hair) where the task holds on the share of them.
func (e *ensemble) miss(c law, share float64) float64 {
	worst := math.Inf(-1)
	v := make([][]float64, e.cards)
	for i, o := range e.outcomes(c, searchStep) {
		card := e.scenarios[i].card
		v[card] = append(v[card], o.violation)
	}
	for _, x := range v {
		if len(x) > 0 {
			worst = max(worst, quantile(x, share))
		}
	}
	return worst
}

// loadIAE is the median, over about the given number of scenarios, of the
// integral of |error| after a unit load step at the plant's input; +Inf where
// a loop is unstable. It is never less than the integral of the error itself,
// which is Ti/Kc.
func (e *ensemble) loadIAE(c law, about int, fine float64) float64 {
	stride := max(1, len(e.scenarios)/about)
	sub := *e
	sub.scenarios, sub.order = nil, nil
	for i := 0; i < len(e.scenarios); i += stride {
		sub.order = append(sub.order, len(sub.scenarios))
		sub.scenarios = append(sub.scenarios, e.scenarios[i])
	}
	v := make([]float64, len(sub.scenarios))
	sub.each(func(i int, s *scenario) {
		v[i] = math.Inf(1)
		if f := s.quick(c); f.stable {
			if fig, err := s.task.load(s, c, f, fine); err == nil {
				v[i] = fig.iae
				if c.integral() && s.scan == 0 {
					v[i] = max(v[i], math.Abs(c.ti/c.kc))
				}
			}
		}
	})
	return quantile(v, 0.5)
}

// thinned keeps every n-th scenario of each card so that about the given
// number are left.
func (e *ensemble) thinned(about int) *ensemble {
	stride := max(1, len(e.scenarios)/about)
	var kept []*scenario
	seen := make([]int, e.cards)
	for _, s := range e.scenarios {
		if seen[s.card]%stride == 0 {
			kept = append(kept, s)
		}
		seen[s.card]++
	}
	return newEnsemble(kept, e.workers)
}

func cancelled(ctx context.Context) bool { return ctx.Err() != nil }
