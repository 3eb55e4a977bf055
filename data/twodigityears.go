package data

import (
	"fmt"
	"slices"
	"time"
)

// Of three numbers of two digits the year may stand last or first: 26-03-14 is
// 26 March 2014 or 14 March 2026.

// compareYears looks at dates that were found to begin with the day, or with
// the month. If the year could stand first, the reading is taken in which the
// clock goes on; where both go on alike, that is noted.
func (k *clock) compareYears(cells [][]byte) *Note {
	if k.order == yearMonthDay || k.yearless || len(cells) == 0 {
		return nil
	}
	dots := len(cells[0]) > 2 && cells[0][2] == '.' // the day stands first, unless the clock would jump
	if k.order == openOrder && !dots {
		return nil
	}
	first := clock{kind: calendar, order: yearMonthDay, rewrite: k.rewrite}
	last := clock{kind: calendar, order: k.order, rewrite: k.rewrite}
	var a, b []int64
	for _, cell := range cells {
		if !beginsWithTwo(cell) {
			return nil
		}
		t, _, ok := first.parse(cell, '.')
		u, _, also := last.parse(cell, '.')
		if !also {
			continue
		}
		if !ok {
			return nil
		}
		a, b = append(a, t), append(b, u)
	}
	if slices.Equal(a, b) {
		return nil
	}
	backA, leapA := roughness(a)
	backB, leapB := roughness(b)
	const month = int64(28 * nsDay)
	day := func(t int64) string { return time.Unix(0, t).UTC().Format("2 January 2006") }
	if backA == 0 && leapA < month && (backB > 0 || leapB >= month) {
		k.order = yearMonthDay
		return &Note{Code: "date-order", Text: "the dates were read year first, because the clock would jump otherwise"}
	}
	if dots || backB == 0 && leapB < month && (backA > 0 || leapA >= month) {
		return nil
	}
	k.yearOpen = true
	return &Note{Code: "date-order", Text: fmt.Sprintf("the dates were read %s, the first as %s; year first it would be %s (--time-format year-first)",
		orderWords[k.order], day(b[0]), day(a[0]))}
}

// beginsWithTwo tells a date whose first number has two digits.
func beginsWithTwo(cell []byte) bool {
	cell = trimBlanks(cell)
	return len(cell) > 7 && isPairOf(cell, 0) && (cell[2] == '/' || cell[2] == '-' || cell[2] == '.')
}
