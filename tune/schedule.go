package tune

import (
	"context"
	"fmt"

	"lagwright/fit"
)

// schedule compares one set for all cards with a set for each, and proposes
// the sets where the one costs too much load IAE.
func (t *tuning) schedule(ctx context.Context, g *Gains) {
	limit := t.options.ScheduleFactor
	if limit == 0 {
		limit = 1.5
	}
	common, err := g.law()
	if err != nil || !common.integral() {
		return
	}
	var entries []ScheduleEntry
	worst := 0.0
	for card, o := range t.ops {
		e := t.ofCard(card)
		d := newSearch(ctx, e, o.nominal, t.options.Assurance).design(g.Controller)
		entry := ScheduleEntry{Card: label(o.card), Input: o.card.Range.Input, Kc: d.law.kc, Ti: finite(d.law.ti), Filter: d.law.tf, Meets: d.found}
		if g.Controller == "pid" {
			entry.Td = finite(d.law.td)
		}
		if d.found {
			cost := e.loadIAE(common, iaeSample, searchStep) / d.iae
			entry.Cost = finite(cost)
			worst = max(worst, cost)
		}
		entries = append(entries, entry)
	}
	switch {
	case !g.Meets:
		g.Reasons = append(g.Reasons, fmt.Sprintf("no one set for all %d cards was found: see the schedule for a set for each", len(t.ops)))
	case worst > limit:
		g.Reasons = append(g.Reasons, fmt.Sprintf("one set for all %d cards costs up to %.2f times the load IAE of a set for each: see the schedule", len(t.ops), worst))
	default:
		return
	}
	g.Schedule = entries
}

func label(c *fit.Card) string {
	if len(c.Source) == 0 {
		return ""
	}
	return c.Source[0].File
}
