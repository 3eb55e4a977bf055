package report

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/validate"
)

// replayed answers: what would these gains have done?
func replayed(b *Bundle) *section {
	r := b.Replay
	if r == nil {
		return nil
	}
	s := &section{ID: "replay", Title: "What would they have done?", Lead: replayPhrase(r)}
	if back := backTests(r); len(back) > 0 {
		s.Blocks = append(s.Blocks, block{Heading: "Does the model reproduce what was logged under known gains?", List: listOf(back)})
	}
	for _, run := range worthDrawing(r) {
		s.Blocks = append(s.Blocks, block{Figure: picturesOf(ReplayFigure(run, &r.Gains, r.Requirement))})
	}
	if len(r.Runs) > 0 {
		s.Blocks = append(s.Blocks, block{Table: replayTable(r)})
	}
	return s
}

// worthDrawing are the runs with a trace on which the gains do worst.
func worthDrawing(r *validate.Replay) []*validate.RunReplay {
	var out []*validate.RunReplay
	for i := range r.Runs {
		if t := r.Runs[i].Trace; t != nil && len(t.T) > 1 {
			out = append(out, &r.Runs[i])
		}
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].Probability < out[j].Probability })
	return out[:min(len(out), mostDrawn)]
}

func backTests(r *validate.Replay) []item {
	var out []item
	for i := range r.Runs {
		run := &r.Runs[i]
		t := run.BackTest
		if t == nil {
			continue
		}
		if t.Reproduced && len(t.Differs) > 0 {
			out = append(out, item{"warn", fmt.Sprintf("%s: nothing speaks against it; %s.", runName(run), strings.Join(t.Differs, "; "))})
			continue
		}
		if t.Reproduced {
			out = append(out, item{"good", fmt.Sprintf("%s: yes, %s.", runName(run), insideBand(t))})
			continue
		}
		out = append(out, item{"bad", fmt.Sprintf("%s: no. %s", runName(run), strings.Join(sides(t), " "))})
		for _, d := range t.Differs {
			out = append(out, item{"bad", d})
		}
	}
	return out
}

func insideBand(t *validate.BackTest) string {
	return fmt.Sprintf("%s of the samples lie inside the %s band", format.Percent(t.ShareInside), format.Percent(t.Stated))
}

// sides says of each side that was tested whether the run speaks against it.
func sides(t *validate.BackTest) []string {
	temperature := fmt.Sprintf("Temperature side: it fails, %s. Do not believe this replay.", insideBand(t))
	if t.Plant {
		temperature = fmt.Sprintf("Temperature side: nothing speaks against the model, %s.", insideBand(t))
	}
	if t.Controller == nil || t.InputInside == nil {
		return []string{temperature}
	}
	input := fmt.Sprintf("the input that the logged gains give meets the logged one on %s of the rows", format.Percent(*t.InputInside))
	if *t.Controller {
		return []string{temperature, "Controller side: it passes, " + input + "."}
	}
	return []string{temperature, "Controller side: it fails, " + input + "; look at the gains said to be in force."}
}

// A replayColumn is a figure of the table of runs.
type replayColumn struct {
	name, unit string
	pick       func(*validate.RunMetrics) *float64
}

// replayColumns are the first four that some run has, as many as paper is wide:
// settling and overshoot need a setpoint move.
func replayColumns(r *validate.Replay) []replayColumn {
	unit := kelvin(r.Gains.Units.Temperature)
	all := []replayColumn{
		{"Settling", "s", func(m *validate.RunMetrics) *float64 { return m.Settling }},
		{"Overshoot", "%", func(m *validate.RunMetrics) *float64 { return m.Overshoot }},
		{"Largest deviation", unit, func(m *validate.RunMetrics) *float64 { return m.Deviation }},
		{"Peak temperature", r.Gains.Units.Temperature, func(m *validate.RunMetrics) *float64 { return m.PeakTemp }},
		{"IAE", unit + "·s", func(m *validate.RunMetrics) *float64 { return m.IAE }},
		{"Peak input", r.Gains.Units.Input, func(m *validate.RunMetrics) *float64 { return m.PeakInput }},
	}
	all = slices.DeleteFunc(all, func(c replayColumn) bool {
		return !slices.ContainsFunc(r.Runs, func(run validate.RunReplay) bool {
			return c.pick(&run.Proposed.Median) != nil || c.pick(&run.Logged) != nil
		})
	})
	return all[:min(4, len(all))]
}

func replayTable(r *validate.Replay) *table {
	columns := replayColumns(r)
	t := &table{Caption: fmt.Sprintf("Run by run: logged → proposed (median; below it the two-sided %s band over the plausible plants)", format.Percent(r.Confidence)), Head: []string{"Run"}}
	for _, c := range columns {
		t.Head = append(t.Head, c.name)
	}
	if len(columns) > 0 && columns[0].name == "Settling" {
		t.Caption += "; settling and overshoot as proposed are those of the setpoint moves, without noise and loads"
	}
	if slices.ContainsFunc(r.Runs, func(run validate.RunReplay) bool { return run.OneSided() }) {
		t.Caption += "; \"up to\" under what to watch for is one-sided and lies inside the band's end"
	}
	t.Head = append(t.Head, "Holds on", "Meets")
	for i := range r.Runs {
		if i == longestList {
			t.More = len(r.Runs) - longestList
			break
		}
		run := &r.Runs[i]
		row := []cell{head(runName(run))}
		for _, c := range columns {
			row = append(row, beforeAfter(run, c.pick, c.unit))
		}
		share := "-"
		if run.Judged {
			share = format.Percent(run.Probability)
		}
		t.Rows = append(t.Rows, append(row, num(share), judged(run)))
	}
	return t
}

func judged(r *validate.RunReplay) cell {
	if !r.Judged {
		return text("not judged")
	}
	return yesNo(r.Meets)
}

// beforeAfter writes a figure as logged and as proposed, "3.6 → 1.2 K", and
// the band below.
func beforeAfter(r *validate.RunReplay, pick func(*validate.RunMetrics) *float64, unit string) cell {
	logged, median, low, high := pick(&r.Logged), pick(&r.Proposed.Median), pick(&r.Proposed.Low), pick(&r.Proposed.High)
	size := 1.0
	if unit == "s" {
		unit, size = format.TimeUnit(logged, median, high)
	}
	write := func(v *float64, unit string) string {
		if v == nil {
			return "-"
		}
		digits := 3
		if math.Abs(*v) >= 100 && (unit == "degC" || unit == "degF") {
			digits = 4 // tenths of a degree
		}
		return format.Amount(*v/size, unit, digits)
	}
	bare := func(v *float64) string { return strings.TrimSuffix(write(v, unit), " "+format.Unit(unit)) }
	c := num(bare(logged) + " → " + write(median, unit))
	if low != nil && high != nil && *low != *high {
		c.Small = bare(low) + " to " + bare(high)
	}
	return c
}
