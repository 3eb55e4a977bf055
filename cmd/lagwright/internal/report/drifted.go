package report

import (
	"fmt"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/validate"
)

// drifted answers: what has changed since?
func drifted(b *Bundle) *section {
	d := b.Drift
	if d == nil {
		return nil
	}
	s := &section{ID: "drift", Title: "What has drifted?", Lead: driftLead(d)}
	if len(d.Parameters) > 0 && len(d.Runs) > 1 {
		s.Blocks = append(s.Blocks, block{Figure: picturesOf(DriftFigure(d))})
	}
	var found []item
	for _, p := range d.Parameters {
		sign := ""
		if p.Alarm {
			sign = "bad"
		}
		found = append(found, item{sign, p.Text})
	}
	for _, h := range d.Hints {
		found = append(found, item{"", h})
	}
	if len(found) > 0 {
		s.Blocks = append(s.Blocks, block{List: listOf(found)})
	}
	return withTable(s, driftTable(d))
}

func withTable(s *section, t *table) *section {
	if len(t.Rows) > 0 {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	return s
}

func driftLead(d *validate.Drift) string {
	s := "No change is seen beyond what the intervals explain"
	if d.Alarm {
		s = "Something changed by more than the intervals explain"
	}
	return fmt.Sprintf("%s. On a history without change the chance of any alarm is %s.", s, format.Percent(d.FalseAlarm))
}

func driftTable(d *validate.Drift) *table {
	t := &table{
		Caption: fmt.Sprintf("Run by run, %s model with %s intervals", d.Structure, format.Percent(d.Confidence)),
		Head:    []string{"Run", "Start"},
	}
	for _, p := range d.Parameters {
		t.Head = append(t.Head, parameterName(p.Name))
	}
	for i, r := range d.Runs {
		if i == longestList {
			t.More = len(d.Runs) - longestList
			break
		}
		start := "-"
		if r.Start != nil {
			start, _, _ = strings.Cut(*r.Start, "T")
		}
		row := []cell{head(fileAndRun(r.File, r.Name)), num(start)}
		for _, p := range d.Parameters {
			c := num("-")
			if q := p.Points[i]; q.Value != nil {
				c.Text = format.Value(*q.Value, q.Low, q.High, p.Unit)
			}
			row = append(row, c)
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}
