package report

import (
	"cmp"
	"fmt"
	"maps"
	"slices"
	"sort"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/data"
)

// mostDrawn is the number of runs whose logs, and of replays whose traces, a
// page draws; the others are in its tables.
const mostDrawn = 3

// trust answers: can I trust this log?
func trust(b *Bundle) *section {
	if len(b.Runs) == 0 {
		return nil
	}
	s := &section{ID: "log", Title: "Can I trust this log?", Lead: trustLead(b)}
	for i := range min(len(b.Runs), mostDrawn) {
		if k := b.check(i); k != nil && len(checked(k)) > 0 {
			s.Blocks = append(s.Blocks, block{Heading: runHeading(b.Runs, i), List: listOf(checked(k))})
		}
	}
	if remarks := remarksOf(b.Runs); len(remarks) > 0 {
		said := format.Count(len(remarks), "remark", "remarks") + " about the recording:"
		s.Blocks = append(s.Blocks, block{Text: said, List: listOf(remarks)})
	}
	m := b.model()
	for i, r := range b.Runs {
		if i == mostDrawn {
			s.Blocks = append(s.Blocks, block{Text: fmt.Sprintf("The first %d of %d runs are drawn.", mostDrawn, len(b.Runs))})
			break
		}
		c := b.curves(i)
		s.Blocks = append(s.Blocks, block{Heading: runHeading(b.Runs, i), Figure: picturesOf(LogFigure(r, c, m))})
		if c != nil && m != nil && len(c.Residual) > 0 {
			s.Blocks = append(s.Blocks, block{Figure: picturesOf(ResidualFigure(r, c, m))})
		}
	}
	s.Blocks = append(s.Blocks, block{Table: recordingTable(b)})
	return s
}

func trustLead(b *Bundle) string {
	rows, length := 0, 0.0
	for _, r := range b.Runs {
		rows += len(r.T)
		length += span(r.T)
	}
	answer := verdictWords(b.Checks)
	if answer == "Yes. " && warnedOf(b.Card, "little-explained", "input-correlation", "residual-correlation") {
		answer = "With care. "
	}
	s := answer + fmt.Sprintf("%s with %s over %s.", format.Count(len(b.Runs), "run", "runs"),
		format.Count(rows, "row", "rows"), format.Duration(length))
	if m := b.model(); m != nil {
		s += fmt.Sprintf(" The model explains it to %s rms (fit %s %%).", format.Amount(m.RMSE, kelvin(b.Card.Units.Temperature), 2), format.Short(m.FitPercent, 3))
	}
	if b.Card != nil && len(b.Card.Warnings) > 0 {
		s += fmt.Sprintf(" %s came with the fit, see what to watch for.", format.Count(len(b.Card.Warnings), "warning", "warnings"))
	}
	if len(remarksOf(b.Runs)) == 0 {
		s += " Nothing had to be mended or set aside."
	}
	return s
}

func runHeading(runs []*data.Run, i int) string {
	if len(runs) == 1 {
		return ""
	}
	return runTitle(runs[i].Source)
}

func runTitle(s data.Source) string {
	return fileAndRun(s.File, s.Name)
}

// fileAndRun names a run by its file and, in a file of several, its own name.
func fileAndRun(file, run string) string {
	name := format.Text(file)
	if run != "" {
		name += ", run " + format.Text(run)
	}
	return format.Clip(name, 60)
}

// remarksOf lists what was mended, set aside or seen while reading, in words.
func remarksOf(runs []*data.Run) []item {
	var out []item
	for i, r := range runs {
		for _, it := range remarks(r) {
			if len(runs) > 1 {
				it.Text = runTitle(runs[i].Source) + ": " + it.Text
			}
			out = append(out, it)
		}
	}
	return out
}

// manyRows is the share of a log's rows above which what was set aside or
// dropped is a warning and no longer a remark.
const manyRows = 0.01

func remarks(r *data.Run) []item {
	var out []item
	add := func(warn bool, form string, a ...any) {
		sign := ""
		if warn {
			sign = "warn"
		}
		out = append(out, item{sign, fmt.Sprintf(form, a...)})
	}
	q := r.Quality
	many := func(n int) bool { return float64(n) > manyRows*float64(max(q.RowsRead, len(r.T))) }
	for _, kind := range slices.Sorted(maps.Keys(q.Missing)) {
		n := q.Missing[kind]
		add(many(n), "%s set aside: %s.", format.Count(n, "cell", "cells"), kind)
	}
	for _, why := range slices.Sorted(maps.Keys(q.Dropped)) {
		n := q.Dropped[why]
		add(many(n), "%s dropped: %s.", format.Count(n, "row", "rows"), why)
	}
	switch n := len(q.Gaps); {
	case n == 1:
		add(true, "1 gap of %s in the recording.", format.Duration(q.Gaps[0].Duration))
	case n > 1:
		longest := slices.MaxFunc(q.Gaps, func(a, b data.Gap) int { return cmp.Compare(a.Duration, b.Duration) })
		add(true, "%d gaps in the recording, the longest %s.", n, format.Duration(longest.Duration))
	}
	if n := len(q.Spikes); n > 0 {
		add(many(n), "%s of temperature.", format.Count(n, "isolated spike", "isolated spikes"))
	}
	for _, n := range q.Notes {
		if n.Row > 0 {
			add(true, "%s (line %d)", sentenceCase(n.Text), n.Row)
		} else {
			add(true, "%s", sentenceCase(n.Text))
		}
	}
	return out
}

// recordingTable has one row for each run.
func recordingTable(b *Bundle) *table {
	t := &table{
		Caption: "What was recorded",
		Head:    []string{"Run", "Rows", "Length", "Interval", "Temperature", "Input", "Resolution", "Bumps"},
	}
	for i, r := range b.Runs {
		if i == longestList {
			t.More = len(b.Runs) - longestList
			break
		}
		bumps := "-"
		if c := b.curves(i); c != nil {
			bumps = fmt.Sprint(len(c.Bumps))
		}
		quantum := "not visible"
		if r.Quality.Quantum > 0 {
			quantum = format.Amount(r.Quality.Quantum, kelvin(r.Units.Temperature), 3)
		}
		t.Rows = append(t.Rows, []cell{
			head(runTitle(r.Source)), num(format.Thousands(len(r.T))), num(format.Duration(span(r.T))),
			num(format.Duration(medianInterval(r))), num(spanWords(r.Y, r.Units.Temperature)), num(spanWords(r.U, r.Units.Input)),
			num(quantum), num(bumps),
		})
	}
	return t
}

// medianInterval is the reader's, else taken from the clock.
func medianInterval(r *data.Run) float64 {
	if r.Quality.MedianInterval > 0 || len(r.T) < 2 {
		return r.Quality.MedianInterval
	}
	d := make([]float64, len(r.T)-1)
	for i := range d {
		d[i] = r.T[i+1] - r.T[i]
	}
	sort.Float64s(d)
	return d[len(d)/2]
}

func spanWords(v []float64, unit string) string {
	low, high := rangeOf(v)
	return format.Short(low, 4) + " to " + format.Amount(high, unit, 4)
}
