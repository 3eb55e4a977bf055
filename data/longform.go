package data

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
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
	if tag, value := namedPair(cols); tag >= 0 && value >= 0 {
		return true
	}
	values := 0
	for _, c := range cols {
		r, _ := roleOf(c)
		switch {
		case c.part != noPart:
		case c.switched && r == roleInput:
			return false
		case c.class == numbers && r != roleTime && r != roleStatus && r != roleOther:
			values++
		}
	}
	return values == 1 && len(tagColumns(cols)) == 1
}

// namedPair finds a tag and a value that are called so, in a log that has no
// column for an input or a temperature: beside them may stand numbers that are
// neither. A tag may be a number.
func namedPair(cols []column) (tag, value int) {
	tag, value = -1, -1
	state := -1 // the value, where nothing else is called so
	for i, c := range cols {
		r, _ := roleOf(c)
		switch {
		case r == roleInput || r == roleTemp:
			return -1, -1
		case strings.EqualFold(c.name, "state") && c.class == numbers:
			state = i
		case words[roleValue].in(c) && c.class == numbers:
			if value >= 0 {
				return -1, -1
			}
			value = i
		case words[roleTag].in(c) && (c.class == texts && c.repeats && !c.switched || c.class == numbers && c.numbered):
			if tag >= 0 {
				return -1, -1
			}
			tag = i
		}
	}
	if value < 0 {
		value = state
	}
	return tag, value
}

// tagColumns lists the columns of text that can be the tag; of several those
// whose name says so best.
func tagColumns(cols []column) []int {
	return bestNamed(cols, roleTag, func(_ int, c column) bool {
		r, _ := roleOf(c)
		return c.class == texts && r != roleStatus && r != roleMode && c.repeats && !c.switched && !c.units && !isSpoiled(c, r)
	})
}

// isSpoiled tells a column that is called an input or a temperature and holds
// what begins like numbers: these are no tags.
func isSpoiled(c column, r role) bool {
	return (r == roleInput || r == roleTemp) && slices.ContainsFunc(c.sample, func(cell string) bool {
		cell = strings.TrimLeft(cell, "+-.,")
		return cell != "" && cell[0] >= '0' && cell[0] <= '9'
	})
}

// bestNamed returns the columns whose names fit the role best, among those that
// may have it.
func bestNamed(cols []column, r role, may func(i int, c column) bool) (found []int) {
	best := -1
	for i, c := range cols {
		if !may(i, c) {
			continue
		}
		score := words[r].hit(c.name, wordsOf(c.name))
		if score > best {
			best, found = score, nil
		}
		if score == best {
			found = append(found, i)
		}
	}
	return found
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
	for i, c := range cols {
		taken[i] = c.part == somePart
	}
	take := func(r role, i int) { at[r], taken[i] = i, true }
	for _, r := range []role{roleTime, roleRun} {
		name := o.column(r)
		if name == "" {
			continue
		}
		i, err := findColumn(cols, name, flags[r])
		if err != nil {
			return err
		}
		take(r, i)
	}
	if err := assignTime(cols, &at, taken); err != nil {
		return err
	}
	if tag, value := namedPair(cols); tag >= 0 && value >= 0 {
		take(roleTag, tag)
		take(roleValue, value)
	}
	if found := bestByName(cols, taken, roleStatus); len(found) == 1 {
		take(roleStatus, found[0])
	}
	if i := slices.IndexFunc(cols, func(c column) bool { return c.units && (c.ofUnits || namesUnit(c)) }); i >= 0 {
		take(roleUnit, i)
	}
	for _, r := range []role{roleTag, roleValue} {
		if at[r] >= 0 {
			continue
		}
		found := bestByWords(cols, taken, r)
		if len(found) != 1 {
			return fmt.Errorf("the log is read as rows of time, tag and value, but it is not clear which column is the %s among %s",
				roleNames[r], listColumns(cols, every(cols)))
		}
		take(r, found[0])
	}
	c.at = at
	c.long = &longReader{byName: map[string]*series{}}
	return c.planClock(o, info)
}

// bestByWords lists the columns that can be the tag or the value, those whose
// name says so before others.
func bestByWords(cols []column, taken map[int]bool, r role) []int {
	return bestNamed(cols, r, func(i int, c column) bool { return !taken[i] && fits(c.class, r) })
}

// longReader collects the records of a log in long form, tag by tag.
type longReader struct {
	byName  map[string]*series
	series  []*series // in the order met
	tooMany bool
}

// series is what was recorded of one tag in one run.
type series struct {
	run, tag string
	tb       *table // columns: the value as input, the mode
	unit     string // of a column of units
	units    bool   // it changes
	sample   []string
	stats    columnStats
	onOff    switchTally // of the cells that are no numbers
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
	if i := c.at[roleUnit]; i >= 0 && len(c.cells[i]) > 0 {
		unit, _ := canonicalUnit(decodeName(c.cells[i]))
		s.units = s.units || s.unit != "" && s.unit != unit
		s.unit = unit
	}
	cell := c.cells[c.at[roleValue]]
	if len(s.sample) < 5 {
		s.sample = append(s.sample, decodeName(bytes.Clone(cell[:min(len(cell), 30)])))
	}
	v, unit, ok := c.d.number(cell)
	if ok && unit != "" {
		if same, known := inUnit(v, unit, s.unit); known {
			v, unit = same, s.unit
		}
		s.units = s.units || s.unit != "" && s.unit != unit
		s.unit = unit
	}
	if ok {
		r.v[roleInput] = v
		s.stats.add(v)
		c.spelled.look(cell, r.line)
		s.tb.brackets = s.tb.brackets.add(roleInput, s.tb.rows, cell)
	} else {
		s.onOff.add(cell)
		kind, _ := missingKind(cell)
		count(s.tb.counts.missing, kind, 1)
	}
	r.auto = modeOf(cell)
	if i := c.at[roleStatus]; i >= 0 && c.badStatus(c.cells[i]) && ok {
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
		if !o.Long {
			tag := c.d.cols[c.at[roleTag]]
			if tag.class == numbers {
				return nil, fmt.Errorf("the rows were taken for (time, tag, value) because of the names of their columns; among the tags in column %q, %w", tag.label, err)
			}
			return nil, fmt.Errorf("the rows were taken for (time, tag, value) because column %q holds words; among these tags, %w; if it is the input instead, write numbers, or ON and OFF",
				tag.label, err)
		}
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
		if _, known := canonicalUnit(s.unit); known || col.unit == "" { // what stands beside the value is said of it
			col.unit = s.unit
		}
		col.class = numbers
		if s.stats.n == 0 {
			col.class = texts
			col.switched, col.words = s.onOff.switched(), s.onOff.seen
		}
		cols = append(cols, col)
	}
	return cols
}

// merge puts the tags of a run on one clock, the union of the stamps of input
// and temperature.
func (l *longReader) merge(run string, cols []column, at layout, info *reading, c *csvReader) (*table, error) {
	var parts [numRoles]*rows
	tb := newTable(run, at, 0)
	for r := roleInput; r < roleStatus; r++ {
		i := at[r]
		if i < 0 {
			continue
		}
		s := l.byName[run+"\x00"+cols[i].label]
		if s == nil {
			if r == roleInput || r == roleTemp {
				return nil, fmt.Errorf("run %q holds no record of tag %q", run, cols[i].label)
			}
			continue
		}
		if s.units {
			return nil, fmt.Errorf("tag %q is recorded in more than one unit: cut the log in two", s.tag)
		}
		p, err := s.settled(info)
		if err != nil {
			return nil, fmt.Errorf("tag %q: %w", s.tag, err)
		}
		if r == roleInput {
			if err := s.switchOver(p, cols[i].switched); err != nil {
				return nil, err
			}
		}
		parts[r] = p
		tb.counts.add(p.counts, r == roleInput || r == roleTemp)
		for _, n := range p.notes {
			addNote(&info.notes, n)
		}
	}
	for _, d := range c.tables { // rows that could not be read at all
		if d.name == run {
			tb.counts.add(d.counts, false)
		}
	}
	if err := sameDays(parts); err != nil {
		return nil, err
	}
	l.lay(tb, parts)
	return tb, nil
}

// add sums counts; missing values count only for columns that a fit needs.
func (c *counts) add(d counts, missing bool) {
	c.read += d.read
	for reason, n := range d.dropped {
		count(c.dropped, reason, n)
	}
	for kind, n := range d.missing {
		if missing {
			count(c.missing, kind, n)
		}
	}
}

// sameDays refuses tags whose clocks without a date passed midnight in ways
// that do not fit together: a tag that was recorded only after midnight shows
// no midnight of its own.
func sameDays(parts [numRoles]*rows) error {
	passed := func(p *rows) bool {
		return slices.ContainsFunc(p.notes, func(n Note) bool { return n.Code == "clock-midnight" })
	}
	for _, p := range parts {
		if p == nil || !passed(p) {
			continue
		}
		for r, q := range parts {
			if q != nil && !passed(q) && q.t[0] < p.t[0] {
				return fmt.Errorf("the clock names no date and the record passes midnight, but the tag of the %s does not show on which side of it: export the log with dates", roleNames[r])
			}
		}
	}
	return nil
}

// lay puts the records on the union of the stamps of input and temperature.
// Input, setpoint and mode hold between their records; a temperature or an
// airflow is there only where it was recorded.
func (l *longReader) lay(tb *table, parts [numRoles]*rows) {
	grid := slices.Concat(parts[roleInput].t, parts[roleTemp].t)
	slices.Sort(grid)
	grid = slices.Compact(grid)
	var next [numRoles]int
	var rec record
	rec.clear()
	for _, t := range grid {
		rec.t = t
		for i, p := range parts {
			if p == nil {
				continue
			}
			held := role(i) == roleInput || role(i) == roleSetpoint || role(i) == roleMode
			if !held {
				rec.v[i] = math.NaN()
			}
			for ; next[i] < len(p.t) && p.t[next[i]] <= t; next[i]++ {
				v, auto := p.v[roleInput][next[i]], p.auto[next[i]]
				if v == v && (held || p.t[next[i]] == t) {
					rec.v[i] = v
				}
				if role(i) == roleMode && auto >= 0 {
					rec.auto = auto
				}
				rec.line = p.lines.line(next[i])
			}
		}
		tb.add(&rec, false)
	}
}

// switchOver reads the words of a switched tag; in a tag of numbers such words
// are an error.
func (s *series) switchOver(p *rows, switched bool) error {
	if !switched {
		if s.onOff.any() {
			return fmt.Errorf("tag %q is the input and holds the words %s among numbers: write 0 where the drive was off and its full value where it was on",
				s.tag, strings.Join(s.onOff.seen, ", "))
		}
		return nil
	}
	for i, on := range p.auto {
		p.v[roleInput][i] = math.NaN()
		if on >= 0 {
			p.v[roleInput][i] = full * float64(on)
		}
	}
	for kind := range p.missing {
		if word, is := strings.CutPrefix(kind, `text "`); is || kind == "OPEN" {
			if _, is := switchOf([]byte(strings.TrimSuffix(word, `"`))); is {
				delete(p.missing, kind)
			}
		}
	}
	return nil
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
	if err := s.tb.brackets.markRatherThanMinus(roleInput, p.v[roleInput], s.tb.lines.line, s.tag); err != nil {
		return nil, err
	}
	p.auto = s.tb.auto.flat()
	if len(p.t) == 1 {
		return p, nil
	}
	return p, p.mendClock(info.clock)
}
