package data

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"slices"
)

// maxTags bounds how many tags a log in long form may hold.
const maxTags = 10000

// isLong tells that rows are (time, tag, value): because the caller says so,
// or because there is one column of numbers beside the clock and one of text
// whose few values keep coming back.
func isLong(cols []column, o *Options) bool {
	if o.Long {
		return true
	}
	if o.InputCol != "" && hasColumn(cols, o.InputCol) || o.TempCol != "" && hasColumn(cols, o.TempCol) {
		return false
	}
	tags, values := 0, 0
	for _, c := range cols {
		r, _ := roleOf(c)
		switch {
		case c.class == texts && r != roleStatus && r != roleMode && c.repeats:
			tags++
		case c.class == numbers && r != roleTime && r != roleStatus && r != roleOther:
			values++
		}
	}
	return tags == 1 && values == 1
}

func hasColumn(cols []column, name string) bool {
	_, err := findColumn(cols, name, "")
	return err == nil
}

// planLong finds the columns of time, tag, value and status.
func (c *csvReader) planLong(o *Options, info *reading) error {
	cols := c.d.cols
	at := noLayout()
	taken := map[int]bool{}
	for _, r := range []role{roleTime, roleRun} {
		name := o.column(r)
		if name == "" {
			continue
		}
		i, err := findColumn(cols, name, flags[r])
		if err != nil {
			return err
		}
		at[r], taken[i] = i, true
	}
	if err := assignTime(cols, &at, taken); err != nil {
		return err
	}
	for i, col := range cols {
		r, _ := roleOf(col)
		if r == roleStatus && !taken[i] && at[roleStatus] < 0 {
			at[roleStatus] = i
			taken[i] = true
		}
	}
	for _, want := range []struct {
		role  role
		class class
	}{{roleTag, texts}, {roleValue, numbers}} {
		var found []int
		best := 0
		for i, col := range cols {
			if taken[i] || col.class != want.class {
				continue
			}
			score := 1 + words[want.role].hit(col.name, wordsOf(col.name))
			if score > best {
				best, found = score, nil
			}
			if score == best {
				found = append(found, i)
			}
		}
		if len(found) != 1 {
			return fmt.Errorf("the log is read as rows of time, tag and value, but it is not clear which column is the %s among %s",
				roleNames[want.role], listColumns(cols, every(cols)))
		}
		at[want.role] = found[0]
		taken[found[0]] = true
	}
	c.at = at
	c.long = &longReader{byName: map[string]*series{}, modeTag: o.ModeCol}
	info.long = true
	return c.planClock(o, info)
}

// longReader collects the records of a log in long form, tag by tag.
type longReader struct {
	byName  map[string]*series
	series  []*series // in the order met
	modeTag string
	tooMany bool
	dropped counts
}

// series is what was recorded of one tag in one run.
type series struct {
	run, tag string
	tb       *table // columns: the value as input, the mode
	sample   []string
	stats    columnStats
}

// add takes one row; the value may be a number, a mode or a word.
func (l *longReader) add(c *csvReader, run string, r *record) {
	tag := decodeName(c.cells[c.at[roleTag]])
	s := l.byName[run+"\x00"+tag]
	if s == nil {
		if s = l.open(run, tag); s == nil {
			return
		}
	}
	cell := c.cells[c.at[roleValue]]
	if len(s.sample) < 5 {
		s.sample = append(s.sample, decodeName(bytes.Clone(cell[:min(len(cell), 30)])))
	}
	v, _, ok := c.d.number(cell)
	if ok {
		r.v[roleInput] = v
		s.stats.add(v)
	} else {
		kind, _ := missingKind(cell)
		count(s.tb.counts.missing, kind, 1)
	}
	r.auto = modeOf(cell)
	if i := c.at[roleStatus]; i >= 0 && isBadStatus(c.cells[i]) && ok {
		count(s.tb.counts.missing, "status "+decodeName(c.cells[i]), 1)
		r.v[roleInput] = math.NaN()
	}
	s.tb.take(r, c.open)
}

func (l *longReader) open(run, tag string) *series {
	if len(l.series) >= maxTags {
		l.tooMany = true
		return nil
	}
	at := noLayout()
	at[roleInput], at[roleMode] = 0, 1
	s := &series{run: run, tag: tag, tb: newTable(run, at, 0)}
	l.byName[run+"\x00"+tag] = s
	l.series = append(l.series, s)
	return s
}

// tables chooses the tags and merges them, run by run, onto one clock.
func (l *longReader) tables(c *csvReader, o *Options, info *reading) ([]*table, error) {
	if l.tooMany {
		return nil, fmt.Errorf("more than %d tags", maxTags)
	}
	cols := l.columns()
	if len(cols) == 0 {
		return nil, errNoRows
	}
	at, notes, err := assign(cols, o, true)
	if err != nil {
		return nil, fmt.Errorf("among the tags, %w", err)
	}
	info.notes = append(info.notes, notes...)
	timeCol, dateCol := c.at[roleTime], c.at[roleDate]
	info.cols = append(slices.Clone(cols), c.d.cols[timeCol])
	at[roleTime] = len(info.cols) - 1
	if dateCol >= 0 {
		info.cols = append(info.cols, c.d.cols[dateCol])
		at[roleDate] = len(info.cols) - 1
	}
	info.at, info.clock, info.open = at, c.clock, c.open
	info.note("long-form", 0, "the rows are (time, tag, value); %d tags", len(cols))
	var out []*table
	var runs []string
	for _, s := range l.series {
		if !slices.Contains(runs, s.run) {
			runs = append(runs, s.run)
		}
	}
	for _, run := range runs {
		tb, err := l.merge(run, cols, at, info, c)
		if err != nil {
			return nil, err
		}
		out = append(out, tb)
	}
	info.open = false
	return out, nil
}

// columns describes the tags as if they were columns of a wide log.
func (l *longReader) columns() []column {
	var cols []column
	for _, s := range l.series {
		if slices.ContainsFunc(cols, func(c column) bool { return c.label == s.tag }) {
			continue
		}
		col := column{index: len(cols), label: s.tag, sample: s.sample, stepwise: s.stats.stepwise(), ascending: false}
		col.name, col.unit = splitNameUnit(s.tag)
		col.class = numbers
		if s.stats.n == 0 {
			col.class = texts
		}
		cols = append(cols, col)
	}
	return cols
}

// merge puts the tags of a run on one clock, the union of the stamps of input
// and temperature. The input, the setpoint and the mode hold between their
// records; a temperature is there only where it was recorded.
func (l *longReader) merge(run string, cols []column, at layout, info *reading, c *csvReader) (*table, error) {
	var parts [numRoles]*rows
	tb := newTable(run, at, 0)
	var grid []int64
	for r := range numRoles {
		i := at[r]
		if i < 0 || r == roleTime || r == roleDate {
			continue
		}
		s := l.byName[run+"\x00"+cols[i].label]
		if s == nil {
			if r == roleInput || r == roleTemp {
				return nil, fmt.Errorf("run %q holds no record of tag %q", run, cols[i].label)
			}
			continue
		}
		p, err := s.settled(info)
		if err != nil {
			return nil, fmt.Errorf("tag %q: %w", s.tag, err)
		}
		parts[r] = p
		tb.counts.read += p.read
		if r == roleInput || r == roleTemp {
			grid = append(grid, p.t...)
			for kind, n := range p.missing {
				count(tb.counts.missing, kind, n)
			}
		}
		for reason, n := range p.dropped {
			count(tb.counts.dropped, reason, n)
		}
		for _, n := range p.notes {
			addNote(&info.notes, n)
		}
	}
	for _, d := range c.tables { // rows that could not be read at all
		if d.name == run {
			tb.counts.read += d.counts.read
			for reason, n := range d.counts.dropped {
				count(tb.counts.dropped, reason, n)
			}
		}
	}
	slices.Sort(grid)
	grid = slices.Compact(grid)
	var next [numRoles]int
	var rec record
	rec.clear()
	for _, t := range grid {
		rec.t, rec.alt = t, noTime
		for r, p := range parts {
			if p == nil {
				continue
			}
			fresh := false
			for next[r] < len(p.t) && p.t[next[r]] <= t {
				fresh = p.t[next[r]] == t
				if v := p.v[roleInput][next[r]]; v == v || role(r) != roleInput && role(r) != roleSetpoint {
					rec.v[r] = v
				}
				if role(r) == roleMode && p.auto[next[r]] >= 0 {
					rec.auto = p.auto[next[r]]
				}
				rec.line = p.lines.line(next[r])
				next[r]++
			}
			if !fresh && role(r) != roleInput && role(r) != roleSetpoint && role(r) != roleMode {
				rec.v[r] = math.NaN()
			}
		}
		tb.add(&rec, false)
	}
	return tb, nil
}

var errTagEmpty = errors.New("holds no record")

// settled mends the clock of one tag.
func (s *series) settled(info *reading) (*rows, error) {
	if s.tb.rows == 0 {
		return nil, errTagEmpty
	}
	t, err := settleOrder(s.tb, info)
	if err != nil {
		return nil, err
	}
	p := &rows{t: t, lines: s.tb.lines, counts: s.tb.counts}
	p.v[roleInput] = s.tb.cols[roleInput].flat()
	p.auto = s.tb.auto.flat()
	if len(p.t) == 1 {
		return p, nil
	}
	return p, p.mendClock(info.clock)
}
