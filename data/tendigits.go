package data

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"time"
)

// Ten digits are seconds since 1970, or a date and a time of day: 2603141000,
// yymmddhhmm. Read as seconds, the second kind goes on by 1 a minute, and by 41
// at the full hour.

// tenDigits is a way to read them as a date.
type tenDigits struct {
	dateDigits
	pattern string // as --time-format names it
}

var tenDigitForms = []tenDigits{
	{dateDigits{6, yearMonthDay}, "yyMMddHHmm"}, {dateDigits{6, dayMonthYear}, "ddMMyyHHmm"}, {dateDigits{6, monthDayYear}, "MMddyyHHmm"},
}

// instant reads ten digits.
func (f tenDigits) instant(b []byte) (t time.Time, ok bool) {
	if len(b) != 10 || !areDigits(b) {
		return t, false
	}
	date, _, ok := f.split(b[:6])
	tod, n := digitsOfTime(append(slices.Clone(b[6:]), '0', '0'))
	return date.Add(time.Duration(tod)), ok && n == 6
}

// What tells a date of ten digits from seconds (common practice, no source): its
// start would lie beyond 2040, or so many rows in a row are dates of these years
// without one that is none.
const (
	secondsLast = 2208988800 // 2040-01-01
	datesFirst  = 2015
	datesLast   = 2040
	manyDates   = 30
)

// refuseTenDigits refuses stamps that could be both.
func refuseTenDigits(cells [][]byte, v []float64, label string) error {
	if lower := strings.ToLower(label); strings.Contains(lower, "unix") || strings.Contains(lower, "epoch") {
		return nil
	}
	likely := false
	var readings, flags []string
	for _, f := range tenDigitForms {
		start, all := f.span(cells)
		if !all {
			continue
		}
		likely = likely || isLikelyDate(cells, v, start)
		readings = append(readings, start.Format("2 January 2006 15:04"))
		flags = append(flags, f.pattern)
	}
	if !likely {
		return nil
	}
	return fmt.Errorf("column %q (%s) could be seconds since 1970 (%s), or a date and a time of day (%s): say which with --time-format unix or --time-format %s",
		label, cells[0], time.Unix(int64(v[0]), 0).UTC().Format("2 January 2006 15:04:05"), orList(readings), orList(flags))
}

// span is the first instant of cells that can all be read so.
func (f tenDigits) span(cells [][]byte) (start time.Time, all bool) {
	for i, b := range cells {
		t, ok := f.instant(trimBlanks(b))
		if !ok {
			return start, false
		}
		if i == 0 {
			start = t
		}
	}
	return start, len(cells) > 0
}

func isLikelyDate(cells [][]byte, v []float64, start time.Time) bool {
	distinct := 1
	step := typicalStep(v)
	for i := 1; i < len(v); i++ {
		d := math.Abs(v[i] - v[i-1])
		if d == step+40 { // from one hour to the next
			return true
		}
		if d > 0 {
			distinct++
		}
	}
	return cells[0][0] == '0' || v[0] > secondsLast || distinct >= manyDates && start.Year() >= datesFirst && start.Year() <= datesLast
}
