package data

import (
	"fmt"
	"slices"
	"strings"
)

// A log to which another was appended may go on with its columns in another
// order, or in other units.

// lookForHeader keeps the first line of names in the data that are not those
// above them.
func (c *csvReader) lookForHeader(line int) {
	at := c.at[roleTime]
	if c.headerErr != nil || c.d.keys != nil || len(c.d.header) == 0 || at >= len(c.cells) || len(nonBlank(c.cells)) < 2 {
		return
	}
	if slices.ContainsFunc(nonBlank(c.cells), func(b []byte) bool { return c.d.classOf(b) != texts }) {
		return
	}
	names := cellNames(c.cells)
	known, changed := 0, ""
	for _, f := range c.fields {
		i := f.index - c.d.shift
		if i < 0 || i >= len(names) {
			continue
		}
		if !slices.ContainsFunc(c.d.cols, func(col column) bool { return sameName(names[i], col) }) {
			return // a remark about a column is no header
		}
		if strings.EqualFold(names[i], c.d.cols[f.index].label) {
			known++
		} else if changed == "" {
			changed = names[i]
		}
	}
	if known > 0 && changed != "" {
		c.headerErr = fmt.Errorf("%s:%d: the header changes here (%s): cut the file in two and read each by itself", c.path, line, strings.Join(names, " | "))
	}
}

// sameName tells a name in a header that is that of a column, or differs in its
// unit.
func sameName(name string, col column) bool {
	bare, _ := splitNameUnit(name)
	return strings.EqualFold(name, col.label) || strings.EqualFold(bare, col.name)
}
