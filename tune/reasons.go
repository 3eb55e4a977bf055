package tune

import (
	"context"
	"fmt"
	"math"
	"slices"

	"lagwright/fit"
)

// reasons says what fails, and by how much, at the share quantile of every
// figure that is asked for.
func (e *ensemble) reasons(q Requirement, u GainUnits, out []outcome, m *Metrics, share float64) []string {
	var r []string
	say := func(format string, args ...any) { r = append(r, fmt.Sprintf(format, args...)) }
	percent := 100 * share
	if !m.Stable {
		say("the loop is not stable on %.0f %% of the plausible plants", percent)
	}
	over := func(name, unit string, value, limit *float64) {
		switch {
		case limit == nil:
		case value == nil:
			say("%s: not reached on %.0f %% of the plausible plants; asked is %s%s", name, percent, figure(limit, 4), unit)
		case *value > *limit*(1+hair):
			say("%s: %s%s on the plant at %.0f %%; asked is %s%s", name, figure(value, 4), unit, percent, figure(limit, 4), unit)
		}
	}
	over("Ms", "", m.Ms, q.Ms)
	over("settling time", " s", m.Settling, q.Settling)
	over("overshoot", " %", m.Overshoot, q.Overshoot)
	damped := 0
	for _, o := range out {
		if o.dampingHeld {
			damped++
		}
	}
	if q.Damping != nil && damped < needed(len(out), share) {
		say("damping ratio %.3g: held on %.0f %% of the plausible plants only", *q.Damping, 100*float64(damped)/float64(len(out)))
	}
	if e.missedCount(out, "temperature") > len(out)-needed(len(out), share) {
		say("temperature ceiling of %s: passed on %d of %d plausible plants", quantity(*q.TempMax, u.Temperature, 4), e.missedCount(out, "temperature"), len(out))
	}
	if short := e.missedCount(out, "input"); short > len(out)-needed(len(out), share) {
		say("input limits: the setpoint step needs more input than they leave on %d of %d plausible plants", short, len(out))
	}
	if len(r) == 0 {
		say("every figure holds at its own %.0f %% plant, but not all of them together: %.0f %% of the plausible plants meet the whole requirement", percent, 100*e.share(out))
	}
	if binding := e.binding(out); binding != "" {
		say("the limit that binds is %s", binding)
	}
	return r
}

func (e *ensemble) missedCount(out []outcome, name string) int {
	n := 0
	for _, o := range out {
		if !o.met() && o.missed == name {
			n++
		}
	}
	return n
}

// binding is what is missed most on most of the plants that fail.
func (e *ensemble) binding(out []outcome) string {
	names := []string{"stability", "ms", "damping", "overshoot", "settling", "temperature", "input"}
	best, count := "", 0
	for _, n := range names {
		if k := e.missedCount(out, n); k > count {
			best, count = n, k
		}
	}
	return map[string]string{"ms": "Ms", "settling": "settling time", "damping": "the damping ratio", "overshoot": "the overshoot",
		"temperature": "the temperature ceiling", "input": "the input", "stability": "stability"}[best]
}

// cures sizes the changes, one at a time, that would let a controller of this
// kind meet the requirement.
func (t *tuning) cures(ctx context.Context, kind string, assurance float64) []string {
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	if d := t.solve(ctx, kind, change{nominalOnly: true}, assurance); d.found {
		say("a better test would do: on the best-fit plant alone a %s controller meets the requirement, it is the spread of the plausible plants that fails", kind)
	}
	if f, ok := t.leastChange(ctx, kind, assurance, func(f float64) change { return change{relax: f} }); ok {
		say("relaxing every limit asked (settling, overshoot, Ms − 1, damping) by %.0f %% would do", 100*(f-1))
	}
	if f, ok := t.leastChange(ctx, kind, assurance, func(f float64) change { return change{deadTime: 1 / f} }); ok {
		say("cutting the dead time to %.0f %% (sensor nearer the heater, faster scan) would do", 100/f)
	}
	if q := t.requirement; q.InputMax != nil && t.ops[0].input < *q.InputMax {
		if f, ok := t.leastChange(ctx, kind, assurance, func(f float64) change { return change{supply: f} }); ok {
			unit := t.ops[0].card.Units.Input
			say("more supply would do: an input up to %s in place of %s", quantity(t.ops[0].input+f*(*q.InputMax-t.ops[0].input), unit, 3), quantity(*q.InputMax, unit, 3))
		}
	}
	return out
}

// leastChange finds, to a few percent, the smallest factor above 1 (up to 8)
// with which a change makes the requirement feasible.
func (t *tuning) leastChange(ctx context.Context, kind string, assurance float64, of func(float64) change) (float64, bool) {
	feasible := func(f float64) bool {
		return !cancelled(ctx) && t.solve(ctx, kind, of(f), assurance).found
	}
	lo, hi := 1.0, 0.0
	for _, f := range []float64{1.3, 2, 4, 8} {
		if feasible(f) {
			hi = f
			break
		}
		lo = f
	}
	if hi == 0 {
		return 0, false
	}
	for hi/lo > 1.04 {
		if mid := math.Sqrt(lo * hi); feasible(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	return hi, true
}

// change is a hypothetical change of plant or requirement; zero fields change
// nothing.
type change struct {
	nominalOnly bool
	relax       float64
	deadTime    float64
	supply      float64
}

// solve repeats the synthesis, thinly, with a change.
func (t *tuning) solve(ctx context.Context, kind string, ch change, assurance float64) design {
	q := ch.apply(t.requirement)
	var list []*scenario
	for card, o := range t.ops {
		limited := q
		if ch.supply > 0 {
			limited.InputMax = finite(o.input + ch.supply*(*q.InputMax-o.input))
		}
		task := newTask(limited, o.input, o.temperature)
		plants := o.plants
		if ch.nominalOnly {
			plants = plants[:0:0]
			plants = append(plants, o.nominal)
		}
		for i := 0; i < len(plants); i += max(1, len(plants)/24) {
			p := plants[i]
			if ch.deadTime > 0 {
				p.DeadTime *= ch.deadTime
			}
			list = append(list, newScenario(p, &task, card))
		}
	}
	s := newSearch(ctx, newEnsemble(list, t.workers), t.ops[0].nominal, assurance)
	s.thin = true
	return s.design(kind)
}

func (ch change) apply(q Requirement) Requirement {
	if ch.relax == 0 {
		return q
	}
	scale := func(v *float64, f func(float64) float64) *float64 {
		if v == nil {
			return nil
		}
		return finite(f(*v))
	}
	q.Settling = scale(q.Settling, func(v float64) float64 { return v * ch.relax })
	q.Overshoot = scale(q.Overshoot, func(v float64) float64 { return max(v, 1) * ch.relax })
	q.Ms = scale(q.Ms, func(v float64) float64 { return 1 + (v-1)*ch.relax })
	q.Damping = scale(q.Damping, func(v float64) float64 { return v / ch.relax })
	return q
}

// CautionStart goes with every set of gains. Common practice, no source.
const CautionStart = "Start new gains with the output limited and a small setpoint step; stay with the heater, ready to switch to manual."

// soundMs is the largest peak sensitivity that passes without a word: sound
// loops have 1.2 to 2 (Åström and Hägglund, Advanced PID Control, 2006, from
// memory).
const soundMs = 2.0

// cautions go with every set of gains.
func (t *tuning) cautions(g *Gains) []string {
	c := []string{fit.CautionCutOut, fit.CautionSheath, CautionStart}
	for _, o := range t.ops {
		if words := o.card.CautionRange(); !slices.Contains(c, words) {
			c = append(c, words)
		}
	}
	o := t.ops[0]
	unit := o.card.Units.Temperature
	if s := g.Requirement.SetpointStep; s != nil && g.Worst != nil && g.Worst.Overshoot != nil {
		from := o.temperature // of the hottest card
		for _, other := range t.ops {
			from = max(from, other.temperature)
		}
		top := from + *s*(1+math.Max(*g.Worst.Overshoot, 0)/100)
		if *s > 0 {
			top = math.Ceil(10*top) / 10 // never said to be cooler than it is
		}
		c = append(c, fmt.Sprintf("A setpoint step of %s from about %s may reach %s.", quantity(*s, perKelvin(unit), 2), quantity(from, unit, 3), quantity(top, unit, 4)))
	}
	if n := g.Nominal; g.Controller == "p" && n != nil && n.SteadyOffset != nil && g.Requirement.SetpointStep != nil {
		c = append(c, fmt.Sprintf("P control leaves an offset: a setpoint step of %s ends %s away from the setpoint, on the best fit.",
			quantity(*g.Requirement.SetpointStep, perKelvin(unit), 2), quantity(math.Abs(*n.SteadyOffset), perKelvin(unit), 2)))
	}
	if w := g.Worst; w != nil && w.Ms != nil && *w.Ms > soundMs {
		c = append(c, fmt.Sprintf("Small margins: Ms is %s on the plausible plant at %.0f %%; up to %.0f is usual. Ask for --ms %.1f.",
			figure(w.Ms, 3), 100*g.Assurance, soundMs, usualMs))
	}
	if len(o.plants) < 20 {
		c = append(c, fmt.Sprintf("The card holds %d plausible plants: the spread of the figures is not known.", len(o.plants)))
	}
	for _, w := range o.card.Warnings {
		if slices.Contains([]string{"short-record", "no-plateau"}, w.Code) {
			c = append(c, "From the card: "+w.Text+".")
		}
	}
	return append(c, fit.CautionCodes)
}
