package data

import (
	"bytes"
	"time"
)

// parseTimeOfDay reads h:mm:ss.s, or with two fields mm:ss.s, or h:mm when
// hourMinute is set. Hours may exceed 24: such clocks show elapsed time.
func parseTimeOfDay(b []byte, hourMinute bool) (ns int64, ok bool) {
	ns, n, fields := scanTime(b, hourMinute)
	if fields == 0 {
		return parseElapsed(b)
	}
	ns, rest, ok := halfOrLetter(ns, b[n:])
	if fields == 3 && ok {
		rest = withoutHourWord(rest)
	}
	return ns, ok && len(rest) == 0
}

// withoutHourWord takes off a word that only says that hours stand in front.
func withoutHourWord(rest []byte) []byte {
	switch string(skipSpaces(rest)) {
	case "h", "hrs", "hr", "Uhr":
		return nil
	}
	return rest
}

// scanTime reads two or three fields of digits with colons between them and
// a fraction of the last. With two fields the first are minutes, or hours
// when hourMinute is set. fields is 0 when b begins with no such time.
func scanTime(b []byte, hourMinute bool) (ns int64, n, fields int) {
	var f [3]uint64
	i := 0
	if h, m, s, ok := eightOfTime(b); ok {
		f, fields, i = [3]uint64{h, m, s}, 3, 8
	}
	for fields < 3 {
		first := i
		for i < len(b) && i-first < 6 && b[i]-'0' <= 9 {
			f[fields] = f[fields]*10 + uint64(b[i]-'0')
			i++
		}
		if i == first || fields > 0 && (i-first > 2 || f[fields] > 60) {
			return 0, 0, 0
		}
		fields++
		if fields == 3 || i == len(b) || b[i] != ':' {
			break
		}
		i++
	}
	switch {
	case fields < 2:
		return 0, 0, 0
	case fields == 2 && !hourMinute:
		f[0], f[1], f[2] = 0, f[0], f[1]
	}
	ns = int64(f[0]*nsHour + f[1]*nsMinute + f[2]*nsSecond)
	if i < len(b) && (b[i] == '.' || b[i] == ',' || b[i] == ':') {
		frac, w := fraction(b[i+1:])
		if b[i] == ':' && w <= 3 { // hh:mm:ss:mmm: milliseconds after a colon
			frac /= int64(pow10u[3-w])
		}
		if w > 0 && (b[i] != ':' || fields == 3 && w <= 3) {
			ns += frac
			i += 1 + w
		}
	}
	return ns, i, fields
}

// eightOfTime reads hh:mm:ss, the form of most logs.
func eightOfTime(b []byte) (h, m, s uint64, ok bool) {
	if len(b) < 8 || b[2] != ':' || b[5] != ':' || len(b) > 8 && b[8]-'0' <= 9 {
		return 0, 0, 0, false
	}
	for _, i := range [...]int{0, 1, 3, 4, 6, 7} {
		if b[i]-'0' > 9 {
			return 0, 0, 0, false
		}
	}
	two := func(i int) uint64 { return 10*uint64(b[i]-'0') + uint64(b[i+1]-'0') }
	h, m, s = two(0), two(3), two(6)
	return h, m, s, m <= 60 && s <= 60
}

// digitsOfTime reads hhmmss and a fraction of the second, or hhmmssmmm.
func digitsOfTime(b []byte) (ns int64, n int) {
	if len(b) < 6 {
		return 0, 0
	}
	var f [3]int64
	for i, c := range b[:6] {
		if c-'0' > 9 {
			return 0, 0
		}
		f[i/2] = 10*f[i/2] + int64(c-'0')
	}
	n = 6
	if f[0] > 23 || f[1] > 59 || f[2] > 60 {
		return 0, 0
	}
	ns = (f[0]*3600 + f[1]*60 + f[2]) * int64(time.Second)
	switch {
	case len(b) > 7 && (b[6] == '.' || b[6] == ',' || b[6] == '_'):
		frac, w := fraction(b[7:])
		ns, n = ns+frac, 7+w
	case len(b) == 9 && areDigits(b):
		frac, w := fraction(b[6:])
		ns, n = ns+frac, 6+w
	}
	return ns, n
}

// fraction reads the digits of a decimal fraction of a second. Digits beyond
// the ninth are cut off.
func fraction(b []byte) (ns int64, n int) {
	for n < len(b) && n < 9 && b[n]-'0' <= 9 {
		ns = 10*ns + int64(b[n]-'0')
		n++
	}
	ns *= int64(pow10u[9-n])
	for n < len(b) && b[n]-'0' <= 9 {
		n++
	}
	return ns, n
}

// halfDay applies AM or PM, with or without dots and blanks.
func halfDay(ns int64, rest []byte) (int64, []byte, bool) {
	if len(rest) == 0 {
		return ns, rest, true
	}
	r := skipSpaces(rest)
	n := 1
	if len(r) > 1 && r[1] == '.' {
		n = len(r) - len(skipSpaces(r[2:]))
	}
	if len(r) <= n || r[n]|0x20 != 'm' || r[0]|0x20 != 'a' && r[0]|0x20 != 'p' {
		return ns, rest, true
	}
	pm := r[0]|0x20 == 'p'
	r = bytes.TrimPrefix(r[n+1:], []byte("."))
	hour := ns / int64(nsHour)
	if hour < 1 || hour > 12 {
		return 0, nil, false
	}
	if hour == 12 {
		ns -= 12 * int64(nsHour)
	}
	if pm {
		ns += 12 * int64(nsHour)
	}
	return ns, r, true
}

// halfOrLetter is halfDay that knows a and p as well, which by themselves, in a
// column of their own, could mean anything.
func halfOrLetter(ns int64, rest []byte) (int64, []byte, bool) {
	if r := skipSpaces(rest); len(r) == 1 && (r[0]|0x20 == 'a' || r[0]|0x20 == 'p') {
		return halfDay(ns, []byte{r[0], 'm'})
	}
	return halfDay(ns, rest)
}

// parseTimeAndZone reads the time of day after a date, and the zone if there
// is one, as the time east of Greenwich.
func (c *clock) parseTimeAndZone(b []byte) (tod, east int64, ok bool) {
	tod, n, fields := scanTime(b, true)
	if fields == 0 {
		if tod, n = digitsOfTime(b); n == 0 {
			return 0, 0, false
		}
	}
	tod, rest, ok := halfDay(tod, b[n:])
	if !ok || tod >= int64(nsDay+nsSecond) {
		return 0, 0, false
	}
	rest = skipSpaces(rest)
	if len(rest) == 1 && rest[0] != 'Z' {
		if tod, rest, ok = halfOrLetter(tod, rest); !ok {
			return 0, 0, false
		}
	}
	if len(rest) > shortestPlace {
		rest = withoutPlace(rest)
	}
	if len(rest) == 0 || isZoneName(rest) {
		return tod, 0, true
	}
	east, ok = zoneOffset(rest)
	if ok && c.zone == nil {
		c.zone = time.UTC
		if east != 0 {
			c.zone = time.FixedZone("", int(east/int64(nsSecond)))
		}
	}
	return tod, east, ok
}

func skipSpaces(b []byte) []byte {
	for len(b) > 0 {
		switch {
		case b[0] == ' ' || b[0] == 0xA0: // alone, a no-break space of Windows-1252
			b = b[1:]
		case bytes.HasPrefix(b, []byte("\u00a0")):
			b = b[len("\u00a0"):]
		case bytes.HasPrefix(b, []byte("\u202f")):
			b = b[len("\u202f"):]
		default:
			return b
		}
	}
	return b
}

// isZoneName tells the letters of a zone such as CET. They mean different
// zones in different countries, so the clock stays a local one.
func isZoneName(b []byte) bool {
	if len(b) < 3 || len(b) > 5 || bytes.Equal(b, []byte("UTC")) || bytes.Equal(b, []byte("GMT")) {
		return false
	}
	for _, c := range b {
		if c < 'A' || c > 'Z' {
			return false
		}
	}
	return true
}

const shortestPlace = len("Asia/Ho")

// withoutPlace takes away the name of a place, alone or in brackets behind the
// offset that says it all.
func withoutPlace(zone []byte) []byte {
	if isPlace(zone) {
		return nil
	}
	if i := bytes.IndexByte(zone, '['); i >= 0 && zone[len(zone)-1] == ']' && isPlace(zone[i+1:len(zone)-1]) {
		return zone[:i]
	}
	return zone
}

// isPlace tells the name of a zone such as Europe/Paris, whose offset from
// Greenwich is not looked up: the clock stays a local one.
func isPlace(b []byte) bool {
	slash := bytes.IndexByte(b, '/')
	if slash < 3 || slash == len(b)-1 || len(b) > 40 {
		return false
	}
	for _, c := range b {
		if !isLetter(c) && c != '/' && c != '_' && c != '-' {
			return false
		}
	}
	return true
}

// zoneOffset reads Z, UTC, GMT, ±hh, ±hhmm or ±hh:mm.
func zoneOffset(b []byte) (east int64, ok bool) {
	if len(b) == 1 && b[0] == 'Z' {
		return 0, true
	}
	if len(b) > 3 && (b[0]|0x20 == 'u' || b[0]|0x20 == 'g') {
		if !bytes.EqualFold(b[:3], []byte("UTC")) && !bytes.EqualFold(b[:3], []byte("GMT")) {
			return 0, false
		}
		b = b[3:]
	}
	if len(b) == 1 && b[0]|0x20 == 'z' || bytes.EqualFold(b, []byte("UTC")) || bytes.EqualFold(b, []byte("GMT")) {
		return 0, true
	}
	if len(b) < 2 || b[0] != '+' && b[0] != '-' {
		return 0, false
	}
	digits := bytes.Replace(b[1:], []byte(":"), nil, 1)
	var v int64
	for _, d := range digits {
		if d-'0' > 9 {
			return 0, false
		}
		v = v*10 + int64(d-'0')
	}
	switch len(digits) {
	case 1, 2:
		v *= 100
	case 4:
	default:
		return 0, false
	}
	if v%100 > 59 || v > 1500 {
		return 0, false
	}
	east = (v/100*60 + v%100) * int64(nsMinute)
	if b[0] == '-' {
		east = -east
	}
	return east, true
}
