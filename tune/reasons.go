package tune

import (
	"fmt"
	"slices"
)

// reasons says what fails, and by how much, at the share quantile of every
// figure that is asked for; of several cards, on the worst.
func (t *tuning) reasons(r row) []string {
	q, u, share := t.requirement, t.units(), t.options.Assurance
	most := percent(share) + " of the plausible plants"
	var said []string
	say := func(card int, format string, args ...any) {
		said = append(said, fmt.Sprintf(format, args...)+t.onCard(card))
	}
	if card, stable := r.on.leastShare(func(i int) bool { return r.out[i].stable }); stable < share {
		say(card, "the loop is stable on %s of the plausible plants only", percent(stable))
	}
	over := func(name string, write func(v float64) string, f func(i int) float64, limit *float64) {
		if limit == nil {
			return
		}
		f = onStable(r.out, f)
		switch v, card := r.on.quantile(f, share); {
		case !isFinite(v):
			card, some := r.on.leastShare(func(i int) bool { return isFinite(f(i)) })
			say(card, "%s: reached on %s of the plausible plants only; asked is %s", name, percent(some), write(*limit))
		case v > *limit*(1+hair):
			say(card, "%s: up to %s on %s; asked is %s", name, write(v), most, write(*limit))
		}
	}
	in := func(unit string) func(float64) string {
		return func(v float64) string { return quantity(v, unit, 3) }
	}
	over("Ms", in(""), func(i int) float64 { return r.out[i].quick.ms }, q.Ms)
	over("settling time", func(v float64) string { return duration(v, 3) }, func(i int) float64 { return r.out[i].step.settling }, q.Settling)
	over("overshoot", in("%"), func(i int) float64 { return 100 * r.out[i].step.overshoot }, q.Overshoot)
	if slices.ContainsFunc(r.out, func(o outcome) bool { return o.small != nil }) {
		small := func(figure func(f *stepFigures) float64) func(i int) float64 {
			return func(i int) float64 {
				if f := r.out[i].small; f != nil {
					return figure(f)
				}
				return 0 // said of the step asked for
			}
		}
		const of = " of a small step that no limit touches"
		over("settling time"+of, func(v float64) string { return duration(v, 3) }, small(func(f *stepFigures) float64 { return f.settling }), q.Settling)
		over("overshoot"+of, in("%"), small(func(f *stepFigures) float64 { return 100 * f.overshoot }), q.Overshoot)
	}
	if card, damped := r.on.leastShare(func(i int) bool { return r.out[i].dampingHeld }); q.Damping != nil && damped < share {
		say(card, "damping ratio: %.3g is held on %s of the plausible plants only", *q.Damping, percent(damped))
	}
	if card, passed := r.misses("temperature"); passed > 1-share+1e-9 {
		say(card, "temperature ceiling: %s is passed on %s of the plausible plants", quantity(*q.TempMax, u.Temperature, 4), percent(passed))
	}
	if card, short := r.misses("input"); short > 1-share+1e-9 {
		say(card, "input limits: the setpoint step of %s needs more input than they leave on %s of the plausible plants", quantity(*q.SetpointStep, perKelvin(u.Temperature), 3), percent(short))
	}
	if len(said) == 0 {
		card, held := r.on.leastShare(func(i int) bool { return r.out[i].met() })
		say(card, "every figure by itself holds on %s, all of them together on %s", most, percent(held))
	}
	if binding, card := r.binding(); binding != "" {
		say(card, "the limit that binds is %s", binding)
	}
	return said
}

// onCard names one of several cards.
func (t *tuning) onCard(card int) string {
	if len(t.ops) < 2 {
		return ""
	}
	return fmt.Sprintf(" (card of %s)", label(t.ops[card].card))
}

// misses returns the card that misses a limit most often, and on which share
// of its plants.
func (r row) misses(name string) (card int, share float64) {
	card, held := r.on.leastShare(func(i int) bool { return r.out[i].met() || r.out[i].missed != name })
	return card, 1 - held
}

// binding is what is missed most on most of the plants that fail, and the card
// where.
func (r row) binding() (words string, card int) {
	most := 0.0
	for _, b := range []struct{ name, words string }{
		{"stability", "stability"}, {"ms", "Ms"}, {"damping", "the damping ratio"}, {"overshoot", "the overshoot"},
		{"settling", "settling time"}, {smallOvershoot, "the overshoot of small steps"}, {smallSettling, "the settling time of small steps"}, {"temperature", "the temperature ceiling"}, {"input", "the input"},
	} {
		if k, share := r.misses(b.name); share > most {
			words, card, most = b.words, k, share
		}
	}
	return words, card
}
