package validate

import (
	"context"
	"fmt"
	"math"

	"lagwright/ident"
	"lagwright/tune"
)

// A loopCheck says what is wrong with the proposed loop itself, whatever the
// run: a recording may be too short, too quiet or too far inside the input's
// limits to show that a loop swings up.
type loopCheck struct {
	misses  []bool   // by plant: unstable, or a figure of the loop missed on too many plants
	fails   bool     // on too many plants for any run to meet the requirement
	reasons []string // in words
}

// checkLoop analyses the loop on every plausible plant. Under the power law
// the plants' gains are those at the input that the gains were tuned for, else
// at the upper end of the card's range, where they are highest.
func (p *plan) checkLoop() loopCheck {
	slope := p.law.Slope(p.operatingInput())
	figures := make([]tune.LoopFigures, len(p.plants))
	analyse := func(_, k int) error {
		plant := p.plants[k]
		plant.Gain *= slope
		figures[k] = tune.Analyse(plant, p.gains)
		return nil
	}
	_ = share(context.Background(), len(figures), p.options.Workers, nil, analyse) // never fails
	c := loopCheck{misses: make([]bool, len(figures))}
	// count marks the plants that miss; fails when there are too many of them
	count := func(miss func(tune.LoopFigures) bool, certain bool) int {
		var at []int
		for k, f := range figures {
			if miss(f) {
				at = append(at, k)
			}
		}
		tooMany := len(at) > p.allowedMisses(len(figures))
		if c.fails = c.fails || tooMany; !tooMany && !certain {
			return 0
		}
		for _, k := range at {
			c.misses[k] = true
		}
		return len(at)
	}
	say := func(n int, format string, args ...any) {
		if n > 0 {
			c.reasons = append(c.reasons, fmt.Sprintf(format+" on %d of %d plausible plants", append(args, n, len(figures))...))
		}
	}
	r := p.options.Requirement
	say(count(func(f tune.LoopFigures) bool { return !f.Stable }, true), "the loop is unstable")
	if p.wrongWay(p.gains) {
		c.reasons = append(c.reasons, "the gains act the wrong way for this heater")
	}
	if r.Ms != nil {
		say(count(func(f tune.LoopFigures) bool { return f.Stable && f.Ms > *r.Ms*(1+loopSlack) }, false), "Ms is above the %s asked", number(*r.Ms))
	}
	if r.Damping != nil {
		say(count(func(f tune.LoopFigures) bool {
			return f.Stable && f.Poles != nil && f.Damping < *r.Damping*(1-loopSlack)
		}, false), "the damping ratio is below the %s asked", number(*r.Damping))
	}
	p.checkNominal(&c)
	return c
}

// checkNominal compares what is asked with what the gains file says of a
// setpoint step on the best-fit plant. The setpoint moves of a recording may be
// smaller than that step and so stay clear of limits it runs into, or there may
// be none: what the gains are known to miss must not pass by that.
func (p *plan) checkNominal(c *loopCheck) {
	n, r := p.gains.Nominal, p.options.Requirement
	if n == nil || !n.Stable {
		return
	}
	miss := func(figure, limit *float64, format, unit string) {
		if figure == nil || limit == nil || *figure <= *limit*(1+loopSlack)+1e-9 {
			return
		}
		c.fails = true
		c.reasons = append(c.reasons, fmt.Sprintf("without noise or load, on the best-fit plant, "+format+", by the gains file itself", quantity(*figure, unit), quantity(*limit, unit)))
	}
	miss(n.Settling, r.Settling, "a setpoint step settles in %s where %s is asked", "s")
	miss(n.Overshoot, r.Overshoot, "a setpoint step overshoots by %s where %s is asked", "%")
}

// loopSlack is what a figure of the loop may pass its limit by, in parts: the
// accuracy to which gains are tuned.
const loopSlack = 1e-3

// allowedMisses is how many of n plants may miss a figure of the loop: what
// the assurance leaves, and twice the sampling error of so many plants, as
// gains are judged when they are tuned.
func (p *plan) allowedMisses(n int) int {
	a := p.assurance()
	return int((1-a+2*math.Sqrt(a*(1-a)/float64(n)))*float64(n) + 1e-9)
}

func (p *plan) operatingInput() float64 {
	switch {
	case p.law != ident.Power:
		return 0 // any: the slope is 1
	case p.gains.OperatingInput != nil:
		return *p.gains.OperatingInput
	}
	return max(math.Abs(p.card.Range.Input[0]), math.Abs(p.card.Range.Input[1]))
}
