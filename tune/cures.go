package tune

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"

	"lagwright/ident"
)

// Cures say what would let the requirement be met, one change at a time and in
// numbers that can be acted on. The size of a change is searched on a few of
// the plausible plants; it is said only where the synthesis with that change,
// on all plants and judged like any other, meets the requirement with a
// controller that brings the temperature to the setpoint.

// curePlants is how many plants of a card a change is sized on.
const curePlants = 40

// cures lists what would let a controller of this kind do. What leaves an
// offset is cured by PI.
func (t *tuning) cures(ctx context.Context, kind string) []string {
	if t.options.Rule != "" {
		return t.cureOfRule(ctx, t.settling(kind))
	}
	out := t.otherControllers(ctx, kind)
	if cured := t.settling(kind); cured != kind {
		if len(out) > 0 {
			return out
		}
		for _, words := range t.curesOf(ctx, cured) {
			out = append(out, "with a PI controller, which leaves no offset (--controller pi): "+words)
		}
		return out
	}
	return append(out, t.curesOf(ctx, kind)...)
}

// settling is the kind itself, PI for one that leaves an offset.
func (t *tuning) settling(kind string) string {
	leaves := func(o operation) bool { return !o.nominal.Structure.Integrating() }
	if kind == "p" && slices.ContainsFunc(t.ops, leaves) {
		return "pi"
	}
	return kind
}

// curesOf lists the changes that let a controller of this kind do.
func (t *tuning) curesOf(ctx context.Context, kind string) []string {
	if !t.plausible.reaches(t.options.Assurance) {
		return t.curesOfReach(ctx, kind)
	}
	var out []string
	asked, least := t.limitsAsked(), math.Inf(1)
	for _, l := range asked {
		if f, ok := t.pull(ctx, kind, l); ok {
			out = append(out, l.words(l.value(f)))
			least = min(least, f)
		}
	}
	if len(asked) > 1 && least >= immoderate {
		if f, ok := t.pull(ctx, kind, together(asked)); ok && f < clearlyLess*least {
			out = append(out, together(asked).words(f))
		}
	}
	for _, l := range t.otherLevers() {
		if f, ok := t.pull(ctx, kind, l); ok {
			out = append(out, l.words(l.value(f)))
		}
	}
	certain, err := t.changed(func(_ *Requirement, o *operation) { o.plants = []ident.Plant{o.nominal} })
	if err == nil && certain.attains(ctx, kind) {
		out = append(out, "make a better bump test (lagwright plan): on the best fit alone the requirement holds, what fails is the spread of the plausible plants")
	}
	return out
}

// immoderate is the factor by which no limit should be eased alone without
// offering to ease all that are asked by less; clearlyLess is by how much less.
const (
	immoderate  = 3
	clearlyLess = 0.8
)

// curesOfReach lists what brings a setpoint step within reach of the input,
// with what else it takes then.
func (t *tuning) curesOfReach(ctx context.Context, kind string) []string {
	var out []string
	for _, l := range slices.Concat(t.supplyLever(), t.floorLever(), t.stepLever()) {
		f, ok := leastFactor(l.most, func(f float64) bool {
			c := t.pulled(l, f)
			return c != nil && c.plausible.reaches(t.options.Assurance)
		})
		if !ok {
			continue
		}
		switch c := t.pulled(l, f); {
		case c == nil:
		case c.attains(ctx, kind):
			out = append(out, l.words(l.value(f)))
		default:
			out = append(out, t.curesBeyondReach(ctx, kind, l, f, c)...)
		}
	}
	return out
}

// curesBeyondReach is for a lever that at a factor brings the step within
// reach, but not more: what is asked of the step has to be eased as well, or
// the lever is pulled further; what is not known to do is not said.
func (t *tuning) curesBeyondReach(ctx context.Context, kind string, l lever, f float64, reached *tuning) []string {
	if further, ok := t.pull(ctx, kind, l); ok {
		return []string{l.words(l.value(further))}
	}
	asked := reached.limitsAsked()
	if len(asked) > 1 {
		asked = append(asked, together(asked))
	}
	for _, also := range asked {
		if g, ok := reached.pull(ctx, kind, also); ok {
			words := also.words(also.value(g))
			return []string{l.words(l.value(f)) + ", so that the input reaches, and " + strings.TrimSuffix(words, allTogether) + allTogether}
		}
	}
	return nil
}

// cureOfRule offers the synthesis in place of a published rule.
func (t *tuning) cureOfRule(ctx context.Context, kind string) []string {
	own := *t
	own.options.Rule = ""
	if own.attains(ctx, kind) {
		words := "leave out --rule: gains made for this requirement meet it"
		if t.options.Controller == "p" && kind != "p" {
			words = "leave out --rule and take --controller pi: gains made for this requirement meet it, and leave no offset"
		}
		return []string{words}
	}
	return nil
}

// otherControllers names the kinds that meet the requirement as it is, where
// only one was looked at.
func (t *tuning) otherControllers(ctx context.Context, kind string) []string {
	var out []string
	for _, k := range noP {
		if t.options.Controller != "" && k != kind && t.attains(ctx, k) {
			out = append(out, fmt.Sprintf("take a %s controller (--controller %s): it meets the requirement as it is", kindWords(k), k))
		}
	}
	return out
}

// attains tells whether a controller of a kind meets the requirement.
func (t *tuning) attains(ctx context.Context, kind string) bool {
	r, err := t.designRow(ctx, kind)
	return err == nil && t.meets(r)
}

// promises is attains at a glance: whether a few plants leave anything.
func (t *tuning) promises(ctx context.Context, kind string) bool {
	s := newSearch(ctx, t.plausible.thinned(curePlants*len(t.ops)), t.ops[0].nominal, t.options.Assurance)
	s.any = true
	return s.design(kind).found && !cancelled(ctx)
}

// changed is the same tuning after a change of requirement or plants.
func (t *tuning) changed(change func(q *Requirement, o *operation)) (*tuning, error) {
	c := *t
	c.ops = slices.Clone(t.ops)
	for i := range c.ops {
		c.requirement = t.requirement
		c.ops[i].plants = slices.Clone(t.ops[i].plants)
		change(&c.requirement, &c.ops[i])
	}
	return &c, c.prepare()
}

// A lever is one thing that can be changed.
type lever struct {
	most  float64                 // largest factor of ease tried
	value func(f float64) float64 // what stands at a factor of ease ≥ 1, in round figures
	apply func(v float64, q *Requirement, o *operation)
	words func(v float64) string
}

// pulled is the tuning with a lever pulled by a factor, nil where there the
// requirement cannot be judged.
func (t *tuning) pulled(l lever, f float64) *tuning {
	c, err := t.changed(func(q *Requirement, o *operation) { l.apply(l.value(f), q, o) })
	if err != nil {
		return nil
	}
	return c
}

// pull returns about the smallest factor at which a lever helps.
func (t *tuning) pull(ctx context.Context, kind string, l lever) (f float64, ok bool) {
	f, ok = leastFactor(l.most, func(f float64) bool {
		c := t.pulled(l, f)
		return c != nil && c.promises(ctx, kind)
	})
	if !ok {
		return 0, false
	}
	for range 8 { // the few plants may have promised a little too much
		if c := t.pulled(l, f); c != nil && c.attains(ctx, kind) {
			return f, true
		}
		f = min(f*1.04, l.most)
	}
	return 0, false
}

// leastFactor finds, to 4 %, the smallest factor from 1 to most with which
// something is possible that larger factors make easier.
func leastFactor(most float64, possible func(f float64) bool) (float64, bool) {
	if !possible(most) {
		return 0, false
	}
	lo, hi := 1.0, math.Min(1.3, most)
	for hi < most && !possible(hi) {
		lo, hi = hi, math.Min(2*hi, most)
	}
	for hi/lo > 1.04 {
		if mid := math.Sqrt(lo * hi); possible(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	return hi, true
}

// roundOut rounds a positive number to two figures (three where it begins
// with a 1), away from zero or towards it.
func roundOut(v float64, up bool) float64 {
	if !(v > 0) {
		return v
	}
	unit := math.Pow(10, math.Floor(math.Log10(v))-1)
	if v < 2*math.Pow(10, math.Floor(math.Log10(v))) {
		unit /= 10
	}
	n := v / unit
	if up {
		n = math.Ceil(n - 1e-9)
	} else {
		n = math.Floor(n + 1e-9)
	}
	return math.Round(n) * unit
}

// The easiest limits worth proposing.
const (
	easiestOvershoot = 50.0 // %
	easiestDamping   = 0.2
	longestSettling  = 25.0 // times the longest integral time searched
)

// limitsAsked are the limits of the loop that the requirement holds.
func (t *tuning) limitsAsked() []lever {
	q := t.requirement
	var out []lever
	add := func(asked *float64, most float64, value func(f float64) float64, set func(q *Requirement, v *float64), words string) {
		if asked != nil && most > 1 {
			out = append(out, lever{most, value,
				func(v float64, q *Requirement, _ *operation) { set(q, &v) },
				func(v float64) string { return fmt.Sprintf(words, figure(&v, 3), figure(asked, 3)) }})
		}
	}
	if q.Settling != nil {
		longest := longestSettling * newSearch(context.Background(), t.plausible, t.ops[0].nominal, t.options.Assurance).ti[1]
		add(q.Settling, longest/(*q.Settling), func(f float64) float64 { return roundOut(*q.Settling*f, true) },
			func(q *Requirement, v *float64) { q.Settling = v }, "allow a settling time of %s s in place of %s s")
	}
	if q.Overshoot != nil {
		from := max(*q.Overshoot, 0.5)
		add(q.Overshoot, easiestOvershoot/from, func(f float64) float64 { return roundOut(from*f, true) },
			func(q *Requirement, v *float64) { q.Overshoot = v }, "allow an overshoot of %s %% in place of %s %%")
	}
	if q.Ms != nil {
		add(q.Ms, (soundMs-1)/(*q.Ms-1), func(f float64) float64 { return math.Ceil((1+(*q.Ms-1)*f)*100-1e-9) / 100 },
			func(q *Requirement, v *float64) { q.Ms = v }, "allow an Ms of %s in place of %s")
	}
	if q.Damping != nil {
		add(q.Damping, *q.Damping/easiestDamping, func(f float64) float64 { return roundOut(*q.Damping/f, false) },
			func(q *Requirement, v *float64) { q.Damping = v }, "allow a damping ratio of %s in place of %s")
	}
	return out
}

// allTogether ends the words of a cure that takes several changes at once.
const allTogether = " (together)"

// together pulls several levers by the same factor.
func together(all []lever) lever {
	most := math.Inf(1)
	for _, l := range all {
		most = min(most, l.most)
	}
	// the value is the factor itself
	return lever{most, func(f float64) float64 { return f },
		func(f float64, q *Requirement, o *operation) {
			for _, l := range all {
				l.apply(l.value(min(f, l.most)), q, o)
			}
		},
		func(f float64) string {
			words := ""
			for i, l := range all {
				if i > 0 {
					words += ", and "
				}
				words += l.words(l.value(min(f, l.most)))
			}
			return words + allTogether
		}}
}

// otherLevers are those of the plant and of the limits.
func (t *tuning) otherLevers() []lever {
	return slices.Concat(t.deadTimeLever(), t.scanLever(), t.supplyLever(), t.floorLever(), t.stepLever())
}

// The largest factors by which plant and limits are changed.
const (
	mostChange = 8.0
	leastStep  = 50.0
)

func (t *tuning) deadTimeLever() []lever {
	dead := t.ops[0].nominal.DeadTime
	if dead == 0 {
		return nil
	}
	return []lever{{mostChange, func(f float64) float64 { return roundOut(dead/f, false) },
		func(v float64, _ *Requirement, o *operation) {
			o.nominal.DeadTime *= v / dead
			for i := range o.plants {
				o.plants[i].DeadTime *= v / dead
			}
		},
		func(v float64) string {
			return fmt.Sprintf("cut the dead time from %s to %s (sensor nearer the heater, measurement less filtered)", quantity(dead, "s", 2), quantity(v, "s", 2))
		}}}
}

func (t *tuning) scanLever() []lever {
	scan := t.requirement.Scan
	if scan == 0 {
		return nil
	}
	return []lever{{mostChange, func(f float64) float64 { return roundOut(scan/f, false) },
		func(v float64, q *Requirement, _ *operation) { q.Scan = v },
		func(v float64) string {
			return fmt.Sprintf("scan every %s in place of %s", quantity(v, "s", 3), quantity(scan, "s", 3))
		}}}
}

func (t *tuning) supplyLever() []lever {
	q, o := t.requirement, t.ops[0]
	if q.InputMax == nil || o.input >= *q.InputMax {
		return nil
	}
	unit := o.card.Units.Input
	return []lever{{mostChange, func(f float64) float64 { return roundOut(o.input+f*(*q.InputMax-o.input), true) },
		func(v float64, q *Requirement, _ *operation) { q.InputMax = &v },
		func(v float64) string {
			return fmt.Sprintf("more supply: an input up to %s in place of %s", quantity(v, unit, 3), quantity(*q.InputMax, unit, 3))
		}}}
}

// floorLever lowers the least input, never below zero.
func (t *tuning) floorLever() []lever {
	q, o := t.requirement, t.ops[0]
	if q.InputMin == nil || !(*q.InputMin > 0) || o.input <= *q.InputMin {
		return nil
	}
	unit := o.card.Units.Input
	most := min(mostChange, o.input/(o.input-*q.InputMin))
	return []lever{{most, func(f float64) float64 { return max(0, roundOut(o.input-f*(o.input-*q.InputMin), false)) },
		func(v float64, q *Requirement, _ *operation) { q.InputMin = &v },
		func(v float64) string {
			return fmt.Sprintf("allow an input down to %s in place of %s", quantity(v, unit, 3), quantity(*q.InputMin, unit, 3))
		}}}
}

func (t *tuning) stepLever() []lever {
	q := t.requirement
	if q.InputMin == nil && q.InputMax == nil && q.InputRate == nil && q.TempMax == nil {
		return nil
	}
	step, unit := *q.SetpointStep, perKelvin(t.ops[0].card.Units.Temperature)
	return []lever{{leastStep, func(f float64) float64 { return math.Copysign(roundOut(math.Abs(step)/f, false), step) },
		func(v float64, q *Requirement, _ *operation) { q.SetpointStep = &v },
		func(v float64) string {
			return fmt.Sprintf("keep setpoint steps to %s in place of %s", quantity(v, unit, 3), quantity(step, unit, 3))
		}}}
}

// kindWords writes a kind of controller as people do.
func kindWords(kind string) string {
	return map[string]string{"p": "P", "pi": "PI", "pid": "PID"}[kind]
}
