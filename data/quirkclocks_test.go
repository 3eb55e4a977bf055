package data

// Where logs begin: by themselves, before noon, before midnight.
const (
	janStart  = "2026-01-25T10:00:00Z"
	noonStart = "2026-01-25T11:59:58Z"
	lateStart = "2026-01-25T23:59:58Z"
)

// clockQuirks are logs whose stamps are written in a less usual form.
var clockQuirks = []quirk{
	{file: "iso-week.csv", start: janStart, notes: []string{local}},
	{file: "iso-week-basic.csv", start: "2026-01-25T10:00:00+01:00"},
	{file: "iso-week-new-year.csv", start: "2026-12-31T23:59:58Z"},
	{file: "day-of-year-basic.csv", start: janStart},
	{file: "day-of-year-slash.csv", start: janStart, notes: []string{local}},
	{file: "am-pm-letter.csv", start: noonStart, notes: []string{local}},
	{file: "am-pm-front.csv", start: noonStart, notes: []string{local}},
	{file: "am-pm-narrow-blank.csv", start: noonStart, notes: []string{local}},
	{file: "words-in-stamp-spanish.csv", start: janStart, notes: []string{local}},
	{file: "words-in-stamp-german.csv", start: janStart, notes: []string{local}},
	{file: "words-in-stamp-french.csv", start: janStart, notes: []string{local}},
	{file: "words-in-stamp-english.csv", start: janStart, notes: []string{local}},
	{file: "hours-letter.csv", start: janStart, notes: []string{local}},
	{file: "time-dots-short-date.csv", start: janStart, notes: []string{local}},
	{file: "digits-low-line.csv", start: janStart, notes: []string{local}},
	{file: "digits-seventeen.csv", start: janStart, notes: []string{local}},
	{file: "month-finnish.csv", start: "2026-11-25T10:00:00Z", notes: []string{local}},
	{file: "month-russian.csv", start: janStart, notes: []string{local}},
	{file: "month-polish.csv", start: janStart, notes: []string{local}},
	{file: "dots-and-blanks.csv", start: janStart, notes: []string{local}},

	// no year
	{file: "no-year-dashes.csv", notes: []string{"year-unknown"}},
	{file: "no-year-dots.csv", notes: []string{"year-unknown"}},
	{file: "no-year-syslog.csv", notes: []string{"year-unknown"}},
	{file: "no-year-new-year.csv", notes: []string{"year-unknown"}},
	{file: "no-year-february.csv", notes: []string{"year-unknown"}},
	{file: "no-year-february-29.csv", notes: []string{"year-unknown"}},
	{file: "no-year-february-pause.csv", wrong: "no-year-february-pause.csv:6: the stamps name no year, and from 28 February to this row it is a day more in a leap year: export stamps with the year, or cut the log here"},
	{file: "no-year-open.csv", notes: []string{"year-unknown"}},
	{file: "no-year-open.csv", o: Options{TimeFormat: "MM/dd hh:mm:ss.S a"}},
	{file: "no-year-open-days.csv", t: ramp(8, func(i int) float64 { return 86400 * float64(i) }), notes: []string{"year-unknown", "date-order"}},
	{file: "no-year-open-days.csv", o: Options{TimeFormat: "MM/dd HH:mm:ss"}, t: ramp(8, func(i int) float64 { return 86400 * float64(i) })},
	{file: "no-year-open-days.csv", o: Options{TimeFormat: "month-first", From: "86400"}, t: ramp(7, func(i int) float64 { return 86400 * float64(i) }), u: baseU[1:], y: baseY[1:],
		notes: []string{"year-unknown"}, dropped: map[string]int{"outside --from and --to": 1}},
	{file: "no-year-two-columns.csv", notes: []string{"year-unknown"}},
	{file: "no-year-syslog-pairs.log", notes: []string{"year-unknown", "rows-of-pairs"}},
	{file: "no-year-number.csv", notes: []string{"year-unknown"}},
	{file: "no-year-month-name.csv", notes: []string{"year-unknown"}},
	{file: "no-year-cell-missing.csv", t: without(baseT, 3), u: without(baseU, 3), y: without(baseY, 3), notes: []string{"year-unknown"}, dropped: map[string]int{"no usable time": 1}},
	{file: "date-unknown-form.csv", notes: []string{"date-left"}},

	// bare digits
	{file: "date-digits-day-first.csv", start: lateStart, notes: []string{"clock-digits", local}},
	{file: "date-digits-month-first.csv", start: lateStart, notes: []string{local}},
	{file: "date-digits-two-digit-year.csv", start: lateStart, notes: []string{"date-order", local}},
	{file: "date-digits-both-ways.csv", wrong: `column "date" (05012026 10:00:00.0) can be read as 5 January 2026 or 1 May 2026: say which with --time-format day-first or --time-format month-first`},
	{file: "date-digits-both-ways.csv", o: Options{TimeFormat: "day-first"}, start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "date-digits-both-ways.csv", o: Options{TimeFormat: "year-first"}, wrong: "does not hold dates in the order that --time-format names"},
	{file: "date-digits-one-column.csv", start: janStart, notes: []string{local}},
	{file: "date-digits-fourteen.csv", t: ramp(8, func(i int) float64 { return float64(i) }), start: janStart, notes: []string{local}},
	{file: "date-digits-fifteen.csv", start: lateStart, notes: []string{"date-order", local}},
	{file: "year-two-digits.csv", start: "2025-01-26T10:00:00Z", notes: []string{"date-order", local}},
	{file: "year-two-digits.csv", o: Options{TimeFormat: "year-first"}, start: janStart, notes: []string{local}},
	{file: "year-two-digits-midnight.csv", start: lateStart, notes: []string{"date-order", local}},

	// fractions and counts
	{file: "milliseconds-unpadded.csv", t: ramp(8, func(i int) float64 { return float64(5*i) / 100 }), start: janStart, notes: []string{"clock-milliseconds", local}},
	{file: "milliseconds-unpadded-colon.csv", t: ramp(8, func(i int) float64 { return float64(5*i) / 100 }), notes: []string{"clock-milliseconds"}},
	{file: "hundredths-behind-colon.csv", wrong: `column "time" (10:00:00:00): the digits behind the last colon could be a decimal fraction of a second, milliseconds, frames, or seconds behind days`},
	{file: "colon-days-unpadded.csv", wrong: "the digits behind the last colon could be"},
	{file: "colon-days-seconds.csv", wrong: "the digits behind the last colon could be"},
	{file: "colon-frames.csv", wrong: "the digits behind the last colon could be"},
	{file: "colon-hundredths.csv", wrong: "the digits behind the last colon could be"},
	{file: "colon-milliseconds-date.csv", start: janStart, notes: []string{"clock-milliseconds", local}},
	{file: "milliseconds-never-zero.csv", t: ramp(8, func(i int) float64 { return float64(i) / 5 }), notes: []string{"clock-milliseconds"}},
	{file: "decimals-cut-unevenly.csv", t: ramp(8, func(i int) float64 { return float64(i) / 4 })},
	{file: "fraction-both-ways.csv", wrong: `column "time" (10:00:00.0): the digits behind the seconds could be decimals or a number of milliseconds: export them with a fixed number of digits`},
	{file: "ticks-year-1.csv", start: janStart, notes: []string{"clock-ticks"}},
	{file: "ticks-1601.csv", start: janStart, notes: []string{"clock-ticks"}},

	// clocks that start again, and units
	{file: "date-at-midnight.csv", start: lateStart, notes: []string{local}},
	{file: "date-at-midnight-us.csv", start: lateStart, notes: []string{local}},
	{file: "date-stands-still.csv", start: lateStart, notes: []string{"clock-midnight", local}},
	{file: "counter-16-bit.csv", notes: []string{"clock-counter"}},
	{file: "two-runs-near-counter.csv", wrong: "two-runs-near-counter.csv:4: the clock jumps back by 1m5s: these may be two recordings in one file"},
	{file: "two-runs-far-from-counter.csv", wrong: "two-runs-far-from-counter.csv:6: the clock jumps back by 1m5.49s: these may be two recordings in one file"},
	{file: "counter-32-bit.csv", notes: []string{"clock-counter"}},
	{file: "seconds-of-day.csv", notes: []string{"clock-counter"}},
	{file: "minutes-pointed.csv", wrong: `column "Time (min)" goes on evenly only if what stands behind the point is a number of sixtieths (1.30 for 1:30): export it with a colon, or say --time-format seconds, min or hours`},
	{file: "minutes-pointed.csv", o: Options{TimeFormat: "min"}, t: []float64{0, 6, 12, 18, 24, 30, 60, 66}},
	{file: "time-unit-odd.csv", wrong: `column "Time (100 ms)" counts time in "100 ms", which is no unit that is known`},
	{file: "time-unit-m.csv", wrong: `column "Time (m)" counts time in "m", which is no unit that is known: if its numbers are seconds or another unit, say which with --time-format seconds, ms, min or hours`},
	{file: "time-unit-m.csv", o: Options{TimeFormat: "seconds"}},
	{file: "duration-iso.csv"},
	{file: "browser-date.csv", t: ramp(8, func(i int) float64 { return float64(i) }), start: "2026-01-25T10:00:00+01:00"},
	{file: "zone-in-brackets.csv", start: "2026-01-25T10:00:00+01:00"},
	{file: "long-millionths-of-day.csv", t: ramp(8, func(i int) float64 { return float64(i) }), within: 1e-5, // four decimals of 86.4 ms
		start: "2026-01-25T10:00:00.00000288Z", notes: []string{"clock-day-number", "long-form", local}, dropped: map[string]int{"no time": 1}},
	{file: "year-two-digits-dots.csv", start: lateStart, notes: []string{"date-order", local}},
	{file: "time-with-h.csv"},
	{file: "countdown.csv", wrong: `column "remaining_s" counts down by its name: export the time that went by, or name another clock with --time-col`},
	{file: "clock-still.csv", wrong: "the clock does not move: name another with --time-col, or export stamps with more digits; where a column holds the time between rows, export the sum"},
}
