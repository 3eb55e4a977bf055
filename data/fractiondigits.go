package data

import (
	"bytes"
	"fmt"
	"math"
)

// Some programs print the milliseconds of a stamp as a whole number, without
// the zeros in front: 10:22:31.50 is then 31.050 s. Which it is shows in how
// evenly the rows go on; else in fractions of changing width of which some end
// with a zero: a decimal fraction is printed with a fixed width, or without
// zeros at its end.

// fractionAt is the place of the digits of a fraction behind hh:mm:ss; n is 0
// where there is none. Behind a colon they are one only behind three fields.
func fractionAt(b []byte) (at, n int) {
	for i := len(b) - 1; i >= 3; i-- {
		switch c := b[i]; {
		case c == '.' || c == ',':
			if fieldsAhead(b[:i]) > 1 {
				return i + 1, digitsAhead(b[i+1:])
			}
		case c == ':':
			if n = digitsAhead(b[i+1:]); n > 0 && fieldsAhead(b[:i]) == 3 {
				return i + 1, n
			}
		}
	}
	return 0, 0
}

// fieldsAhead counts the fields of a time of day, with colons between them, that
// b ends with.
func fieldsAhead(b []byte) (n int) {
	for i := len(b); ; i-- {
		k := i
		for k > 0 && b[k-1]-'0' <= 9 {
			k--
		}
		if k == i || i-k > 2 && (n < 2 || i-k > 6) {
			return n
		}
		if n == 2 && k > 0 && bytes.IndexByte([]byte("/.-"), b[k-1]) >= 0 { // the year, in 25/Jan/2026:10:00:00
			return n
		}
		if n++; k == 0 || b[k-1] != ':' {
			return n
		}
		i = k
	}
}

// fractionDigits is what the fractions of a column of stamps look like.
type fractionDigits struct {
	widths      [4]int // how many stamps have so many digits; more than three count as none
	wide        bool   // some have more than three
	zeroAhead   bool   // .05
	zeroBehind  bool   // .50, .500
	colon       []byte // a stamp with the digits behind a colon
	seen, cells int
}

func fractionsOf(cells [][]byte) (f fractionDigits) {
	for _, b := range cells {
		f.cells++
		at, n := fractionAt(b)
		if n == 0 {
			continue
		}
		f.seen++
		if n > 3 {
			f.wide = true
			continue
		}
		f.widths[n]++
		if b[at-1] == ':' && (f.colon == nil || n > 2) {
			f.colon = b
		}
		f.zeroAhead = f.zeroAhead || n > 1 && b[at] == '0'
		f.zeroBehind = f.zeroBehind || n > 1 && b[at+n-1] == '0'
	}
	return f
}

// only is the number of digits that all stamps have; 0 where they differ.
func (f fractionDigits) only() int {
	for n, count := range f.widths {
		if n > 0 && count == f.cells {
			return n
		}
	}
	return 0
}

func (f fractionDigits) varied() bool {
	return f.widths[1] > 0 && f.widths[2]+f.widths[3] > 0 || f.widths[2] > 0 && f.widths[3] > 0
}

// findPadding settles whether the digits behind the seconds are decimals or a
// number of milliseconds.
func (k *clock) findPadding(cells [][]byte, c column) ([]Note, error) {
	f := fractionsOf(cells)
	switch {
	case f.colon != nil && f.widths[3] == 0:
		return nil, fmt.Errorf("column %q (%s): the digits behind the last colon could be a decimal fraction of a second, milliseconds, frames, or seconds behind days: export the fraction behind a point, or days apart", c.label, f.colon)
	case f.wide || !f.varied():
		if n := f.only(); n > 0 && !f.wide && f.colon == nil {
			k.fraction = &fixedFraction{length: len(trimBlanks(cells[0])), digits: n, whole: n == 3 && f.zeroBehind, label: c.label}
		}
		return nil, nil
	case f.zeroAhead && f.colon == nil:
		return nil, nil
	}
	decimals, numbers := k.secondsAs(cells, nil), k.secondsAs(cells, padFraction())
	roughly, otherwise := unevenness(stepsOf(decimals)), unevenness(stepsOf(numbers))
	switch {
	case f.colon != nil || 2*otherwise < roughly && (f.widths[3] > 0 || evenOnlyAs(numbers, decimals)):
	case 2*roughly < otherwise:
		return nil, nil
	case f.zeroBehind && f.widths[3] == 0:
		return nil, fmt.Errorf("column %q (%s): the digits behind the seconds could be decimals or a number of milliseconds: export them with a fixed number of digits", c.label, cells[0])
	case !f.zeroBehind:
		return nil, nil
	}
	k.rewrite = padFraction()
	return []Note{noteMilliseconds(c.label)}, nil
}

func noteMilliseconds(label string) Note {
	return Note{Code: "clock-milliseconds", Text: fmt.Sprintf("what stands behind the seconds in column %q was read as a number of milliseconds, without the zeros in front", label)}
}

// secondsAs are the times of a column in seconds from the first, if its stamps
// are rewritten so.
func (k *clock) secondsAs(cells [][]byte, rewrite func(b []byte) []byte) []float64 {
	probe := clock{kind: k.kind, order: k.order, rewrite: rewrite}
	var t []float64
	var first int64
	for _, b := range cells {
		ns, _, ok := probe.parse(b, '.')
		if !ok {
			continue
		}
		if t == nil {
			first = ns
		}
		t = append(t, float64(ns-first)/1e9)
	}
	return t
}

// stepsOf are the steps between times in seconds, ns, without those past
// midnight.
func stepsOf(t []float64) (steps []float64) {
	for i := 1; i < len(t); i++ {
		if d := math.Round((t[i] - t[i-1]) * 1e9); d != 0 && math.Abs(d) < float64(halfDayLong) {
			steps = append(steps, d)
		}
	}
	return steps
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

// fixedFraction watches stamps that have the same number of digits behind their
// seconds throughout the sample. Milliseconds without the zeros in front may
// show only behind it.
type fixedFraction struct {
	length int    // of the stamp looked at last
	digits int    // behind the seconds
	whole  bool   // three digits with zeros at their end: no decimals cut short
	label  string // of the column
	met    bool   // milliseconds that lack zeros were met, and read so
	other  []byte // a stamp that could be read in two ways
}

// look tells whether a stamp of another length lacks zeros in front of its
// milliseconds.
func (f *fixedFraction) look(b []byte) (lacks bool) {
	f.length = len(b)
	at, n := fractionAt(b)
	switch {
	case n == f.digits || n == 0 || n > 3 || f.other != nil:
	case f.digits == 3 && (f.whole || n == 2 && b[at+1] == '0'):
		f.met = true
		return true
	default:
		f.other = bytes.Clone(b)
	}
	return false
}

// say notes what was met, or refuses what nobody can tell.
func (f *fixedFraction) say(info *reading) error {
	switch {
	case f == nil:
	case f.other != nil:
		return fmt.Errorf("column %q has stamps of %d digits behind the seconds, then others (%s): these could be decimals or a number of milliseconds: export them with a fixed number of digits", f.label, f.digits, f.other)
	case f.met:
		addNote(&info.notes, noteMilliseconds(f.label))
	}
	return nil
}
