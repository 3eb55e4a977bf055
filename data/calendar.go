package data

import (
	"bytes"
	"slices"
	"strings"
	"time"
)

// parseCalendar reads a date with or without a time of day:
//
//	2026-01-05T10:00:00.25+01:00   RFC 3339, also with a blank, without zone
//	05.01.2026 10:00:00,25         dots: day first
//	5/1/2026 10:00:00 PM           slashes or dashes: in the clock's order
//	05-Jan-2026 10:00              month by name
//	20260105T100000Z               ISO 8601 basic format
//	Mon Jan  5 10:00:00 2026       the year last, as ctime of ISO C writes it
func (c *clock) parseCalendar(b []byte) (ns, alt int64, ok bool) {
	if ns, alt, ok = c.parseUsual(b); ok || len(b) < 8 {
		return ns, alt, ok
	}
	if plain := plainStamp(b); !bytes.Equal(plain, b) {
		return c.parseUsual(plain)
	}
	return ns, alt, ok
}

// parseHeld reads a stamp of any form, or one that leaves out its date.
func (c *clock) parseHeld(b []byte) (ns, alt int64, ok bool) {
	ns, alt, ok = c.parseCalendar(b)
	if c.held != nil {
		return c.held.stamp(b, ns, alt, ok)
	}
	return ns, alt, ok
}

// parseUsual reads the forms listed, parseCalendar those that plainStamp
// rewrites as well.
func (c *clock) parseUsual(b []byte) (ns, alt int64, ok bool) {
	alt = noTime
	rest, hit := c.cachedDate(b)
	day := c.day
	if !hit {
		if ns, ok := compactStamp(b); ok {
			return ns, noTime, true
		}
		if ns, ok := c.parseYearLast(b); ok {
			return ns, noTime, true
		}
		var first, second int64
		first, second, rest, ok = c.parseDate(b)
		if !ok {
			first, second, rest, ok = c.parseDate(withoutWeekday(b))
		}
		if !ok {
			return 0, noTime, false
		}
		day, alt = first, second
	}
	for len(rest) > 0 && isStampGap(rest[0]) {
		rest = rest[1:]
	}
	if len(rest) == 0 {
		return day, alt, true
	}
	tod, zone, ok := c.parseTimeAndZone(rest)
	if !ok {
		return 0, noTime, false
	}
	if alt != noTime {
		alt += tod - zone
	}
	return day + tod - zone, alt, true
}

// weekdays are the first letters of the days of the week, in English, German,
// French, Spanish, Italian, Dutch and Portuguese.
var weekdays = []string{"mon", "tue", "wed", "thu", "fri", "sat", "sun", "mo", "di", "mi", "do", "fr", "sa", "so", "lu", "ma", "me", "je", "ve", "vi",
	"gi", "ju", "sá", "wo", "vr", "za", "zo", "seg", "ter", "qua", "qui", "sex"}

// withoutWeekday removes the day of the week that a stamp begins with.
func withoutWeekday(b []byte) []byte {
	n := 0
	for n < len(b) && (isLetter(b[n]) || b[n] >= 0x80) {
		n++
	}
	word := strings.ToLower(decodeName(b[:n]))
	if n < 2 || !slices.ContainsFunc(weekdays, func(d string) bool { return strings.HasPrefix(word, d) }) {
		return nil
	}
	return bytes.TrimLeft(b[n:], "., ")
}

// parseYearLast reads a month by name, a day, a time of day and the year, with
// or without a zone in front of the year.
func (c *clock) parseYearLast(b []byte) (ns int64, ok bool) {
	if len(b) < len("Jan 5 10:00 2026") || b[len(b)-5] != ' ' {
		return 0, false
	}
	year, _, n := dateField(b[len(b)-4:])
	if n != 4 {
		return 0, false
	}
	if ns, ok = c.parseMonthFirst(b[:len(b)-5], year); !ok { // mar is a month, and a day of the week
		ns, ok = c.parseMonthFirst(withoutWeekday(b[:len(b)-5]), year)
	}
	return ns, ok
}

// parseMonthFirst reads the name of a month, a day, a time of day and a zone.
func (c *clock) parseMonthFirst(b []byte, year int) (ns int64, ok bool) {
	month, named, w := dateField(b)
	if !named {
		return 0, false
	}
	b = bytes.TrimLeft(b[w:], " ")
	d, named, w := dateField(b)
	if w == 0 || named || w == len(b) || b[w] != ' ' {
		return 0, false
	}
	day, ok := dayStart(year, month, d)
	if !ok {
		return 0, false
	}
	tod, east, ok := c.parseTimeAndZone(bytes.Trim(b[w:], " "))
	return day + tod - east, ok
}

// isStampGap tells the characters between a date and a time of day.
func isStampGap(c byte) bool {
	return c == 'T' || c == ' ' || c == ',' || c == 't' || c == '_' || c == '\t'
}

// cachedDate tells that b begins with the ten bytes of the date read last.
func (c *clock) cachedDate(b []byte) (rest []byte, hit bool) {
	if c.warm && len(b) > 10 && [10]byte(b) == c.cached {
		return b[10:], true
	}
	return nil, false
}

// parseDate reads the date that b begins with, in both readings while the
// order is open.
func (c *clock) parseDate(b []byte) (ns, alt int64, rest []byte, ok bool) {
	alt = noTime
	if y, m, d, n := basicDate(b); n > 0 {
		ns, ok = dayStart(y, m, d)
		return ns, alt, b[n:], ok
	}
	var f [3]int
	var named [3]bool
	var width [3]int
	var sep byte
	i := 0
	for k := range f {
		n := 0
		f[k], named[k], n = dateField(b[i:])
		if n == 0 {
			return 0, alt, nil, false
		}
		width[k] = n
		i += n
		if k < 2 {
			s, n := dateSeparator(b[i:], named[0] || named[k] || k == 0)
			if n == 0 || k == 1 && s != sep && !named[0] && !named[1] {
				return 0, alt, nil, false
			}
			sep = s
			i += n
		}
	}
	rest = b[i:]
	if len(rest) > 0 && rest[0] >= '0' && rest[0] <= '9' {
		return 0, alt, nil, false
	}
	ns, alt, ok = c.arrange(f, named, width, sep)
	if ok && i == len(c.cached) && alt == noTime {
		c.cached, c.day, c.warm = [10]byte(b), ns, true
	}
	return ns, alt, rest, ok
}

// arrange decides which of three fields is day, month and year.
func (c *clock) arrange(f [3]int, named [3]bool, width [3]int, sep byte) (ns, alt int64, ok bool) {
	alt = noTime
	order := c.order
	switch {
	case named[1]:
		order = dayMonthYear
		if width[0] == 4 {
			order = yearMonthDay
		}
	case named[0]:
		order = monthDayYear
	case named[2]:
		return 0, alt, false
	case width[0] == 4:
		order = yearMonthDay
	case width[0] > 2 || width[1] > 2:
		return 0, alt, false
	case sep == '.' && order == openOrder:
		order = dayMonthYear
	case order == openOrder && f[0] > 31:
		order = yearMonthDay
	}
	switch order {
	case yearMonthDay:
		ns, ok = dayStart(fullYear(f[0], width[0]), f[1], f[2])
		return ns, alt, ok
	case dayMonthYear:
		ns, ok = dayStart(fullYear(f[2], width[2]), f[1], f[0])
		return ns, alt, ok
	case monthDayYear:
		ns, ok = dayStart(fullYear(f[2], width[2]), f[0], f[1])
		return ns, alt, ok
	}
	year := fullYear(f[2], width[2])
	dmy, dayOK := dayStart(year, f[1], f[0])
	mdy, monthOK := dayStart(year, f[0], f[1])
	switch {
	case dayOK && monthOK:
		return dmy, mdy, true
	case dayOK:
		c.dayFirst = true
		return dmy, dmy, true
	case monthOK:
		c.monthFirst = true
		return mdy, mdy, true
	}
	return 0, alt, false
}

// fullYear completes a year of two digits: 70 to 99 are in the twentieth
// century (the rule of POSIX strptime has 69; from memory).
func fullYear(y, width int) int {
	if width > 2 {
		return y
	}
	if y >= 70 {
		return 1900 + y
	}
	return 2000 + y
}

// compactStamp reads yyyymmddhhmmss and a fraction.
func compactStamp(b []byte) (ns int64, ok bool) {
	if len(b) < 14 || b[8]-'0' > 9 {
		return 0, false
	}
	y, m, d, n := basicDate(b[:8])
	tod, w := digitsOfTime(b[8:])
	if n == 0 || w != len(b)-8 {
		return 0, false
	}
	day, ok := dayStart(y, m, d)
	return day + tod, ok
}

// basicDate reads yyyymmdd followed by a T, a blank, a low line or nothing.
func basicDate(b []byte) (y, m, d, n int) {
	if len(b) < 8 {
		return 0, 0, 0, 0
	}
	v := 0
	for _, c := range b[:8] {
		if c-'0' > 9 {
			return 0, 0, 0, 0
		}
		v = v*10 + int(c-'0')
	}
	if len(b) > 8 && b[8] != 'T' && b[8] != ' ' && b[8] != '_' {
		return 0, 0, 0, 0
	}
	return v / 10000, v / 100 % 100, v % 100, 8
}

// dateField reads digits or the name of a month; n is 0 when there is neither.
func dateField(b []byte) (v int, named bool, n int) {
	for n < len(b) && n < 5 && b[n]-'0' <= 9 {
		v = v*10 + int(b[n]-'0')
		n++
	}
	if n > 0 {
		return v, false, n
	}
	for n < len(b) && (isLetter(b[n]) || b[n] >= 0x80) {
		n++
	}
	if n < 3 {
		return 0, false, 0
	}
	if m := monthByName(b[:n]); m > 0 {
		if n < len(b) && b[n] == '.' {
			n++
		}
		return m, true, n
	}
	return 0, false, 0
}

// dateSeparator reads one of / . - or, next to the name of a month, blanks
// and a comma.
func dateSeparator(b []byte, blank bool) (sep byte, n int) {
	if len(b) == 0 {
		return 0, 0
	}
	switch c := b[0]; {
	case c == '.' && len(b) > 1 && b[1] == ' ': // 14. 3. 2026, 14. März 2026
		return c, 2
	case c == '/' || c == '.' || c == '-':
		return c, 1
	case blank && (c == ' ' || c == ','):
		for n < len(b) && (b[n] == ' ' || b[n] == ',') {
			n++
		}
		return ' ', n
	}
	return 0, 0
}

// dayStart is midnight of a date, ns since 1970-01-01; ok is false for a day
// that is not in the calendar.
func dayStart(y, m, d int) (ns int64, ok bool) {
	if m < 1 || m > 12 || d < 1 || d > 31 || y <= 1700 || y >= 2250 {
		return 0, false
	}
	t := time.Date(y, time.Month(m), d, 0, 0, 0, 0, time.UTC)
	return t.UnixNano(), t.Day() == d
}

func isLetter(c byte) bool { return 'a' <= c|0x20 && c|0x20 <= 'z' }
