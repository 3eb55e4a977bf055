package data

import "math"

// table collects the rows of one run as they stand in the file.
type table struct {
	name string // of the run in a file of several

	rows   int
	t      growing[int64] // ns
	alt    growing[int64] // the same stamps read month first, while that is open
	cols   [numRoles]*growing[float64]
	values []role         // those that have a column
	auto   *growing[int8] // 1 automatic, 0 manual, -1 not known
	lines  lineMap
	counts counts

	brackets bracketed
}

// counts are the figures of Quality that are known while reading.
type counts struct {
	read    int
	missing map[string]int
	dropped map[string]int
}

// newTable makes the table of a run. rows is how many rows are expected, 0
// when nobody knows: with a good guess no column has to be put together from
// blocks.
func newTable(name string, logged layout, rows int) *table {
	tb := &table{name: name, counts: counts{missing: map[string]int{}, dropped: map[string]int{}}}
	tb.t.reserve(rows)
	for r := range numRoles {
		if logged[r] < 0 {
			continue
		}
		switch r {
		case roleInput, roleTemp, roleSetpoint, roleAirflow, roleInlet, roleCold:
			tb.cols[r] = &growing[float64]{}
			tb.cols[r].reserve(rows)
			tb.values = append(tb.values, r)
		case roleMode:
			tb.auto = &growing[int8]{}
		}
	}
	return tb
}

// growing is a column that grows in blocks, so that growing never copies what
// is there and a finished column costs one block at a time more than itself.
type growing[T int8 | int64 | float64] struct {
	full [][]T
	last []T
}

const (
	firstBlock = 256
	largeBlock = 1 << 16

	mostReserved = 1 << 24 // rows that are made room for because of a guess
)

func (g *growing[T]) reserve(n int) {
	if n > 0 {
		g.last = roomFor[T](min(n, mostReserved))
	}
}

func (g *growing[T]) add(v T) {
	if len(g.last) == cap(g.last) {
		g.grow()
	}
	g.last = append(g.last, v)
}

func (g *growing[T]) grow() {
	n := firstBlock
	if g.last != nil {
		g.full = append(g.full, g.last)
		n = min(4*cap(g.last), largeBlock)
	}
	g.last = make([]T, 0, n)
}

// flat returns the column in one piece and empties g.
func (g *growing[T]) flat() []T {
	if n := len(g.last); len(g.full) == 0 && 4*n >= 3*cap(g.last) {
		out := g.last
		g.last = nil
		return out
	}
	n := len(g.last)
	for _, b := range g.full {
		n += len(b)
	}
	out := make([]T, 0, n)
	for i, b := range g.full {
		out = append(out, b...)
		g.full[i] = nil
	}
	out = append(out, g.last...)
	g.full, g.last = nil, nil
	return out
}

// lineMap tells the line in the file of a row: rows follow each other line by
// line but for the places noted.
type lineMap struct {
	breaks []lineBreak
}

// lineBreak is where rows begin to stand so many lines apart: more than one
// where several lines make a row.
type lineBreak struct{ row, line, step int }

func (b lineBreak) at(row int) int { return b.line + (row-b.row)*b.step }

func (m *lineMap) add(row, line int) {
	if n := len(m.breaks); n > 0 && m.breaks[n-1].at(row) == line {
		return
	}
	m.change(row, line)
}

func (m *lineMap) change(row, line int) {
	if n := len(m.breaks); n > 0 && m.breaks[n-1].row == row-1 { // of the last break only one row is known
		m.breaks[n-1].step = line - m.breaks[n-1].line
		return
	}
	m.breaks = append(m.breaks, lineBreak{row, line, 1})
}

func (m *lineMap) line(row int) int {
	lo, hi := 0, len(m.breaks)
	for lo < hi {
		mid := (lo + hi) / 2
		if m.breaks[mid].row <= row {
			lo = mid + 1
		} else {
			hi = mid
		}
	}
	if lo == 0 {
		return 0
	}
	return m.breaks[lo-1].at(row)
}

// record is one row on its way into a table.
type record struct {
	line int
	t    int64
	alt  int64
	v    [numRoles]float64
	auto int8
}

func (tb *table) add(r *record, open bool) {
	tb.lines.add(tb.rows, r.line)
	tb.t.add(r.t)
	if open {
		tb.alt.add(r.alt)
	}
	for _, i := range tb.values {
		tb.cols[i].add(r.v[i])
	}
	if tb.auto != nil {
		tb.auto.add(r.auto)
	}
	tb.rows++
}

// clear makes every value of a record missing.
func (r *record) clear() {
	for i := range r.v {
		r.v[i] = math.NaN()
	}
	r.auto = -1
}
