package data

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"slices"
	"unicode/utf8"
)

// dialect is how a text file writes its rows, as its beginning shows.
type dialect struct {
	delim  byte
	format numberFormat
	onlyCR bool // lines end with CR alone

	rewrite func(line []byte) []byte // as of the lineReader
	keys    []string                 // names that stand in every row, in place of a header

	thousands string // a number whose mark could be a decimal one as well

	fields int // cells in a row of data, with those that only the header names
	filled int // cells that most rows have
	first  int // line of the first row of data
	shift  int // 1 when the rows begin with a row name that the header leaves out

	header [][]byte // lines above the data that may come again: header and unit row
	cols   []column
	rows   []line // rows of data in the sample, until the clock is found
}

// sampleSize is how much of a text is looked at before its rows are read;
// more is taken, up to sampleMost, while it holds fewer than sampleLines lines.
const (
	sampleSize  = 1 << 18
	sampleMost  = 8 << 20
	sampleLines = 20
	sampleRows  = 2000 // rows looked at in detail
)

// readSample reads the beginning of a text; whole tells that it is all of it.
// size is that of the text, 0 where it is not known.
func readSample(r io.Reader, size int64) (sample []byte, whole bool, err error) {
	want := sampleSize / 16
	if size > 0 {
		want = int(min(size+1, sampleSize))
	}
	for {
		old := len(sample)
		sample = slices.Grow(sample, want-old)[:want]
		n, err := io.ReadFull(r, sample[old:])
		sample = sample[:old+n]
		if err == io.EOF || err == io.ErrUnexpectedEOF {
			return sample, true, nil
		}
		if err != nil {
			return sample, false, err
		}
		if want < sampleSize {
			want = min(2*want, sampleSize)
			continue
		}
		lines := bytes.Count(sample, []byte{'\n'}) + bytes.Count(sample, []byte{'\r'})
		if lines >= sampleLines || want >= sampleMost {
			return sample, false, nil
		}
		want *= 2
	}
}

// line is one line of the sample, cut into cells.
type line struct {
	number int
	text   []byte
	cells  [][]byte
}

// sniff finds the dialect of a text from its beginning.
func sniff(path string, sample []byte, whole bool) (*dialect, error) {
	d := &dialect{}
	d.onlyCR = bytes.IndexByte(sample, '\n') < 0 && bytes.IndexByte(sample, '\r') >= 0
	physical, err := d.lines(path, sample, whole)
	if err != nil {
		return nil, err
	}
	if len(physical) == 0 {
		return nil, fmt.Errorf("%s: is empty", path)
	}
	if d.rewrite = findWrapping(physical); d.rewrite == nil {
		k, err := findKeys(path, physical)
		if err != nil {
			return nil, err
		}
		if k != nil {
			d.rewrite, d.keys = k.row, k.names
		}
	}
	if d.rewrite != nil {
		if physical, err = d.lines(path, sample, whole); err != nil {
			return nil, err
		}
	}
	d.delim, d.fields = findDelimiter(physical)
	d.filled = d.fields
	if text := bytes.TrimLeft(sample, " \t\r\n\xEF\xBB\xBF"); d.fields < 2 && len(text) > 0 && (text[0] == '{' || text[0] == '[') {
		return nil, fmt.Errorf("%s: no rows of two or more numbers found: this seems to be JSON, of which only one object or list for every time, in a line of its own, can be read: export it so, or as CSV", path)
	}
	if d.fields < 2 {
		return nil, fmt.Errorf("%s: no rows of two or more numbers found: %s", path, logWanted)
	}
	records := physical
	if bytes.IndexByte(sample, '"') >= 0 { // now it is known which quotes enclose cells
		if records, err = d.lines(path, sample, whole); err != nil {
			return nil, err
		}
	}
	if err := cutLines(path, records, d.delim); err != nil {
		return nil, err
	}
	if names := d.signalNames(records); names != nil {
		return nil, fmt.Errorf("%s: %w", path, errTransposed(names))
	}
	var guess []byte
	if d.format.point, guess = findPoint(records, d.delim, d.fields); guess != nil {
		d.thousands = decodeName(guess)
	}
	return d, d.findColumns(path, records)
}

// logWanted is what to do with a file that is no log.
const logWanted = "a log has a row of numbers for every time, in columns parted by commas, semicolons, tabs, bars or blanks; give a CSV or Parquet file, or export the log as CSV"

// lines cuts the sample into lines. Blank lines are left out, and the last line
// when the sample ends within it.
func (d *dialect) lines(path string, sample []byte, whole bool) ([]line, error) {
	r := newLineReader(path, bytes.Clone(sample), nil)
	r.onlyCR, r.rewrite, r.delim = d.onlyCR, d.rewrite, d.delim
	r.start()
	out := make([]line, 0, min(bytes.Count(r.buf[:r.hi], []byte{'\n'})+1, sampleRows))
	for len(out) < sampleRows {
		text, err := r.read()
		if err == io.EOF {
			break
		}
		if err != nil {
			return nil, err
		}
		if len(bytes.Trim(text, " \t\x00")) == 0 {
			continue
		}
		if r.line == 1 {
			text = bytes.TrimPrefix(text, []byte("\xEF\xBB\xBF"))
		}
		out = append(out, line{number: r.line, text: text})
	}
	if !whole && len(out) > 1 && len(out) < sampleRows {
		out = out[:len(out)-1]
	}
	return out, nil
}

// cutLines cuts lines into cells, those of many lines in one piece of memory.
func cutLines(path string, lines []line, delim byte) error {
	var room [][]byte
	usual := 0
	for i := range lines {
		l := &lines[i]
		if usual > cap(room) {
			room = make([][]byte, 0, max(usual, cellBlock))
		}
		l.cells = splitCells(room[:0:usual], l.text, delim)
		if len(l.cells) > maxColumns {
			return fmt.Errorf("%s:%d: %d columns, at most %d can be read", path, l.number, len(l.cells), maxColumns)
		}
		room = room[usual:usual]
		usual = len(l.cells)
	}
	return nil
}

// cellBlock is how many cells of the sample share a piece of memory.
const cellBlock = 1 << 10

const maxColumns = 100000

// isComment tells a line that is meant for people.
func isComment(text []byte, delim byte) bool {
	text = bytes.TrimLeft(text, " \t\"")
	if len(text) == 0 {
		return false
	}
	return text[0] == '#' || text[0] == '%' || bytes.HasPrefix(text, []byte("//")) ||
		text[0] == '!' || text[0] == ';' && delim != ';'
}

// findColumns finds where the data begin, the header above them, and what is
// in each column.
func (d *dialect) findColumns(path string, lines []line) error {
	d.describe(lines)
	start := -1
	for k, l := range lines {
		if d.isData(l) {
			start = k
			break
		}
	}
	if start < 0 {
		return fmt.Errorf("%s: no rows of data found: %s", path, logWanted)
	}
	start += d.belowNames(lines[start:], start == 0)
	d.first = lines[start].number
	names, units := d.keys, []string(nil)
	if names == nil {
		names, units = d.findHeader(lines[:start], lines[start])
	}
	if err := d.checkNames(names, lines[start:]); err != nil {
		return fmt.Errorf("%s:%d: %w", path, max(1, d.first-1), err)
	}
	for i := range d.cols {
		c := &d.cols[i]
		c.label = fmt.Sprintf("column %d", i+1)
		if k := i - d.shift; k >= 0 && k < len(names) && names[k] != "" {
			c.label = names[k]
		} else if d.shift == 1 && i == 0 {
			c.label = "row"
		}
		c.name, c.unit = splitNameUnit(c.label)
		if k := i - d.shift; k >= 0 && k < len(units) && units[k] != "" {
			c.unit = units[k]
		}
	}
	d.rows = slices.DeleteFunc(lines[start:], func(l line) bool {
		return slices.ContainsFunc(d.header, func(h []byte) bool { return bytes.Equal(h, l.text) })
	})
	for k, h := range d.header {
		d.header[k] = bytes.Clone(h) // kept when the sample is not
	}
	d.inspect(d.rows)
	return nil
}

// numberedLines is how far below a row of numbers at the top of a file the names
// are looked for.
const numberedLines = 10

// belowNames tells how many lines stand in front of the first row of data where
// the file begins with numbers that are none: of columns, of channels.
func (d *dialect) belowNames(lines []line, atTop bool) int {
	if !atTop {
		return 0
	}
	names := 0
	for k, l := range lines[:min(numberedLines, len(lines))] {
		if len(l.cells) == d.fields && !isComment(l.text, d.delim) && len(nonBlank(l.cells)) == d.fields &&
			!slices.ContainsFunc(l.cells, func(c []byte) bool { return d.classOf(c) != texts }) {
			names = k
		} else if names > 0 && d.isData(l) {
			return k
		}
	}
	return 0
}

// describe classes the columns by the majority of their cells.
func (d *dialect) describe(lines []line) {
	votes := make([][4]int, d.fields)
	for _, l := range lines {
		if len(l.cells) != d.fields || isComment(l.text, d.delim) {
			continue
		}
		for i, c := range l.cells {
			votes[i][d.classOf(c)]++
		}
	}
	d.cols = make([]column, d.fields)
	for i, v := range votes {
		c := &d.cols[i]
		c.index = i
		switch {
		case v[numbers]+v[stamps]+v[texts] == 0:
			c.class = blankCells
		case v[numbers] >= v[stamps] && v[numbers] >= v[texts]:
			c.class = numbers
		case v[stamps] >= v[texts]:
			c.class = stamps
		default:
			c.class = texts
		}
	}
}

// classOf classes a cell: a word for a missing value counts as blank.
func (d *dialect) classOf(cell []byte) class {
	if len(cell) == 0 {
		return blankCells
	}
	if _, _, ok := d.number(cell); ok {
		return numbers
	}
	if isStamp(cell) {
		return stamps
	}
	if _, known := knownMissing(cell); known {
		return blankCells
	}
	return texts
}

// number reads a cell that may end with a unit.
func (d *dialect) number(cell []byte) (v float64, unit string, ok bool) {
	if v, ok = d.format.parse(cell); ok {
		return v, "", true
	}
	if plain, how := respell(cell); how != usualSpelling {
		v, ok = d.format.parse(plain)
		return v, "", ok
	}
	if n := bytes.LastIndexAny(cell, "0123456789") + 1; n > 0 && isUnitSuffix(cell[n:]) {
		v, ok = d.format.parse(cell[:n])
		unit, _ = canonicalUnit(decodeName(trimBlanks(cell[n:])))
		return v, unit, ok
	}
	return 0, "", false
}

// isData tells a row of data: its first cell that should be a number or a
// stamp is one, and so are more than half of all such cells. A row with fewer
// cells than the others, as lines above the header are, must hold no words.
func (d *dialect) isData(l line) bool {
	if len(l.cells) < 2 || isComment(l.text, d.delim) {
		return false
	}
	good, bad := 0, 0
	short := len(l.cells) < d.fields
	for i, c := range l.cells {
		if short && d.classOf(c) == texts {
			return false
		}
		if i >= len(d.cols) || d.cols[i].class != numbers && d.cols[i].class != stamps {
			continue
		}
		switch k := d.classOf(c); {
		case k == numbers || k == stamps:
			good++
		case k == texts && good == 0:
			return false
		case k == texts && !isWord(c):
			bad++
		}
	}
	return good > bad && len(l.cells) >= min(d.fields, 2)
}

// isWord tells a word that stands for a value: ON, MAN.
func isWord(cell []byte) bool {
	_, is := switchOf(cell)
	return is || modeOf(cell) >= 0
}

// tagRows is how many rows are looked at to tell numbered tags.
const tagRows = 200

// inspect looks at the rows of the sample: values to show, whether a column
// moves in steps, whether it only rises, what its stamps hold.
func (d *dialect) inspect(rows []line) {
	for i := range d.cols {
		c := &d.cols[i]
		var s columnStats
		words := map[string]int{}
		var onOff switchTally
		for _, l := range rows {
			if i >= len(l.cells) || len(l.cells[i]) == 0 {
				continue
			}
			cell := l.cells[i]
			if len(c.sample) < 5 {
				c.sample = append(c.sample, decodeName(cell[:min(len(cell), 30)]))
			}
			switch c.class {
			case numbers:
				if v, unit, ok := d.number(cell); ok {
					s.add(v)
					if s.n <= tagRows && v == math.Trunc(v) {
						words[string(cell)]++
					}
					if unit != "" && c.unit == "" {
						c.unit = unit
					}
				}
			case texts:
				words[string(cell)]++
				if len(l.cells) >= d.fields { // not a line of words below the data
					onOff.add(cell)
				}
			case stamps:
				if isStamp(cell) {
					dated, timed := stampParts(cell)
					c.dated, c.timed = c.dated || dated, c.timed || timed
				}
			}
		}
		c.stepwise, c.ascending = s.stepwise(), s.ascending()
		if c.class == numbers {
			c.numbered = s.fell > 0 && len(words) > 1 && sum(words) == min(s.n, tagRows) && 2*len(words) <= sum(words)
			continue
		}
		c.repeats = len(words) > 0 && 2*len(words) <= sum(words)
		if c.class == texts {
			c.switched, c.words = onOff.switched(), onOff.seen
			c.units, c.halves = len(words) > 0 && !c.switched, len(words) > 0
			for w := range words {
				_, rest, ok := halfDay(int64(nsHour), []byte(w))
				c.halves = c.halves && ok && len(rest) == 0
			}
			for w := range words {
				_, known := canonicalUnit(decodeName([]byte(w)))
				c.units = c.units && known
				c.ofUnits = c.ofUnits || utf8.RuneCountInString(w) > 1
			}
			c.ofUnits = c.ofUnits && c.units && len(words) > 1
		}
	}
	d.takeUnits()
}

func sum(counts map[string]int) (n int) {
	for _, c := range counts {
		n += c
	}
	return n
}

// stampParts tells whether a stamp holds a date and a time of day.
func stampParts(cell []byte) (dated, timed bool) {
	var c clock
	if _, _, ok := c.parseCalendar(cell); ok {
		return true, bytes.IndexByte(cell, ':') >= 0 || len(cell) > 10 && bytes.IndexByte(cell, 'T') > 0
	}
	return false, true
}

// columnStats follows a column of numbers from row to row.
type columnStats struct {
	n, same, fell int
	last          float64
}

func (s *columnStats) add(v float64) {
	if s.n > 0 {
		if v == s.last {
			s.same++
		}
		if v < s.last {
			s.fell++
		}
	}
	s.n++
	s.last = v
}

// stepwise is the share of rows that repeat the one before.
func (s *columnStats) stepwise() float64 {
	if s.n < 5 {
		return math.NaN()
	}
	return float64(s.same) / float64(s.n-1)
}

func (s *columnStats) ascending() bool { return s.n > 1 && s.fell == 0 }
