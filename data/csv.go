package data

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"slices"
)

// field is a column that is read: where it stands and what it means.
type field struct {
	index int
	role  role
	unit  string // that cells may carry behind the number

	switched bool // the cells are words: ON, OFF
	beside   *unitColumn
}

// csvReader reads the rows of a text into tables, one for each run.
type csvReader struct {
	path    string
	d       *dialect
	clock   *clock
	open    bool // order of day and month is not settled
	fields  []field
	last    int // index of the last field
	at      layout
	spread  *spreadClock // the clock is the sum of several columns
	digits  clockDigits  // of a time of day without colons
	pair    bool         // date and time of day have a column each
	quality bool         // the status is a number, good from 192 on
	inPlace bool         // cells can be read in place

	tables []*table
	only   *table // of a log whose rows are read in place
	byName map[string]*table
	long   *longReader // rows are (time, tag, value)
	expect int         // rows of a file of one run, 0 when nobody knows

	rec     record
	cells   [][]byte
	stamp   []byte
	repeats int // header lines met again
	nulRows int
	word    wordAmongNumbers
	spelled spellings
	twins   [][2]int // columns of time that are the same as far as the sample goes
	twinErr error    // they are not

	headerErr error          // other names in the data
	unitErr   error          // another unit beside the numbers
	firstNo   map[string]int // line of the first row dropped, by reason
}

// readText reads a log in text form.
func readText(ctx context.Context, s *source, o *Options) ([]*table, *reading, error) {
	text := utf8Reader(s.head, s.r)
	sample, whole, err := readSample(text, s.textSize())
	if err != nil {
		return nil, nil, err
	}
	d, err := sniff(s.path, sample, whole)
	if err != nil {
		return nil, nil, err
	}
	c := &csvReader{path: s.path, d: d, byName: map[string]*table{}, firstNo: map[string]int{}}
	info := &reading{cols: d.cols}
	defer func() {
		if v, ok := d.format.parse([]byte(d.thousands)); ok {
			info.note("thousands-mark", 0, "numbers such as %q were read as %.10g, with a thousands mark, since others beside them have none; if it is a decimal mark, export every number with it", d.thousands, v)
		}
	}()
	if err = c.planStamps(o, info); err == nil {
		if isLong(d.cols, o) {
			err = c.planLong(o, info)
		} else {
			err = c.plan(o, info)
		}
	}
	if err != nil {
		return nil, nil, fmt.Errorf("%s: %w", s.path, err)
	}
	d.rows = nil
	if c.at[roleRun] < 0 && c.long == nil {
		c.expect = s.expectedRows(sample)
	}
	if whole {
		text = nil
	}
	lines := newLineReader(s.path, sample, text)
	lines.onlyCR, lines.rewrite, lines.delim = d.onlyCR, d.rewrite, d.delim
	lines.start()
	if err := c.readRows(ctx, lines); err != nil {
		return nil, nil, err
	}
	if d.keys != nil {
		info.note("rows-of-pairs", 0, "each row holds names and values, of %d names", len(d.keys))
	}
	if c.repeats > 0 {
		info.note("header-repeated", 0, "the header is repeated %s inside the data (the logger was restarted)", times(c.repeats))
	}
	if c.nulRows > 0 {
		info.note("nul-bytes", c.firstNo["NUL bytes"], "the file holds NUL bytes, as a logger leaves them that lost power")
	}
	if !lines.lastNL && c.nulRows == 0 {
		info.note("no-final-newline", lines.line, "the last line does not end; if the file was cut off, its last value may be wrong")
	}
	if err := c.clock.fraction.say(info); err != nil {
		return nil, nil, fmt.Errorf("%s: %w", s.path, err)
	}
	if c.long != nil {
		c.spelled.say(info)
		tables, err := c.long.tables(c, o, info)
		if err != nil {
			return nil, nil, fmt.Errorf("%s: %w", s.path, err)
		}
		return tables, info, nil
	}
	c.spelled.say(info)
	c.clock.held.say(info)
	info.clock, info.at, info.open = c.clock, c.at, c.open
	return c.tables, info, c.refuse()
}

// refuse tells what in the rows forbids to use them.
func (c *csvReader) refuse() error {
	if c.headerErr != nil {
		return c.headerErr
	}
	if c.unitErr != nil {
		return c.unitErr
	}
	if err := c.tooManyDropped(); err != nil {
		return err
	}
	if c.twinErr != nil {
		return fmt.Errorf("%s: %w", c.path, c.twinErr)
	}
	rows := 0
	for _, tb := range c.tables {
		rows += tb.rows
	}
	return c.word.err(c.path, rows)
}

// planStamps looks for clocks of plain numbers that one column alone does not
// show: digits of a date and a time, and a clock in parts.
func (c *csvReader) planStamps(o *Options, info *reading) (err error) {
	markDates(c.d)
	if c.digits, info.notes, err = markDigits(c.d, o); err != nil {
		return err
	}
	spread, notes := findSpreadClock(c.d, o)
	c.spread, info.notes = spread, append(info.notes, notes...)
	return nil
}

// plan decides which columns are read and how.
func (c *csvReader) plan(o *Options, info *reading) error {
	if err := markStamps(c.d, o.TimeFormat); err != nil {
		return err
	}
	if o.TimeCol == "" {
		c.markTwins()
	}
	at, notes, err := assign(c.d.cols, o, false)
	if err != nil {
		return c.sideways(c.channelClocks(err))
	}
	info.notes = append(info.notes, notes...)
	c.at = at
	if o.TimeCol == "" {
		if err := c.hiddenClock(); err != nil {
			return err
		}
	}
	if at[roleTime] >= 0 && c.d.cols[at[roleTime]].class == stamps {
		c.at[roleHalf] = slices.IndexFunc(c.d.cols, func(c column) bool { return c.halves })
	}
	return c.planClock(o, info)
}

// markStamps makes a column of stamps of the columns that a layout given by
// the caller can read.
func markStamps(d *dialect, format string) error {
	if format == "" {
		return nil
	}
	k, err := clockOfFormat(format)
	if err != nil || k.kind != custom {
		return err
	}
	for i := range d.cols {
		read, all := 0, 0
		for _, l := range d.rows {
			if i < len(l.cells) && len(l.cells[i]) > 0 {
				all++
				if _, _, ok := k.parse(l.cells[i], '.'); ok {
					read++
				}
			}
		}
		if read > 0 && 2*read > all {
			c := &d.cols[i]
			c.class, c.dated, c.timed = stamps, true, true
		}
	}
	return nil
}

func (c *csvReader) planClock(o *Options, info *reading) error {
	if c.spread != nil && c.spread.stamp >= 0 {
		c.at[roleDate] = c.spread.stamp
	}
	c.pair = c.at[roleDate] >= 0
	cells := make([][]byte, 0, len(c.d.rows))
	for _, l := range c.d.rows {
		if cell, ok := c.stampOf(l.cells); ok && len(trimBlanks(cell)) > 0 {
			if c.pair || c.at[roleHalf] >= 0 { // put together in memory that is used again
				cell = bytes.Clone(cell)
			}
			cells = append(cells, cell)
		}
	}
	k, notes, err := c.findClock(cells, o)
	if err != nil {
		return err
	}
	info.notes = append(info.notes, notes...)
	if o.TimeCol == "" {
		info.notes = append(info.notes, noteDateLeft(c.d.cols, &c.at, k)...)
	}
	c.clock = k
	c.open = k.kind == calendar && k.order == openOrder && hasAlternative(k, cells)
	if k.kind == calendar && k.order == openOrder && !c.open {
		k.dayFirst, k.monthFirst = false, false
	}
	if k.kind == calendar && c.long == nil { // the tags of a long log may stand one below the other
		k.held = newHeldDate(k, cells)
	}
	for r, i := range c.at {
		if i >= 0 {
			c.fields = append(c.fields, field{index: i, role: role(r), unit: c.d.cols[i].unit, switched: c.d.cols[i].switched})
			c.last = max(c.last, i)
		}
	}
	if c.spread != nil {
		c.last = max(c.last, c.spread.last())
	}
	slices.SortFunc(c.fields, func(a, b field) int { return a.index - b.index })
	if err := c.planUnits(o, info); err != nil {
		return err
	}
	c.inPlace = c.canReadInPlace()
	c.quality = isQuality(c.d.rows, c.at[roleStatus])
	if o.TimeCol == "" && o.TimeFormat == "" && c.spread == nil {
		return c.compareClocks(info)
	}
	return nil
}

// findClock finds the clock of the stamps; one in parts without a stamp among
// them is known already.
func (c *csvReader) findClock(cells [][]byte, o *Options) (*clock, []Note, error) {
	col := c.at[roleTime]
	switch {
	case c.spread == nil || c.spread.stamp == ownStamp:
	case c.spread.stamp < 0:
		return &clock{kind: c.spread.kind}, nil, nil
	default:
		col = c.spread.stamp
	}
	shown := c.d.cols[col]
	if c.pair { // what is said of dates is said of theirs
		shown.label = c.d.cols[c.at[roleDate]].label
	}
	return findClock(cells, shown, c.pair, o, c.d.format.point)
}

// instant is the time of a row.
func (c *csvReader) instant() (t, alt int64, ok bool) {
	stamp, _ := c.stampOf(c.cells)
	t, alt, ok = c.clock.parse(stamp, c.d.format.point)
	if c.spread != nil {
		t, alt, ok = c.spread.add(t, alt, ok, c.cells)
	}
	return t, alt, ok
}

// hasAlternative tells that some stamps can be read both day and month first.
func hasAlternative(k *clock, cells [][]byte) bool {
	probe := clock{kind: calendar, rewrite: k.rewrite}
	for _, b := range cells {
		if _, alt, ok := probe.parse(b, '.'); ok && alt != noTime {
			return true
		}
	}
	return false
}

// stampOf puts the stamp of a row together, from one cell to three.
func (c *csvReader) stampOf(cells [][]byte) ([]byte, bool) {
	if c.spread != nil && c.spread.stamp >= 0 {
		if c.spread.stamp >= len(cells) {
			return nil, false
		}
		return cells[c.spread.stamp], true
	}
	i, j, h := c.at[roleTime], c.at[roleDate], c.at[roleHalf]
	if i >= len(cells) || j >= len(cells) || h >= len(cells) {
		return nil, false
	}
	if j < 0 && h < 0 || len(cells[i]) == 0 { // a date alone is no instant
		return cells[i], true
	}
	c.stamp = c.stamp[:0]
	if j >= 0 && !isNoDate(cells[j]) {
		c.stamp = append(append(c.stamp, cells[j]...), ' ')
	}
	c.stamp = appendClock(c.stamp, cells[i], c.digits)
	if h >= 0 {
		c.stamp = append(append(c.stamp, ' '), cells[h]...)
	}
	return c.stamp, true
}

// checkEvery is how many rows pass between looks at the context.
const checkEvery = 1 << 14

func (c *csvReader) readRows(ctx context.Context, lines *lineReader) error {
	for n := 0; ; n++ {
		if n%checkEvery == 0 && ctx.Err() != nil {
			return fmt.Errorf("%s: %w", c.path, ctx.Err())
		}
		text, err := lines.read()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		if lines.line < c.d.first || len(text) == 0 {
			continue
		}
		if lines.line == 1 {
			text = bytes.TrimPrefix(text, []byte("\xEF\xBB\xBF"))
		}
		if c.inPlace && c.fast(text, lines.line, lines.quoted) {
			continue
		}
		c.slow(text, lines.line)
	}
}

// table returns the table of a run, by its name.
func (c *csvReader) table(name string) *table {
	if name == "" && len(c.tables) == 1 {
		return c.tables[0]
	}
	tb := c.byName[name]
	if tb == nil {
		tb = newTable(name, c.at, c.expect)
		c.byName[name] = tb
		c.tables = append(c.tables, tb)
	}
	return tb
}

// slow reads any other row.
func (c *csvReader) slow(text []byte, line int) {
	text = bytes.TrimPrefix(text, []byte("\xEF\xBB\xBF")) // of a file joined to another
	trimmed := bytes.Trim(text, " \t")
	if len(trimmed) == 0 || c.isHeader(text) || isComment(text, c.d.delim) {
		return
	}
	if bytes.IndexByte(trimmed, 0) >= 0 {
		c.nulRows++
		if len(bytes.Trim(trimmed, "\x00")) == 0 {
			c.first("NUL bytes", line)
			return
		}
		c.drop("", "NUL bytes", line)
		return
	}
	c.cells = splitCells(c.cells[:0], text, c.d.delim)
	c.cellRow(line)
}

// cellRow reads a row from its cells.
func (c *csvReader) cellRow(line int) {
	run := ""
	if i := c.at[roleRun]; i >= 0 && i < len(c.cells) {
		run = decodeName(c.cells[i])
	}
	if !slices.ContainsFunc(c.cells, func(cell []byte) bool { return len(cell) > 0 }) {
		return
	}
	if reason := c.misfit(); reason != "" {
		c.drop(run, reason, line)
		return
	}
	t, alt, ok := c.instant()
	if !ok {
		stamp, _ := c.stampOf(c.cells)
		c.lookForHeader(line)
		reason := "no usable time"
		if kind, _ := missingKind(stamp); kind == "blank" {
			reason = "no time"
		}
		c.drop(run, reason, line)
		return
	}
	c.checkTwins(line)
	r := &c.rec
	r.clear()
	r.line, r.t, r.alt = line, t, alt
	if c.long != nil {
		c.long.add(c, run, r)
		return
	}
	c.values(c.table(run), r)
}

// misfit tells what is wrong with the number of cells in a row.
func (c *csvReader) misfit() string {
	if len(c.cells) <= c.last || c.d.delim == ' ' && len(c.cells) < c.d.filled { // a blank cell between blanks is none
		return "row too short"
	}
	for i := c.d.fields; i < len(c.cells); i++ {
		if len(c.cells[i]) > 0 && looseClass(c.cells[i]) != texts { // text is a remark
			return "row too long"
		}
	}
	return ""
}

// values reads the cells of a row into a table.
func (c *csvReader) values(tb *table, r *record) {
	for _, f := range c.fields {
		cell := c.cells[f.index]
		switch f.role {
		case roleInput, roleTemp, roleSetpoint, roleAirflow, roleInlet, roleCold:
			v, unit, ok := c.d.number(cell)
			if f.switched {
				unit = ""
				v, ok = switchOf(cell)
			}
			if ok && unit == "" && f.beside != nil {
				v = c.sameUnit(f, v, r.line)
			}
			if ok && (unit == "" || unit == f.unit) {
				r.v[f.role] = v
				c.spelled.look(cell, r.line)
				tb.brackets = tb.brackets.add(f.role, tb.rows, cell)
			} else if same, known := inUnit(v, unit, f.unit); ok && known {
				r.v[f.role] = same
			} else if f.role == roleInput || f.role == roleTemp {
				kind, _ := missingKind(cell)
				count(tb.counts.missing, kind, 1)
			}
			if f.role == roleInput && math.IsNaN(r.v[f.role]) {
				c.word.look(cell, r.line)
			}
		case roleTime:
			if f.beside != nil {
				c.sameUnit(f, 0, r.line)
			}
		case roleMode:
			r.auto = modeOf(cell)
		}
	}
	if i := c.at[roleStatus]; i >= 0 && c.badStatus(c.cells[i]) && !math.IsNaN(r.v[roleTemp]) {
		count(tb.counts.missing, "status "+decodeName(c.cells[i]), 1)
		r.v[roleTemp] = math.NaN()
	}
	tb.take(r, c.open)
}

func (c *csvReader) drop(run, reason string, line int) {
	tb := c.table(run)
	tb.counts.read++
	count(tb.counts.dropped, reason, 1)
	c.first(reason, line)
}

func (c *csvReader) first(reason string, line int) {
	if _, seen := c.firstNo[reason]; !seen {
		c.firstNo[reason] = line
	}
}

// isHeader tells that a line above the data has come again.
func (c *csvReader) isHeader(text []byte) bool {
	for k, h := range c.d.header {
		if bytes.Equal(h, text) {
			if k == len(c.d.header)-1 {
				c.repeats++
			}
			return true
		}
	}
	return false
}

// tooManyDropped refuses a file most of whose rows could not be read: what is
// left would not be the recording.
func (c *csvReader) tooManyDropped() error {
	read, dropped := 0, 0
	worst, most := "", 0
	for _, tb := range c.tables {
		read += tb.counts.read
		for reason, n := range tb.counts.dropped {
			dropped += n
			if n > most || n == most && reason < worst {
				worst, most = reason, n
			}
		}
	}
	if 2*dropped <= read {
		return nil
	}
	return fmt.Errorf("%s:%d: %d of %d rows cannot be read, most because of %q (this is the first): is the right column the clock? say which with %s",
		c.path, c.firstNo[worst], dropped, read, worst, flags[roleTime])
}

func times(n int) string {
	if n == 1 {
		return "once"
	}
	return fmt.Sprintf("%d times", n)
}
