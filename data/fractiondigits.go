package data

import (
	"bytes"
	"fmt"
)

// Some programs print the milliseconds of a stamp as a whole number, without
// the zeros in front: 10:22:31.50 is then 31.050 s. Fractions of changing width
// of which some end with a zero are such numbers: a decimal fraction is printed
// with a fixed width, or without zeros at its end.

// fractionAt is the place of the digits of a fraction behind hh:mm:ss; n is 0
// where there is none.
func fractionAt(b []byte) (at, n int) {
	for i := len(b) - 1; i >= 5; i-- {
		c := b[i]
		if c-'0' <= 9 {
			continue
		}
		if (c == '.' || c == ',' || c == ':') && isPairOf(b, i-2) && b[i-3] == ':' && (c != ':' || bytes.Count(b[:i], []byte{':'}) > 1) {
			return i + 1, digitsAhead(b[i+1:])
		}
	}
	return 0, 0
}

// findUnpadded tells that the stamps hold such milliseconds.
func findUnpadded(cells [][]byte, label string) (found bool, err error) {
	widths := map[int]bool{}
	zeroAhead, zeroBehind, colon, widest := false, false, false, 0
	for _, b := range cells {
		at, n := fractionAt(b)
		if n == 0 {
			continue
		}
		colon = colon || b[at-1] == ':'
		widths[n] = true
		widest = max(widest, n)
		zeroAhead = zeroAhead || n > 1 && b[at] == '0'
		zeroBehind = zeroBehind || n > 1 && b[at+n-1] == '0'
	}
	switch {
	case colon && len(widths) == 1 && widest < 3:
		return false, fmt.Errorf("column %q (%s): the digits behind the last colon could be a decimal fraction of a second, milliseconds, or seconds behind days: export the fraction behind a point, or days apart", label, cells[0])
	case widest > 3 || zeroAhead || len(widths) < 2:
		return false, nil
	}
	return colon || zeroBehind, nil
}

// padFraction is the rewrite that puts the zeros in front.
func padFraction() func(b []byte) []byte {
	var room []byte
	return func(b []byte) []byte {
		at, n := fractionAt(b)
		if n == 0 || n > 2 {
			return b
		}
		room = append(room[:0], b[:at]...)
		room[at-1] = '.'
		room = append(room, "00"[:3-n]...)
		room = append(room, b[at:]...)
		return room
	}
}
