package data

import (
	"bytes"
	"fmt"
	"math"
	"time"
)

// Two clocks in a log may differ by a hundredth of what they advance, by two
// seconds, as one of whole seconds does from a finer one, and by a step of the
// coarser.
const (
	clocksApart  = 0.01
	clocksCoarse = 2 * float64(time.Second)
)

// compareClocks looks at a clock of numbers beside a column of full stamps. If
// they do not advance alike, the numbers are not in the unit they seem to be
// in, and nothing says which clock is right.
func (c *csvReader) compareClocks(info *reading) error {
	at := c.at[roleTime]
	if c.d.cols[at].class != numbers || c.clock.kind == calendar {
		return nil
	}
	for i, col := range c.d.cols {
		if col.class != stamps || !col.dated || !col.timed {
			continue
		}
		var cells [][]byte
		for _, l := range c.d.rows {
			if i < len(l.cells) && len(l.cells[i]) > 0 {
				cells = append(cells, bytes.Clone(l.cells[i]))
			}
		}
		other, _, err := findCalendar(cells, col)
		if err != nil {
			continue
		}
		mine, _ := c.advance(at, c.clock)
		theirs, step := c.advance(i, other)
		tolerance := max(clocksCoarse, clocksApart*theirs, step)
		// a stamp that stands still says when the test began
		if theirs != 0 && math.Abs(mine-theirs) > tolerance {
			if millionths := c.countsMillionths(at, i, other); millionths != nil && math.Abs(c.total(at, millionths)-theirs) <= tolerance {
				c.clock = millionths
				info.note("clock-day-number", 0, "column %q was read as millionths of a day, as it goes on with column %q; %s says otherwise", c.d.cols[at].label, col.label, flags[roleTime])
				return nil
			}
			return fmt.Errorf("columns %q and %q are both clocks, but over the first %d rows one goes on by %v and the other by %v: say which to use with %s",
				c.d.cols[at].label, col.label, len(c.d.rows), time.Duration(mine), time.Duration(theirs), flags[roleTime])
		}
	}
	return nil
}

// countsMillionths is the clock of numbers that are spreadsheet days times a
// million, as some operator panels export them under the name of milliseconds;
// nil where they do not lie within a day of the stamps beside them.
func (c *csvReader) countsMillionths(at, beside int, other *clock) *clock {
	k := &clock{kind: dayNumber, unit: nsDay / 1e6}
	for _, l := range c.d.rows {
		if max(at, beside) >= len(l.cells) {
			continue
		}
		t, _, ok := k.parse(l.cells[at], c.d.format.point)
		u, _, also := other.parse(l.cells[beside], c.d.format.point)
		if ok && also && math.Abs(float64(t)-float64(u)) > float64(nsDay) {
			return nil
		}
	}
	return k
}

func (c *csvReader) total(i int, k *clock) float64 {
	total, _ := c.advance(i, k)
	return total
}

// advance is how far a clock goes on from the first to the last row of the
// sample that it can be read in, and its least step, ns.
func (c *csvReader) advance(i int, k *clock) (total, step float64) {
	var first, last int64
	seen := false
	step = math.Inf(1)
	for _, l := range c.d.rows {
		if i >= len(l.cells) {
			continue
		}
		t, _, ok := k.parse(l.cells[i], c.d.format.point)
		if !ok {
			continue
		}
		if !seen {
			first, last, seen = t, t, true
		}
		if t > last {
			step = min(step, float64(t)-float64(last))
		}
		last = t
	}
	return float64(last) - float64(first), step
}
