package validate

import (
	"fmt"
	"math"
	"slices"

	"lagwright/data"
)

// Why a run in which the setpoint moved is not judged, in words.
const (
	tooShort = "the record ends before the settling time asked: not judged"
	untested = "the back-test speaks against the model here: not judged"
)

// conclude writes metrics with their bands, and the verdict. A run in which no
// setpoint was followed is judged only if the loop itself is not sound.
func (p *plan) conclude(out *RunReplay, run *data.Run, e *ensemble) {
	out.Proposed, out.WithNoise = bandMetrics(e.figures, p.options.Confidence), withNoise(e.figures)
	missing := p.missing(e.figures)
	asked, unfollowed := p.asked, p.unfollowed(run)
	if unfollowed != "" && len(asked) > 0 {
		asked, missing = nil, nil
		out.Reasons = append(out.Reasons, "not judged: "+unfollowed)
	}
	cold := p.impossible(e.figures)
	fails := p.loop.fails || cold.fails
	out.Judged = len(missing) < len(asked) || fails
	share, open, reasons := judge(asked, e.figures, either(p.loop.misses, cold.misses), p.assurance())
	out.Reasons = slices.Concat(out.Reasons, p.loop.reasons, cold.reasons, reasons)
	passes := p.enough(share) && !fails
	why := p.undecided(out, share-open)
	if passes && why != "" {
		out.Judged = false
		out.Reasons = append(out.Reasons, why)
		return
	}
	if len(missing) > 0 {
		out.Reasons = append(out.Reasons, fmt.Sprintf("not judged on this run: %s", list(missing)))
	}
	if out.Judged || len(p.asked) == 0 {
		out.Probability, out.Meets = share, passes
	}
	if short := p.assurance() - share; out.Judged && out.Meets && short > 1e-9 {
		out.Reasons = append(out.Reasons, fmt.Sprintf("%s are asked: short by no more than twice the sampling error of %d plants, which passes", percent(p.assurance()), len(p.plants)))
	}
}

// missing names the demands that a run has no figure for.
func (p *plan) missing(all []figures) []string {
	out, typical := []string{}, p.typical(all)
	for _, d := range p.asked {
		if math.IsNaN(d.figure(typical)) {
			out = append(out, d.name)
		}
	}
	return out
}

// undecided says why a run in which nothing fails still does not meet: too few
// plants are seen to meet, or the model is not to be trusted there; "" where it
// meets. What fails is not excused by this.
func (p *plan) undecided(out *RunReplay, seen float64) string {
	switch {
	case out.Judged && out.BackTest != nil && !out.BackTest.Plant:
		return untested
	case !p.enough(seen):
		return tooShort
	}
	return ""
}

// Undecided tells a run in which nothing fails and which is not judged all the
// same, though it should show what is asked: its record ends too early, or the
// back-test speaks against the model.
func (r *RunReplay) Undecided() bool {
	return !r.Judged && (slices.Contains(r.Reasons, tooShort) || slices.Contains(r.Reasons, untested))
}

// impossible marks the plants on which the replayed temperature falls below
// absolute zero: whatever is asked, model and gains are not those of a heater.
func (p *plan) impossible(all []figures) loopCheck {
	c := loopCheck{misses: make([]bool, len(all))}
	zero, known := absoluteZero[p.units.temperature]
	if !known {
		return c
	}
	count, lowest := 0, zero
	for k, f := range all {
		if f.moves == runaway || !(f.lowTemp < zero) {
			continue // running away fails by itself
		}
		c.misses[k] = true
		count++
		lowest = min(lowest, f.lowTemp)
	}
	c.fails = count > p.allowedMisses(len(all))
	if count > 0 {
		c.reasons = []string{fmt.Sprintf("the replayed temperature falls to %s, below absolute zero, on %d of %d plausible plants: these gains and this model are not those of this heater",
			quantity(lowest, p.units.temperature), count, len(all))}
	}
	return c
}

// absoluteZero by the unit of a card.
var absoluteZero = map[string]float64{"degC": -273.15, "degF": -459.67, "K": 0}

// either tells where one of two is true.
func either(a, b []bool) []bool {
	out := slices.Clone(a)
	for i := range out {
		out[i] = out[i] || b[i]
	}
	return out
}

// enough tells whether a share of the plants holds the requirement on as many
// as the assurance asks, as gains are judged when they are tuned.
func (p *plan) enough(share float64) bool {
	n := len(p.plants)
	return (1-share)*float64(n) <= float64(p.allowedMisses(n))+1e-9
}

// assurance is the share of plants on which a run must meet the requirement.
func (p *plan) assurance() float64 {
	if p.gains.Assurance > 0 {
		return p.gains.Assurance
	}
	return 0.95
}
