package data

import (
	"bytes"
	"fmt"
	"slices"
	"strings"
)

// markDates makes stamps of the columns that hold dates of bare digits or dates
// without a year, by their names and by all of their cells. A date alone counts
// only beside a time of day.
func markDates(d *dialect) {
	markZeroDates(d)
	for i := range d.cols {
		c := &d.cols[i]
		if c.class != numbers && c.class != texts || c.unit != "" {
			continue
		}
		cells := d.cellsOf(i)
		if c.class == texts || dateWords.in(*c) { // 14.03 is a number, unless it is called a date
			if all, timed := areYearless(cells); all && (timed || d.besideTime(i) && fewValues(cells)) {
				c.class, c.dated, c.timed = stamps, true, timed
				continue
			}
		}
		if !namesTime(*c) {
			continue
		}
		if forms, _ := fittingDigits(cells); len(forms) > 0 {
			alone := true
			for _, b := range cells {
				alone = alone && len(b) <= 8
			}
			if !alone || d.besideTime(i) && fewValues(cells) {
				c.class, c.dated, c.timed = stamps, true, !alone
			}
		}
	}
}

// dateWords are what columns of dates are called.
var dateWords = vocabulary{words: []string{"date", "datum", "fecha", "data", "tarih", "dato", "dátum", "päivä", "дата", "日期", "日付"}}

// noteDateLeft says that a column called a date is not part of a clock that has
// only the time of day: a pause of a day or more does not show.
func noteDateLeft(cols []column, at *layout, k *clock) []Note {
	if !k.timeOfDay() {
		return nil
	}
	for _, c := range cols {
		if dateWords.in(c) && c.class != blankCells && c.part == noPart && !slices.Contains(at[:], c.index) {
			return []Note{{Code: "date-left", Text: fmt.Sprintf("column %q (%s) was not read as a date: time is that of day alone, and a pause of a day or more does not show",
				c.label, strings.Join(c.sample[:min(2, len(c.sample))], ", "))}}
		}
	}
	return nil
}

// cellsOf lists the cells of a column that hold a digit.
func (d *dialect) cellsOf(i int) (cells [][]byte) {
	for _, l := range d.rows {
		if len(l.cells) < d.fields { // words below the data, a row cut off
			continue
		}
		cells = append(cells, l.cells[i])
	}
	return withDigits(cells)
}

// withDigits leaves out what stands in place of a stamp.
func withDigits(cells [][]byte) (out [][]byte) {
	for _, b := range cells {
		if bytes.ContainsAny(b, "0123456789") {
			out = append(out, b)
		}
	}
	return out
}

// besideTime tells that another column holds a time of day, or is called by one
// and may hold its digits.
func (d *dialect) besideTime(i int) bool {
	for k, c := range d.cols {
		if k == i {
			continue
		}
		if c.class == stamps && c.timed && !c.dated {
			return true
		}
		if c.class == numbers && namesTime(c) && c.unit == "" && !fewValues(d.cellsOf(k)) {
			if w, _ := d.findClockDigits(k); w > 0 {
				return true
			}
		}
	}
	return false
}

// fewValues tells cells that change at most once in ten rows, as the days of a
// log do.
func fewValues(cells [][]byte) bool {
	changes := 0
	for i := 1; i < len(cells); i++ {
		if string(cells[i]) != string(cells[i-1]) {
			changes++
		}
	}
	return changes <= max(1, len(cells)/10)
}
