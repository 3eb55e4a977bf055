package data

import (
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// A table with a signal in each row, and a column for each instant, cannot be
// read, and what its columns seem to be is no help to anybody.

// errTransposed says so.
func errTransposed(names []string) error {
	return fmt.Errorf("the table seems to hold one signal in each row (%s) and one instant in each column: turn it round (in a spreadsheet: copy, paste special, transpose) and save it as CSV, so that each row is an instant",
		listOf(names))
}

// errSideways is for a table that is that wide, without names.
func errSideways(err error, rows, columns int) error {
	return fmt.Errorf("%w; the table has %d rows and %d columns: if each row holds a signal, turn it round (in a spreadsheet: copy, paste special, transpose) and save it as CSV",
		err, rows, columns)
}

// mostSignals is how many rows a table can have that holds a signal in each;
// fewInstants is how many columns it has at least, wideness how many for each
// row.
const (
	mostSignals = 200
	fewInstants = 6
	wideness    = 2
)

// signalNames lists what the rows begin with where each begins with a name and
// goes on in numbers or stamps, and two of the names are a clock's and that of
// an input or a temperature.
func (d *dialect) signalNames(lines []line) []string {
	var names []string
	roles := map[role]bool{}
	for _, l := range lines {
		if len(nonBlank(l.cells)) < 2 || isComment(l.text, d.delim) {
			continue
		}
		first, good, rest := l.cells[0], 0, nonBlank(l.cells[1:])
		for _, c := range rest {
			if k := looseClass(c); k == numbers || k == stamps {
				good++
			}
		}
		if len(names) == mostSignals || looseClass(first) != texts || len(rest) < 3 || len(rest)-good > 1 { // a column of units
			return nil
		}
		name := decodeName(first)
		if slices.Contains(names, name) { // a tag, which comes again
			return nil
		}
		col := column{label: name, class: numbers}
		col.name, col.unit = splitNameUnit(name)
		r, _ := roleOf(col)
		roles[r] = true
		names = append(names, name)
	}
	if len(names) < 2 || !roles[roleTime] || !roles[roleInput] && !roles[roleTemp] {
		return nil
	}
	return names
}

// sideways adds to an error about columns that the table is wider than long.
func (c *csvReader) sideways(err error) error {
	rows, columns := len(c.d.rows)+len(c.d.header), c.d.fields
	var open *ambiguousError
	if !errors.As(err, &open) || rows > mostSignals || columns < max(fewInstants, wideness*rows) {
		return err
	}
	if slices.ContainsFunc(c.d.cols, func(c column) bool { return c.class == texts && !c.switched }) {
		return err
	}
	return errSideways(err, rows, columns)
}

// listOf joins the first of many names.
func listOf(names []string) string {
	more := ""
	if len(names) > maxListed {
		more = fmt.Sprintf(" and %d more", len(names)-maxListed)
		names = names[:maxListed]
	}
	quoted := make([]string, len(names))
	for i, n := range names {
		quoted[i] = strconv.Quote(n)
	}
	return strings.Join(quoted, ", ") + more
}
