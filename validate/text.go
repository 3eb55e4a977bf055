package validate

import (
	"fmt"
	"io"
	"slices"
	"strings"
	"unicode"

	"lagwright/data"
)

// mostShown is how many runs and failures the terminal lists; the files hold
// them all.
const mostShown = 20

// WriteText writes the replay for a terminal, its tables 80 columns wide at
// most: the runs, worst first, each with what limits it, then what could not
// be replayed, and the cautions.
func (r *Replay) WriteText(w io.Writer) error {
	var b strings.Builder
	r.writeHead(&b)
	r.writeRuns(&b, r.worstFirst())
	for i, f := range r.Failed {
		if i == 0 {
			b.WriteString("\n")
		}
		if i == mostShown {
			fmt.Fprintf(&b, "and %d more not replayed\n", len(r.Failed)-mostShown)
			break
		}
		fmt.Fprintf(&b, "not replayed: %s\n", f.Words())
	}
	if len(r.Cautions) > 0 {
		b.WriteString("\nCautions\n")
	}
	for _, c := range r.Cautions {
		fmt.Fprintf(&b, "  - %s\n", c)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func (r *Replay) writeHead(b *strings.Builder) {
	s := r.Summary
	switch open := s.Runs - s.Judged; {
	case r.Requirement.Words(r.Gains.Units) == "none" && r.RunLimits == (RunLimits{}):
		fmt.Fprintf(b, "%s replayed on %d plausible plants; no requirement was given to judge by", counted(s.Runs, "run"), r.Plants)
	case s.Judged == 0 && slices.ContainsFunc(r.Runs, func(run RunReplay) bool { return run.Undecided() }):
		fmt.Fprintf(b, "not judged: %s, replayed on %d plausible plants", counted(open, "run"), r.Plants)
	case s.Judged == 0:
		fmt.Fprintf(b, "nothing of the requirement shows in %s, replayed on %d plausible plants", counted(open, "run"), r.Plants)
	case open > 0:
		fmt.Fprintf(b, "%d of %d judged runs meet the requirement on %d plausible plants; %d could not be judged", s.Meeting, s.Judged, r.Plants, open)
	default:
		fmt.Fprintf(b, "%d of %d judged runs meet the requirement on %d plausible plants", s.Meeting, s.Judged, r.Plants)
	}
	if s.Failed > 0 {
		fmt.Fprintf(b, "; %d not replayed", s.Failed)
	}
	b.WriteString("\n")
	plant, controller := r.notReproduced()
	if plant > 0 {
		fmt.Fprintf(b, "do not trust this model on %s: driven by the logged input it does not give the logged temperature\n", counted(plant, "run"))
	}
	if controller > 0 {
		fmt.Fprintf(b, "the logged gains are not reproduced on %s, where the temperature speaks for the model: look at those gains\n", counted(controller, "run"))
	}
	b.WriteString("\n")
}

// worstFirst orders the runs: not reproduced, then by rising probability,
// then in the order of the logs.
func (r *Replay) worstFirst() []*RunReplay {
	out := make([]*RunReplay, len(r.Runs))
	for i := range r.Runs {
		out[i] = &r.Runs[i]
	}
	rank := func(run *RunReplay) float64 {
		switch {
		case run.BackTest != nil && !run.BackTest.Reproduced:
			return -1
		case !run.Judged:
			return 2
		}
		return run.Probability
	}
	slices.SortStableFunc(out, func(a, b *RunReplay) int {
		switch ra, rb := rank(a), rank(b); {
		case ra < rb:
			return -1
		case ra > rb:
			return 1
		}
		return 0
	})
	return out
}

// A shownMetric is a column of the table of runs.
type shownMetric struct {
	head, unit string
	pick       func(RunMetrics) *float64
	scale      timeScale // of a time
}

// shownMetrics are the columns: there is room for five.
func (r *Replay) shownMetrics() []shownMetric {
	u, scale := r.Gains.Units, r.settlingScale()
	columns := []shownMetric{
		{head: "settling " + scale.unit, scale: scale, pick: func(m RunMetrics) *float64 { return m.Settling }},
		{head: "overshoot %", pick: func(m RunMetrics) *float64 { return m.Overshoot }},
		{head: "deviation " + difference(u.Temperature), pick: func(m RunMetrics) *float64 { return m.Deviation }},
		{head: "peak " + data.ShownUnit(u.Temperature), unit: u.Temperature, pick: func(m RunMetrics) *float64 { return m.PeakTemp }},
	}
	if r.RunLimits.IAE != nil {
		return append(columns, shownMetric{head: "IAE " + difference(u.Temperature) + "·s", pick: func(m RunMetrics) *float64 { return m.IAE }})
	}
	return append(columns, shownMetric{head: "peak " + data.ShownUnit(u.Input), unit: u.Input, pick: func(m RunMetrics) *float64 { return m.PeakInput }})
}

// settlingScale is the unit of the whole column, that of the longest median:
// what the words below it are in as well.
func (r *Replay) settlingScale() timeScale {
	most := 0.0
	for i := range r.Runs {
		most = max(most, longest(r.Runs[i].Proposed.Median.Settling))
	}
	return scaleOf(most)
}

// cell writes the metric of a signal.
func (c shownMetric) cell(m RunMetrics) string {
	x := c.pick(m)
	switch {
	case c.scale != timeScale{}:
		return c.scale.cell(x)
	case x != nil:
		return bare(*x, c.unit)
	}
	return "-"
}

// band writes the metric's band, "48..80"; nothing where there is none.
func (c shownMetric) band(b BandMetrics) string {
	low, high := c.pick(b.Low), c.pick(b.High)
	if low == nil && high == nil || low != nil && high != nil && *low == *high {
		return ""
	}
	return c.cell(b.Low) + ".." + c.cell(b.High)
}

// writeRuns writes for each run its verdict with the median figures, their
// band over the plausible plants, the figures of the log, and what limits it.
func (r *Replay) writeRuns(b *strings.Builder, runs []*RunReplay) {
	if len(runs) == 0 {
		return
	}
	columns := r.shownMetrics()
	tableRow(b, "", cellsOf(columns, func(c shownMetric) string { return c.head }))
	for i, run := range runs {
		if i == mostShown {
			fmt.Fprintf(b, "and %s more; a file written with -o holds them all\n", counted(len(runs)-mostShown, "run"))
			break
		}
		fmt.Fprintln(b, clean(run.title()))
		tableRow(b, "  "+run.verdict(), cellsOf(columns, func(c shownMetric) string { return c.cell(run.Proposed.Median) }))
		if bands := cellsOf(columns, func(c shownMetric) string { return c.band(run.Proposed) }); strings.Join(bands, "") != "" {
			tableRow(b, "  band", bands)
		}
		if n := run.WithNoise; n != (StepMetrics{}) {
			tableRow(b, "  with noise", []string{columns[0].scale.cell(n.Settling), optional(n.Overshoot)})
		}
		tableRow(b, "  logged", cellsOf(columns, func(c shownMetric) string { return c.cell(run.Logged) }))
		run.writeNotes(b)
	}
	r.writeSides(b, runs[:min(len(runs), mostShown)])
}

// writeSides tells the band, which has two sides, from the figure of a reason,
// which has one, where both are shown: their ends differ.
func (r *Replay) writeSides(b *strings.Builder, runs []*RunReplay) {
	if slices.ContainsFunc(runs, func(run *RunReplay) bool { return run.OneSided() }) {
		fmt.Fprintf(b, "band: two-sided, from %s to %s of the plants; \"up to\" in a reason is one-sided\n",
			percentile((1-r.Confidence)/2), percentile((1+r.Confidence)/2))
	}
}

// percentile writes a share with the tenths it may have.
func percentile(share float64) string {
	return strings.TrimSuffix(fmt.Sprintf("%.1f", 100*share), ".0") + " %"
}

// OneSided tells a run whose reasons give the figure that a share of the plants
// stays below, which lies inside the end of the two-sided band.
func (r *RunReplay) OneSided() bool {
	return slices.ContainsFunc(r.Reasons, func(s string) bool { return strings.Contains(s, upToWords) })
}

func cellsOf(columns []shownMetric, cell func(shownMetric) string) []string {
	out := make([]string, len(columns))
	for i, c := range columns {
		out[i] = cell(c)
	}
	return out
}

// tableRow writes a label and cells set to the right, 80 columns wide at most
// with five cells.
func tableRow(b *strings.Builder, label string, cells []string) {
	const labelWidth, cellWidth = 15, 12
	line := fmt.Sprintf("%-*s", labelWidth, label)
	for _, c := range cells {
		line += fmt.Sprintf(" %*s", cellWidth, c)
	}
	fmt.Fprintln(b, strings.TrimRight(line, " "))
}

func (r *RunReplay) writeNotes(b *strings.Builder) {
	note := func(format string, a ...any) { fmt.Fprintf(b, "  - "+format+"\n", a...) }
	for _, reason := range r.Reasons {
		note("%s", reason)
	}
	if t := r.BackTest; t != nil && !t.Reproduced {
		note("%s: %s", t.Failure(), strings.Join(t.Differs, "; "))
	} else if t != nil && len(t.Differs) > 0 {
		note("back-test: %s", strings.Join(t.Differs, "; "))
	}
	for _, warning := range r.Warnings {
		note("warning: %s", warning)
	}
}

// Words name the file once.
func (f FailedRun) Words() string {
	if strings.HasPrefix(f.Reason, f.File) {
		return clean(f.Reason)
	}
	return clean(f.File) + ": " + clean(f.Reason)
}

// counted writes "1 run", "2 runs".
func counted(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}

func (r *RunReplay) title() string {
	if r.Name == "" {
		return r.File
	}
	return r.File + ", run " + r.Name
}

// notReproduced counts the runs that speak against the model, and those that
// speak against the logged gains alone.
func (r *Replay) notReproduced() (plant, controller int) {
	for i := range r.Runs {
		switch t := r.Runs[i].BackTest; {
		case t == nil || t.Reproduced:
		case t.Plant:
			controller++
		default:
			plant++
		}
	}
	return plant, controller
}

// Failure says which side of the model and its loop a run speaks against; ""
// where it is reproduced. A replay needs the model alone.
func (t *BackTest) Failure() string {
	switch {
	case t.Reproduced:
		return ""
	case t.Plant:
		return "the logged gains are not reproduced here, the temperature speaks for the model"
	case t.Controller != nil && !*t.Controller:
		return "do not trust this model here, nor the logged gains"
	}
	return "do not trust this model here"
}

// verdict is the word of the table, with the share of plausible plants on
// which the run meets the requirement.
func (r *RunReplay) verdict() string {
	switch {
	case r.BackTest != nil && !r.BackTest.Reproduced && !r.BackTest.Plant:
		return "do not trust"
	case !r.Judged:
		return "not judged"
	case r.Meets:
		return "meets, " + percent(r.Probability)
	}
	return "fails, " + percent(r.Probability)
}

// percent never rounds a share that is short of everything up to 100 %.
func percent(share float64) string {
	if share < 1 && share > 0.995 {
		return "over 99 %"
	}
	return fmt.Sprintf("%.0f %%", 100*share)
}

func optional(x *float64) string {
	if x == nil {
		return "-"
	}
	return number(*x)
}

// difference is the unit of a difference of temperatures.
func difference(temperature string) string {
	if temperature == "degC" {
		return "K"
	}
	return temperature
}

// clean shows foreign text without what would steer a terminal.
func clean(s string) string {
	return strings.Map(func(r rune) rune {
		if !unicode.IsPrint(r) {
			return '·'
		}
		return r
	}, s)
}
