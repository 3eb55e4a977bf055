package data

import (
	"math"
	"strconv"
	"strings"
	"time"
)

// A clock turns what stands in the time column into nanoseconds: since
// 1970-01-01 for a clock that knows the date, since midnight for a time of
// day, since the logger's zero for elapsed time. Times are kept to the
// nanosecond; intervals of whole nanoseconds are exact.
type clock struct {
	kind     clockKind
	unit     uint64                // ns in one unit of a number
	order    dateOrder             // of dates with slashes or dashes
	layout   string                // of --time-format, as package time writes it
	pad      bool                  // the layout is hhmmss, and numbers may lack the zeros in front
	zone     *time.Location        // zone of the last stamp that named one
	days     dayCount              // of day numbers
	rewrite  func(b []byte) []byte // of stamps in a form that the whole column settles, nil where none is needed: nil for a stamp of another form
	yearless bool                  // the stamps name no year
	yearOpen bool                  // a year of two digits could stand first as well
	zeroTick uint64                // of a count of ticks

	fraction *fixedFraction // of stamps with as many digits behind the seconds each; nil where none is watched

	held *heldDate // of calendar stamps that leave out the date; nil where all have one

	cached [10]byte // the date read last, as written …
	day    int64    // … and its beginning
	warm   bool

	dayFirst, monthFirst bool // a stamp was met that can only be read this way
}

type clockKind int

const (
	elapsed     clockKind = iota // number since the logger's zero
	epoch                        // number since 1970-01-01
	dayNumber                    // number of a day and its fraction
	tickNumber                   // number of steps of 100 ns
	sexagesimal                  // hh:mm:ss.s or, from minutes on, mm:ss.s
	hourMinute                   // hh:mm
	calendar                     // date and time
	custom                       // the layout of --time-format
)

type dateOrder int

const (
	openOrder dateOrder = iota // not known yet: stamps are read both ways
	dayMonthYear
	monthDayYear
	yearMonthDay
)

// noTime marks the second reading of a stamp that can be read in one way only.
const noTime = math.MinInt64

const (
	nsSecond = uint64(time.Second)
	nsMinute = 60 * nsSecond
	nsHour   = 60 * nsMinute
	nsDay    = 24 * nsHour
)

// dated tells that the clock knows the date.
func (c *clock) dated() bool {
	if c.yearless {
		return false
	}
	return c.kind == epoch || c.kind == dayNumber || c.kind == tickNumber || c.kind == calendar || c.kind == custom && !c.timeOfDay()
}

// wall tells that the clock is a local clock without a zone, which may be set
// back and forth by an hour.
func (c *clock) wall() bool {
	return (c.kind == calendar || c.kind == custom || c.kind == dayNumber) && c.zone == nil ||
		c.timeOfDay()
}

// counts are what a counter of 16, 31 or 32 bits in the clock's unit holds, and
// the seconds of a day, in ns: there it starts again at zero.
func (c *clock) counts() []int64 {
	if c.kind != elapsed || c.unit > nsSecond {
		return nil
	}
	return []int64{int64(c.unit << 16), int64(c.unit << 31), int64(c.unit << 32), int64(nsDay)}
}

// timeOfDay tells that the clock starts again at midnight.
func (c *clock) timeOfDay() bool {
	return c.kind == sexagesimal || c.kind == hourMinute || c.kind == custom && !strings.Contains(c.layout, "06")
}

// parse reads one stamp. While the order of day and month is open, alt is the
// stamp read month first and ns the stamp read day first; else alt is noTime.
func (c *clock) parse(b []byte, point byte) (ns, alt int64, ok bool) {
	b = trimBlanks(b)
	alt = noTime
	if c.fraction != nil && len(b) != c.fraction.length && c.fraction.look(b) && c.rewrite == nil {
		c.rewrite = padFraction()
	}
	if c.rewrite != nil {
		if b = c.rewrite(b); b == nil {
			return 0, alt, false
		}
	}
	switch c.kind {
	case elapsed, epoch, dayNumber, tickNumber:
		ns, ok = c.parseNumber(b, point)
	case sexagesimal, hourMinute:
		ns, ok = parseTimeOfDay(b, c.kind == hourMinute)
	case calendar:
		if ns, alt, ok = c.parseUsual(b); ok && c.held == nil {
			return ns, alt, ok
		}
		return c.parseHeld(b)
	case custom:
		if c.pad {
			b = padded(b)
		}
		t, err := time.Parse(c.layout, string(b))
		if err != nil {
			return 0, alt, false
		}
		if c.zone == nil && strings.Contains(c.layout, "07") {
			c.zone = t.Location()
		}
		if c.timeOfDay() {
			return t.Sub(t.Truncate(24 * time.Hour)).Nanoseconds(), alt, true
		}
		ns, ok = t.UnixNano(), inRange(t)
	}
	return ns, alt, ok
}

func (c *clock) parseNumber(b []byte, point byte) (int64, bool) {
	d, n, ok := scanDecimal(b, point)
	if ok && n != len(b) && c.isOwnUnit(b[n:]) {
		b = b[:n]
	}
	if !ok || n != len(b) {
		plain, _ := respell(b)
		v, ok := numberFormat{point}.parse(plain)
		if !ok {
			return 0, false
		}
		return c.ofFloat(v)
	}
	return c.ofDecimal(d, b, point)
}

// isOwnUnit tells that what follows a number is the unit of the clock.
func (c *clock) isOwnUnit(rest []byte) bool {
	u, known := canonicalUnit(decodeName(trimBlanks(rest)))
	return known && timeUnits[u] == c.unit && c.kind == elapsed
}

// ofDecimal turns a number as written into nanoseconds without a detour
// through a float64, whose 53 bits cannot hold a date to the nanosecond.
func (c *clock) ofDecimal(d decimal, b []byte, point byte) (int64, bool) {
	if c.kind == tickNumber {
		return c.tickInstant(d)
	}
	if c.kind == dayNumber && c.days.zero != 0 && !d.dropped {
		return c.days.instant(d)
	}
	if d.dropped {
		v, ok := d.float(b, point)
		if !ok || math.Abs(v)*float64(c.unit) > 9e18 {
			return 0, false
		}
		return c.shifted(int64(math.Round(v * float64(c.unit)))), true
	}
	ns, ok := d.scaled(c.unit)
	if !ok {
		return 0, false
	}
	if c.kind == dayNumber && (d.neg || ns > spreadsheetLast) {
		return 0, false
	}
	return c.shifted(ns), true
}

// ofFloat does the same for a number that a file holds as a float64: it is
// read as the shortest decimal that gives this float64.
func (c *clock) ofFloat(v float64) (int64, bool) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return 0, false
	}
	if ns := v * float64(c.unit); math.Abs(ns) < 1<<50 && c.kind != dayNumber && c.kind != tickNumber {
		return int64(math.Round(ns)), true
	}
	var text [32]byte
	b := strconv.AppendFloat(text[:0], v, 'g', -1, 64)
	d, _, ok := scanDecimal(b, '.')
	if !ok {
		return 0, false
	}
	return c.ofDecimal(d, b, '.')
}

// Day numbers of spreadsheets count from 1899-12-30.
const (
	spreadsheetEpoch = 25569 * int64(nsDay)
	spreadsheetLast  = 100000 * int64(nsDay)
)

func (c *clock) shifted(ns int64) int64 {
	if c.kind == dayNumber {
		return ns - spreadsheetEpoch
	}
	return ns
}

func inRange(t time.Time) bool { return t.Year() > 1700 && t.Year() < 2250 }
