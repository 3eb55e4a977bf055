package validate

import (
	"fmt"
	"io"
	"slices"
	"strings"
)

// ComparisonSchema is the schema of a comparison file.
const ComparisonSchema = "lagwright/comparison/1"

// Comparison sets several replays of the same runs side by side: several
// gains on one card, several cards under the same gains, or both.
type Comparison struct {
	Schema  string        `json:"schema"`
	Columns []string      `json:"columns"` // what tells the replays apart
	Rows    []ComparedRun `json:"rows"`    // in the order of the first replay that has the run
	Totals  []Summary     `json:"totals"`  // by column
}

// ComparedRun is one run; Cells go with the columns, null where that replay
// does not have the run.
type ComparedRun struct {
	File   string          `json:"file"`
	Name   string          `json:"run,omitempty"`
	SHA256 string          `json:"sha256"`
	Logged RunMetrics      `json:"logged"`
	Cells  []*ComparedCell `json:"cells"`
}

// ComparedCell is what one replay says of one run.
type ComparedCell struct {
	Judged      bool        `json:"judged"`
	Meets       bool        `json:"meets"`
	Probability float64     `json:"probability"`
	Reproduced  *bool       `json:"reproduced"` // null unless back-tested
	Proposed    BandMetrics `json:"proposed"`
}

// Compare sets replays side by side; labels name them. Runs are matched by
// file name, content and name inside the file.
func Compare(labels []string, replays []*Replay) (*Comparison, error) {
	if len(labels) != len(replays) {
		return nil, fmt.Errorf("%d labels for %d replays", len(labels), len(replays))
	}
	type runID struct{ file, name, sha string }
	c := &Comparison{Schema: ComparisonSchema, Columns: labels, Rows: []ComparedRun{}}
	rows := map[runID]int{}
	for k, r := range replays {
		c.Totals = append(c.Totals, r.Summary)
		for _, run := range r.Runs {
			id := runID{run.File, run.Name, run.SHA256}
			at, ok := rows[id]
			if !ok {
				at = len(c.Rows)
				rows[id] = at
				c.Rows = append(c.Rows, ComparedRun{
					File: run.File, Name: run.Name, SHA256: run.SHA256, Logged: run.Logged, Cells: make([]*ComparedCell, len(replays)),
				})
			}
			c.Rows[at].Cells[k] = cellOf(&run)
		}
	}
	return c, nil
}

func cellOf(run *RunReplay) *ComparedCell {
	cell := &ComparedCell{Judged: run.Judged, Meets: run.Meets, Probability: run.Probability, Proposed: run.Proposed}
	if run.BackTest != nil {
		cell.Reproduced = &run.BackTest.Reproduced
	}
	return cell
}

// WriteJSON writes the comparison as indented JSON.
func (c *Comparison) WriteJSON(w io.Writer) error { return writeJSON(w, c) }

// WriteText writes for each run the figures of the log and, for each replay,
// the share of plausible plants on which it meets the requirement and the
// medians over the plants, 80 columns wide at most.
func (c *Comparison) WriteText(w io.Writer) error {
	var b strings.Builder
	scale := c.settlingScale()
	row := func(label string, m RunMetrics, verdict string) {
		fmt.Fprintf(&b, "%-36s %12s %10s %11s %7s\n", short("  "+clean(label), 36), verdict, scale.cell(m.Settling), optional(m.Overshoot), optional(m.IAE))
	}
	fmt.Fprintf(&b, "%-36s %12s %10s %11s %7s\n", "", "meets on", "settling "+scale.unit, "overshoot %", "IAE")
	for i, run := range c.Rows {
		if i == mostShown {
			fmt.Fprintf(&b, "and %s more; a file written with -o holds them all\n", counted(len(c.Rows)-mostShown, "run"))
			break
		}
		fmt.Fprintln(&b, clean((&RunReplay{File: run.File, Name: run.Name}).title()))
		row("logged", run.Logged, "")
		for k, cell := range run.Cells {
			if cell == nil {
				row(c.Columns[k], RunMetrics{}, "-")
				continue
			}
			row(c.Columns[k], cell.Proposed.Median, cell.verdict())
		}
	}
	if slices.ContainsFunc(c.Rows, func(r ComparedRun) bool { return r.Logged.Settling != nil || r.Logged.Overshoot != nil }) {
		b.WriteString("logged settling and overshoot are measured past the noise: told rather too small\n")
	}
	b.WriteString("runs that meet, of those judged\n")
	for k, s := range c.Totals {
		meeting := "none judged"
		if s.Judged > 0 {
			meeting = fmt.Sprintf("%d of %d", s.Meeting, s.Judged)
		}
		fmt.Fprintf(&b, "%-36s %12s\n", short("  "+clean(c.Columns[k]), 36), meeting)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// settlingScale is the unit of the whole column, that of its longest time.
func (c *Comparison) settlingScale() timeScale {
	most := 0.0
	for _, run := range c.Rows {
		for _, cell := range run.Cells {
			if cell != nil {
				most = max(most, longest(cell.Proposed.Median.Settling))
			}
		}
	}
	return scaleOf(most)
}

// short cuts a text to so many characters, the last one then being "…".
func short(s string, n int) string {
	if r := []rune(s); len(r) > n {
		return string(r[:n-1]) + "…"
	}
	return s
}

func (c *ComparedCell) verdict() string {
	switch {
	case c.Reproduced != nil && !*c.Reproduced:
		return "do not trust"
	case !c.Judged:
		return "not judged"
	}
	return percent(c.Probability)
}
