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
	var everywhere bool
	g.SquareRoot, everywhere = t.squareRoot(c)
	if !g.Meets {
		return
	}
	words := t.rangeWords(g, c)
	if everywhere {
		words += " Behind a square root of the controller's output one set holds everywhere, as far as the input limits leave room."
	}
	g.Cautions = append([]string{words}, g.Cautions...)
}

// rangeWords finds the inputs over which the gains hold and says what that
// means: where the requirement says something of a setpoint step, the steps
// that start there, up and down; else the loop there.
func (t *tuning) rangeWords(g *Gains, c law) string {
	const grows = "The gain grows with the input"
	step := *t.requirement.SetpointStep
	first := t.holdsOver(c, step)
	if first == nil {
		return grows + ", and there is no input at which these gains hold the requirement on every card: each card's figures hold about its own operating input."
	}
	between := func(r *[2]float64) string {
		if r[0] == r[1] {
			return "of " + quantity(r[1], g.Units.Input, 3)
		}
		if r[0] > 0.1*r[1] {
			return "between " + figure(&r[0], 3) + " and " + quantity(r[1], g.Units.Input, 3)
		}
		return "up to " + quantity(r[1], g.Units.Input, 3)
	}
	if task := t.ops[0].task(t.requirement); !task.simulates() {
		g.HoldsOver = first
		return fmt.Sprintf("%s: these gains hold the requirement at an input %s.", grows, between(first))
	}
	up, down := "up", "down"
	if step < 0 {
		up, down = down, up
	}
	size := quantity(math.Abs(step), perKelvin(g.Units.Temperature), 3)
	second := t.holdsOver(c, -step)
	if second == nil {
		return fmt.Sprintf("%s: with these gains setpoint steps of %s %s hold the requirement where the heater rests at an input %s before the step; steps %s do not, at the input judged.",
			grows, size, up, between(first), down)
	}
	g.HoldsOver = common(first, second)
	if *first == *second {
		return fmt.Sprintf("%s: with these gains setpoint steps of %s, up and down, hold the requirement where the heater rests at an input %s before the step.", grows, size, between(first))
	}
	return fmt.Sprintf("%s: with these gains setpoint steps of %s hold the requirement where the heater rests, before a step %s, at an input %s, and before a step %s, %s.",
		grows, size, up, between(first), down, between(second))
}

// common is what two ranges share, nil for nothing.
func common(a, b *[2]float64) *[2]float64 {
	r := [2]float64{max(a[0], b[0]), min(a[1], b[1])}
	if r[0] > r[1] {
		return nil
	}
	return &r
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
// loop is linear: on each card the gain times dphi/du at its operating input,
// and whether the requirement holds there. Of several cards it is the smallest,
// and nil unless that holds on all of them and all follow the power law.
func (t *tuning) squareRoot(c law) (*SquareRoot, bool) {
	least := t.ops[0].slope
	for _, o := range t.ops {
		if o.card.Law() != ident.Power {
			return nil, false
		}
		least = min(least, o.slope)
	}
	everywhere := t.requirement.InputRate == nil // a rate is that of the voltage, not of its square
	for card, o := range t.ops {
		behind := c
		behind.kc *= least / o.slope
		e := t.ofCard(card)
		if holds := e.straightened().holds(behind, t.enough(e)); !holds {
			everywhere = false
			if len(t.ops) > 1 {
				return nil, false
			}
		}
	}
	u := t.units()
	return &SquareRoot{Kc: c.kc * least, Unit: orUnit(u.Input, "input") + "²/" + orUnit(perKelvin(u.Temperature), "K")}, everywhere
}

// holdsOver returns the inputs from which the requirement holds on every card
// for a setpoint step of a size, nil where there are none. Each card is
// followed, in steps of 2 %, from its own operating input.
func (t *tuning) holdsOver(c law, step float64) *[2]float64 {
	over := &[2]float64{0, math.Inf(1)}
	for card, o := range t.ops {
		if o.card.Law() != ident.Power {
			continue
		}
		few := t.ofCard(card).thinned(rulesJudged)
		holds := func(input float64) bool {
			e := t.movedTo(few, o, input, step)
			return e != nil && e.holds(c, t.enough(e))
		}
		if step != *t.requirement.SetpointStep && !holds(o.input) {
			return nil
		}
		lo, hi := 1.0, 1.0
		for f := 0.98; f > 0.05 && holds(o.input*f); f -= 0.02 {
			lo = f
		}
		for f := 1.02; f < 3 && holds(o.input*f); f += 0.02 {
			hi = f
		}
		if over = common(over, &[2]float64{o.input * lo, o.input * hi}); over == nil {
			return nil
		}
	}
	return over
}

// movedTo is the ensemble of a card's plants about another input, to be judged
// by a step of another size; nil where the limits do not admit it.
func (t *tuning) movedTo(e *ensemble, o operation, input, step float64) *ensemble {
	q, at := t.requirement, o.moved(input)
	q.SetpointStep = &step
	if at.admits(q) != nil {
		return nil
	}
	task := at.task(q)
	list := make([]*scenario, len(e.scenarios))
	for i, s := range e.scenarios {
		list[i] = newScenario(scaledGain(s.p, at.slope/o.slope), &task, s.card)
	}
	return newEnsemble(list, e.workers)
}

// enough is the share on which gains must hold that were not chosen on these
// plants: the assurance less twice its sampling error.
func (t *tuning) enough(e *ensemble) float64 {
	a := t.options.Assurance
	return a - 2*samplingError(a, len(e.scenarios))
}

// straightened is the ensemble behind a square root of the output.
func (e *ensemble) straightened() *ensemble {
	list := make([]*scenario, len(e.scenarios))
	for i, s := range e.scenarios {
		task := s.task.straightened()
		list[i] = newScenario(s.p, &task, s.card)
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
