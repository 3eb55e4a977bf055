package tune

import (
	"fmt"
	"math"

	"lagwright/ident"
)

// Where the heat goes with the square of the input, the plant's gain grows
// with it.

// powerLaw says over which inputs the gains hold, and what to enter behind a
// square-root linearisation.
func (t *tuning) powerLaw(g *Gains) {
	c, err := g.law()
	if err != nil || !t.anyPower() {
		return
	}
	g.SquareRoot = t.squareRoot(c)
	if !g.Meets {
		return
	}
	if g.HoldsOver = t.holdsOver(c); g.HoldsOver == nil {
		g.Cautions = append([]string{"The gain grows with the input, and there is no input at which these gains hold the requirement on every card: each card's figures hold about its own operating input."}, g.Cautions...)
		return
	}
	over := "up to " + quantity(g.HoldsOver[1], g.Units.Input, 3)
	if g.HoldsOver[0] > 0.1*g.HoldsOver[1] {
		over = "between " + figure(&g.HoldsOver[0], 3) + " and " + quantity(g.HoldsOver[1], g.Units.Input, 3)
	}
	words := fmt.Sprintf("The gain grows with the input: these gains hold the requirement %s.", over)
	if g.SquareRoot != nil {
		words += " Behind a square root of the controller's output one set holds everywhere."
	}
	g.Cautions = append([]string{words}, g.Cautions...)
}

func (t *tuning) anyPower() bool {
	for _, o := range t.ops {
		if o.card.Law() == ident.Power {
			return true
		}
	}
	return false
}

// squareRoot returns the gain behind a square root of the output, by which the
// loop is linear: on each card the gain times dphi/du at its operating input.
// Of several cards it is the smallest, and nil unless that holds on all of them
// and all follow the power law.
func (t *tuning) squareRoot(c law) *SquareRoot {
	least := t.ops[0].slope
	for _, o := range t.ops {
		if o.card.Law() != ident.Power {
			return nil
		}
		least = min(least, o.slope)
	}
	for card, o := range t.ops {
		behind := c
		behind.kc *= least / o.slope
		if e := t.ofCard(card); len(t.ops) > 1 && !e.holds(behind, t.enough(e)) {
			return nil
		}
	}
	u := t.units()
	return &SquareRoot{Kc: c.kc * least, Unit: orUnit(u.Input, "input") + "²/" + orUnit(perKelvin(u.Temperature), "K")}
}

// holdsOver returns the inputs over which the requirement holds on every card,
// nil where there are none. Each card is followed, in steps of 2 %, from its
// own operating input.
func (t *tuning) holdsOver(c law) *[2]float64 {
	low, high := 0.0, math.Inf(1)
	for card, o := range t.ops {
		if o.card.Law() != ident.Power {
			continue
		}
		few := t.ofCard(card).thinned(rulesJudged)
		holds := func(input float64) bool {
			e := few.withGains(o.card.Law().Slope(input) / o.slope)
			return e.holds(c, t.enough(e))
		}
		lo, hi := 1.0, 1.0
		for f := 0.98; f > 0.05 && holds(o.input*f); f -= 0.02 {
			lo = f
		}
		for f := 1.02; f < 3 && holds(o.input*f); f += 0.02 {
			hi = f
		}
		low, high = max(low, o.input*lo), min(high, o.input*hi)
	}
	if low > high {
		return nil
	}
	return &[2]float64{low, high}
}

// enough is the share on which gains must hold that were not chosen on these
// plants: the assurance less twice its sampling error.
func (t *tuning) enough(e *ensemble) float64 {
	a := t.options.Assurance
	return a - 2*samplingError(a, len(e.scenarios))
}

// withGains is the ensemble with every plant's gain multiplied.
func (e *ensemble) withGains(by float64) *ensemble {
	list := make([]*scenario, len(e.scenarios))
	for i, s := range e.scenarios {
		list[i] = newScenario(scaledGain(s.p, by), s.task, s.card)
	}
	return newEnsemble(list, e.workers)
}

// ofCard is the ensemble of one card's plants.
func (t *tuning) ofCard(card int) *ensemble {
	var own []*scenario
	for _, s := range t.plausible.scenarios {
		if s.card == card {
			alone := *s
			alone.card = 0
			own = append(own, &alone)
		}
	}
	return newEnsemble(own, t.workers)
}
