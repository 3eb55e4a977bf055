package data

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"os"
	"strings"
	"time"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/metadata"
)

// maxHeld bounds a Parquet file that has to be held in memory because it
// comes packed or from standard input: its footer stands at its end.
const maxHeld = 1 << 30

// readParquet reads a log in Parquet form. The library that reads the pages
// panics on damaged ones; that is an error here, and so is a count of values
// that differs from the footer's.
func readParquet(ctx context.Context, s *source, o *Options) (tables []*table, info *reading, err error) {
	in, size, err := s.seekable()
	if err != nil {
		return nil, nil, err
	}
	defer func() {
		if p := recover(); p != nil {
			tables, info = nil, nil
			err = fmt.Errorf("%s: damaged or unsupported Parquet file: %s", s.path, firstLine(fmt.Sprint(p)))
		}
	}()
	pages := newPageMemory()
	props := parquet.NewReaderProperties(pages)
	props.BufferedStreamEnabled = true
	f, err := file.NewParquetReader(in, file.WithReadProps(props))
	if err != nil {
		return nil, nil, fmt.Errorf("%s: damaged Parquet file: %s", s.path, firstLine(err.Error()))
	}
	p := &parquetReader{path: s.path, f: f, in: in, size: size}
	if err := p.checkFooter(); err != nil {
		return nil, nil, fmt.Errorf("%s: damaged Parquet file: %w", s.path, err)
	}
	pages.allow(p.largestGroup(), size)
	return p.read(ctx, o)
}

// largestGroup is the number of bytes that the largest row group unpacks to.
func (p *parquetReader) largestGroup() (most int64) {
	meta := p.f.MetaData()
	for g := range meta.RowGroups {
		var sum int64
		for i := range meta.Schema.NumColumns() {
			if c, err := meta.RowGroup(g).ColumnChunk(i); err == nil {
				sum += c.TotalUncompressedSize()
			}
		}
		most = max(most, sum)
	}
	return most
}

func firstLine(s string) string {
	s, _, _ = strings.Cut(s, "\n")
	return s
}

// seekable gives the file itself where it is stored as Parquet, else its
// unpacked bytes held in memory.
func (s *source) seekable() (parquet.ReaderAtSeeker, int64, error) {
	if f, ok := s.closer.(*os.File); ok && s.packed == "" {
		stat, err := f.Stat()
		if err == nil && stat.Mode().IsRegular() {
			return io.NewSectionReader(f, 0, stat.Size()), stat.Size(), nil
		}
	}
	held, err := io.ReadAll(io.LimitReader(s.r, maxHeld+1))
	if err != nil {
		return nil, 0, err
	}
	if len(held) > maxHeld {
		return nil, 0, fmt.Errorf("%s: a Parquet file of more than %d MiB can only be read as an unpacked file", s.path, maxHeld>>20)
	}
	return bytes.NewReader(held), int64(len(held)), nil
}

type parquetReader struct {
	path string
	f    *file.Reader
	in   io.ReaderAt
	size int64

	columns []*parquetColumn // those that can be read, in file order
	skipped []string
	csv     *csvReader // knows the roles and the clock
}

// checkFooter refuses a footer that cannot be true, before anything is
// allocated because of it.
func (p *parquetReader) checkFooter() error {
	meta := p.f.MetaData()
	columns := meta.Schema.NumColumns()
	if columns > maxColumns {
		return fmt.Errorf("%d columns, at most %d can be read", columns, maxColumns)
	}
	var rows int64
	for g := range meta.RowGroups {
		rg := meta.RowGroup(g)
		if rg.NumColumns() != columns || rg.NumRows() < 0 {
			return fmt.Errorf("row group %d does not fit the schema", g)
		}
		rows += rg.NumRows()
		for i := range columns {
			c, err := rg.ColumnChunk(i)
			if err != nil {
				return err
			}
			start, n := extentOf(c)
			flat := meta.Schema.Column(i).MaxRepetitionLevel() == 0
			switch {
			case rg.NumRows() == 0:
			case n <= 0 || start < 4 || start > p.size-n:
				return fmt.Errorf("row group %d, column %d lies outside the file", g, i)
			case c.TotalUncompressedSize() < 0 || c.TotalUncompressedSize() >= math.MaxInt32:
				return fmt.Errorf("row group %d, column %d unpacks to %d bytes", g, i, c.TotalUncompressedSize())
			case flat && c.NumValues() != rg.NumRows():
				return fmt.Errorf("row group %d, column %d holds %d values for %d rows", g, i, c.NumValues(), rg.NumRows())
			}
		}
	}
	if rows != p.f.NumRows() {
		return fmt.Errorf("the row groups hold %d rows, the footer says %d", rows, p.f.NumRows())
	}
	return nil
}

// extentOf is where the pages of a column of a row group stand.
func extentOf(c *metadata.ColumnChunkMetaData) (start, n int64) {
	start = c.DataPageOffset()
	if c.HasDictionaryPage() && c.DictionaryPageOffset() > 0 {
		start = min(start, c.DictionaryPageOffset())
	}
	return start, c.TotalCompressedSize()
}

// open starts reading a column's part of row group g, after a look at its pages.
func (p *parquetReader) open(c *parquetColumn, g int) error {
	rg := p.f.MetaData().RowGroup(g)
	chunk, err := rg.ColumnChunk(c.index)
	if err != nil {
		return err
	}
	start, n := extentOf(chunk)
	if err := checkPages(p.in, start, n, rg.NumRows()); err != nil {
		return err
	}
	return c.open(p.f.RowGroup(g))
}

func (p *parquetReader) read(ctx context.Context, o *Options) ([]*table, *reading, error) {
	p.list()
	if p.f.NumRows() == 0 {
		return nil, nil, fmt.Errorf("%s: %w", p.path, errNoRows)
	}
	d, err := p.sample(o)
	if err != nil {
		return nil, nil, p.hint(err)
	}
	c := &csvReader{path: p.path, d: d, byName: map[string]*table{}, firstNo: map[string]int{}}
	p.csv = c
	info := &reading{cols: d.cols}
	if len(p.skipped) > 0 {
		shown := p.skipped[:min(len(p.skipped), maxListed)]
		info.note("columns-skipped", 0, "%d columns are nested or of a kind that holds no number or time and were skipped: %s",
			len(p.skipped), strings.Join(shown, ", "))
	}
	if isLong(d.cols, o) {
		err = c.planLong(o, info)
	} else {
		err = c.plan(o, info)
	}
	if err != nil {
		return nil, nil, fmt.Errorf("%s: %w", p.path, err)
	}
	d.rows = nil
	if c.at[roleRun] < 0 && c.long == nil {
		c.expect = int(min(p.f.NumRows(), mostReserved))
	}
	if err := p.readRows(ctx); err != nil {
		return nil, nil, p.hint(err)
	}
	if c.long != nil {
		tables, err := c.long.tables(c, o, info)
		if err != nil {
			return nil, nil, fmt.Errorf("%s: %w", p.path, err)
		}
		return tables, info, nil
	}
	info.clock, info.at, info.open = c.clock, c.at, c.open
	return c.tables, info, c.refuse()
}

// hint adds what to do about the two kinds of files that cannot be read.
func (p *parquetReader) hint(err error) error {
	text := firstLine(err.Error())
	if strings.Contains(text, "LZ4_RAW") || strings.Contains(text, "unsupported data encoding") {
		return fmt.Errorf("%s: %s: write the file again with zstd or snappy and default encodings", p.path, text)
	}
	if strings.HasPrefix(text, p.path) {
		return err
	}
	return fmt.Errorf("%s: %w", p.path, err)
}

// list finds the columns that can be read.
func (p *parquetReader) list() {
	schema := p.f.MetaData().Schema
	for i := range schema.NumColumns() {
		descr := schema.Column(i)
		c := newParquetColumn(descr, i)
		if c == nil {
			p.skipped = append(p.skipped, descr.Path())
			continue
		}
		p.columns = append(p.columns, c)
	}
}

// wide is the number of columns from which on only those are sampled whose
// name says something.
const wide = 64

// sample reads the first rows of the columns as text, so that clock and roles
// are found as they are in a text file.
func (p *parquetReader) sample(o *Options) (*dialect, error) {
	d := &dialect{delim: ',', format: numberFormat{'.'}, fields: len(p.columns)}
	d.cols = make([]column, len(p.columns))
	g := 0
	for p.f.RowGroup(g).NumRows() == 0 {
		g++
	}
	n := int(min(p.f.RowGroup(g).NumRows(), sampleRows))
	d.rows = make([]line, n)
	for i := range d.rows {
		d.rows[i] = line{number: i + 1, cells: make([][]byte, len(p.columns))}
	}
	for i, c := range p.columns {
		col := column{index: i, label: c.name, class: c.class}
		col.name, col.unit = splitNameUnit(c.name)
		if c.truth {
			col.switched, col.words = true, []string{"true", "false"}
		}
		d.cols[i] = col
		if r, _ := roleOf(col); len(p.columns) > wide && r == roleNone && !named(o, c.name) {
			continue
		}
		if err := p.open(c, g); err != nil {
			return nil, fmt.Errorf("damaged Parquet file: row group %d, column %q: %w", g, c.name, err)
		}
		if err := c.fill(n); err != nil {
			return nil, fmt.Errorf("column %q: %w", c.name, err)
		}
		for k := range n {
			d.rows[k].cells[i] = c.cell(k)
		}
	}
	classes := make([]class, len(d.cols))
	for i := range d.cols {
		classes[i] = d.cols[i].class
	}
	cols := d.cols
	d.describe(d.rows)
	for i := range d.cols {
		found := d.cols[i].class
		d.cols[i] = cols[i]
		if classes[i] == texts { // text may hold numbers or stamps
			d.cols[i].class = found
		}
	}
	d.inspect(d.rows)
	return d, nil
}

// named tells that an option names a column.
func named(o *Options, name string) bool {
	for r := range numRoles {
		if o.column(r) != "" && strings.HasPrefix(strings.ToLower(name), strings.ToLower(o.column(r))) {
			return true
		}
	}
	return false
}

// batch is how many rows are read at once.
const batch = 8192

// readRows reads the columns that have a role side by side.
func (p *parquetReader) readRows(ctx context.Context) error {
	c := p.csv
	var used []*parquetColumn
	for _, f := range c.fields {
		col := p.columns[f.index]
		col.switched = f.role == roleInput && f.switched
		col.role, col.isTime = f.role, (f.role == roleTime || f.role == roleDate) && c.long == nil
		col.clock, col.format = c.clock, c.d.format
		if col.utc && f.role == roleTime {
			c.clock.zone = time.UTC
		}
		used = append(used, col)
	}
	row := 0
	for g := range p.f.NumRowGroups() {
		rg := p.f.RowGroup(g)
		left := int(rg.NumRows())
		if left == 0 {
			continue
		}
		for _, col := range used {
			if err := p.open(col, g); err != nil {
				return fmt.Errorf("row group %d, column %q: %w", g, col.name, err)
			}
		}
		for left > 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
			n := min(left, batch)
			for _, col := range used {
				if err := col.fill(n); err != nil {
					return fmt.Errorf("row group %d, column %q: %w", g, col.name, err)
				}
			}
			for k := range n {
				p.row(used, k, row+k+1)
			}
			row += n
			left -= n
		}
		for _, col := range used {
			if col.reader.HasNext() {
				return fmt.Errorf("row group %d, column %q holds more values than rows", g, col.name)
			}
			if err := col.reader.Err(); err != nil {
				return fmt.Errorf("row group %d, column %q: %w", g, col.name, err)
			}
		}
	}
	return nil
}

// row hands one row to its table.
func (p *parquetReader) row(used []*parquetColumn, k, number int) {
	c := p.csv
	if c.long != nil || c.at[roleHalf] >= 0 || c.pair && (p.columns[c.at[roleTime]].kind == asText || p.columns[c.at[roleDate]].kind == asText) {
		p.textRow(used, k, number)
		return
	}
	r := &c.rec
	var tod, day, alt int64
	run := ""
	haveTod, haveDay, bad := false, !c.pair, false
	status := []byte(nil)
	alt = noTime
	for _, col := range used {
		switch col.role {
		case roleTime:
			tod, alt, haveTod = col.stamp(k)
		case roleDate:
			day, _, haveDay = col.stamp(k)
		case roleMode:
			r.auto = modeOf(col.cell(k))
		case roleStatus:
			status = col.cell(k)
			bad = c.badStatus(status)
		case roleRun:
			run = decodeName(col.cell(k))
		default:
			r.v[col.role] = col.number(k)
		}
	}
	if !haveTod || !haveDay {
		c.drop(run, "no time", number)
		return
	}
	tb := c.table(run)
	for _, col := range used {
		if (col.role == roleInput || col.role == roleTemp) && r.v[col.role] != r.v[col.role] {
			count(tb.counts.missing, col.missing(k), 1)
			if col.role == roleInput && col.kind == asText {
				c.word.look(col.texts[k], number)
			}
		}
	}
	if bad && r.v[roleTemp] == r.v[roleTemp] {
		count(tb.counts.missing, "status "+decodeName(status), 1)
		r.v[roleTemp] = math.NaN()
	}
	r.line, r.t, r.alt = number, tod+day, alt
	tb.take(r, c.open)
}

// textRow hands a row over as text: rows in long form, and stamps in two
// columns of text.
func (p *parquetReader) textRow(used []*parquetColumn, k, number int) {
	c := p.csv
	if c.cells == nil {
		c.cells = make([][]byte, len(p.columns))
	}
	for i, f := range c.fields {
		c.cells[f.index] = used[i].cell(k)
	}
	c.cellRow(number)
}
