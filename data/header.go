package data

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strings"
)

// findHeader looks upward from the first row of data for a unit row and a
// header; a comment line counts when there is nothing else.
func (d *dialect) findHeader(above []line, data line) (names, units []string) {
	var rows []line
	for k := len(above) - 1; k >= 0 && len(rows) < 2; k-- {
		if isComment(above[k].text, d.delim) || isRule(above[k].text) || isTypeRow(above[k].cells) {
			continue
		}
		if len(above[k].cells) < 2 {
			break
		}
		if one := nonBlank(above[k].cells); len(one) == 1 && !isUnitRow(one) { // a line between header and data
			continue
		}
		rows = append(rows, above[k])
	}
	if len(rows) > 1 {
		under, isUnder := unitRow(rows[0].cells)
		over, isOver := unitRow(rows[1].cells)
		switch {
		case isUnder && !isOver:
			d.header = append(d.header, rows[0].text)
			units, rows = under, rows[1:]
		case isOver && !isUnder && len(over) == d.fields:
			units = over
		}
	}
	if len(rows) == 0 {
		return d.commentHeader(above), nil
	}
	d.header = append(d.header, rows[0].text)
	names = cellNames(rows[0].cells)
	if d.delim == ' ' && len(names) == d.fields-1 && areDateAndTime(data.cells) {
		return append([]string{"date"}, names...), units
	}
	if len(names) == d.fields-1 && names[len(names)-1] != "" && (isRowName(data, names, d) || isWeekday(data.cells)) {
		d.shift = 1
		return names, units
	}
	return d.fitNames(rows[0].text, names), units
}

// isRule tells a line drawn under or over a header: dashes and the like.
func isRule(text []byte) bool {
	return bytes.Count(text, []byte{'-'})+bytes.Count(text, []byte{'='}) >= 3 && len(bytes.Trim(text, "-=+_|: \t\r")) == 0
}

// typeWords are what databases and analysis programs call kinds of columns.
var typeWords = []string{"float", "float32", "float64", "double", "real", "lreal", "single", "int", "integer", "int16", "int32", "int64", "dint", "uint", "long",
	"string", "text", "varchar", "char", "bool", "boolean", "date", "time", "datetime", "timestamp", "number", "numeric", "decimal"}

// isTypeRow tells a row that says of what kind the columns are.
func isTypeRow(cells [][]byte) bool {
	n, kinds := 0, 0
	for _, c := range cells {
		if len(c) == 0 {
			continue
		}
		n++
		word := strings.ToLower(decodeName(c))
		if slices.Contains(typeWords, word) {
			kinds++
		}
		if word == "date" || word == "time" || word == "timestamp" || word == "number" { // names as well
			n--
			kinds--
		}
	}
	return n > 0 && kinds == n
}

// fitNames makes as many names of a header as the rows have cells, where it
// has more because the delimiter stands in names: in front of a unit
// ("Voltage, V"), or as the blank between words.
func (d *dialect) fitNames(text []byte, names []string) []string {
	for len(names) > d.fields && names[len(names)-1] == "" {
		names = names[:len(names)-1]
	}
	if len(names) <= d.fields {
		return names
	}
	if d.delim == ' ' {
		if wide := wideGaps(text); len(wide) == d.fields {
			return wide
		}
	}
	var joined []string
	for i, n := range names {
		if _, known := unitCell(n); known && i > 0 {
			joined[len(joined)-1] += " [" + strings.Trim(n, "[](){}<>") + "]"
			continue
		}
		joined = append(joined, n)
	}
	if len(joined) == d.fields {
		return joined
	}
	return names
}

// wideGaps splits a header at tabs and at two blanks or more.
func wideGaps(text []byte) (names []string) {
	for _, part := range strings.Split(strings.ReplaceAll(decodeName(bytes.Trim(text, " \t")), "\t", "  "), "  ") {
		if part = strings.TrimSpace(part); part != "" {
			names = append(names, part)
		}
	}
	return names
}

// remarks are names of columns that most rows leave out.
var remarks = []string{"comment", "comments", "remark", "remarks", "note", "notes", "marker", "event", "annotation", "kommentar", "bemerkung", "notiz", "marke",
	"commentaire", "remarque", "comentario", "nota", "commento", "opmerking", "comentário", "uwagi"}

// checkNames refuses a header that names more or fewer columns than the rows
// hold: whatever the names say would be said of the wrong column. Columns of
// remarks may be left out, and columns without a name may hold text.
func (d *dialect) checkNames(names []string, lines []line) error {
	switch {
	case d.shift > 0 && d.commaInLast(lines):
		return fmt.Errorf("the header names %d columns (%s), but the rows hold %d (%s): is the comma both the delimiter and the decimal mark? then export again with semicolons or tabs between the columns, or with decimal points; if every row begins with its number, name that column too",
			len(names), strings.Join(names, " | "), d.fields, bytes.TrimSpace(lines[0].text[:min(len(lines[0].text), 60)]))
	case len(names) == 0 || d.shift > 0:
		return nil
	case len(names) > d.fields:
		used := slices.ContainsFunc(lines, func(l line) bool { return len(l.cells) > d.fields })
		extra := slices.ContainsFunc(names[d.fields:], func(n string) bool { return !slices.Contains(remarks, strings.ToLower(n)) })
		if used || !extra {
			d.fields = len(names)
			return nil
		}
	case !slices.ContainsFunc(d.cols[len(names):], func(c column) bool { return c.class == numbers || c.class == stamps }):
		return nil
	}
	if d.commaTwice(names, lines) {
		return fmt.Errorf("the header names %d columns (%s), but the rows hold %d (%s): the comma seems to be both the delimiter and the decimal mark: export again with semicolons or tabs between the columns, or with decimal points",
			len(names), strings.Join(names, " | "), d.fields, bytes.TrimSpace(lines[0].text[:min(len(lines[0].text), 60)]))
	}
	return fmt.Errorf("the header names %d columns (%s), but the rows hold %d (%s): quote the cells that hold the delimiter %q, or name every column once",
		len(names), strings.Join(names, " | "), d.fields, bytes.TrimSpace(lines[0].text[:min(len(lines[0].text), 60)]), d.delim)
}

// commaTwice tells rows cut at their decimal commas too: more cells than the
// header names, between commas, and no number with a decimal point.
func (d *dialect) commaTwice(names []string, lines []line) bool {
	return d.delim == ',' && d.fields > len(names) && !d.pointed(lines)
}

// commaInLast tells rows of one cell too many whose last cell may be the
// decimals of the one before: of many values, single digits or more with
// zeros in front, and no decimal point in sight.
func (d *dialect) commaInLast(lines []line) bool {
	if d.delim != ',' || isWeekday(lines[0].cells) || d.pointed(lines) {
		return false
	}
	width, zeros, seen := 0, false, map[string]bool{}
	for _, l := range lines {
		last := l.cells[len(l.cells)-1]
		if len(l.cells) != d.fields || len(last) == 0 {
			continue
		}
		if len(bytes.Trim(last, "0123456789")) > 0 || len(last) > 3 || width > 0 && len(last) != width {
			return false
		}
		width, seen[string(last)] = len(last), true
		zeros = zeros || last[0] == '0'
	}
	return (width == 1 || zeros) && len(seen) > 2 // two may be a switch, or a mode
}

// pointed tells rows with a decimal point in some number.
func (d *dialect) pointed(lines []line) bool {
	return slices.ContainsFunc(lines, func(l line) bool {
		return slices.ContainsFunc(l.cells, func(c []byte) bool {
			return bytes.IndexByte(c, '.') >= 0 && d.classOf(c) == numbers
		})
	})
}

// isRowName tells that a row of data has one cell more than the header
// because it begins with the row's number or quoted name.
func isRowName(data line, names []string, d *dialect) bool {
	last := data.cells[len(data.cells)-1]
	v, _, ok := d.number(data.cells[0])
	return len(data.cells) == len(names)+1 && len(last) > 0 && ok && v == math.Trunc(v)
}

// areDateAndTime tells a stamp that the blank inside it cuts in two, under one
// name.
func areDateAndTime(cells [][]byte) bool {
	if len(cells) < 2 || !isStamp(cells[0]) || !isStamp(cells[1]) {
		return false
	}
	dated, timed := stampParts(cells[0])
	behind, also := stampParts(cells[1])
	return dated && !timed && !behind && also
}

// isWeekday tells that a row has one cell more because its stamp has a comma
// behind the day of the week (Tue, 01 Dec 2026 20:20:05).
func isWeekday(cells [][]byte) bool {
	return len(cells) > 2 && len(withoutWeekday(cells[0])) == 0 && withoutWeekday(append(slices.Clone(cells[0]), ' ', '1')) != nil && isStamp(cells[1])
}

// commentHeader takes the last comment above the data for the header when it
// has as many cells as the data.
func (d *dialect) commentHeader(above []line) []string {
	for k := len(above) - 1; k >= 0; k-- {
		if !isComment(above[k].text, d.delim) {
			return nil
		}
		text := bytes.TrimLeft(above[k].text, " \t#%!/;")
		if names := cellNames(splitCells(nil, text, d.delim)); len(names) == d.fields {
			return names
		}
	}
	return nil
}

func cellNames(cells [][]byte) []string {
	names := make([]string, len(cells))
	for i, c := range cells {
		names[i] = strings.Join(strings.Fields(decodeName(bytes.TrimPrefix(c, []byte("\xEF\xBB\xBF")))), " ")
	}
	return names
}

// unitRow reads a row whose cells are all units or blank.
func unitRow(cells [][]byte) (units []string, ok bool) {
	known, written := 0, 0
	clock := ""
	for _, c := range cells {
		if len(c) == 0 || bytes.Equal(c, []byte("-")) {
			units = append(units, "")
			continue
		}
		written++
		text := decodeName(c)
		u, is := unitCell(text)
		if _, ofTime := timeUnits[u]; ofTime && clock != "" && clock != u { // Hour, Minute: these are names
			return nil, false
		} else if ofTime {
			clock = u
		}
		if is {
			known++
		} else if len([]rune(text)) > 12 {
			return nil, false
		}
		units = append(units, u)
	}
	return units, known >= 1 && 2*known >= written
}

func isUnitRow(cells [][]byte) bool {
	_, ok := unitRow(cells)
	return ok
}

func nonBlank(cells [][]byte) [][]byte {
	var out [][]byte
	for _, c := range cells {
		if len(c) > 0 {
			out = append(out, c)
		}
	}
	return out
}
