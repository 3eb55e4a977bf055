package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// answer is the top of the page: what to do, and how sure.
type answer struct {
	Headline   string
	EnterTitle string
	Enter      []setting
	Verdict    *item
	Doubts     []doubt
	Sure       []string
	Reasons    []string // what fails, and by how much
	Cures      []string // what would let it hold
}

func answerOf(b *Bundle) answer {
	switch {
	case b.Gains != nil:
		return gainsAnswer(b)
	case b.Replay != nil:
		return replayAnswer(b)
	case b.Card != nil:
		return cardAnswer(b)
	case b.Drift != nil:
		return driftAnswer(b.Drift)
	}
	return logAnswer(b)
}

func gainsAnswer(b *Bundle) answer {
	g := b.Gains
	a := answer{
		EnterTitle: fmt.Sprintf("%s controller, %s form", strings.ToUpper(g.Controller), g.Form),
		Enter:      settings(g, b.fahrenheit()),
		Reasons:    g.Reasons, Cures: g.Cures,
	}
	a.Headline, a.Verdict = gainsVerdict(g, b.Replay)
	a.withDoubts(b, g)
	if g.Judged() {
		a.Sure = append(a.Sure, "Asked: "+requirementWords(g.Requirement, g.Units)+".", sharePhrase(g))
	}
	if words := offsetPhrase(g); words != "" {
		a.Sure = append(a.Sure, words)
	}
	if b.Replay != nil {
		a.Sure = append(a.Sure, replayPhrase(b.Replay))
	}
	if m := b.model(); m != nil {
		a.Sure = append(a.Sure, heaterPhrase(b.Card, m))
	}
	switch {
	case g.Unstable():
		a.Sure = append(a.Sure, "Do not enter them. The cautions below come first.")
	case g.Meets || !g.Judged():
		a.Sure = append(a.Sure, "Begin with the output limited and a small setpoint step. The cautions below come first.")
	default:
		a.Sure = append(a.Sure, "Enter them only if what fails can be lived with. The cautions below come first.")
	}
	return a
}

// enterThese is the headline of gains that meet everything.
const enterThese = "Enter these gains"

// gainsVerdict weighs the plausible plants first, then the past runs.
func gainsVerdict(g *tune.Gains, r *validate.Replay) (headline string, verdict *item) {
	switch {
	case !g.Judged():
		return "Gains as they were written down", nil
	case g.Unstable():
		return "Do not enter these gains", &item{"bad", "With them the loop would be unstable on plausible plants."}
	case !g.Meets && g.Rule == "synthesis":
		return "No gains meet the requirement; these come nearest", &item{"bad", "They do not meet the requirement."}
	case !g.Meets:
		return "These gains do not meet the requirement", &item{"bad", "They do not meet the requirement."}
	case r != nil && !reproduced(r):
		return "These gains are not proven on past runs", &item{"bad", "They meet the requirement on the plausible plants, but " + unproven(r) + "."}
	case r != nil && r.Summary.Judged > 0 && !r.Summary.Meets:
		return "These gains do not hold on every past run", &item{"bad", "They meet the requirement on the plausible plants, but not on every replayed run."}
	}
	return enterThese, &item{"good", "They meet the requirement."}
}

// reproduced tells whether every back-test gave the log back.
func reproduced(r *validate.Replay) bool {
	for i := range r.Runs {
		if t := r.Runs[i].BackTest; t != nil && !t.Reproduced {
			return false
		}
	}
	return true
}

// undecided tells whether a run that should show the requirement could not be judged.
func undecided(r *validate.Replay) bool {
	return slices.ContainsFunc(r.Runs, func(run validate.RunReplay) bool { return run.Undecided() })
}

// unproven names the side that past runs speak against: the model, which every
// replay rests on, or only the gains said to be in force then.
func unproven(r *validate.Replay) string {
	for i := range r.Runs {
		if t := r.Runs[i].BackTest; t != nil && !t.Reproduced && !t.Plant {
			return "the model does not give the temperature of every run logged under known gains"
		}
	}
	return "the gains said to be in force do not give the logged input of every run; the temperatures speak for the model"
}

// offsetPhrase says what a requirement of settling and overshoot does not show:
// where a P controller comes to rest.
func offsetPhrase(g *tune.Gains) string {
	m, step := g.Nominal, g.Requirement.SetpointStep
	if g.Controller != "p" || m == nil || m.SteadyOffset == nil || step == nil || *m.SteadyOffset == 0 {
		return ""
	}
	unit := kelvin(g.Units.Temperature)
	return fmt.Sprintf("Mind the offset: under P control a setpoint step of %s ends %s away from the setpoint, on the best fit; settling and overshoot are told from there.",
		format.Amount(*step, unit, 2), format.Amount(math.Abs(*m.SteadyOffset), unit, 2))
}

func sharePhrase(g *tune.Gains) string {
	s := fmt.Sprintf("How sure: the requirement holds on %s of the plausible plants, the heaters that the log cannot rule out",
		format.Percent(g.ShareMeeting))
	if g.Assurance > 0 {
		s += fmt.Sprintf("; %s were asked for", format.Percent(g.Assurance))
		if g.Meets && g.ShareMeeting < g.Assurance {
			s += ", and the difference is within the error of the sample"
		}
	}
	return s + "."
}

func replayPhrase(r *validate.Replay) string {
	n := r.Summary
	s := fmt.Sprintf("Replayed on %s: ", format.Count(n.Runs, "past run", "past runs"))
	switch {
	case n.Judged == 0 && undecided(r):
		s += "the requirement could not be judged"
	case n.Judged == 0 && n.Runs == 1:
		s += "it shows nothing that the requirement asks for"
	case n.Judged == 0:
		s += "none shows anything that the requirement asks for"
	case n.Runs == 1 && n.Meeting == 1:
		s += "the requirement holds"
	case n.Runs == 1:
		s += "the requirement does not hold"
	case n.Judged < n.Runs:
		s += fmt.Sprintf("the requirement holds on %d of the %d that can be judged", n.Meeting, n.Judged)
	default:
		s += fmt.Sprintf("the requirement holds on %d", n.Meeting)
	}
	if n.Distrusted > 0 {
		s += fmt.Sprintf("; %s logged under known gains not reproduced", format.Count(n.Distrusted, "run", "runs"))
	}
	if r.Summary.Failed > 0 {
		s += fmt.Sprintf("; %s could not be replayed", format.Count(r.Summary.Failed, "log", "logs"))
	}
	return s + "."
}

func heaterPhrase(c *fit.Card, m *fit.Model) string {
	var parts []string
	for _, p := range m.Parameters {
		if p.Name == "baseline" || p.Name == "drift" {
			continue
		}
		parts = append(parts, strings.ToLower(parameterName(p.Name))+" = "+format.Value(p.Value, p.Low, p.High, p.Unit))
	}
	return fmt.Sprintf("The heater (%s, %s intervals): %s.", m.Structure, format.Percent(c.Confidence), strings.Join(parts, ", "))
}

func replayAnswer(b *Bundle) answer {
	r := b.Replay
	a := answer{
		EnterTitle: fmt.Sprintf("%s controller, %s form, as replayed", strings.ToUpper(r.Gains.Controller), r.Gains.Form),
		Enter:      settings(&r.Gains, b.fahrenheit()),
		Sure:       []string{"Asked: " + requirementWords(r.Requirement, r.Gains.Units) + ".", replayPhrase(r)},
	}
	switch {
	case r.Summary.Judged == 0 && (reproduced(r) || !undecided(r)):
		a.Headline = "These runs cannot judge the requirement"
	case r.Summary.Meets && reproduced(r):
		a.Headline = "These gains would have met the requirement"
		a.Verdict = &item{"good", "The requirement holds on every run that can be judged."}
	case r.Summary.Judged == 0 || r.Summary.Meets:
		a.Headline = "These gains are not proven on past runs"
		a.Verdict = &item{"bad", sentenceCase(unproven(r)) + "."}
	default:
		a.Headline = "These gains would not have met the requirement"
		a.Verdict = &item{"bad", "The requirement does not hold on every run."}
	}
	return a
}

func cardAnswer(b *Bundle) answer {
	a := answer{Headline: "The heater is measured; no gains are computed yet"}
	if m := b.model(); m != nil {
		a.Sure = []string{heaterPhrase(b.Card, m)}
	}
	if n := len(b.Card.Warnings); n > 0 {
		a.Sure = append(a.Sure, fmt.Sprintf("%s limit what this card can be used for; they are listed below.", format.Count(n, "warning", "warnings")))
	}
	return a
}

func driftAnswer(d *validate.Drift) answer {
	a := answer{Headline: "No drift is seen", Sure: []string{driftLead(d)}}
	if d.Alarm {
		a.Headline = "The heater has changed"
	}
	for _, p := range d.Parameters {
		if p.Alarm {
			a.Reasons = append(a.Reasons, p.Text)
		}
	}
	return a
}

func logAnswer(b *Bundle) answer {
	if len(b.Runs) == 0 {
		return answer{Headline: "There is nothing in this report"}
	}
	return answer{Headline: "What is in the log", Sure: []string{"No model has been fitted."}}
}

// requirementWords says a requirement in one clause.
func requirementWords(q tune.Requirement, u tune.GainUnits) string {
	rows := requirementRows(q, u)
	if len(rows) == 0 {
		return "peak sensitivity held, nothing else asked"
	}
	parts := make([]string, len(rows))
	for i, r := range rows {
		parts[i] = strings.ToLower(r.Name[:1]) + r.Name[1:] + " " + r.Value
	}
	return strings.ReplaceAll(strings.Join(parts, ", "), "ms at", "Ms at")
}

// requirementRows lists what a requirement asks, with its numbers.
func requirementRows(q tune.Requirement, u tune.GainUnits) []setting {
	var rows []setting
	add := func(name, before string, v *float64, unit, after string) {
		if v != nil {
			rows = append(rows, setting{name, before + format.Amount(*v, unit, 4) + after})
		}
	}
	if q.Settling != nil {
		rows = append(rows, setting{"Settling", fmt.Sprintf("within %s to ±%s", format.Duration(*q.Settling), format.Percent(settlingBand(q)))})
	}
	add("Overshoot", "at most ", q.Overshoot, "%", "")
	add("Damping ratio", "at least ", q.Damping, "", "")
	add("Ms", "at most ", q.Ms, "", "")
	add("Input", "not below ", q.InputMin, u.Input, "")
	add("Input", "not above ", q.InputMax, u.Input, "")
	add("Input rate", "at most ", q.InputRate, u.Input+"/s", "")
	add("Temperature", "never above ", q.TempMax, u.Temperature, "")
	return rows
}
