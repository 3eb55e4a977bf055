package data

import (
	"bytes"
	"slices"
	"strings"
)

// parseElapsed reads elapsed time that has days in front of hours, minutes and
// seconds (0 days 00:00:01.5, 1.02:03:04, 1d 02:03:04), or units behind the
// numbers (1h2m3.5s, PT1.5S of ISO 8601, and T#1s500ms as IEC 61131-3 writes it,
// from memory).
func parseElapsed(b []byte) (ns int64, ok bool) {
	if len(b) < 4 {
		return 0, false
	}
	if rest := withoutTimePrefix(b); len(rest) < len(b) {
		return parseUnits(rest, 1)
	}
	if b[0] == 'P' { // a duration of ISO 8601: P1DT2H3M4.5S
		date, tod, timed := bytes.Cut(b[1:], []byte{'T'})
		if timed && !bytes.ContainsAny(date, "MYW") { // months, not minutes
			return parseUnits(slices.Concat(date, tod), 1)
		}
		return 0, false
	}
	if days, rest := leadingDays(b); rest != nil {
		tod, n, fields := scanTime(rest, true)
		return days*int64(nsDay) + tod, fields == 3 && n == len(rest) && tod < int64(nsDay)
	}
	if tod := withoutLiteral(b); len(tod) < len(b) {
		ns, n, fields := scanTime(tod, true)
		return ns, fields == 3 && n == len(tod)
	}
	return parseUnits(b, 2)
}

// withoutTimePrefix takes T#, TIME# or LTIME# off.
func withoutTimePrefix(b []byte) []byte {
	i := bytes.IndexByte(b, '#')
	if i < 1 || i > 5 {
		return b
	}
	switch strings.ToUpper(string(b[:i])) {
	case "T", "TIME", "LT", "LTIME":
		return b[i+1:]
	}
	return b
}

// leadingDays reads a number of days in front of a time; rest is nil when b
// begins with none.
func leadingDays(b []byte) (days int64, rest []byte) {
	n := 0
	for n < len(b) && n < 5 && b[n]-'0' <= 9 {
		days = 10*days + int64(b[n]-'0')
		n++
	}
	if n == 0 || n == len(b) {
		return 0, nil
	}
	for _, mark := range []string{" days, ", " day, ", " days ", " day ", "days ", "d ", "d, ", "d", " d ", ".", " "} {
		if rest, ok := bytes.CutPrefix(b[n:], []byte(mark)); ok && len(rest) > 0 && rest[0]-'0' <= 9 {
			return days, rest
		}
	}
	return 0, nil
}

// parseUnits reads numbers with units of time behind them, larger units first,
// at least so many of them.
func parseUnits(b []byte, least int) (ns int64, ok bool) {
	last, found := 2*nsDay, 0
	for len(b) > 0 {
		d, n, ok := scanDecimal(b, '.')
		if !ok || d.neg {
			return 0, false
		}
		b = bytes.TrimLeft(b[n:], " ")
		n = 0
		for n < len(b) && isLetter(b[n]) {
			n++
		}
		unit, known := unitsBehind[strings.ToLower(string(b[:n]))]
		part, ok := d.scaled(unit)
		if !known || !ok || unit >= last || part > 1<<60 {
			return 0, false
		}
		ns, last = ns+part, unit
		found++
		b = bytes.TrimLeft(b[n:], " _")
	}
	return ns, found >= least
}

var unitsBehind = map[string]uint64{"d": nsDay, "h": nsHour, "m": nsMinute, "min": nsMinute, "s": nsSecond, "sec": nsSecond, "ms": 1e6, "us": 1e3, "ns": 1}
