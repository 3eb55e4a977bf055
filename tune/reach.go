package tune

import (
	"fmt"
	"math"

	"lagwright/ident"
)

// What no controller can change: whether the operating point and the end of
// the setpoint step lie within the limits.

// admits says whether a requirement can be judged about an operating point.
func (o operation) admits(q Requirement) error {
	in, temp := o.card.Units.Input, o.card.Units.Temperature
	if q.InputMax != nil && o.input > *q.InputMax || q.InputMin != nil && o.input < *q.InputMin {
		return fmt.Errorf("the heater is taken to run at an input of %s, outside the input limits (%s): give --operating-input with the input at which it runs", quantity(o.input, in, 4), limitWords(q, in))
	}
	if q.TempMax == nil {
		return nil
	}
	if end := o.temperature + max(0, *q.SetpointStep); !(end < *q.TempMax) {
		return fmt.Errorf("a setpoint step of %s from about %s, the temperature at an input of %s, ends at %s, not below the ceiling of %s: give a smaller --setpoint-step or a lower --operating-input",
			quantity(*q.SetpointStep, perKelvin(temp), 3), quantity(o.temperature, temp, 4), quantity(o.input, in, 4), quantity(end, temp, 4), quantity(*q.TempMax, temp, 4))
	}
	return nil
}

// limitWords writes the limits of the input down.
func limitWords(q Requirement, unit string) string {
	switch {
	case q.InputMin == nil:
		return "up to " + quantity(*q.InputMax, unit, 4)
	case q.InputMax == nil:
		return "from " + quantity(*q.InputMin, unit, 4)
	}
	return figure(q.InputMin, 4) + " to " + quantity(*q.InputMax, unit, 4)
}

// reaches tells whether the limits of the input leave the end of the setpoint
// step within reach of a controller with integral action.
func (t *task) reaches(p ident.Plant) bool {
	if p.Structure.Integrating() || !t.simulates() {
		return true
	}
	u := t.curve.input(t.step / p.Gain)
	return (t.limits.Min == nil || u >= *t.limits.Min) && (t.limits.Max == nil || u <= *t.limits.Max)
}

// reaches tells whether the step is within reach on the share of every card's
// plants.
func (e *ensemble) reaches(share float64) bool {
	reached := make([]int, e.cards)
	for _, s := range e.scenarios {
		if s.task.reaches(s.p) {
			reached[s.card]++
		}
	}
	for card, n := range e.counts() {
		if reached[card] < toHold(n, share) {
			return false
		}
	}
	return true
}

// beyondReach designs where the step is out of reach, so that nothing about
// the step can tell one controller from another: for Ms, and for damping where
// it is asked. The result is not found, whatever it is.
func (s *search) beyondReach(kind string) design {
	list := make([]*scenario, len(s.on.scenarios))
	for i, old := range s.on.scenarios {
		free := *old.task
		free.ms = min(free.ms, usualMs)
		free.overshoot, free.settling, free.peakTemp = math.Inf(1), math.Inf(1), math.Inf(1)
		list[i] = newScenario(old.p, &free, old.card)
	}
	near := *s
	near.on = newEnsemble(list, s.on.workers)
	d := near.design(kind)
	d.found, d.miss = false, s.on.miss(d.law, s.assurance)
	return d
}
