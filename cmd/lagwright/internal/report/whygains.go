package report

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/tune"
)

// whyGains answers: why these gains?
func whyGains(b *Bundle) *section {
	g := b.Gains
	if g == nil {
		return nil
	}
	s := &section{ID: "gains", Title: "Why these gains?", Lead: ruleWords(g)}
	if g.Nominal != nil || g.Worst != nil {
		s.Blocks = append(s.Blocks, block{Table: metricsTable(g)})
	}
	for _, f := range LoopFigures(b.Loop, g) {
		s.Blocks = append(s.Blocks, block{Figure: picturesOf(f)})
	}
	if b.loopError != "" {
		s.Blocks = append(s.Blocks, block{Text: "The loop cannot be drawn: " + b.loopError + "."})
	}
	if t := operatingWords(g); t != "" {
		s.Blocks = append(s.Blocks, block{Text: t})
	}
	if len(g.Schedule) > 0 {
		s.Blocks = append(s.Blocks, block{Table: scheduleTable(g)})
	}
	if len(g.Candidates) > 0 {
		s.Blocks = append(s.Blocks, block{Table: candidateTable(g)})
	}
	return s
}

// operatingWords says about which input the figures were judged, and how far
// from it they hold.
func operatingWords(g *tune.Gains) string {
	s := ""
	if g.OperatingInput != nil {
		s = fmt.Sprintf("The figures are judged about an input of %s.", format.Amount(*g.OperatingInput, g.Units.Input, 4))
	}
	if h := g.HoldsOver; h != nil {
		s += fmt.Sprintf(" The requirement holds for setpoint steps that start at inputs from %s to %s, up and down.", format.Short(h[0], 4), format.Amount(h[1], g.Units.Input, 4))
	}
	return strings.TrimSpace(s)
}

// scheduleTable lists a set of gains for each card.
func scheduleTable(g *tune.Gains) *table {
	t := &table{
		Caption: "One set for each card (ideal form), and what the common set costs against it",
		Head:    []string{"Card", "Input", "Kc", "Ti", "Td", "Filter", "Load IAE of the common set", "Meets"},
	}
	kc := g.Units.Input + "/" + kelvin(g.Units.Temperature)
	for _, e := range g.Schedule {
		cost := "-"
		if e.Cost != nil {
			cost = format.Short(*e.Cost, 3) + " times"
		}
		t.Rows = append(t.Rows, []cell{
			head(e.Card), num(format.Short(e.Input[0], 4) + " to " + format.Amount(e.Input[1], g.Units.Input, 4)),
			num(format.Amount(e.Kc, kc, 4)), num(format.Optional(e.Ti, "s", 4)), num(format.Optional(e.Td, "s", 4)),
			num(format.Amount(e.Filter, "s", 3)), num(cost), yesNo(e.Meets),
		})
	}
	return t
}

// LoopFigures draws what a loop has: step and load response, sensitivity,
// poles.
func LoopFigures(l *Loop, g *tune.Gains) []*Figure {
	if l == nil {
		return nil
	}
	var out []*Figure
	if l.Step != nil {
		out = append(out, StepFigure(l.Step, g))
	}
	if l.Load != nil {
		out = append(out, LoadFigure(l.Load, g))
	}
	if l.Sensitivity != nil {
		out = append(out, SensitivityFigure(l.Sensitivity, g))
	}
	if l.Poles != nil {
		out = append(out, PoleFigure(l.Poles))
	}
	return out
}

func ruleWords(g *tune.Gains) string {
	if !g.Judged() {
		return "They were written down; no requirement has been judged for them."
	}
	if (g.Rule == "synthesis" || g.Rule == "") && g.Controller == "p" {
		return "Of the P gains that keep the requirement on the plausible plants this is the largest: it leaves the smallest offset."
	}
	if g.Rule == "synthesis" || g.Rule == "" {
		return fmt.Sprintf("Of all %s gains with a setpoint weight of 1 that keep the requirement on the plausible plants, these reject a load best (smallest IAE).", strings.ToUpper(g.Controller))
	}
	return "They come from the rule " + g.Rule + "; the plausible plants say how well it does here."
}

// metricsTable sets what was asked beside what the loop does.
func metricsTable(g *tune.Gains) *table {
	over := format.Percent(g.Assurance) + " of the plausible plants"
	if g.WorstOver > 0 { // met within the sampling error
		over = "the " + format.Percent(g.WorstOver) + " of the plausible plants that meet"
	}
	t := &table{
		Caption: "What the loop does: on the best-fit plant, and at its worst over " + over,
		Head:    []string{"Figure", "Asked", "Best fit", "Worst"},
	}
	q, u := g.Requirement, g.Units
	add := func(name, asked string, pick func(*tune.Metrics) *float64, write func(*float64) string) {
		n, w := metric(g.Nominal, pick), metric(g.Worst, pick)
		if n == nil && w == nil && asked == "" {
			return
		}
		t.Rows = append(t.Rows, []cell{head(name), text(dash(asked)), num(write(n)), num(write(w))})
	}
	row := func(name, unit, asked string, pick func(*tune.Metrics) *float64) {
		add(name, asked, pick, func(v *float64) string { return format.Optional(v, unit, 3) })
	}
	most := func(v *float64, unit string) string { return bound("at most ", v, unit) }
	asked := ""
	if q.Settling != nil {
		asked = "at most " + format.Duration(*q.Settling)
	}
	add("Settling", asked, func(m *tune.Metrics) *float64 { return m.Settling }, durationOrDash)
	row("Overshoot", "%", most(q.Overshoot, "%"), func(m *tune.Metrics) *float64 { return m.Overshoot })
	row("Damping ratio", "", bound("at least ", q.Damping, ""), func(m *tune.Metrics) *float64 { return m.Damping })
	row("Peak sensitivity Ms", "", most(q.Ms, ""), func(m *tune.Metrics) *float64 { return m.Ms })
	row("Gain margin", "", "", func(m *tune.Metrics) *float64 { return m.GainMargin })
	row("Phase margin", "°", "", func(m *tune.Metrics) *float64 { return m.PhaseMargin })
	add("Delay margin", "", func(m *tune.Metrics) *float64 { return m.DelayMargin }, durationOrDash)
	row("Peak input", u.Input, most(q.InputMax, u.Input), func(m *tune.Metrics) *float64 { return m.PeakInput })
	row("Steady offset", kelvin(u.Temperature), "", func(m *tune.Metrics) *float64 { return m.SteadyOffset })
	row("IAE after a unit load", strings.TrimSuffix(kelvin(u.Temperature)+"·s/"+u.Input, "/"), "", func(m *tune.Metrics) *float64 { return m.IAE })
	return t
}

func metric(m *tune.Metrics, pick func(*tune.Metrics) *float64) *float64 {
	if m == nil {
		return nil
	}
	return pick(m)
}

func durationOrDash(seconds *float64) string {
	if seconds == nil {
		return "-"
	}
	return format.Duration(*seconds)
}

func bound(word string, v *float64, unit string) string {
	if v == nil {
		return ""
	}
	return word + format.Amount(*v, unit, 4)
}

func dash(s string) string {
	if s == "" {
		return "-"
	}
	return s
}

// mostCandidates is the number of controllers tried that a page lists.
const mostCandidates = 12

// candidateTable lists the chosen controller, those that meet the requirement
// and those that come nearest.
func candidateTable(g *tune.Gains) *table {
	t := &table{
		Caption: "Controllers tried: the chosen one, those that meet the requirement, those that come near it; settling, overshoot, Ms and IAE at the worst over the assured share of plants; b is the setpoint weight",
		Head:    []string{"Rule", "Kc, " + g.Units.Input + "/" + kelvin(g.Units.Temperature), "Ti, s", "Td, s", "b", "Settles, s", "Over, %", "Ms", "IAE", "Share", "Meets"},
	}
	best := slices.Clone(g.Candidates)
	slices.SortStableFunc(best, func(a, b tune.Candidate) int { return cmp.Compare(rank(b), rank(a)) })
	if len(best) > mostCandidates {
		t.More = len(best) - mostCandidates
		best = best[:mostCandidates]
	}
	for i := range best {
		t.Rows = append(t.Rows, candidateRow(&best[i]))
	}
	return t
}

// rank orders candidates: chosen, meeting, then by their share of plants.
func rank(c tune.Candidate) float64 {
	r := c.Share
	if c.Meets {
		r += 2
	}
	if c.Selected {
		r += 4
	}
	return r
}

func candidateRow(c *tune.Candidate) []cell {
	m := c.Worst
	if m == nil {
		m = c.Nominal
	}
	if m == nil {
		m = &tune.Metrics{}
	}
	name := strings.TrimSpace(c.Rule + " " + strings.ToUpper(c.Controller))
	if c.Selected {
		name += " (chosen)"
	}
	return []cell{
		{Text: name, Small: c.Note, Header: true}, num(format.Amount(c.Kc, "", 3)),
		num(format.Optional(c.Ti, "", 3)), num(format.Optional(c.Td, "", 3)), num(format.Optional(c.SetpointWeight, "", 3)),
		num(format.Optional(m.Settling, "", 3)), num(format.Optional(m.Overshoot, "", 3)), num(format.Optional(m.Ms, "", 3)),
		num(format.Optional(m.IAE, "", 3)), num(format.Percent(c.Share)), yesNo(c.Meets),
	}
}
