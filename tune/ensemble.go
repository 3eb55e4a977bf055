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
	_, share := e.leastShare(func(i int) bool { return out[i].met() })
	return share
}

// meeting is the ensemble of the scenarios on which the task is met, with
// their outcomes.
func (e *ensemble) meeting(out []outcome) (*ensemble, []outcome) {
	var list []*scenario
	var met []outcome
	for i, s := range e.scenarios {
		if out[i].met() {
			list, met = append(list, s), append(met, out[i])
		}
	}
	return newEnsemble(list, e.workers), met
}

// leastShare returns the card on which the smallest share of the scenarios
// has a property, and that share.
func (e *ensemble) leastShare(has func(i int) bool) (card int, share float64) {
	hits := make([]int, e.cards)
	for i, s := range e.scenarios {
		if has(i) {
			hits[s.card]++
		}
	}
	share = math.Inf(1)
	for k, n := range e.counts() {
		if n == 0 {
			continue
		}
		if part := float64(hits[k]) / float64(n); part < share {
			card, share = k, part
		}
	}
	return card, min(share, 1)
}

// quantile is the largest of the cards' share quantiles of a figure that
// should be small, and the card it belongs to.
func (e *ensemble) quantile(figure func(i int) float64, share float64) (value float64, card int) {
	return e.worstCard(figure, func(v []float64) float64 { return quantile(v, share) })
}

// worstCard is the largest of what a figure's values come to on each card.
func (e *ensemble) worstCard(figure func(i int) float64, of func(v []float64) float64) (value float64, card int) {
	v := make([][]float64, e.cards)
	for i, s := range e.scenarios {
		v[s.card] = append(v[s.card], figure(i))
	}
	value = math.Inf(-1)
	for k, x := range v {
		if len(x) == 0 {
			continue
		}
		if q := of(x); q > value {
			value, card = q, k
		}
	}
	return value, card
}

// miss is the worst violation on as many of the scenarios as a design must hold
// on (see toHold), of the worst card: ≤ 0 (but for a hair) where holds is true.
func (e *ensemble) miss(c law, share float64) float64 { return e.missBelow(c, share, math.Inf(1)) }

// missBelow is miss where that is below bound; where it is not, +Inf, which is
// known as soon as too many scenarios miss by as much.
func (e *ensemble) missBelow(c law, share, bound float64) float64 {
	counts := e.counts()
	beyond := make([]atomic.Int64, e.cards)
	violations, failed := make([]float64, len(e.scenarios)), make([]bool, len(e.scenarios))
	var out atomic.Bool
	e.each(func(i int, s *scenario) {
		if out.Load() {
			return
		}
		violations[i] = s.task.violation(s, c, bound)
		if violations[i] < bound {
			return
		}
		failed[i] = true
		if n := counts[s.card]; int(beyond[s.card].Add(1)) > n-toHold(n, share) {
			out.Store(true)
		}
	})
	e.promote(failed)
	if out.Load() {
		return math.Inf(1)
	}
	worst, _ := e.worstCard(func(i int) float64 { return violations[i] }, func(v []float64) float64 {
		return quantile(v, float64(toHold(len(v), share))/float64(len(v)))
	})
	return worst
}

// loadIAE is the median, over about the given number of scenarios, of the
// integral of |error| after a unit load step at the plant's input, of several
// cards the largest; +Inf where a loop is unstable. It is never less than the integral of the error itself,
// which is Ti/Kc.
func (e *ensemble) loadIAE(c law, about int, fine float64) float64 {
	sub := e.thinned(about)
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
	median, _ := sub.quantile(func(i int) float64 { return v[i] }, 0.5)
	return median
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
