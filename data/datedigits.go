package data

import (
	"bytes"
	"fmt"
	"slices"
	"time"
)

// Dates of bare digits that do not begin with a year of four digits: 14032026,
// 03142026, 260314, alone, in front of a time of day, or with the digits of one
// right behind them. Which digits are the day shows only in the whole column.

// dateDigits is a way to read such dates.
type dateDigits struct {
	width int // 8 digits, or 6 with a year of two
	order dateOrder
}

var dateDigitForms = []dateDigits{
	{8, yearMonthDay}, {8, dayMonthYear}, {8, monthDayYear},
	{6, yearMonthDay}, {6, dayMonthYear}, {6, monthDayYear},
}

// split takes the date off a stamp.
func (f dateDigits) split(b []byte) (date time.Time, rest []byte, ok bool) {
	run := 0
	for run < len(b) && b[run]-'0' <= 9 {
		run++
	}
	if !slices.Contains(f.runs(), run) || run == f.width && run < len(b) && b[run] != '-' && !isStampGap(b[run]) {
		return date, nil, false
	}
	two := func(i int) int { return 10*int(b[i]-'0') + int(b[i+1]-'0') }
	century := func(i int) int {
		if f.width == 8 {
			return 100*two(i) + two(i+2)
		}
		return fullYear(two(i), 2)
	}
	y, m, d := 0, 0, 0
	switch last := f.width - 4; f.order {
	case yearMonthDay:
		y, m, d = century(0), two(last), two(last+2)
	case dayMonthYear:
		y, m, d = century(4), two(2), two(0)
	default:
		y, m, d = century(4), two(0), two(2)
	}
	ns, ok := dayStart(y, m, d)
	if !ok || y < 1970 || y > 2100 {
		return date, nil, false
	}
	return time.Unix(0, ns).UTC(), b[f.width:], true
}

// runs are the digits that a stamp can begin with: of the date, or with hhmmss
// or hhmmssmmm behind it, or with hhmm behind a whole year: ten digits are the
// seconds since 1970.
func (f dateDigits) runs() []int {
	if f.width == 6 {
		return []int{6, 12, 15}
	}
	return []int{8, 12, 14, 17}
}

// plain writes a stamp in the usual form; nil where it has another.
func (f dateDigits) plain(dst, b []byte) []byte {
	date, rest, ok := f.split(b)
	if !ok {
		return nil
	}
	dst = date.AppendFormat(dst, time.DateOnly)
	if len(rest) == 0 {
		return dst
	}
	if rest[0]-'0' > 9 {
		rest = rest[1:]
	}
	dst = append(dst, ' ')
	switch n := digitsAhead(rest); {
	case n == 4 && len(rest) == 4:
		return append(append(append(dst, rest[:2]...), ':'), rest[2:]...)
	case n == 6 || n == 9:
		return appendClock(dst, rest, clockDigits(n))
	}
	return append(dst, rest...)
}

func digitsAhead(b []byte) (n int) {
	for n < len(b) && b[n]-'0' <= 9 {
		n++
	}
	return n
}

// instant reads a stamp in one of the forms.
func (f dateDigits) instant(b []byte) (ns int64, ok bool) {
	plain := f.plain(nil, trimBlanks(b))
	if plain == nil {
		return 0, false
	}
	var k clock
	ns, _, ok = k.parseUsual(plain)
	return ns, ok
}

// fitting lists the forms in which every cell can be read. Cells that begin
// with yyyymmdd are left to others.
func fittingDigits(cells [][]byte) (found []dateDigits, series [][]int64) {
	for _, f := range dateDigitForms {
		var t []int64
		for _, b := range cells {
			ns, ok := f.instant(b)
			if !ok {
				t = nil
				break
			}
			t = append(t, ns)
		}
		if len(t) == 0 {
			continue
		}
		if f == dateDigitForms[0] {
			return nil, nil
		}
		found, series = append(found, f), append(series, t)
	}
	return found, series
}

// findDateDigits settles how dates of bare digits are read; found is false
// where the cells are none. order is what the caller says of it.
func findDateDigits(cells [][]byte, label string, order dateOrder) (f dateDigits, note *Note, found bool, err error) {
	forms, series := fittingDigits(cells)
	if len(forms) == 0 {
		return f, nil, false, nil
	}
	if order != openOrder {
		i := slices.IndexFunc(forms, func(f dateDigits) bool { return f.order == order })
		if i < 0 {
			return f, nil, false, fmt.Errorf("column %q (%s) does not hold dates in the order that --time-format names", label, cells[0])
		}
		return forms[i], nil, true, nil
	}
	if len(forms) == 1 {
		return forms[0], nil, true, nil
	}
	best, smooth := -1, 0
	for i, t := range series {
		if back, leap := roughness(t); back == 0 && leap < int64(28*nsDay) {
			best, smooth = i, smooth+1
		}
	}
	if smooth == 1 {
		return forms[best], &Note{Code: "date-order", Text: fmt.Sprintf("the digits of column %q were read %s, because the clock would jump otherwise", label, orderWords[forms[best].order])}, true, nil
	}
	var readings []string
	var flag []string
	for i, f := range forms {
		readings = append(readings, time.Unix(0, series[i][0]).UTC().Format("2 January 2006"))
		flag = append(flag, "--time-format "+orderFlags[f.order])
	}
	return f, nil, false, fmt.Errorf("column %q (%s) can be read as %s: say which with %s", label, cells[0], orList(readings), orList(flag))
}

var (
	orderWords = [...]string{dayMonthYear: "day first", monthDayYear: "month first", yearMonthDay: "year first"}
	orderFlags = [...]string{dayMonthYear: "day-first", monthDayYear: "month-first", yearMonthDay: "year-first"}
)

// orList joins candidates: a, b or c.
func orList(s []string) string {
	var b bytes.Buffer
	for i, x := range s {
		switch {
		case i > 0 && i == len(s)-1:
			b.WriteString(" or ")
		case i > 0:
			b.WriteString(", ")
		}
		b.WriteString(x)
	}
	return b.String()
}

// orderOf is the order that --time-format names by a word.
func orderOf(format string) (order dateOrder, named bool) {
	k, ok := namedClocks[format]
	return k.order, ok && k.kind == calendar
}
