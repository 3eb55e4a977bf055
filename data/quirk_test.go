package data

import (
	"context"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

var nan = math.NaN()

// What most quirk files hold, written in another way each.
var (
	baseT = []float64{0, 0.5, 1, 1.5, 2, 2.5, 3, 3.5}
	baseU = []float64{0, 0, 1.5, 1.5, 1.5, 1.5, 1.5, 1.5}
	baseY = []float64{24.1, 24.1, 24.2, 24.6, 25.9, 27.3, 28.6, 29.8}
)

// quirk is one small file of testdata/logs/quirks and what must be read from
// it; nil columns are those of the base.
type quirk struct {
	file    string
	o       Options
	t, u, y []float64
	within  float64 // tolerance of values, for files that round them; 0 is exact

	input, temp string // units; "" means V and degC
	start       string // RFC 3339, "" means none
	notes       []string
	missing     map[string]int
	dropped     map[string]int
	also        func(t *testing.T, r *Run)
	wrong       string // the error must hold this text
}

func times1500(u []float64) []float64 {
	out := slices.Clone(u)
	for i := range out {
		out[i] *= 1000
	}
	return out
}

// without leaves out the rows at the given places.
func without(v []float64, rows ...int) []float64 {
	var out []float64
	for i, x := range v {
		if !slices.Contains(rows, i) {
			out = append(out, x)
		}
	}
	return out
}

// with replaces values: place, value, place, value.
func with(v []float64, pairs ...float64) []float64 {
	out := slices.Clone(v)
	for i := 0; i < len(pairs); i += 2 {
		out[int(pairs[i])] = pairs[i+1]
	}
	return out
}

func ramp(n int, f func(i int) float64) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = f(i)
	}
	return out
}

const local = "zone-unknown"

var quirks = []quirk{
	// delimiters, marks, quotes
	{file: "comma.csv"},
	{file: "semicolon.csv"},
	{file: "tab.tsv"},
	{file: "pipe.csv"},
	{file: "blanks.txt"},
	{file: "blanks-date-time.txt", start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "decimal-comma.csv"},
	{file: "decimal-comma-tab.tsv"},
	{file: "decimal-comma-quoted.csv"},
	{file: "thousands-comma.csv", u: times1500(baseU), input: "W"},
	{file: "thousands-dot.csv", u: times1500(baseU), input: "W"},
	{file: "thousands-apostrophe.csv", u: times1500(baseU), input: "W"},
	{file: "thousands-only.csv", u: times1500(baseU), y: wholeY, input: "W", start: "2026-01-25T10:00:00Z", notes: []string{"thousands-mark", local}},
	{file: "thousands-only-dots.csv", u: times1500(baseU), y: wholeY, input: "W", start: "2026-01-25T10:00:00Z", notes: []string{"thousands-mark", local}},
	{file: "three-decimals-quoted.csv", u: []float64{1, 1, 2.5, 2.5, 2.5, 2.5, 2.5, 2.5}, start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "comma-and-tab.txt"},
	{file: "pairs.txt", notes: []string{"rows-of-pairs"}},
	{file: "pairs-behind-stamp.log", start: "2026-01-25T10:00:00Z", notes: []string{"rows-of-pairs", local}},
	{file: "json-lines.txt", start: "2026-01-25T10:00:00Z", notes: []string{"rows-of-pairs"}},
	{file: "json-array.txt", notes: []string{"rows-of-pairs"}},
	{file: "page.csv", wrong: "is a page of HTML or XML, whatever its name says, not a log: open it in a spreadsheet and save it as CSV"},
	{file: "quoted-newline.csv"},
	{file: "stray-quote.csv"},
	{file: "row-quoted.csv"},
	{file: "row-quoted-inner.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "protected.csv"},
	{file: "protected-comma.csv"},
	{file: "protected-quoted.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "apostrophes.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},

	// bytes and lines
	{file: "crlf.csv"},
	{file: "cr.csv"},
	{file: "bom.csv"},
	{file: "bom-no-header.csv", t: ramp(24, half), u: headless, y: headlessY, input: "unit", temp: "unit",
		notes: []string{"column-by-content", "time-unit-assumed", "input-unit-unknown", "unit-unknown"}},
	{file: "utf16le.csv"},
	{file: "utf16be.csv"},
	{file: "utf16-no-bom.csv"},
	{file: "latin1.csv", also: func(t *testing.T, r *Run) {
		if got := r.Source.Columns.Temperature; got != "Austritt [°C]" {
			t.Errorf("column %q, want the degree sign of Latin-1 decoded", got)
		}
	}},
	{file: "packed.csv.gz"},
	{file: "nul-padding.csv", notes: []string{"nul-bytes"}},
	{file: "nul-inside.csv", t: without(baseT, 2), u: without(baseU, 2), y: without(baseY, 2), notes: []string{"nul-bytes"}, dropped: map[string]int{"NUL bytes": 1}},
	{file: "no-newline-at-end.csv", notes: []string{"no-final-newline"}},
	{file: "joined-files.csv", notes: []string{"header-repeated"}},
	{file: "crcrlf.csv"},
	{file: "blank-lines.csv"},
	{file: "comments.csv"},

	// headers
	{file: "preamble.csv"},
	{file: "preamble-same-width.csv"},
	{file: "unit-row.csv"},
	{file: "unit-row-brackets.csv"},
	{file: "unit-row-parens-f.csv", within: 1e-12, notes: []string{"fahrenheit"}},
	{file: "unit-suffix-f.csv", within: 1e-12, notes: []string{"fahrenheit"}},
	{file: "unit-kelvin.csv", within: 1e-12},
	{file: "unit-in-cell.csv"},
	{file: "unit-row-dashes.csv", also: func(t *testing.T, r *Run) {
		if r.Auto == nil || slices.Contains(r.Auto, true) {
			t.Errorf("automatic %v, want manual throughout", r.Auto)
		}
	}},
	{file: "tab-many-words.tsv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "comment-header.csv"},
	{file: "trailing-delimiter.csv"},
	{file: "header-repeated.csv", notes: []string{"header-repeated"}},
	{file: "row-names.txt"},
	{file: "no-header.csv", t: ramp(24, half), u: headless, y: headlessY, input: "unit", temp: "unit",
		notes: []string{"column-by-content", "time-unit-assumed", "input-unit-unknown", "unit-unknown"}},
	{file: "unknown-unit.csv", temp: "unit", notes: []string{"unit-unknown"}},
	{file: "unknown-unit.csv", o: Options{TempUnit: "F"}, y: fahrenheit(baseY), within: 1e-12, notes: []string{"fahrenheit"}},
	{file: "other-columns.csv", also: func(t *testing.T, r *Run) {
		if r.Source.Columns.Input != "drive_V" || r.Source.Columns.Temperature != "outlet_degC" {
			t.Errorf("columns %+v", r.Source.Columns)
		}
	}},
	{file: "words-german.csv", also: setpoint60},
	{file: "words-french.csv", also: setpoint60},
	{file: "words-spanish.csv", also: setpoint60},
	{file: "words-italian.csv", also: setpoint60},
	{file: "words-dutch.csv", also: setpoint60},
	{file: "words-portuguese.csv", also: setpoint60},
	{file: "words-polish.csv", also: setpoint60},
	{file: "words-czech.csv", also: setpoint60},
	{file: "words-swedish.csv", also: setpoint60},
	{file: "words-danish.csv", also: setpoint60},
	{file: "words-finnish.csv", also: setpoint60},
	{file: "words-turkish.csv", also: setpoint60},
	{file: "words-japanese.csv", also: setpoint60},
	{file: "words-chinese.csv", also: setpoint60},
	{file: "names-are-units.csv"},
	{file: "names-are-units-min.csv", within: 1e-7}, // minutes to nine decimals
	{file: "percent-in-name.csv", u: []float64{0, 0, 15, 15, 15, 15, 15, 15}, input: "%", also: setpoint60},
	{file: "unit-row-above.csv"},
	{file: "tab-blank-first-unit.tsv", u: []float64{0, 0, 15, 15, 15, 15, 15, 15}, input: "%", start: "2026-01-25T10:00:00Z", notes: []string{local}, also: setpoint60},
	{file: "time-last.tsv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "header-narrow.csv", wrong: "header-narrow.csv:1: the header names 3 columns (time | drive_V | outlet_degC), but the rows hold 4 (2026-01-25 10:00:00,0,0,24.1)"},
	{file: "header-decimal-comma.csv", wrong: "but the rows hold 6"},
	{file: "header-unit-apart.csv"},
	{file: "header-wide.csv", wrong: "the header names 4 columns (Time | local | Drive_V | Outlet_C), but the rows hold 3"},
	{file: "header-two-words.txt"},
	{file: "header-rule.tsv"},
	{file: "numbers-above-names.csv"},
	{file: "types-below-names.csv"},
	{file: "brackets-full-width.csv"},
	{file: "sample-number-only.csv", wrong: "no column is a clock: say which with --time-col"},
	{file: "rule-blanks.txt"},
	{file: "rule-frame.txt", dropped: map[string]int{"row too short": 1}},
	{file: "rule-bars.txt"},
	{file: "unit-millivolts.csv"},
	{file: "unit-kilovolts.csv"},
	{file: "degree-sign-dos.csv"},
	{file: "degree-sign-twice.csv"},
	{file: "remark-column.csv"},
	{file: "remark-unnamed.csv"},
	{file: "many-roles.csv", also: func(t *testing.T, r *Run) {
		same(t, "setpoint", r.Setpoint, with(ramp(8, func(int) float64 { return 60 }), 0, nan), 0)
		same(t, "airflow", r.Airflow, ramp(8, func(i int) float64 { return 400 + float64(i) }), 0)
		same(t, "inlet", r.Inlet, ramp(8, func(i int) float64 { return 18.5 + float64(i)/4 }), 0)
		if want := []bool{false, false, false, false, true, true, true, true}; !slices.Equal(r.Auto, want) {
			t.Errorf("automatic %v, want %v", r.Auto, want)
		}
	}},
	{file: "supply-voltage.csv"},
	{file: "two-temperatures.csv", wrong: `2 columns could be the temperature: "outlet_A_degC" (24.1, 24.1, 24.2), "outlet_B_degC" (25.1, 25.1, 25.2); say which with --temp-col`},
	{file: "two-temperatures.csv", o: Options{TempCol: "OUTLET_B_DEGC"}, y: []float64{25.1, 25.1, 25.2, 25.6, 26.9, 28.3, 29.6, 30.8}},
	{file: "still-temperature.csv", wrong: `2 columns could be the temperature: "Ch2 (°C)"`},
	{file: "set-and-measured.csv", t: ramp(24, half), u: headless, y: headlessY, notes: []string{"column-by-content"}, also: func(t *testing.T, r *Run) {
		if r.Source.Columns.Input != "voltage set (V)" {
			t.Errorf("input is %q, want the stepwise one", r.Source.Columns.Input)
		}
	}},
	{file: "historian-tags.csv", input: "unit", temp: "unit", start: "2026-01-05T10:00:00Z", notes: []string{"input-unit-unknown", "unit-unknown"}, also: func(t *testing.T, r *Run) {
		if r.Auto == nil || r.Auto[0] || r.Source.Columns.Setpoint != "TIC-7.SP" {
			t.Errorf("automatic %v, columns %+v", r.Auto, r.Source.Columns)
		}
	}},
	{file: "start-up-text.csv", y: with(baseY, 0, nan, 1, nan, 2, nan), missing: map[string]int{`text "Startup"`: 3}},
	{file: "comma.csv", o: Options{TempCol: "inlet"}, wrong: `--temp-col "inlet": there is no such column; the columns are "time_s" (0, 0.5, 1), "drive_V"`},

	// clocks
	{file: "rfc3339.csv", start: "2026-01-05T10:00:00Z"},
	{file: "rfc3339-offset.csv", start: "2026-01-05T10:00:00+01:00"},
	{file: "iso-basic.csv", start: "2026-01-05T10:00:00Z"},
	{file: "iso-basic-fraction.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "restart-two-columns.csv", start: "2026-01-25T10:00:00Z", notes: []string{"header-repeated", local}},
	{file: "year-first-slash.csv", start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "dots-day-first.csv", start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "dots-decimal-comma.csv", start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "day-above-12.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "month-first.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "ambiguous-order.csv", wrong: `column "time" (05/01/2026 10:00:00.0) can be read day first or month first: say which with --time-format`},
	{file: "ambiguous-order.csv", o: Options{TimeFormat: "month-first"}, start: "2026-05-01T10:00:00Z", notes: []string{local}},
	{file: "ambiguous-order.csv", o: Options{TimeFormat: "dd/MM/yyyy HH:mm:ss.S"}, start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "ambiguous-order.csv", o: Options{TimeFormat: "%m/%d/%Y %H:%M:%S.%f"}, start: "2026-05-01T10:00:00Z", notes: []string{local}},
	{file: "order-by-midnight.csv", start: "2026-01-05T23:59:58Z", notes: []string{"date-order", local}},
	{file: "am-pm.csv", start: "2026-01-25T11:59:58Z", notes: []string{local}},
	{file: "am-pm-column.csv", start: "2026-01-25T11:59:58Z", notes: []string{local}},
	{file: "month-name.csv", start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "date-and-time.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "unix-s.csv", start: "2026-01-05T10:00:00Z"},
	{file: "unix-ms.csv", start: "2026-01-05T10:00:00Z"},
	{file: "unix-us.csv", start: "2026-01-05T10:00:00Z"},
	{file: "unix-ns.csv", start: "2026-01-05T10:00:00Z"},
	{file: "day-number.csv", within: 1e-6, start: "2026-01-05T10:00:00.000002966Z", notes: []string{"clock-day-number", local}},               // the file holds 46027.416666666701 days
	{file: "day-number-decimal-comma.csv", within: 1e-7, start: "2026-01-25T10:00:00.000000029Z", notes: []string{"clock-day-number", local}}, // twelve decimals of a day
	{file: "day-number-year-0.csv", within: 1e-7, start: "2026-01-25T10:00:00.000000029Z", notes: []string{"clock-day-number", local}},
	{file: "day-number-julian.csv", within: 1e-7, start: "2026-01-25T10:00:00.000000029Z", notes: []string{"clock-day-number", local}},
	{file: "day-fraction.csv", within: 1e-7, notes: []string{"clock-day-number"}},
	{file: "minutes-unnamed.csv", wrong: "goes on by 0.000139 a row, too little for seconds: say --time-format hours"},
	{file: "minutes-unnamed.csv", o: Options{TimeFormat: "hours"}, within: 1e-5}, // nine decimals of an hour
	{file: "clock-digits.csv", wrong: "say --time-format HHmmss, or --time-format seconds"},
	{file: "clock-digits.csv", o: Options{TimeFormat: "HHmmss"}, t: ramp(8, func(i int) float64 { return float64(i) })},
	{file: "two-clocks.csv", wrong: `columns "time (ms)" and "timestamp" are both clocks, but over the first 8 rows one goes on by 583.333µs and the other by 35s: say which to use with --time-col`},
	{file: "two-clocks.csv", o: Options{TimeCol: "timestamp"}, t: ramp(8, func(i int) float64 { return 5 * float64(i) }), start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "two-clocks-minutes.csv", t: ramp(8, func(i int) float64 { return 5 * float64(i) })},
	{file: "compact-stamp.csv", start: "2026-01-25T10:00:58Z", notes: []string{local}},
	{file: "zone-name.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "am-pm-spanish.csv", start: "2026-01-25T11:59:58Z", notes: []string{local}},
	{file: "weekday.tsv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "ctime.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "ctime-zone.csv", start: "2026-03-01T10:00:00Z"},
	{file: "rfc-1123.csv", start: "2026-01-25T10:00:00Z"},
	{file: "rfc-1123-comma.csv", start: "2026-01-25T10:00:00Z"},
	{file: "rfc-850.csv", start: "2026-01-25T10:00:00Z"},
	{file: "date-first-row.csv", start: "2026-01-25T10:00:00Z", notes: []string{"date-held", local}},
	{file: "date-first-row-midnight.csv", start: "2026-01-25T23:59:58Z", notes: []string{"date-held", "clock-midnight", local}},
	{file: "date-where-it-changes.csv", start: "2026-01-25T23:59:58Z", notes: []string{"date-held", local}},
	{file: "date-ditto.csv", start: "2026-01-25T10:00:00Z", notes: []string{"date-held", local}},
	{file: "date-after-midnight-only.csv", start: "2026-01-25T23:59:58Z", notes: []string{"date-held", local}},
	{file: "date-last-newest-first.csv", start: "2026-01-25T23:59:58Z", notes: []string{"date-held", "clock-midnight", "rows-reversed", local}},
	{file: "date-first-row-open.csv", wrong: `column "Date" (05/01/2026) can be read day first or month first: say which with --time-format`},
	{file: "date-first-row-open.csv", o: Options{TimeFormat: "day-first"}, start: "2026-01-05T10:00:00Z", notes: []string{"date-held", local}},
	{file: "date-without-time.csv", t: without(baseT, 3), u: without(baseU, 3), y: without(baseY, 3), start: "2026-01-25T10:00:00Z",
		notes: []string{local}, dropped: map[string]int{"no time": 1}},
	{file: "date-digits.csv", start: "2026-01-25T23:59:58Z", notes: []string{"clock-digits", local}},
	{file: "date-digits-milli.csv", start: "2026-01-25T09:59:58Z", notes: []string{"clock-digits", local}},
	{file: "date-digits-early.csv", t: ramp(8, func(i int) float64 { return float64(i) }), start: "2026-01-25T00:00:58Z", notes: []string{"clock-digits", local}},
	{file: "date-digits-open.csv", wrong: `column "Time" (80005, 80006, 80007) beside a date could be hours, minutes and seconds without colons, or a number of seconds: say --time-col "Time" with --time-format HHmmss or with --time-format seconds`},
	{file: "date-digits-open.csv", o: Options{TimeCol: "Time", TimeFormat: "HHmmss"}, t: ramp(8, func(i int) float64 { return float64(i) })},
	{file: "date-and-dotted-time.csv", start: "2026-01-25T10:10:00Z", notes: []string{local}},
	{file: "hours-beside-elapsed.csv"},
	{file: "date-digits-colons.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "day-and-seconds.csv", notes: []string{"clock-columns"}},
	{file: "day-and-elapsed.csv", notes: []string{"clock-columns"}},
	{file: "date-and-milliseconds-of-day.csv", notes: []string{"clock-columns"}},
	{file: "clock-six-columns.csv", start: "2026-01-25T23:59:58Z", notes: []string{"clock-columns", local}},
	{file: "clock-year-day-hhmm.csv", start: "2026-01-25T23:59:58Z", notes: []string{"clock-columns", local}},
	{file: "clock-hour-minute-second.csv", notes: []string{"clock-columns", "clock-midnight"}},
	{file: "clock-date-hour-minute-second.csv", start: "2026-01-25T23:59:58Z", notes: []string{"clock-columns", local}},
	{file: "milliseconds-beside-time.csv", start: "2026-01-25T10:00:00.1Z", notes: []string{"clock-columns", local}},
	{file: "nanoseconds-beside-epoch.csv", start: "2026-01-25T10:00:00.000000007Z", notes: []string{"clock-columns"}},
	{file: "milliseconds-of-loop.csv", start: "2026-01-25T10:00:00Z", notes: []string{"clock-fraction", "clock-spread", local}},
	{file: "day-number-and-fraction.csv", within: 1e-7, start: "2026-01-25T10:00:00.000000029Z", notes: []string{"clock-columns", local}}, // twelve decimals of a day
	{file: "stamp-brackets.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "stamp-dashes.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "stamp-time-dots.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "stamp-digits-dash.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "stamp-literal.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "stamp-uhr.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "stamp-signs.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "am-pm-signs.csv", start: "2026-01-25T11:59:58Z", notes: []string{local}},
	{file: "day-of-year.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "day-of-year-colons.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "zone-place.csv", start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "zone-offset-place.csv", start: "2026-01-25T10:00:00+01:00"},
	{file: "stamp-unknown.csv", wrong: `column "time" is the time by its name, but its stamps (25:01:2026 @ 10.00.00.0, 25:01:2026 @ 10.00.00.5) are in no form that is known: say how to read them with --time-format`},
	{file: "stamp-unknown.csv", o: Options{TimeFormat: "dd:MM:yyyy '@' HH.mm.ss"}, start: "2026-01-25T10:00:00Z", notes: []string{local}},
	{file: "elapsed-literal.csv"},
	{file: "elapsed-units.csv"},
	{file: "elapsed-days.csv"},
	{file: "elapsed-days-dot.csv"},
	{file: "elapsed-ms.csv"},
	{file: "elapsed-min.csv"},
	{file: "elapsed-offset.csv"},
	{file: "minutes-seconds.csv"},
	{file: "hours.csv"},
	{file: "ambiguous-minutes.csv", wrong: "could be minutes and seconds or hours and minutes: say which with --time-format mm:ss or --time-format HH:mm"},
	{file: "ambiguous-minutes.csv", o: Options{TimeFormat: "HH:mm"}, t: ramp(8, func(i int) float64 { return 60 * float64(i) })},
	{file: "ambiguous-minutes.csv", o: Options{TimeFormat: "mm:ss"}, t: ramp(8, func(i int) float64 { return float64(i) })},
	{file: "time-pattern.csv", o: Options{TimeFormat: "HH'h'mm'm'ss dd.MM.yyyy"}, start: "2026-01-05T10:00:00Z", notes: []string{local}},
	{file: "midnight.csv", notes: []string{"clock-midnight"}},
	{file: "whole-seconds.csv", start: "2026-01-05T10:00:00Z", notes: []string{"clock-spread", local}},
	{file: "whole-seconds-cut.csv", start: "2026-01-05T10:00:00.5Z", notes: []string{"clock-spread", local}},
	{file: "whole-seconds-uneven.csv", t: ramp(40, func(i int) float64 { return 0.7 * float64(i) }), u: unevenU, y: unevenY, within: 1e-9,
		start: "2026-01-25T10:00:00.05Z", notes: []string{"clock-spread", local}},
	{file: "whole-seconds-jitter.csv", t: jitterT, u: unevenU, y: unevenY, within: 1, start: "2026-01-25T10:00:00Z", notes: []string{"clock-coarse", local}},
	{file: "seconds-rounded.csv", t: ramp(40, func(i int) float64 { return math.Floor(1.2*float64(i) + 1e-9) }), u: unevenU, y: unevenY,
		start: "2026-01-25T10:00:00Z", notes: []string{"clock-coarse", local}},
	{file: "hour-back.csv", start: "2026-10-25T02:59:58Z", notes: []string{"clock-jump-back", local}},
	{file: "hour-forward.csv", start: "2026-03-29T01:59:58Z", notes: []string{"clock-jump-forward", local}},
	{file: "rows-repeated.csv", dropped: map[string]int{"repeated row": 3}},
	{file: "newest-first.csv", notes: []string{"rows-reversed"}},
	{file: "clock-back.csv", wrong: "clock-back.csv:10: the clock jumps back by 3.5s"},
	{file: "no-time-cells.csv", t: without(baseT, 2, 5), u: without(baseU, 2, 5), y: without(baseY, 2, 5), dropped: map[string]int{"no time": 1, "no usable time": 1}},

	// part of a recording
	{file: "comma.csv", o: Options{From: "1", To: "2.5"}, t: []float64{0, 0.5, 1, 1.5}, u: baseU[2:6], y: baseY[2:6],
		dropped: map[string]int{"outside --from and --to": 4}, also: func(t *testing.T, r *Run) {
			if r.Source.FromS != 1 || r.Source.ToS != 2.5 || r.Source.Rows != 4 {
				t.Errorf("source %+v, want 1 to 2.5 s", r.Source)
			}
		}},
	{file: "rfc3339-offset.csv", o: Options{From: "10:00:01", To: "2026-01-05T09:00:02Z"}, t: []float64{0, 0.5, 1}, u: baseU[2:5], y: baseY[2:5],
		start: "2026-01-05T10:00:01+01:00", dropped: map[string]int{"outside --from and --to": 5}},
	{file: "comma.csv", o: Options{From: "1m"}, wrong: "no rows between --from"},
	{file: "comma.csv", o: Options{From: "2026-01-05 10:00"}, wrong: "the log has no dates"},

	// values
	{file: "bad-words.csv", t: ramp(16, half), u: ramp(16, func(int) float64 { return 1.5 }),
		y:       []float64{24.1, nan, 24.1, nan, 24.2, nan, 24.6, nan, 25.9, nan, 27.3, nan, 28.6, nan, 29.8, nan},
		missing: map[string]int{"OPEN": 1, "OL": 1, "OVER": 1, "NAN": 1, "#N/A": 1, "----": 1, "BAD": 1, "blank": 1}},
	{file: "bad-words-more.csv", u: ramp(8, func(int) float64 { return 1.5 }), y: []float64{24.1, nan, nan, nan, nan, 24.6, nan, 25.9},
		missing: map[string]int{"N/C": 1, "#####": 1, "+++++": 1, "OVRFLW": 1, "TC OPEN": 1}},
	{file: "sentinels.csv", y: with(baseY, 1, nan, 3, nan, 5, nan, 7, nan),
		missing: map[string]int{"sentinel 9999": 1, "sentinel -9999": 1, "sentinel 32767": 1, "sentinel 1372": 1}},
	{file: "sentinels-input.csv", notes: []string{"input-held"}, missing: map[string]int{"sentinel 9999": 2, "sentinel -9999": 1}},
	{file: "sentinels-32-bit.csv", y: with(baseY, 1, nan, 3, nan, 5, nan, 6, nan),
		missing: map[string]int{"sentinel 2.147483647e+09": 1, "sentinel -127": 1, "sentinel 1.7976931348623157e+308": 1, "sentinel 99999.99": 1}},
	{file: "quality-number.csv", y: with(baseY, 4, nan), missing: map[string]int{"status 24": 1}},
	{file: "real-999.csv", y: []float64{997, 998, 999, 999, 1000, 1001, 1003, 1005}},
	{file: "full-scale.csv", o: Options{TempSpan: &Span{Low: 0, High: 200, Unit: "C"}}, y: with(baseY, 2, nan, 6, nan), missing: map[string]int{"full scale": 2}},
	{file: "spike.csv", t: ramp(40, half), u: spikeU, y: spikeY, also: func(t *testing.T, r *Run) {
		if !slices.Equal(r.Quality.Spikes, []int{10}) {
			t.Errorf("spikes at %v, want row 10", r.Quality.Spikes)
		}
	}},
	{file: "spike.csv", o: Options{RemoveSpikes: true}, t: ramp(40, half), u: spikeU, y: with(spikeY, 10, nan), missing: map[string]int{"spike": 1}},
	{file: "input-blanks.csv", t: baseT[:7], u: with(ramp(7, func(int) float64 { return 1.5 }), 0, 0), y: baseY[1:],
		notes: []string{"input-held", "rows-before-input"}, missing: map[string]int{"blank": 3, "OPEN": 1}, dropped: map[string]int{"before the first input": 1}},
	{file: "status-column.csv", y: with(baseY, 4, nan), missing: map[string]int{"status Bad": 1}},
	{file: "short-row.csv", t: without(baseT, 2), u: without(baseU, 2), y: without(baseY, 2), dropped: map[string]int{"row too short": 1}},
	{file: "long-row.csv", t: without(baseT, 2), u: without(baseU, 2), y: without(baseY, 2), dropped: map[string]int{"row too long": 1}},
	{file: "input-ma.csv", u: []float64{4, 4, 6.4, 6.4, 6.4, 6.4, 6.4, 6.4}, input: "mA"},
	{file: "input-ma.csv", o: Options{InputSpan: &Span{Low: 0, High: 10, Unit: "V"}}, within: 1e-12},
	{file: "input-percent.csv", u: []float64{0, 0, 15, 15, 15, 15, 15, 15}, input: "%"},
	{file: "input-percent.csv", o: Options{InputSpan: &Span{Low: 0, High: 10}}, within: 1e-12},
	{file: "temp-ma.csv", o: Options{TempSpan: &Span{Low: 0, High: 200, Unit: "C"}}, y: with(baseY, 7, nan), within: 1e-9, missing: map[string]int{"current below 3.6 mA": 1}},
	{file: "switching-drive.csv", o: Options{Cycle: time.Second}, t: ramp(32, func(i int) float64 { return float64(i) / 4 }),
		u: ramp(32, func(i int) float64 { return []float64{0, 25, 25, 25, 50, 50, 50, 50}[i/4] }),
		y: ramp(32, func(i int) float64 { return math.Round(240+float64(i)) / 10 }), input: "%", notes: []string{"cycle-mean"}},
	{file: "switched-on-off.csv", u: switchedU, input: "%", notes: []string{"input-switched"}},
	{file: "switched-on-off.csv", o: Options{InputUnit: "V"}, wrong: "instead of --input-unit V say what 0 and 100 % are, such as --input-span 0..230V"},
	{file: "switched-on-off.csv", o: Options{InputCol: "heater", InputUnit: "%"}, u: switchedU, input: "%", notes: []string{"input-switched"}},
	{file: "switched-german.csv", u: switchedU, input: "%", notes: []string{"input-switched"}},
	{file: "switched-french.csv", u: switchedU, input: "%", notes: []string{"input-switched"}},
	{file: "switched-contact.csv", o: Options{InputSpan: &Span{Low: 0, High: 230, Unit: "V"}}, u: with(ramp(8, func(int) float64 { return 230 }), 0, 0, 1, 0), notes: []string{"input-switched"}},
	{file: "switched-true.csv", u: switchedU, input: "%", notes: []string{"input-switched", "input-held"}, missing: map[string]int{"blank": 1}},
	{file: "switched-beside-number.csv"},
	{file: "switched-long.csv", u: switchedU, input: "%", notes: []string{"input-switched", "long-form"}},
	{file: "off-among-numbers.csv", wrong: `off-among-numbers.csv:2: the input is "OFF" among numbers: write 0 where the drive was off`},
	{file: "off-among-numbers-long.csv", wrong: `tag "drive_V" is the input and holds the words OFF among numbers`},
	{file: "high-low.csv", wrong: `because column "heater" holds words; among these tags, 2 columns could be the input: "LOW"`},
	{file: "thermocouple.csv", t: baseT[:5], u: baseU[:5], y: []float64{100, 100, 200, nan, 200}, within: 0.013, // half of the table's last digit, twice, over 0.04 mV/K
		missing: map[string]int{"OPEN": 1}},

	// long form and report by exception
	{file: "long-by-time.csv", notes: []string{"long-form"}},
	{file: "long-by-tag.csv", notes: []string{"long-form"}},
	{file: "long-by-tag.csv", o: Options{Long: true, InputCol: "EH-3 drive (V)", TempCol: "TT-7 outlet"}, notes: []string{"long-form"}},
	{file: "long-exception.csv", t: []float64{0, 0.7, 1, 1.3, 2.1, 2.9, 3.5}, u: []float64{0, 0, 1.5, 1.5, 1.5, 1.5, 1.5},
		y: []float64{24.1, 24.1, nan, 24.3, nan, 26.7, 28}, start: "2026-01-05T10:00:00Z", notes: []string{"long-form"}, missing: map[string]int{"BAD": 1},
		also: func(t *testing.T, r *Run) {
			if want := []bool{false, false, false, false, false, false, true}; !slices.Equal(r.Auto, want) {
				t.Errorf("automatic %v, want %v", r.Auto, want)
			}
		}},
	{file: "long-words-first.csv", input: "unit", temp: "unit", start: "2026-01-25T10:00:00Z", notes: []string{"long-form", "input-unit-unknown", "unit-unknown"},
		also: func(t *testing.T, r *Run) {
			if r.Auto == nil || r.Auto[7] {
				t.Errorf("automatic %v, want manual throughout", r.Auto)
			}
		}},
	{file: "long-historian.csv", y: with(baseY, 4, nan), start: "2026-01-25T10:00:00Z", notes: []string{"long-form", local}, missing: map[string]int{"status Bad": 1}},
	{file: "line-for-each-value.csv", start: "2026-01-25T10:00:00Z", notes: []string{"rows-joined", local}, dropped: map[string]int{"joined to the row before": 8}},
	{file: "pairs-line-for-each-value.txt", start: "2026-01-25T10:00:00Z", notes: []string{"rows-of-pairs", "rows-joined", local},
		dropped: map[string]int{"joined to the row before": 8}},
	{file: "exception-wide.csv", t: []float64{0, 0.7, 1, 1.3, 2.9, 3.5}, u: []float64{0, 0, 1.5, 1.5, 1.5, 1.5},
		y: []float64{24.1, 24.1, nan, 24.3, 26.7, 28}, notes: []string{"input-held"}, missing: map[string]int{"blank": 5}},
}

func half(i int) float64 { return float64(i) / 2 }

var (
	headless  = ramp(24, func(i int) float64 { return []float64{0, 1.5}[min(1, i/3)] })
	headlessY = ramp(24, func(i int) float64 { return math.Round(2400+10*float64(i)+float64(i*i%5)) / 100 })
	wholeY    = []float64{24, 24, 24, 25, 26, 27, 29, 30}
	switchedU = with(ramp(8, func(int) float64 { return 100 }), 0, 0, 1, 0)
	unevenU   = ramp(40, func(i int) float64 { return []float64{0, 1.5}[min(1, i/12)] })
	unevenY   = ramp(40, func(i int) float64 { return float64(2400+10*i+i*i%7) / 100 })
	jitterT   = sums(40, func(i int) float64 { return []float64{0.1, 0.9, 0.3, 0.1, 0.1, 0.6, 0.1}[i*i%7] })
	spikeU    = ramp(40, func(i int) float64 { return []float64{0, 1.5}[i/20] })
	spikeY    = with(ramp(40, func(i int) float64 { return float64(240+i%3) / 10 }), 10, 79.1)
)

// sums are the running sums of steps, from 0.
func sums(n int, step func(i int) float64) []float64 {
	out := make([]float64, n)
	for i := 1; i < n; i++ {
		out[i] = out[i-1] + step(i-1)
	}
	return out
}

func fahrenheit(v []float64) []float64 {
	return ramp(len(v), func(i int) float64 { return (v[i] - 32) / 1.8 })
}

func setpoint60(t *testing.T, r *Run) {
	same(t, "setpoint", r.Setpoint, ramp(8, func(int) float64 { return 60 }), 0)
}

func TestQuirks(t *testing.T) {
	for _, q := range slices.Concat(quirks, numberQuirks, clockQuirks, tableQuirks) {
		t.Run(q.file, func(t *testing.T) {
			runs, err := Read(context.Background(), filepath.Join("..", "testdata", "logs", "quirks", q.file), q.o)
			if q.wrong != "" {
				if err == nil || !strings.Contains(err.Error(), q.wrong) {
					t.Fatalf("error %v, want one with %q", err, q.wrong)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			if len(runs) != 1 {
				t.Fatalf("%d runs, want 1", len(runs))
			}
			q.check(t, runs[0])
		})
	}
}

func (q *quirk) check(t *testing.T, r *Run) {
	same(t, "T", r.T, or(q.t, baseT), q.within)
	same(t, "U", r.U, or(q.u, baseU), q.within)
	same(t, "Y", r.Y, or(q.y, baseY), q.within)
	if q.input == "" {
		q.input = "V"
	}
	if q.temp == "" {
		q.temp = "degC"
	}
	if r.Units.Input != q.input || r.Units.Temperature != q.temp {
		t.Errorf("units %+v, want %s and %s", r.Units, q.input, q.temp)
	}
	start := ""
	if !r.Start.IsZero() {
		start = r.Start.Format(time.RFC3339Nano)
	}
	if start != q.start {
		t.Errorf("start %q, want %q", start, q.start)
	}
	var codes []string
	for _, n := range r.Quality.Notes {
		if !slices.Contains(codes, n.Code) {
			codes = append(codes, n.Code)
		}
	}
	if !slices.Equal(codes, q.notes) {
		t.Errorf("notes %v, want %v", r.Quality.Notes, q.notes)
	}
	sameCounts(t, "missing", r.Quality.Missing, q.missing)
	sameCounts(t, "dropped", r.Quality.Dropped, q.dropped)
	if q.also != nil {
		q.also(t, r)
	}
}

func or(v, base []float64) []float64 {
	if v == nil {
		return base
	}
	return v
}

func same(t *testing.T, what string, got, want []float64, within float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Errorf("%s has %d values, want %d: %v", what, len(got), len(want), got)
		return
	}
	for i := range got {
		if math.IsNaN(got[i]) && math.IsNaN(want[i]) || math.Abs(got[i]-want[i]) <= within {
			continue
		}
		t.Errorf("%s[%d] = %v, want %v", what, i, got[i], want[i])
		return
	}
}

func sameCounts(t *testing.T, what string, got, want map[string]int) {
	t.Helper()
	bad := len(got) != len(want)
	for k, n := range want {
		bad = bad || got[k] != n
	}
	if bad {
		t.Errorf("%s %v, want %v", what, got, want)
	}
}

// A file of several runs gives them in file order, each with its own clock.
func TestSeveralRuns(t *testing.T) {
	runs, err := Read(context.Background(), filepath.Join("..", "testdata", "logs", "quirks", "several-runs.csv"), Options{RunCol: "run"})
	if err != nil {
		t.Fatal(err)
	}
	if len(runs) != 2 {
		t.Fatalf("%d runs, want 2", len(runs))
	}
	for k, r := range runs {
		same(t, "T", r.T, baseT, 0)
		same(t, "U", r.U, baseU, 0)
		same(t, "Y", r.Y, ramp(8, func(i int) float64 { return float64(math.Round(10*baseY[i]+10*float64(k))) / 10 }), 1e-12)
		if want := []string{"A", "B"}[k]; r.Source.Name != want {
			t.Errorf("run %d is called %q, want %q", k, r.Source.Name, want)
		}
	}
}
