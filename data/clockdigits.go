package data

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strings"
)

// Some exports write date and time of day as plain numbers in two columns:
// 20261201 and 202005, 202005.250 or 202005250, without the zeros in front.

// clockDigits is how many digits a whole time of day without colons has: 6 of
// hhmmss, 9 of hhmmssmmm, 0 for a column that holds none.
type clockDigits int

// dotted is the width of a time of day with points in place of colons,
// 20.20.05: alone it could be a date.
const dotted clockDigits = -1

// areDotted tells that all cells are such times of day.
func (d *dialect) areDotted(i int) bool {
	n := 0
	for _, l := range d.rows {
		if len(l.cells) < d.fields || len(l.cells[i]) == 0 {
			continue
		}
		c := l.cells[i]
		if n++; len(c) < 8 || c[2] != '.' || c[5] != '.' || len(c) > 8 && c[8] != ',' && c[8] != '.' || !isClock(c) {
			return false
		}
	}
	return n > 0
}

// isClock tells that the digits of a dotted time of day are in range.
func isClock(c []byte) bool {
	tod, ok := parseTimeOfDay(appendClock(nil, c, dotted), false)
	return ok && isPairOf(c, 0) && isPairOf(c, 3) && isPairOf(c, 6) && tod < int64(nsDay) && c[3] < '6' && c[6] < '6'
}

// markDigits makes stamps of the columns of numbers that are such a date, or
// such a time of day beside a date. What could be seconds as well is an error.
func markDigits(d *dialect, o *Options) (width clockDigits, notes []Note, err error) {
	if _, ordered := orderOf(o.TimeFormat); o.TimeFormat != "" && !ordered {
		return 0, nil, nil
	}
	dated, timed := false, false
	for i := range d.cols {
		c := &d.cols[i]
		if c.class == numbers && namesTime(*c) && d.areDateDigits(i) {
			c.class, c.dated = stamps, true
		}
		dated = dated || c.class == stamps && c.dated && !c.timed
		timed = timed || c.class == stamps && c.timed
	}
	if !dated || timed {
		return 0, nil, nil
	}
	for i := range d.cols {
		if c := &d.cols[i]; namesTime(*c) && d.areDotted(i) {
			c.class, c.dated, c.timed = stamps, false, true
			return dotted, nil, nil
		}
	}
	for i := range d.cols {
		c := &d.cols[i]
		if c.class != numbers || !namesTime(*c) || c.unit != "" || o.TimeCol != "" && !strings.EqualFold(o.TimeCol, c.label) {
			continue
		}
		w, sure := d.findClockDigits(i)
		switch {
		case w == 0 && d.couldBeMilliseconds(i):
			return 0, nil, fmt.Errorf("column %q (%s) beside a date could be a number of milliseconds or of seconds: say --time-col %q with --time-format ms or with --time-format seconds",
				c.label, strings.Join(c.sample[:min(3, len(c.sample))], ", "), c.label)
		case w == 0:
			continue
		case !sure:
			return 0, nil, fmt.Errorf("column %q (%s) beside a date could be hours, minutes and seconds without colons, or a number of seconds: say --time-col %q with --time-format HHmmss or with --time-format seconds",
				c.label, strings.Join(c.sample[:min(3, len(c.sample))], ", "), c.label)
		}
		c.class, c.timed = stamps, true
		return w, []Note{{Code: "clock-digits", Text: fmt.Sprintf("column %q was read as hours, minutes and seconds without colons; --time-col with --time-format seconds says otherwise", c.label)}}, nil
	}
	return 0, nil, nil
}

// couldBeMilliseconds tells whole numbers in the steps of a logger that counts
// milliseconds: by 50 or a multiple of it that is no whole number of minutes.
func (d *dialect) couldBeMilliseconds(i int) bool {
	if !d.holds(i, 0, math.MaxInt32, true) {
		return false
	}
	var v []float64
	for _, l := range d.rows {
		if len(l.cells) < d.fields {
			continue
		}
		if x, ok := d.format.parse(l.cells[i]); ok {
			v = append(v, x)
		}
	}
	step := typicalStep(v)
	return step >= 50 && math.Mod(step, 50) == 0 && math.Mod(step, 60) != 0
}

func namesTime(c column) bool {
	return words[roleTime].hit(c.name, wordsOf(c.name)) > 1 || strings.Contains(strings.ToLower(c.name), "hhmmss")
}

// areDateDigits tells that all cells are yyyymmdd.
func (d *dialect) areDateDigits(i int) bool {
	n := 0
	for _, l := range d.rows {
		if len(l.cells) < d.fields || len(l.cells[i]) == 0 { // words below the data, a row cut off
			continue
		}
		y, m, day, w := basicDate(l.cells[i])
		_, ok := dayStart(y, m, day)
		if n++; !ok || w != len(l.cells[i]) || y < 1970 {
			return false
		}
	}
	return n > 0
}

// findClockDigits tells how many digits the time of day in a column has. It is
// sure where the number is too large for seconds (or milliseconds) of a day, or
// goes on evenly only when read so.
func (d *dialect) findClockDigits(i int) (width clockDigits, sure bool) {
	var v []float64
	broken := false
	for _, l := range d.rows {
		if len(l.cells) < d.fields {
			continue
		}
		if x, ok := d.format.parse(l.cells[i]); ok {
			v = append(v, x)
			broken = broken || x != math.Trunc(x)
		}
	}
	if len(v) == 0 {
		return 0, false
	}
	most, day := slices.Max(v), 86400.0
	width = 6
	if most >= 240000 {
		width, day = 9, 86400e3
		if broken {
			return 0, false
		}
		for k := range v {
			v[k] /= 1000
		}
	}
	read := make([]float64, len(v))
	for k, x := range v {
		whole := math.Trunc(x)
		h, m, s := math.Trunc(whole/10000), math.Mod(math.Trunc(whole/100), 100), math.Mod(whole, 100)
		if x < 0 || h > 23 || m > 59 || s > 59 {
			return 0, false
		}
		read[k] = h*3600 + m*60 + s + x - whole
	}
	switch {
	case most > day || strings.Contains(strings.ToLower(d.cols[i].name), "hhmmss") || evenOnlyAs(read, v):
		return width, true
	case v[0] < 10000: // a count that began at zero, as far as one can see
		return 0, false
	}
	return width, false
}

// evenOnlyAs tells that numbers go on evenly as read, and leap as written.
func evenOnlyAs(read, written []float64) bool {
	usual, leap := typicalStep(read), 0.0
	for i := 1; i < len(read); i++ {
		d := math.Abs(read[i] - read[i-1])
		if d > 1.5*usual && d < 12*3600 {
			return false
		}
		leap = max(leap, math.Abs(written[i]-written[i-1]))
	}
	return leap > 1.5*typicalStep(written)
}

// bareTime is the layout of hhmmss.
const bareTime = "150405"

// padded puts the zeros in front of hhmmss that a spreadsheet took away.
func padded(b []byte) []byte {
	if n := bytes.IndexFunc(append(slices.Clone(b), ' '), func(r rune) bool { return r < '0' || r > '9' }); n > 0 && n < 6 {
		return append(bytes.Repeat([]byte{'0'}, 6-n), b...)
	}
	return b
}

// appendClock appends a time of day of such digits, with colons; anything else
// as it is.
func appendClock(dst, cell []byte, width clockDigits) []byte {
	if width == dotted && len(cell) >= 8 && cell[2] == '.' && cell[5] == '.' {
		dst = append(append(dst, cell[:2]...), ':')
		dst = append(append(dst, cell[3:5]...), ':')
		return append(dst, cell[6:]...)
	}
	n := 0
	for n < len(cell) && cell[n]-'0' <= 9 {
		n++
	}
	if width <= 0 || n == 0 || n > int(width) {
		return append(dst, cell...)
	}
	digits := append(bytes.Repeat([]byte{'0'}, int(width)-n), cell...)
	dst = append(dst, digits[:2]...)
	dst = append(append(dst, ':'), digits[2:4]...)
	dst = append(append(dst, ':'), digits[4:6]...)
	if width == 9 {
		dst = append(dst, '.')
	}
	return append(dst, digits[6:]...)
}
