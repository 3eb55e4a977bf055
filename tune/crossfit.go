package tune

import (
	"context"
	"math"
)

// Gains chosen on the plausible plants do a little better on those than on
// others like them. What is reported of a design is therefore counted on
// plants it was not chosen on: the plants are dealt into folds, for each fold
// the gain is chosen again, at the same integral and derivative times, on the
// other folds, and the fold is judged under that gain (cross-validation;
// M. Stone, J. R. Stat. Soc. B 36 (1974), citation from memory). A published
// rule looks at the best fit only, and is judged on all of them as it is.

const folds = 5

// crossFitted returns the outcome of a design on every plant of the ensemble,
// each under the gain chosen without its fold.
func crossFitted(ctx context.Context, e *ensemble, d design, assurance float64) []outcome {
	if !d.found || len(e.scenarios) < 2*folds {
		return e.outcomes(d.law, searchStep)
	}
	out := make([]outcome, len(e.scenarios))
	deal := e.deal()
	for fold := range folds {
		held, others := e.split(deal, fold)
		c := d.law
		kc, ok := largest(math.Abs(c.kc), math.Abs(c.kc)/3, math.Abs(c.kc)*3, 1.02, func(kc float64) bool {
			c.kc = math.Copysign(kc, d.law.kc)
			return !cancelled(ctx) && others.holds(c, assurance)
		})
		c.kc = d.law.kc
		if ok {
			c.kc = math.Copysign(kc, d.law.kc)
		}
		for k, o := range newEnsemble(held.scenarios, e.workers).outcomes(c, searchStep) {
			out[held.order[k]] = o
		}
	}
	return out
}

// deal gives every scenario a fold, evenly within each card.
func (e *ensemble) deal() []int {
	seen := make([]int, e.cards)
	deal := make([]int, len(e.scenarios))
	for i, s := range e.scenarios {
		deal[i] = seen[s.card] % folds
		seen[s.card]++
	}
	return deal
}

// split separates a fold from the others; the order of the held ones says
// where they come from.
func (e *ensemble) split(deal []int, fold int) (held, others *ensemble) {
	held = &ensemble{workers: e.workers, cards: e.cards}
	var rest []*scenario
	for i, s := range e.scenarios {
		if deal[i] == fold {
			held.scenarios = append(held.scenarios, s)
			held.order = append(held.order, i)
		} else {
			rest = append(rest, s)
		}
	}
	return held, newEnsemble(rest, e.workers)
}
