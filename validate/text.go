package validate

import (
	"fmt"
	"io"
	"slices"
	"strings"
	"text/tabwriter"
	"unicode"
)

// WriteText writes the replay for a terminal: a table, worst run first, then
// what failed, what could not be replayed, warnings and cautions.
func (r *Replay) WriteText(w io.Writer) error {
	var b strings.Builder
	r.writeHead(&b)
	worst := r.worstFirst()
	r.writeTable(&b, worst)
	writeNotes(&b, worst)
	for _, f := range r.Failed {
		fmt.Fprintf(&b, "not replayed: %s: %s\n", clean(f.File), clean(f.Reason))
	}
	if len(r.Cautions) > 0 {
		b.WriteString("\n")
	}
	for _, c := range r.Cautions {
		fmt.Fprintf(&b, "caution: %s\n", c)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func (r *Replay) writeHead(b *strings.Builder) {
	s := r.Summary
	fmt.Fprintf(b, "%d of %d judged runs meet the requirement on %d plausible plants", s.Meeting, s.Judged, r.Plants)
	if open := s.Runs - s.Judged; open > 0 {
		fmt.Fprintf(b, "; %d could not be judged", open)
	}
	if s.Failed > 0 {
		fmt.Fprintf(b, "; %d not replayed", s.Failed)
	}
	b.WriteString("\n")
	if s.Distrusted > 0 {
		fmt.Fprintf(b, "do not trust this model on %s: replayed under the gains then in force it does not give the log\n", counted(s.Distrusted, "run"))
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

func (r *Replay) writeTable(b *strings.Builder, runs []*RunReplay) {
	if len(runs) == 0 {
		return
	}
	u := r.Gains.Units
	tw := tabwriter.NewWriter(b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(tw, "run\tmeets\tprobability\tsettling s\tlogged\tovershoot %%\tlogged\tdeviation %s\tlogged\tpeak %s\tlogged\tpeak %s\tlogged\n",
		difference(u.Temperature), shown(u.Temperature), shown(u.Input))
	for _, run := range runs {
		p, l := run.Proposed, run.Logged
		fmt.Fprintf(tw, "%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\n", clean(run.title()), run.verdict(), run.probability(),
			banded(p.Low.Settling, p.Median.Settling, p.High.Settling), optional(l.Settling),
			banded(p.Low.Overshoot, p.Median.Overshoot, p.High.Overshoot), optional(l.Overshoot),
			banded(p.Low.Deviation, p.Median.Deviation, p.High.Deviation), optional(l.Deviation),
			banded(p.Low.PeakTemp, p.Median.PeakTemp, p.High.PeakTemp), optional(l.PeakTemp),
			banded(p.Low.PeakInput, p.Median.PeakInput, p.High.PeakInput), optional(l.PeakInput))
	}
	tw.Flush() // writes to a strings.Builder, which cannot fail
}

func writeNotes(b *strings.Builder, runs []*RunReplay) {
	for _, run := range runs {
		for _, reason := range run.Reasons {
			fmt.Fprintf(b, "\n%s: %s", clean(run.title()), reason)
		}
		if t := run.BackTest; t != nil && !t.Reproduced {
			fmt.Fprintf(b, "\n%s: do not trust this model here: %s", clean(run.title()), strings.Join(t.Differs, "; "))
		} else if t != nil && len(t.Differs) > 0 {
			fmt.Fprintf(b, "\n%s: back-test: %s", clean(run.title()), strings.Join(t.Differs, "; "))
		}
		for _, warning := range run.Warnings {
			fmt.Fprintf(b, "\n%s: warning: %s", clean(run.title()), warning)
		}
	}
	b.WriteString("\n")
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

func (r *RunReplay) verdict() string {
	switch {
	case r.BackTest != nil && !r.BackTest.Reproduced:
		return "do not trust"
	case !r.Judged:
		return "not judged"
	case r.Meets:
		return "yes"
	}
	return "no"
}

func (r *RunReplay) probability() string {
	if !r.Judged {
		return "-"
	}
	return number(100*r.Probability) + "%"
}

// banded writes "62 (48..80)"; a figure that does not exist is a dash.
func banded(low, median, high *float64) string {
	if median == nil && low == nil && high == nil {
		return "-"
	}
	if low != nil && high != nil && *low == *high {
		return optional(median)
	}
	return fmt.Sprintf("%s (%s..%s)", optional(median), optional(low), optional(high))
}

func optional(x *float64) string {
	if x == nil {
		return "-"
	}
	return number(*x)
}

// shown writes a unit as people do.
func shown(unit string) string {
	switch unit {
	case "degC":
		return "°C"
	case "degF":
		return "°F"
	}
	return unit
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
