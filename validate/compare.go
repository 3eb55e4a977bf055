package validate

import (
	"fmt"
	"io"
	"strings"
	"text/tabwriter"
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

// WriteText writes one line a run and, for each replay, the probability of
// meeting the requirement, the median settling time and the median IAE.
func (c *Comparison) WriteText(w io.Writer) error {
	var b strings.Builder
	tw := tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprint(tw, "run\tlogged: settling s\tIAE")
	for _, label := range c.Columns {
		fmt.Fprintf(tw, "\t%s: meets\tsettling s\tIAE", clean(label))
	}
	fmt.Fprintln(tw)
	for _, row := range c.Rows {
		title := (&RunReplay{File: row.File, Name: row.Name}).title()
		fmt.Fprintf(tw, "%s\t%s\t%s", clean(title), optional(row.Logged.Settling), optional(row.Logged.IAE))
		for _, cell := range row.Cells {
			if cell == nil {
				fmt.Fprint(tw, "\t-\t-\t-")
				continue
			}
			fmt.Fprintf(tw, "\t%s\t%s\t%s", cell.verdict(), optional(cell.Proposed.Median.Settling), optional(cell.Proposed.Median.IAE))
		}
		fmt.Fprintln(tw)
	}
	fmt.Fprint(tw, "all\t\t")
	for _, s := range c.Totals {
		fmt.Fprintf(tw, "\t%d of %d\t\t", s.Meeting, s.Judged)
	}
	fmt.Fprintln(tw)
	tw.Flush() // writes to a strings.Builder, which cannot fail
	_, err := io.WriteString(w, b.String())
	return err
}

func (c *ComparedCell) verdict() string {
	switch {
	case c.Reproduced != nil && !*c.Reproduced:
		return "do not trust"
	case !c.Judged:
		return "not judged"
	}
	return number(100*c.Probability) + "%"
}
