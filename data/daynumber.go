package data

import "math"

// dayCount is a way to number days.
type dayCount struct {
	name string
	zero uint64 // number of 1970-01-01
	half bool   // days begin at noon: the number of 1970-01-01 0:00 is a half more
}

// dayCounts beside that of spreadsheets: of numerical software, where day 1 is
// the first of the year 0, and the Julian date, which begins at noon.
var dayCounts = []dayCount{
	{name: "day numbers from the year 0", zero: 719529},
	{name: "Julian dates", zero: 2440587, half: true},
}

// instant is a day number in nanoseconds since 1970-01-01. Whole days are
// taken off before the rest is scaled, since 64 bits do not hold both.
func (c dayCount) instant(d decimal) (int64, bool) {
	if d.neg || d.exp > 0 || d.exp < -19 {
		return 0, false
	}
	ten := pow10u[-d.exp]
	day := int64(d.mant/ten) - int64(c.zero)
	if day < -100000 || day > 100000 {
		return 0, false
	}
	rest, ok := decimal{mant: d.mant % ten, exp: d.exp}.scaled(nsDay)
	ns := day*int64(nsDay) + rest
	if c.half {
		ns -= int64(nsDay / 2)
	}
	return ns, ok
}

// findDayCount tells the count of day numbers from 2000 to 2100 that advance
// by less than ten minutes a row and are no whole numbers.
func findDayCount(v []float64, typical float64) (c dayCount, ok bool) {
	const from, to = 10957, 47482 // 2000 and 2100, days from 1970-01-01
	for _, c := range append([]dayCount{{name: "spreadsheet day numbers", zero: 25569}}, dayCounts...) {
		if day := typical - float64(c.zero); day > from && day < to {
			if c.zero == 25569 {
				c.zero = 0 // small enough to be scaled as it is
			}
			return c, advancesInDays(v)
		}
	}
	return dayCount{}, false
}

func advancesInDays(v []float64) bool {
	const tenMinutes = 1.0 / 144
	broken := false
	for _, x := range v {
		broken = broken || x != math.Trunc(x)
	}
	step := typicalStep(v)
	return broken && step < tenMinutes
}

// typicalStep is the median of the steps between rows that differ, NaN when
// there are none.
func typicalStep(v []float64) float64 {
	var steps []float64
	for i := 1; i < len(v); i++ {
		if d := math.Abs(v[i] - v[i-1]); d > 0 {
			steps = append(steps, d)
		}
	}
	return medianOf(steps)
}
