package data

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
)

// Some exports give every channel a column of time beside it: t1, u, t2, y. Where
// all are the same in every row, one is the clock; else a row holds values of
// different instants, and is none.

// markTwins marks the columns of time that are the same as an earlier one in
// every row of the sample; the caller chose none by name.
func (c *csvReader) markTwins() {
	for i := range c.d.cols {
		if !c.isClock(i) {
			continue
		}
		for k := range i {
			if c.isClock(k) && c.d.cols[k].part == noPart && c.firstApart(k, i) < 0 {
				c.twins = append(c.twins, [2]int{k, i})
				c.d.cols[i].part = somePart
				break
			}
		}
	}
}

// isClock tells a column that can be the clock by its name, or holds stamps.
func (c *csvReader) isClock(i int) bool {
	col := c.d.cols[i]
	if col.class == stamps {
		return col.timed && col.part != mainPart
	}
	r, _ := roleOf(col)
	return r == roleTime && col.class == numbers && col.ascending && !allEqual(col.sample) && col.part != mainPart
}

// firstApart is the first row of the sample in which two columns differ, -1
// where there is none.
func (c *csvReader) firstApart(i, k int) int {
	return slices.IndexFunc(c.d.rows, func(l line) bool {
		return len(l.cells) > max(i, k) && !c.sameInstant(l.cells[i], l.cells[k])
	})
}

func (c *csvReader) sameInstant(a, b []byte) bool {
	if bytes.Equal(a, b) {
		return true
	}
	v, ok := c.d.format.parse(a)
	w, also := c.d.format.parse(b)
	return ok && also && v == w
}

// channelClocks says of clocks of equal standing that each channel seems to
// have its own; any other error comes back as it is.
func (c *csvReader) channelClocks(err error) error {
	var open *ambiguousError
	if !errors.As(err, &open) || open.role != roleTime {
		return err
	}
	i, k := open.found[0], open.found[1]
	row := c.firstApart(i, k)
	if row < 0 || c.d.cols[i].class != c.d.cols[k].class || !c.isClock(i) || !c.isClock(k) || c.d.cols[i].class == numbers && !c.keepsPace(i, k) {
		return err
	}
	return c.apart(i, k, c.d.rows[row].number, c.d.rows[row].cells)
}

func (c *csvReader) apart(i, k, line int, cells [][]byte) error {
	return fmt.Errorf("columns %s are two clocks that differ (%q and %q in line %d): if every channel has its own, export the channels on one clock, or as rows of time, tag and value; else say which to use with %s",
		listColumns(c.d.cols, []int{i, k}), cells[i], cells[k], line, flags[roleTime])
}

// hiddenClock looks for a column whose name only hints that it is a clock, but
// which keeps pace with the one chosen in every row of the sample.
func (c *csvReader) hiddenClock() error {
	at := c.at[roleTime]
	if at < 0 || c.d.cols[at].class != numbers {
		return nil
	}
	for i, col := range c.d.cols {
		if r, _ := roleOf(col); r != roleNone || i == at || slices.Contains(c.at[:], i) || col.class != numbers || !col.ascending || col.part != noPart {
			continue
		}
		if !hintsClock(col) || !c.keepsPace(at, i) {
			continue
		}
		if row := c.firstApart(at, i); row >= 0 {
			return c.apart(at, i, c.d.rows[row].number, c.d.rows[row].cells)
		}
		c.twins = append(c.twins, [2]int{at, i})
	}
	return nil
}

// hintsClock tells names such as t2, time2, uptime and plc_clk. A count of rows,
// an energy or a distance may keep pace with a clock and is none.
func hintsClock(col column) bool {
	if _, ofTime := timeUnits[col.unit]; col.unit != "" && !ofTime {
		return false
	}
	lower := strings.ToLower(col.name)
	return isNumberedClock(col) || slices.ContainsFunc([]string{"time", "zeit", "clk", "stamp", "tick"}, func(part string) bool { return strings.Contains(lower, part) })
}

// isNumberedClock tells names such as t2 and time2.
func isNumberedClock(col column) bool {
	col.name = strings.TrimRight(col.name, "0123456789")
	r, _ := roleOf(col)
	return r == roleTime
}

// pace is how far a clock may stand from another of the same channels, in rows.
const pace = 2

// keepsPace tells that the numbers of a column stay within two rows of another,
// over many.
func (c *csvReader) keepsPace(at, i int) bool {
	var t, v []float64
	for _, l := range c.d.rows {
		if len(l.cells) <= max(at, i) {
			continue
		}
		a, ok := c.d.format.parse(l.cells[at])
		b, also := c.d.format.parse(l.cells[i])
		if ok && also {
			t, v = append(t, a), append(v, b)
		}
	}
	step := typicalStep(t)
	for k := range t {
		if !(math.Abs(v[k]-t[k]) <= pace*step) {
			return false
		}
	}
	return len(t) > 3*pace && t[len(t)-1]-t[0] > 3*pace*step
}

// checkTwins looks whether clocks that were the same so far still are.
func (c *csvReader) checkTwins(line int) {
	for _, p := range c.twins {
		if c.twinErr == nil && max(p[0], p[1]) < len(c.cells) && !c.sameInstant(c.cells[p[0]], c.cells[p[1]]) {
			c.twinErr = c.apart(p[0], p[1], line, c.cells)
		}
	}
}
