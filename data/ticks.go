package data

import "fmt"

// Some software counts time in steps of 100 ns, from the year 1 or from 1601
// (from memory).

// tickCount is such a count.
type tickCount struct {
	name string
	zero uint64 // ticks at 1970-01-01
}

var tickCounts = []tickCount{
	{"steps of 100 ns from the year 1", 621355968000000000},
	{"steps of 100 ns from 1601", 116444736000000000},
}

// perTick is the length of a step, ns.
const perTick = 100

// findTicks tells counts from 2000 to 2080: read as nanoseconds since 1970 they
// would lie before 1991.
func findTicks(typical float64) (c tickCount, ok bool) {
	const from, to = 30 * 365.25 * 86400e7, 110 * 365.25 * 86400e7
	for _, c := range tickCounts {
		if since := typical - float64(c.zero); since > from && since < to {
			return c, true
		}
	}
	return tickCount{}, false
}

func (c tickCount) clock(label string) (*clock, []Note) {
	return &clock{kind: tickNumber, zeroTick: c.zero}, []Note{{Code: "clock-ticks",
		Text: fmt.Sprintf("column %q was read as %s; --time-format unix-ns says otherwise", label, c.name)}}
}

// instant is a count in nanoseconds since 1970-01-01.
func (c *clock) tickInstant(d decimal) (int64, bool) {
	if d.neg || d.dropped || d.exp != 0 || d.mant < c.zeroTick || d.mant-c.zeroTick > 9e16 {
		return 0, false
	}
	return int64(d.mant-c.zeroTick) * perTick, true
}
