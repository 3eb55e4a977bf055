package data

import (
	"bytes"
	"time"
)

// fromDayOfYear rewrites an ordinal date of ISO 8601, 2026-335 or 2026335T, or
// 2026:335, 2026/335, 2026 335 as some loggers write it, with what follows.
func fromDayOfYear(b []byte) ([]byte, bool) {
	n := 5 // where the day begins
	if len(b) > 7 && b[7] == 'T' && b[4]-'0' <= 9 {
		n = 4
	} else if len(b) < 8 || bytes.IndexByte([]byte("-:/ "), b[4]) < 0 || len(b) > 8 && bytes.IndexByte([]byte("T :"), b[8]) < 0 {
		return nil, false
	}
	year, _, w := dateField(b[:4])
	day, _, v := dateField(b[n : n+3])
	if w != 4 || v != 3 || day < 1 || day > 366 {
		return nil, false
	}
	at := time.Date(year, 1, day, 0, 0, 0, 0, time.UTC)
	if at.Year() != year {
		return nil, false
	}
	return withTime(at, b[n+3:]), true
}

// fromWeek rewrites a week date of ISO 8601, 2026-W11-6 or 2026W116, with what
// follows. Week 1 is the one that holds 4 January, and days count from Monday.
func fromWeek(b []byte) ([]byte, bool) {
	i := bytes.IndexByte(b[:min(6, len(b))], 'W')
	if i < 4 || i == 5 && b[4] != '-' || len(b) < i+4 {
		return nil, false
	}
	dashed := i == 5
	if dashed && (len(b) < i+5 || b[i+3] != '-') {
		return nil, false
	}
	at := i + 3
	if dashed {
		at++
	}
	year, _, w := dateField(b[:4])
	week, _, v := dateField(b[i+1 : i+3])
	day := int(b[at] - '0')
	if w != 4 || v != 2 || b[at] < '1' || b[at] > '7' {
		return nil, false
	}
	fourth := time.Date(year, 1, 4, 0, 0, 0, 0, time.UTC)
	monday := fourth.AddDate(0, 0, -int(fourth.Weekday()+6)%7)
	date := monday.AddDate(0, 0, 7*(week-1)+day-1)
	if y, n := date.ISOWeek(); y != year || n != week {
		return nil, false
	}
	rest := b[at+1:]
	if len(rest) > 0 && rest[0] != 'T' && rest[0] != ' ' {
		return nil, false
	}
	return withTime(date, rest), true
}

// withTime writes a date and what stood behind it, set apart by one character.
func withTime(date time.Time, rest []byte) []byte {
	out := date.AppendFormat(nil, time.DateOnly)
	if len(rest) > 1 {
		out = append(append(out, ' '), rest[1:]...)
	}
	return out
}
