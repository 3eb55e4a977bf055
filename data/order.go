package data

import (
	"errors"
	"fmt"
	"slices"
)

var (
	errNoRows = errors.New("no rows of data with a usable time")
	errNoTime = errors.New("the clock does not move: name another with --time-col, or export stamps with more digits; where a column holds the time between rows, export the sum")
)

// settleOrder chooses between the two readings of stamps whose day and month
// could stand either way round. A day above 12 anywhere in the file decides,
// else the reading that never runs back, else the one that leaps a month
// where the other goes on by a row; without any of these it is an error.
func settleOrder(tb *table, info *reading) ([]int64, error) {
	if !info.open {
		t := tb.t.flat()
		return t, info.yearLeaps(t)
	}
	dayFirst, monthFirst := tb.t.flat(), tb.alt.flat()
	for i, alt := range monthFirst {
		if alt == noTime { // a stamp that says its order itself
			monthFirst[i] = dayFirst[i]
		}
	}
	k := info.clock
	switch {
	case k.dayFirst && k.monthFirst:
		return nil, fmt.Errorf("column %q has days above 12 both in front and behind: say how to read it with --time-format day-first or month-first", info.cols[info.dateColumn()].label)
	case k.dayFirst:
		return dayFirst, nil
	case k.monthFirst:
		return monthFirst, nil
	case slices.Equal(dayFirst, monthFirst):
		return dayFirst, nil
	case k.yearless && goOnAlike(dayFirst, monthFirst):
		return dayFirst, nil
	}
	backD, leapD := roughness(dayFirst)
	backM, leapM := roughness(monthFirst)
	const month = int64(28 * nsDay)
	switch {
	case backD == 0 && (backM > 0 || leapM >= month && leapD < month):
		info.note("date-order", 0, "the dates were read day first, because the clock would jump otherwise")
		return dayFirst, nil
	case backM == 0 && (backD > 0 || leapD >= month && leapM < month):
		info.note("date-order", 0, "the dates were read month first, because the clock would jump otherwise")
		return monthFirst, nil
	}
	dates := info.cols[info.dateColumn()]
	show := ""
	if len(dates.sample) > 0 {
		show = fmt.Sprintf(" (%s)", dates.sample[0])
	}
	return nil, fmt.Errorf("column %q%s can be read day first or month first: say which with --time-format day-first or --time-format month-first",
		dates.label, show)
}

// goOnAlike tells two readings that differ by a constant.
func goOnAlike(a, b []int64) bool {
	for i := range a {
		if a[i]-b[i] != a[0]-b[0] {
			return false
		}
	}
	return true
}

// yearLeaps refuses dates whose year of two digits could stand first as well,
// where the clock leaps as it was read.
func (r *reading) yearLeaps(t []int64) error {
	if !r.clock.yearOpen {
		return nil
	}
	if back, leap := roughness(t); back > 0 || leap >= int64(28*nsDay) {
		return fmt.Errorf("the dates of column %q leap when they are read %s: say --time-format year-first if the year stands first, or --time-format %s if they do leap",
			r.cols[r.dateColumn()].label, orderWords[r.clock.order], orderFlags[r.clock.order])
	}
	return nil
}

// dateColumn is the column that the dates stand in: that of the clock, or one
// of their own.
func (r *reading) dateColumn() int {
	if i := r.at[roleDate]; i >= 0 {
		return i
	}
	return r.at[roleTime]
}

// roughness counts the steps back of more than two hours (smaller ones may be
// a clock set back) and gives the largest step forward, ns.
func roughness(t []int64) (back int, leap int64) {
	for i := 1; i < len(t); i++ {
		d := t[i] - t[i-1]
		if d < -int64(2*nsHour) {
			back++
		}
		leap = max(leap, d)
	}
	return back, leap
}
