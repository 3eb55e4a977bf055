package data

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
)

// findClock decides how to read a time column from some of its cells. dated
// tells that a column of dates stands beside it and the cells hold both.
func findClock(cells [][]byte, c column, dated bool, o *Options, point byte) (*clock, []Note, error) {
	if o.TimeFormat != "" {
		k, err := clockOfFormat(o.TimeFormat)
		if err != nil {
			return nil, nil, err
		}
		k.pad = k.layout == bareTime
		if k.kind == calendar {
			notes, err := k.findRewrite(cells, c)
			return k, notes, err
		}
		return k, nil, nil
	}
	switch {
	case c.class == numbers:
		return findNumberClock(cells, c, point)
	case c.dated || dated:
		return findCalendar(cells, c)
	}
	k, err := findTimeOfDay(cells, c)
	if err != nil || k.kind != sexagesimal {
		return k, nil, err
	}
	notes, err := k.findPadding(cells, c)
	return k, notes, err
}

// findRewrite settles the forms of stamps that only the whole column tells:
// dates of bare digits, stamps without a year, milliseconds without the zeros
// in front.
func (k *clock) findRewrite(cells [][]byte, c column) ([]Note, error) {
	cells = withDigits(cells)
	if len(cells) == 0 {
		return nil, nil
	}
	if join := joinedZeroDates(cells); join != nil {
		k.rewrite = join
		return nil, nil
	}
	form, note, found, err := findDateDigits(cells, c.label, k.order)
	switch {
	case err != nil:
		return nil, err
	case found:
		var room []byte
		k.rewrite = func(b []byte) []byte {
			plain := form.plain(room[:0], b)
			if plain != nil {
				room = plain
			}
			return plain
		}
		if note != nil {
			return []Note{*note}, nil
		}
		return nil, nil
	}
	if all, _ := areYearless(cells); all {
		k.yearless, k.rewrite = true, withYear()
		return []Note{{Code: "year-unknown", Text: fmt.Sprintf("the stamps of column %q name no year: time counts from the first row, and the log has no date", c.label)}}, nil
	}
	return k.findPadding(cells, c)
}

// findNumberClock tells elapsed time, time since 1970 and day numbers of
// spreadsheets apart by size: a date of our days is a large number in any unit.
func findNumberClock(cells [][]byte, c column, point byte) (*clock, []Note, error) {
	v := make([]float64, 0, len(cells))
	for _, b := range cells {
		if d, n, ok := scanDecimal(trimBlanks(b), point); ok {
			if x, ok := d.float(trimBlanks(b)[:n], point); ok {
				v = append(v, x)
			}
		}
	}
	if len(v) == 0 {
		return nil, nil, fmt.Errorf("column %q holds no time", c.label)
	}
	typical := medianOf(slices.Clone(v))
	unit, known := timeUnits[c.unit]
	if count, ok := findTicks(typical); ok && !known {
		k, notes := count.clock(c.label)
		return k, notes, nil
	}
	units := []uint64{unit}
	if !known {
		if err := refuseTenDigits(cells, v, c.label); err != nil {
			return nil, nil, err
		}
		units = []uint64{nsSecond, 1e6, 1e3, 1}
	}
	for _, u := range units {
		if ns := typical * float64(u); ns > epochLow && ns < epochHigh && u <= nsSecond {
			return &clock{kind: epoch, unit: u}, nil, nil
		}
	}
	if days, ok := findDayCount(v, typical); ok && (!known || unit == nsDay) {
		return &clock{kind: dayNumber, unit: nsDay, days: days}, []Note{{Code: "clock-day-number",
			Text: fmt.Sprintf("column %q was read as %s; --time-format seconds says otherwise", c.label, days.name)}}, nil
	}
	if !known && areCompact(cells) {
		return &clock{kind: calendar}, nil, nil
	}
	if err := oddNumbers(v, c); err != nil {
		return nil, nil, err
	}
	if known {
		return &clock{kind: elapsed, unit: unit}, nil, nil
	}
	if k, notes, err := implausible(v, c.label); k != nil || err != nil {
		return k, notes, err
	}
	return &clock{kind: elapsed, unit: nsSecond}, []Note{{Code: "time-unit-assumed",
		Text: fmt.Sprintf("column %q names no unit and was read as seconds; --time-format says otherwise", c.label)}}, nil
}

// Times since 1970 from 1985 to 2080, ns: seconds since 1904, as some software
// counts, are beyond.
const (
	epochLow  = 15 * 365.25 * 86400e9
	epochHigh = 110 * 365.25 * 86400e9
)

// fastest is the least plausible step of a clock in seconds: no heater is
// logged a thousand times a second by its rows' numbers alone.
const fastest = 1e-3

// implausible refuses numbers without a unit that cannot be seconds: digits of
// a time of day without colons, and steps too small. Fractions of a day, as
// spreadsheets hold a time of day, are read.
func implausible(v []float64, label string) (*clock, []Note, error) {
	step := typicalStep(v)
	switch {
	case areClockDigits(v):
		return nil, nil, fmt.Errorf("column %q goes from 59 to 100, as hours, minutes and seconds without colons do: say --time-format HHmmss, or --time-format seconds", label)
	case !(step < fastest):
		return nil, nil, nil
	case slices.Min(v) > 0.01 && slices.Max(v) < 1:
		return &clock{kind: elapsed, unit: nsDay}, []Note{{Code: "clock-day-number",
			Text: fmt.Sprintf("column %q was read as fractions of a day; --time-format seconds says otherwise", label)}}, nil
	}
	return nil, nil, fmt.Errorf("column %q names no unit and goes on by %.3g a row, too little for seconds: say --time-format hours, days, min, or seconds", label, step)
}

// areClockDigits tells numbers that skip from 59 to 100 and hold no digits
// from 60 to 99 where minutes and seconds stand.
func areClockDigits(v []float64) bool {
	skips := false
	for i, x := range v {
		whole := math.Trunc(x)
		if x < 0 || whole >= 240000 || math.Mod(whole, 100) >= 60 || math.Mod(math.Trunc(whole/100), 100) >= 60 {
			return false
		}
		if i > 0 {
			d := whole - math.Trunc(v[i-1])
			skips = skips || d > 40 && d < 60 && math.Mod(math.Trunc(v[i-1]), 100) > 40
		}
	}
	return skips && typicalStep(v) < 20
}

// areCompact tells stamps written as yyyymmddhhmmss.
func areCompact(cells [][]byte) bool {
	n := 0
	for _, b := range cells {
		if _, ok := compactStamp(trimBlanks(b)); ok {
			n++
		}
	}
	return n > 0 && 10*n >= 9*len(cells)
}

// findCalendar settles the order of day and month if the cells can: a day
// above 12 does, and so do dots, a year in front, and months by name.
func findCalendar(cells [][]byte, c column) (*clock, []Note, error) {
	k := &clock{kind: calendar}
	notes, err := k.findRewrite(cells, c)
	if err != nil {
		return nil, nil, err
	}
	for _, b := range cells {
		k.parse(b, '.')
	}
	if k.dayFirst && k.monthFirst {
		return nil, nil, fmt.Errorf("column %q has days above 12 both in front and behind: say how to read it with --time-format", c.label)
	}
	fresh := &clock{kind: calendar, rewrite: k.rewrite, fraction: k.fraction, yearless: k.yearless}
	if k.dayFirst {
		fresh.order = dayMonthYear
	}
	if k.monthFirst {
		fresh.order = monthDayYear
	}
	if note := fresh.compareYears(cells); note != nil {
		notes = append(notes, *note)
	}
	return fresh, notes, nil
}

// errMinutes is the ambiguity of two fields with a colon.
var errMinutes = errors.New("could be minutes and seconds or hours and minutes: say which with --time-format mm:ss or --time-format HH:mm")

func findTimeOfDay(cells [][]byte, c column) (*clock, error) {
	label := strings.ToLower(c.label)
	for k, b := range cells {
		b = trimBlanks(b)
		_, n, fields := scanTime(b, true)
		if fields == 0 {
			if _, ok := parseElapsed(b); ok {
				return &clock{kind: sexagesimal}, nil
			}
		}
		switch {
		case fields == 3:
			return &clock{kind: sexagesimal}, nil
		case fields == 2 && n < len(b) && isLetter(bytes.TrimLeft(b[n:], " ")[0]):
			return &clock{kind: hourMinute}, nil
		case fields == 2 && (bytes.ContainsAny(b, ".,") || b[0] > '2' || k == 0 && bytes.HasPrefix(b, []byte("00:0"))):
			return &clock{kind: sexagesimal}, nil
		case fields == 2 && strings.Contains(label, "mm:ss"):
			return &clock{kind: sexagesimal}, nil
		case fields == 2 && strings.Contains(label, "hh:mm"):
			return &clock{kind: hourMinute}, nil
		}
	}
	return nil, fmt.Errorf("column %q (%s) %w", c.label, strings.Join(c.sample, ", "), errMinutes)
}

// clockOfFormat reads the value of --time-format: a word (day-first,
// month-first, year-first, unix, unix-ms, unix-us, unix-ns, seconds, ms, min,
// hours, days), mm:ss, HH:mm, a pattern with the letters of Unicode Technical
// Standard 35 (dd/MM/yyyy HH:mm:ss.SSS) or with the marks of POSIX strptime
// (%d/%m/%Y %H:%M:%S).
func clockOfFormat(format string) (*clock, error) {
	if k, ok := namedClocks[format]; ok {
		return &k, nil
	}
	layout, err := goLayout(format)
	if err != nil {
		return nil, err
	}
	if !strings.Contains(layout, "06") && (strings.Contains(layout, "01") || strings.Contains(layout, "Jan")) { // a date without a year
		return &clock{kind: custom, layout: "2006 " + layout, yearless: true, rewrite: func(b []byte) []byte {
			return slices.Concat([]byte(anyYear+" "), b)
		}}, nil
	}
	return &clock{kind: custom, layout: layout}, nil
}

var namedClocks = map[string]clock{
	"day-first":   {kind: calendar, order: dayMonthYear},
	"dmy":         {kind: calendar, order: dayMonthYear},
	"month-first": {kind: calendar, order: monthDayYear},
	"mdy":         {kind: calendar, order: monthDayYear},
	"year-first":  {kind: calendar, order: yearMonthDay},
	"ymd":         {kind: calendar, order: yearMonthDay},
	"rfc3339":     {kind: calendar, order: yearMonthDay},
	"unix":        {kind: epoch, unit: nsSecond},
	"unix-ms":     {kind: epoch, unit: 1e6},
	"unix-us":     {kind: epoch, unit: 1e3},
	"unix-ns":     {kind: epoch, unit: 1},
	"seconds":     {kind: elapsed, unit: nsSecond},
	"s":           {kind: elapsed, unit: nsSecond},
	"ms":          {kind: elapsed, unit: 1e6},
	"us":          {kind: elapsed, unit: 1e3},
	"min":         {kind: elapsed, unit: nsMinute},
	"minutes":     {kind: elapsed, unit: nsMinute},
	"h":           {kind: elapsed, unit: nsHour},
	"hours":       {kind: elapsed, unit: nsHour},
	"days":        {kind: dayNumber, unit: nsDay},
	"mm:ss":       {kind: sexagesimal},
	"hh:mm:ss":    {kind: sexagesimal},
	"HH:mm:ss":    {kind: sexagesimal},
	"HH:mm":       {kind: hourMinute},
	"hh:mm":       {kind: hourMinute},
}

// patternParts maps pattern letters and strptime marks to the reference time
// of package time, longest first.
var patternParts = [][2]string{
	{"yyyy", "2006"}, {"yy", "06"}, {"MMMM", "January"}, {"MMM", "Jan"}, {"MM", "01"}, {"M", "1"}, {"dd", "02"}, {"d", "2"},
	{"HH", "15"}, {"H", "15"}, {"hh", "03"}, {"h", "3"}, {"mm", "04"}, {"m", "4"}, {"ss", "05"}, {"s", "5"},
	{"a", "PM"}, {"XXX", "Z07:00"}, {"XX", "Z0700"}, {"X", "Z07"}, {"xxx", "-07:00"}, {"xx", "-0700"},
}

var strptimeParts = map[byte]string{
	'Y': "2006", 'y': "06", 'm': "01", 'd': "02", 'e': "_2", 'H': "15", 'I': "03", 'M': "04", 'S': "05", 'p': "PM",
	'b': "Jan", 'B': "January", 'z': "-0700", 'F': "2006-01-02", 'T': "15:04:05", 'D': "01/02/06", 'R': "15:04", '%': "%",
}

// goLayout turns a pattern into a layout of package time, which accepts a
// fraction behind the seconds whether the layout has one or not. Text between
// apostrophes stands for itself.
func goLayout(format string) (string, error) {
	unknown := func(what string) error {
		return fmt.Errorf("--time-format %q: %q is unknown (try dd/MM/yyyy HH:mm:ss, day-first, unix-ms or seconds)", format, what)
	}
	layout := ""
	for rest := format; rest != ""; {
		part, n := patternPart(rest)
		switch {
		case strings.HasPrefix(rest, "%f") || rest[0] == 'S': // the fraction goes with the seconds
			layout = strings.TrimRight(layout, ".,")
			rest = strings.TrimLeft(strings.TrimPrefix(rest, "%f"), "S")
		case rest[0] == '%':
			part, ok := strptimeParts[rest[min(1, len(rest)-1)]]
			if !ok || len(rest) < 2 {
				return "", unknown(rest[:min(2, len(rest))])
			}
			layout += part
			rest = rest[2:]
		case rest[0] == '\'':
			text, after, closed := strings.Cut(rest[1:], "'")
			if !closed {
				return "", unknown(rest)
			}
			layout += text
			rest = after
		case n > 0:
			layout += part
			rest = rest[n:]
		case isLetter(rest[0]) && rest[0] != 'T' && rest[0] != 'Z':
			return "", unknown(rest[:1])
		default:
			layout += rest[:1]
			rest = rest[1:]
		}
	}
	if !strings.ContainsAny(layout, "0123456789") {
		return "", unknown(format)
	}
	return layout, nil
}

func patternPart(rest string) (part string, n int) {
	for _, p := range patternParts {
		if strings.HasPrefix(rest, p[0]) {
			return p[1], len(p[0])
		}
	}
	return "", 0
}
