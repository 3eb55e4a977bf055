package data

import "bytes"

// Databases and spreadsheets have one type for dates and times. A date in a
// column of its own then shows midnight, and a time of day the day that the
// program counts from: 2026-03-14 00:00:00 beside 1899-12-30 10:22:31.

// zeroDays are such days, as they are written (from memory).
var zeroDays = [][]byte{[]byte("1899-12-30"), []byte("1899-12-31"), []byte("1900-01-00"), []byte("1900-01-01"), []byte("1970-01-01"), []byte("0001-01-01"),
	[]byte("30.12.1899"), []byte("30/12/1899"), []byte("12/30/1899"), []byte("01.01.1900"), []byte("01/01/1900"), []byte("1/1/1900"), []byte("1/0/1900")}

// onZeroDay takes a zero day off a stamp.
func onZeroDay(b []byte) (tod []byte, ok bool) {
	for _, day := range zeroDays {
		if rest, found := bytes.CutPrefix(b, day); found && len(rest) > 1 && isStampGap(rest[0]) {
			_, ok := plainTimeOfDay(rest[1:])
			return rest[1:], ok
		}
	}
	return nil, false
}

// atMidnight takes a midnight off a stamp.
func atMidnight(b []byte) (date []byte, ok bool) {
	i := bytes.IndexAny(b, "T ")
	if i < 6 || len(b) < i+5 || len(bytes.Trim(b[i+1:], "0:.,")) > 0 {
		return nil, false
	}
	return b[:i], true
}

// markZeroDates makes a date and a time of day of two such columns.
func markZeroDates(d *dialect) {
	date, tod := -1, -1
	for i, c := range d.cols {
		if c.class != stamps && c.class != texts {
			continue
		}
		cells := d.cellsOf(i)
		switch {
		case areAll(cells, onZeroDay):
			tod = i
		case areAll(cells, atMidnight):
			date = i
		}
	}
	if date < 0 || tod < 0 {
		return
	}
	d.cols[date].class, d.cols[date].dated, d.cols[date].timed = stamps, true, false
	d.cols[tod].class, d.cols[tod].dated, d.cols[tod].timed = stamps, false, true
}

func areAll(cells [][]byte, is func([]byte) ([]byte, bool)) bool {
	for _, b := range cells {
		if _, ok := is(b); !ok {
			return false
		}
	}
	return len(cells) > 0
}

// joinedZeroDates is the rewrite of two such cells with a blank between them;
// nil where the stamps are none.
func joinedZeroDates(cells [][]byte) func(b []byte) []byte {
	var room []byte
	join := func(b []byte) []byte {
		for i := 1; i < len(b); i++ {
			if b[i-1] != ' ' {
				continue
			}
			tod, ok := onZeroDay(b[i:])
			if !ok {
				continue
			}
			date, ok := atMidnight(b[:i-1])
			if !ok {
				return nil
			}
			room = append(append(append(room[:0], date...), ' '), tod...)
			return room
		}
		return nil
	}
	for _, b := range cells {
		if join(b) == nil {
			return nil
		}
	}
	return join
}
