package data

// noonStart is where logs begin that pass noon.
const (
	janStart  = "2026-01-25T10:00:00Z"
	noonStart = "2026-01-25T11:59:58Z"
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
}
