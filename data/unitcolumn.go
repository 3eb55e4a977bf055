package data

import (
	"fmt"
	"slices"
)

// Some exports give the unit in a column of its own, beside the number: 1.5, V,
// 24.1, °C. Only its name tells it from a column of letters that mean something
// else, such as F for a fault or h for a phase.

// unitColumn is the column that holds the unit of another.
type unitColumn struct {
	index       int
	label       string
	first, unit string // of its first cell, as written and in its usual name
	alone       bool   // the name of the numbers holds no unit
}

// unitWords are words for a unit in the name of a column, in the languages of
// the vocabulary.
var unitWords = []string{"unit", "units", "uom", "eu", "engunit", "engunits", "einheit", "einheiten", "maßeinheit", "masseinheit", "unité", "unite", "unités", "unidad", "unidades",
	"unità", "unita", "eenheid", "unidade", "jednostka", "jednotka", "mértékegység", "egység", "enhet", "enhed", "yksikkö", "birim", "единица", "単位", "单位"}

// namesUnit tells that a column is called unit, drive_unit, unit of measure,
// Einheit Temperatur.
func namesUnit(c column) bool {
	parts := slices.DeleteFunc(wordsOf(c.name), isPlainNumber) // unit.1
	n := len(parts)
	switch r, _ := roleOf(c); {
	case n == 0 || r == roleMode || r == roleStatus:
		return false
	case slices.Contains(unitWords, parts[n-1]):
		return true
	}
	english := parts[0] == "unit" || parts[0] == "units"
	return slices.Contains(unitWords, parts[0]) && (!english || parts[1] == "of")
}

func isPlainNumber(word string) bool {
	return len(word) > 0 && digitsAhead([]byte(word)) == len(word)
}

// takeUnits gives the columns of numbers the units that stand in columns beside
// them.
func (d *dialect) takeUnits() {
	for i, c := range d.cols {
		if c.class != texts || c.switched || !namesUnit(c) {
			continue
		}
		first := firstUnit(c.sample)
		unit, known := canonicalUnit(first)
		at := d.measuredIn(i)
		if !known || at < 0 || d.cols[at].beside != nil || !canBeIn(d.cols[at], unit) {
			continue
		}
		d.cols[at].beside = &unitColumn{i, c.label, first, unit, d.cols[at].unit == ""}
		if d.cols[at].unit == "" {
			d.cols[at].unit = unit
		}
	}
}

// firstUnit is the first of some cells that holds more than a dash.
func firstUnit(sample []string) string {
	for _, cell := range sample {
		if _, missing := knownMissing([]byte(cell)); !missing {
			return cell
		}
	}
	return ""
}

// measuredIn is the column of numbers that a column of units is said of: the
// one that it is called after, else the one to its left; -1 where none is.
func (d *dialect) measuredIn(i int) int {
	parts := wordsOf(d.cols[i].name)
	for k, c := range d.cols {
		if c.class == numbers && len(parts) > 1 && len(c.name) > 1 && slices.Equal(wordsOf(c.name), parts[:len(parts)-1]) {
			return k
		}
	}
	if i > 0 && d.cols[i-1].class == numbers {
		return i - 1
	}
	return -1
}

// canBeIn tells that a unit goes with what a column is by its name: one of time
// with a clock, one of temperature with no drive.
func canBeIn(c column, unit string) bool {
	c.unit = ""
	r, _ := roleOf(c)
	_, ofTime := timeUnits[unit]
	degrees := unit == "degC" || unit == "degF" || unit == "K" || unit == "°"
	switch r {
	case roleTime:
		return ofTime
	case roleNone:
		return true
	case roleStatus, roleMode, roleRun, roleTag, roleHalf:
		return false
	case roleInput:
		return !ofTime && !degrees
	}
	return !ofTime
}

// planUnits has the units beside the columns that are read compared in every
// row. A unit that a name holds and one beside it that differs cannot both be.
func (c *csvReader) planUnits(o *Options, info *reading) error {
	if c.long != nil { // the units of tags are compared tag by tag
		return nil
	}
	for k := range c.fields {
		f := &c.fields[k]
		col := c.d.cols[f.index]
		b := col.beside
		if b == nil {
			continue
		}
		f.beside = b
		settled := f.role == roleInput && o.InputUnit != "" || f.role == roleTemp && o.TempUnit != "" || f.role == roleTime && o.TimeFormat != ""
		switch {
		case b.alone:
			info.note("unit-column", 0, "column %q is in %s because column %q says so", col.label, b.unit, b.label)
		case b.unit != col.unit && !settled:
			return fmt.Errorf("column %q is in %s by its name and in %s by column %q: mend the export, or leave the column of units out", col.label, col.unit, b.unit, b.label)
		}
	}
	return nil
}

// sameUnit is a value in the unit of the first row of its column, by the cell
// beside it. Another unit that cannot be converted by its prefix ends reading.
func (c *csvReader) sameUnit(f field, v float64, line int) float64 {
	if f.beside.index >= len(c.cells) {
		return v
	}
	cell := c.cells[f.beside.index]
	if len(cell) == 0 || string(cell) == f.beside.first {
		return v
	}
	unit, known := canonicalUnit(decodeName(cell))
	if _, missing := knownMissing(cell); missing && !known || unit == f.beside.unit {
		return v
	}
	if same, ok := inUnit(v, unit, f.beside.unit); ok {
		return same
	}
	if c.unitErr == nil {
		c.unitErr = fmt.Errorf("%s:%d: column %q goes from %s to %q here, and column %q with it: cut the log in two, or export it in one unit",
			c.path, line, f.beside.label, f.beside.unit, decodeName(cell), c.d.cols[f.index].label)
	}
	return v
}
