package data

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// Some exports spread the clock over columns of numbers: year, month, day,
// hour, minute, second, or seconds and the milliseconds beside them, or a day
// and the seconds of it. The clock of such a log is the sum of its parts.

// spreadClock is a clock in parts.
type spreadClock struct {
	kind  clockKind // what the sum is
	stamp int       // column of dates to which the parts are added, or noStamp, or ownStamp
	main  int       // the column that stands for the clock
	parts []clockPart
}

const (
	noStamp  = -1 // the parts are all there is
	ownStamp = -2 // the parts are added to the stamp that the clock has without them
)

// clockPart reads one part of the clock from the cells of a row, ns.
type clockPart struct {
	cols []int
	read func(cells [][]byte) (ns int64, ok bool)
}

// partOf says what a column is to a clock that is spread over several.
type partOf int

const (
	noPart partOf = iota
	somePart
	mainPart
)

// add adds the parts to the stamp of a row; without a stamp there are the
// parts alone.
func (s *spreadClock) add(t, alt int64, ok bool, cells [][]byte) (int64, int64, bool) {
	if s.stamp == noStamp {
		t, alt, ok = 0, noTime, true
	}
	for _, p := range s.parts {
		ns, is := p.read(cells)
		if ok = ok && is; !ok {
			return 0, noTime, false
		}
		t += ns
		if alt != noTime {
			alt += ns
		}
	}
	return t, alt, ok
}

// last is the last column that the clock needs.
func (s *spreadClock) last() int {
	last := max(s.stamp, s.main)
	for _, p := range s.parts {
		last = max(last, slices.Max(p.cols))
	}
	return last
}

// findSpreadClock looks for the columns of a clock in parts and marks them; nil
// where the log has a column of stamps with the time of day, or where the
// caller names another clock.
func findSpreadClock(d *dialect, o *Options) (*spreadClock, []Note) {
	if o.TimeFormat != "" {
		return nil, nil
	}
	if slices.ContainsFunc(d.cols, func(c column) bool { return c.class == stamps && c.timed }) {
		return findFractionOfStamps(d)
	}
	f := partFinder{d: d, point: d.format.point, found: map[string]int{}}
	for i, c := range d.cols {
		f.look(i, c)
	}
	f.settleMM()
	if !f.clock() || !f.goesOn() || o.TimeCol != "" && !strings.EqualFold(o.TimeCol, d.cols[f.s.main].label) {
		return nil, f.notes
	}
	return &f.s, append(f.notes, f.s.mark(d))
}

// mark marks the columns as parts of the clock and says so.
func (s *spreadClock) mark(d *dialect) Note {
	cols := []int{s.main}
	if s.stamp >= 0 {
		cols = append(cols, s.stamp)
	}
	for _, p := range s.parts {
		cols = append(cols, p.cols...)
	}
	slices.Sort(cols)
	var names []string
	for _, i := range slices.Compact(cols) {
		d.cols[i].part = somePart
		names = append(names, fmt.Sprintf("%q", d.cols[i].label))
	}
	d.cols[s.main].part = mainPart
	return Note{Code: "clock-columns", Text: fmt.Sprintf("the clock was put together from the columns %s; --time-col and --time-format take one of them alone",
		strings.Join(names, ", "))}
}

// partNames are the names of parts that are no units of time.
var partNames = map[string][]string{
	"year":     {"year", "yr", "yyyy", "jahr", "année", "annee", "año", "ano", "anno", "jaar"},
	"month":    {"month", "mon", "mth", "monat", "mois", "mes", "mês", "mese", "maand"},
	"d":        {"dd", "doy", "day of year", "dayofyear", "day_of_year", "julian day", "jday", "jour", "día", "dia", "giorno", "dag"},
	"date":     {"date", "datum", "fecha"},
	"h":        {"hh", "stunde", "heure", "hora", "uur"},
	"hhmm":     {"hhmm", "time hhmm", "hourminute", "hour_minute", "time (hhmm)"},
	"epoch":    {"epoch", "epoch time", "unix", "unixtime", "unix time", "unix timestamp", "timestamp"},
	"min":      {"mi", "minuto"},
	"fraction": {"time", "zeit", "uhrzeit", "clock", "time of day"},
	"s":        {"ss", "sekunde", "seconde", "segundo", "secondo", "tv_sec", "seconds of day", "second of day", "sec of day"},
	"ms":       {"millitm", "time ms", "time_ms", "ms", "msec", "millis", "millisecond", "milliseconds"},
	"us":       {"usecs", "tv_usec", "micros", "microsecond", "microseconds"},
	"ns":       {"nsec", "nsecs", "nanos", "nanosecond", "nanoseconds", "tv_nsec"},
}

// partFinder collects the columns that can be parts: one of each kind.
type partFinder struct {
	d     *dialect
	point byte
	found map[string]int // column by the name of the part
	mm    []int          // columns called so: months or minutes
	twice bool
	s     spreadClock
	probe []clockPart // those of the parts that must go on from row to row
	notes []Note
}

func (f *partFinder) look(i int, c column) {
	name := strings.ToLower(strings.TrimSpace(c.label))
	_, isTime := timeUnits[c.unit]
	switch {
	case c.class == stamps && c.dated && !c.timed:
		f.put("date", i)
	case c.class != numbers:
	case isTime && c.name == c.label:
		f.put(c.unit, i)
	case name == "mm":
		f.mm = append(f.mm, i)
	default:
		for part, names := range partNames {
			if slices.Contains(names, name) {
				f.put(part, i)
			}
		}
	}
}

func (f *partFinder) put(part string, i int) {
	_, seen := f.found[part]
	f.twice = f.twice || seen
	f.found[part] = i
}

// settleMM tells months from minutes where both are written mm: months stand
// beside a year or a day and in front of the hours.
func (f *partFinder) settleMM() {
	for _, i := range f.mm {
		hour, hours := f.found["h"]
		_, years := f.found["year"]
		_, days := f.found["d"]
		_, months := f.found["month"]
		if (years || days) && !months && !(hours && hour < i) {
			f.put("month", i)
		} else if hours {
			f.put("min", i)
		}
	}
}

// goesOn tells that the parts go one way from row to row, but for a midnight (a
// full hour, where there are no hours) and a restart here and there: minima and
// seconds of something else stand still or fall again and again.
func (f *partFinder) goesOn() bool {
	lap := halfDayLong
	if _, hours := f.found["h"]; !hours && f.s.kind == elapsed {
		lap = int64(nsHour / 2)
	}
	up, down := 0, 0
	t := f.d.instants(f.probe)
	for i := 1; i < len(t); i++ {
		switch dt := t[i] - t[i-1]; {
		case dt > 0 && dt < lap:
			up++
		case dt < 0 && dt > -lap:
			down++
		}
	}
	up, down = max(up, down), min(up, down)
	return up > 0 && (20*down <= up || down == 1 && 4*down <= up)
}

// instants are the sums of some parts in the rows of the sample that have them
// all.
func (d *dialect) instants(parts []clockPart) (t []int64) {
	s := spreadClock{stamp: noStamp, parts: parts}
	for _, l := range d.rows {
		if len(l.cells) < d.fields {
			continue
		}
		if ns, _, ok := s.add(0, noTime, true, l.cells); ok {
			t = append(t, ns)
		}
	}
	return t
}

// has tells that a part is there and holds whole numbers in a range.
func (f *partFinder) has(part string, lo, hi float64) bool {
	i, seen := f.found[part]
	return seen && f.d.cols[i].class == numbers && f.d.holds(i, lo, hi, true)
}

// holds tells that all numbers of a column in the sample lie from lo to hi.
func (d *dialect) holds(i int, lo, hi float64, whole bool) bool {
	n := 0
	for _, l := range d.rows {
		if len(l.cells) < d.fields {
			continue
		}
		v, ok := d.format.parse(l.cells[i])
		if !ok {
			continue
		}
		if n++; v < lo || v > hi || whole && v != math.Trunc(v) {
			return false
		}
	}
	return n > 0
}

// clock puts the parts together, if they make one.
func (f *partFinder) clock() bool {
	if f.twice {
		return false
	}
	sec, secOK := f.found["s"]
	minuteSecond := secOK && f.d.holds(sec, 0, 60.999999999, false)
	hour, minute, hhmm := f.has("h", 0, 23), f.has("min", 0, 59), f.has("hhmm", 0, 2359)
	f.s = spreadClock{kind: elapsed, stamp: noStamp}
	switch {
	case (hour && minute || hhmm) && (minuteSecond || !secOK), minute && minuteSecond: // seconds beyond 60 are a clock of their own
		f.addDate(hour || hhmm)
		if hour {
			f.scaled("h", nsHour)
		}
		if hhmm {
			f.hoursMinutes()
		} else if minute {
			f.scaled("min", nsMinute)
		}
		if minuteSecond {
			f.scaled("s", nsSecond)
		}
		f.probe = f.s.parts
	case secOK && f.d.holds(sec, 0, 86401, false) && f.addDays(sec, nsSecond):
		f.scaled("s", nsSecond)
		f.probe = f.s.parts[1:]
	case !secOK && f.has("ms", 0, 86401e3) && f.addDays(f.found["ms"], 1e6):
		f.scaled("ms", 1e6)
		f.probe = f.s.parts[1:]
	case f.spreadsheetDay():
		f.probe = f.s.parts
		return true
	default:
		return f.secondsAndFraction()
	}
	if secOK {
		f.addFraction(sec)
	}
	return true
}

// spreadsheetDay adds the day number of a spreadsheet and the fraction of the
// day that stands in another column. A fraction that begins at zero, or goes on
// by a thousandth or more a row, is more likely a time in seconds.
func (f *partFinder) spreadsheetDay() bool {
	at, ok := f.found["fraction"]
	if !ok || !f.has("date", 36526, 73050) || !f.d.holds(at, 0, 1-1e-9, false) || f.d.holds(at, 0, 1, true) {
		return false
	}
	t := f.d.instants([]clockPart{{[]int{at}, scaledCell(at, nsDay, f.point)}})
	if len(t) == 0 || t[0] == 0 || !(typicalStep(inSeconds(t)) < fastest*86400) {
		return false
	}
	f.scaled("date", nsDay)
	f.scaled("fraction", nsDay)
	f.s.kind = calendar
	f.s.parts = append(f.s.parts, clockPart{[]int{at}, func([][]byte) (int64, bool) { return -spreadsheetEpoch, true }})
	return true
}

func inSeconds(t []int64) []float64 {
	v := make([]float64, len(t))
	for i, ns := range t {
		v[i] = float64(ns) / float64(nsSecond)
	}
	return v
}

// secondsAndFraction adds the parts of a second to seconds since 1970, or since
// the logger's zero.
func (f *partFinder) secondsAndFraction() bool {
	sec, ok := f.found["s"]
	if at, is := f.found["epoch"]; is && f.has("epoch", epochLow/1e9, epochHigh/1e9) {
		sec, ok = at, !ok
	}
	if !ok {
		return false
	}
	f.probe = []clockPart{{[]int{sec}, scaledCell(sec, nsSecond, f.point)}}
	if !f.addFraction(sec) {
		return false
	}
	f.s.stamp, f.s.main = ownStamp, sec
	return true
}

// scaled adds a column that counts units.
func (f *partFinder) scaled(part string, unit uint64) {
	f.s.main = f.found[part]
	f.s.parts = append(f.s.parts, clockPart{[]int{f.s.main}, scaledCell(f.s.main, unit, f.point)})
}

func scaledCell(i int, unit uint64, point byte) func(cells [][]byte) (int64, bool) {
	return func(cells [][]byte) (int64, bool) {
		d, n, ok := scanDecimal(cells[i], point)
		if !ok || n != len(cells[i]) || d.dropped {
			return 0, false
		}
		return d.scaled(unit)
	}
}

// hoursMinutes adds hours and minutes in one number: 2020 is 20:20.
func (f *partFinder) hoursMinutes() {
	f.s.main = f.found["hhmm"]
	read := scaledCell(f.s.main, 1, f.point)
	f.s.parts = append(f.s.parts, clockPart{[]int{f.s.main}, func(cells [][]byte) (int64, bool) {
		v, ok := read(cells)
		return v/100*int64(nsHour) + v%100*int64(nsMinute), ok && v%100 < 60 && v >= 0
	}})
}

// addDate adds the date: a column of dates, year, month and day, year and day
// of the year, or days counted from somewhere. Hours without any of them are a
// time of day.
func (f *partFinder) addDate(hours bool) {
	at, dates := f.found["date"]
	year := f.has("year", 0, 2250)
	switch {
	case dates && f.d.cols[at].class == stamps:
		f.s.stamp, f.s.kind = at, calendar
	case year && f.has("month", 1, 12) && f.has("d", 1, 31):
		f.addYear([]int{f.found["year"], f.found["month"], f.found["d"]}, func(y, m, d int64) (int64, bool) { return dayStart(fourDigits(y), int(m), int(d)) })
	case year && f.has("d", 1, 366):
		f.addYear([]int{f.found["year"], f.found["d"], f.found["d"]}, func(y, _, d int64) (int64, bool) {
			ns, ok := dayStart(fourDigits(y), 1, 1)
			return ns + (d-1)*int64(nsDay), ok && d > 0 && d <= 366
		})
	case f.has("d", 0, 1e5):
		f.scaled("d", nsDay)
	case hours:
		f.s.kind = sexagesimal
	}
}

// addYear adds a date of three numbers.
func (f *partFinder) addYear(cols []int, date func(y, m, d int64) (int64, bool)) {
	f.s.kind = calendar
	f.s.parts = append(f.s.parts, clockPart{cols, func(cells [][]byte) (int64, bool) {
		var v [3]int64
		for k, i := range cols {
			var ok bool
			if v[k], ok = scaledCell(i, 1, f.point)(cells); !ok {
				return 0, false
			}
		}
		return date(v[0], v[1], v[2])
	}})
}

func fourDigits(year int64) int {
	if year < 100 {
		return fullYear(int(year), 2)
	}
	return int(year)
}

// addDays adds the days beside a column of seconds, or of a smaller unit. If the seconds start again
// where the day changes they are seconds of the day; if they go on they count
// from somewhere else, and the day adds nothing. Which day it is stays open.
func (f *partFinder) addDays(sec int, unit uint64) bool {
	at, ok := f.found["date"]
	if !ok {
		at, ok = f.found["d"]
	}
	if !ok || f.d.cols[at].class == numbers && !f.d.holds(at, 0, 1e6, true) {
		return false
	}
	day := f.dayOf(at)
	seconds := scaledCell(sec, unit, f.point)
	var offset, lastDay, lastSecond int64
	warm := false
	f.s.parts = append(f.s.parts, clockPart{[]int{at}, func(cells [][]byte) (int64, bool) {
		d, ok := day(cells)
		s, is := seconds(cells)
		if !ok || !is {
			return 0, false
		}
		if passed := d - lastDay; warm && (passed > 0 && lastSecond-s > halfDayLong || passed < 0 && s-lastSecond > halfDayLong) {
			offset += passed
		}
		lastDay, lastSecond, warm = d, s, true
		return offset, true
	}})
	return true
}

// dayOf reads the beginning of a day, from a number of days, digits of a date
// or a date that can be read in one way only.
func (f *partFinder) dayOf(at int) func(cells [][]byte) (ns int64, ok bool) {
	if f.d.cols[at].class == numbers {
		return scaledCell(at, nsDay, f.point)
	}
	k := clock{kind: calendar}
	return func(cells [][]byte) (int64, bool) {
		ns, alt, ok := k.parse(cells[at], f.point)
		return ns, ok && (alt == noTime || alt == ns)
	}
}
