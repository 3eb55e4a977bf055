package data

import (
	"bytes"
	"fmt"
	"slices"
)

// Some logs leave the year out of their stamps: 03-14 10:22:31, 14.03. 10:22,
// Mar 14 10:22:31 as system logs write it. Time goes on all the same, but for
// the end of February, which the year decides, and the new year.

// anyYear is the year that such stamps are read in: a leap year, so that
// 29 February is a day in it.
const anyYear = "2004"

// yearlessDate takes a day and a month off the beginning of a stamp, the rest
// being blank or a time of day, and writes them with a year.
func yearlessDate(dst, b []byte) (dated, rest []byte, ok bool) {
	b = trimBlanks(b)
	if dated, rest, ok = dayAndMonth(dst, b); ok {
		return dated, rest, ok
	}
	return dayAndMonth(dst, withoutWeekday(b))
}

func dayAndMonth(dst, b []byte) (dated, rest []byte, ok bool) {
	first, named, n := dateField(b)
	if n == 0 || !named && n > 2 {
		return nil, nil, false
	}
	sep, w := dateSeparator(b[n:], true)
	if w == 0 {
		return nil, nil, false
	}
	second, alsoNamed, m := dateField(b[n+w:])
	if m == 0 || !alsoNamed && m > 2 || named && alsoNamed || !named && !alsoNamed && sep == ' ' {
		return nil, nil, false
	}
	if !isDayOf(first, second) && !isDayOf(second, first) {
		return nil, nil, false
	}
	end := n + w + m
	date := bytes.TrimRight(b[:end], ".")
	rest = b[end:]
	if sep == '.' {
		if !bytes.HasPrefix(rest, []byte(".")) && !(alsoNamed || n == 2 && m == 2) { // 1.5 is a number
			return nil, nil, false
		}
		rest = bytes.TrimPrefix(rest, []byte("."))
	}
	if len(rest) > 0 && !isStampGap(rest[0]) {
		return nil, nil, false
	}
	rest = bytes.TrimLeft(rest, "T ,_")
	if len(rest) > 0 {
		if _, ok := plainTimeOfDay(rest); !ok {
			return nil, nil, false
		}
	}
	if sep == '.' && alsoNamed { // behind a name it would be its own
		sep = ' '
	}
	dst = append(append(dst, date...), sep)
	return append(dst, anyYear...), rest, true
}

// isDayOf tells that a month has such a day in a leap year.
func isDayOf(month, day int) bool {
	_, ok := dayStart(2004, month, day)
	return ok
}

// withYear is the rewrite of such stamps.
func withYear() func(b []byte) []byte {
	var room []byte
	return func(b []byte) []byte {
		dated, rest, ok := yearlessDate(room[:0], b)
		if !ok {
			return nil
		}
		room = append(append(dated, ' '), rest...)
		return trimBlanks(room)
	}
}

// areYearless tells cells that all leave out the year; timed tells that they
// hold a time of day as well.
func areYearless(cells [][]byte) (all, timed bool) {
	timed = true
	for _, b := range cells {
		_, rest, ok := yearlessDate(nil, b)
		if !ok {
			return false, false
		}
		timed = timed && len(rest) > 0
	}
	return len(cells) > 0, timed
}

// isYearless tells a day, a month and a time of day.
func isYearless(b []byte) bool {
	_, rest, ok := yearlessDate(nil, b)
	return ok && len(rest) > 0
}

// mendYears makes the stamps of a log without years go on over the new year and
// the end of February. What the year decides, and the rows do not show, is an
// error.
func (s *stampSeries) mendYears() error {
	const halfYear, year, day = 183 * int64(nsDay), 366 * int64(nsDay), int64(nsDay)
	const february29 = 59 * day // from the new year
	inYear := func(t int64) int64 { return t - yearStart }
	leap := slices.ContainsFunc(s.t, func(t int64) bool { return inYear(t)/day == 59 })
	step := s.typicalStep()
	var offset int64
	before := int64(0)
	for i, t := range s.t {
		if i > 0 {
			switch d := t - before; {
			case d < -halfYear:
				offset += year
			case d > halfYear:
				offset -= year
			case !leap && inYear(before) < february29 && inYear(t) > february29:
				if d-day > max(3*step, int64(nsMinute)) {
					return &lineError{s.line(i), fmt.Errorf("the stamps name no year, and from 28 February to this row it is a day more in a leap year: export stamps with the year, or cut the log here")}
				}
				offset -= day
			case !leap && inYear(before) > february29 && inYear(t) < february29: // newest first
				offset += day
			}
		}
		before = t
		s.t[i] = t + offset
	}
	return nil
}

// yearStart is the beginning of anyYear, ns since 1970-01-01.
var yearStart = func() int64 { ns, _ := dayStart(2004, 1, 1); return ns }()
