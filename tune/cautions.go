package tune

import (
	"fmt"
	"math"
	"slices"

	"lagwright/fit"
)

// CautionStart goes with every set of gains. Common practice, no source.
const CautionStart = "Start new gains with the output limited and a small setpoint step; stay with the heater, ready to switch to manual."

// soundMs is the largest peak sensitivity that passes without a word: sound
// loops have 1.2 to 2 (Åström and Hägglund, Advanced PID Control, 2006, from
// memory).
const soundMs = 2.0

// cautions go with every set of gains.
func (t *tuning) cautions(g *Gains) []string {
	var c []string
	// First what the answer above may hide.
	if w := g.Worst; w != nil && w.Ms != nil && *w.Ms > soundMs {
		share := g.Assurance
		if g.WorstOver > 0 {
			share = g.WorstOver
		}
		c = append(c, fmt.Sprintf("Small margins: Ms is %s on the plausible plant at %.3g %%; up to %.0f is usual. Ask for --ms %.1f.",
			figure(w.Ms, 3), 100*share, soundMs, usualMs))
	}
	if n := g.Nominal; g.Controller == "p" && n != nil && n.SteadyOffset != nil && g.Requirement.SetpointStep != nil {
		unit := perKelvin(t.units().Temperature)
		c = append(c, fmt.Sprintf("P control leaves an offset: a setpoint step of %s ends %s away from the setpoint, on the best fit.",
			quantity(*g.Requirement.SetpointStep, unit, 2), quantity(math.Abs(*n.SteadyOffset), unit, 2)))
	}
	if words := g.betweenScans(); words != "" {
		c = append(c, words)
	}
	c = append(c, t.inFahrenheit(g)...)
	c = append(c, fit.CautionCutOut, fit.CautionSheath, CautionStart)
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
			top = math.Ceil(10*top-1e-6) / 10 // never said to be cooler than it is
		} else {
			top = math.Floor(10*top+1e-6) / 10
		}
		c = append(c, fmt.Sprintf("A setpoint step of %s from about %s may reach %s.", quantity(*s, perKelvin(unit), 2), quantity(from, unit, 3), quantity(top, unit, 4)))
	}
	if words := t.beyondTheLog(g); words != "" {
		c = append(c, words)
	}
	if words := g.summing(); words != "" {
		c = append(c, words)
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

// betterBy is the part of the synthesis's load IAE below which that of a published rule is
// worth a word.
const betterBy = 0.9

// betterRule names the published rule that meets the requirement with the same controller
// and a load IAE well below that of the synthesis, which weighs the setpoint in full: with less
// of it the setpoint step leaves room for more gain.
func (g *Gains) betterRule() string {
	if g.Rule != synthesised || !g.Meets || g.Nominal == nil || g.Nominal.IAE == nil {
		return ""
	}
	least := betterBy * *g.Nominal.IAE
	var best *Candidate
	for i := range g.Candidates {
		c := &g.Candidates[i]
		if c.Meets && !c.Selected && c.Controller == g.Controller && c.SetpointWeight != nil && *c.SetpointWeight < 1 &&
			c.Nominal != nil && c.Nominal.IAE != nil && *c.Nominal.IAE < least {
			best, least = c, *c.Nominal.IAE
		}
	}
	if best == nil {
		return ""
	}
	return fmt.Sprintf("The rule %s meets the requirement too and rejects a load better (IAE %s against %s), with a setpoint weight of %s: where the controller has one, look at it with --rule %s.",
		best.Rule, figure(best.Nominal.IAE, 3), figure(g.Nominal.IAE, 3), figure(best.SetpointWeight, 2), best.Rule)
}

// longScan is the part of the settling time from which a scan more or less is
// worth a word.
const longScan = 0.05

// betweenScans says that settling is counted from a setpoint moved at a scan,
// where the scan is long against the settling time found or asked.
func (g *Gains) betweenScans() string {
	shortest := math.Inf(1)
	if q := g.Requirement.Settling; q != nil {
		shortest = *q
	}
	for _, m := range []*Metrics{g.Worst, g.Nominal} {
		if m != nil && m.Settling != nil {
			shortest = min(shortest, *m.Settling)
		}
	}
	if g.Scan <= longScan*shortest || math.IsInf(shortest, 1) {
		return ""
	}
	return fmt.Sprintf("Settling is counted from a setpoint moved at a scan; moved between scans it may take up to %s longer.", duration(g.Scan, 3))
}

// inFahrenheit gives the gain in the degrees of a log in °F.
func (t *tuning) inFahrenheit(g *Gains) []string {
	for _, o := range t.ops {
		if slices.ContainsFunc(o.card.Warnings, func(w fit.Warning) bool { return w.Code == "fahrenheit" }) {
			gain := g.Kc / 1.8
			return []string{fmt.Sprintf("The log is in °F, and these gains are for a controller that works in °C: one that works in °F needs a gain of %s %s/°F.",
				figure(&gain, 4), unitWords(g.Units.Input))}
		}
	}
	return nil
}

// beyondTheLog says that a step drives the input to where the log has not
// been, and whether a limit was given that could have kept it from there.
func (t *tuning) beyondTheLog(g *Gains) string {
	if g.Worst == nil || g.Worst.PeakInput == nil {
		return ""
	}
	peak, unit := *g.Worst.PeakInput, g.Units.Input
	low, high := math.Inf(1), math.Inf(-1)
	for _, o := range t.ops {
		low, high = min(low, o.card.Range.Input[0]), max(high, o.card.Range.Input[1])
	}
	flag, limit := "--input-max", g.Limits.Max
	shown := 0.005 * (high - low) // less does not show in the figures
	switch {
	case peak > high+shown:
	case peak < low-shown:
		flag, limit = "--input-min", g.Limits.Min
	default:
		return ""
	}
	step := quantity(*g.Requirement.SetpointStep, perKelvin(g.Units.Temperature), 2)
	to := fmt.Sprintf("%s, the log has it from %s to %s.", quantity(peak, unit, 3), figure(&low, 3), quantity(high, unit, 3))
	if limit == nil {
		return fmt.Sprintf("No %s was given, so the input is taken as unlimited: the setpoint step of %s drives it to %s Give the drive's limits.", flag, step, to)
	}
	return fmt.Sprintf("The setpoint step of %s drives the input to %s What the heater does beyond is not known from it.", step, to)
}
