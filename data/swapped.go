package data

import (
	"fmt"
	"math"
)

// Input and temperature named the wrong way round give a model that looks like
// one. Names, units and what the columns hold may tell.

// checkNamed compares the columns that the flags name for input and temperature
// with what their names and units say. A unit or a span given by hand settles
// what a column is.
func checkNamed(cols []column, l *layout, o *Options) ([]Note, error) {
	in, temp := cols[l[roleInput]], cols[l[roleTemp]]
	isIn, _ := roleOf(in)
	isTemp, _ := roleOf(temp)
	sureIn := o.InputCol == "" || o.InputUnit != "" || o.InputSpan != nil
	sureTemp := o.TempCol == "" || o.TempUnit != "" || o.TempSpan != nil
	if isIn == roleTemp && isTemp == roleInput && !(sureIn && sureTemp) {
		return nil, fmt.Errorf("column %q is named as the input and column %q as the temperature, but their names or units say the reverse: change over %s and %s, or, if it is meant, say the units with --input-unit and --temp-unit",
			in.label, temp.label, flags[roleInput], flags[roleTemp])
	}
	var notes []Note
	say := func(c column, r, is role) {
		if is != r && roleNames[is] != "" && is <= roleInlet {
			notes = append(notes, Note{Code: "column-named-otherwise", Text: fmt.Sprintf("column %q is the %s because %s says so; by its name or unit it is the %s",
				c.label, roleNames[r], flags[r], roleNames[is])})
		}
	}
	if !sureIn {
		say(in, roleInput, isIn)
	}
	if !sureTemp {
		say(temp, roleTemp, isTemp)
	}
	return notes, nil
}

// What tells a drive's steps from a temperature (common practice, no source):
// a drive changes in few rows, once by half of its range or more; a temperature
// in half of the rows, and never by a quarter of its range.
const (
	swapRows    = 20
	swapChanges = 6
	stepShare   = 0.5
	smoothShare = 0.25
)

// noteSwapped says that the temperature moves like a drive, and the input like a
// temperature. Known units settle it: a controller moves its drive in every row,
// and a coarse thermometer moves in steps.
func noteSwapped(run *Run, info *reading) []Note {
	if len(run.U) < swapRows || run.Units.Input != unitless && run.Units.Temperature == "degC" {
		return nil
	}
	tempChanges, tempLeap := movement(run.Y, swapChanges)
	if tempChanges == 0 || tempChanges > swapChanges || tempLeap < stepShare {
		return nil
	}
	if inChanges, inLeap := movement(run.U, len(run.U)); 2*inChanges < len(run.U) || inLeap > smoothShare {
		return nil
	}
	return []Note{{Code: "columns-look-swapped", Text: fmt.Sprintf("column %q, the temperature, moves in steps as a drive does, and column %q, the input, as a temperature does: if they are the wrong way round, name them with %s and %s",
		info.label(roleTemp), info.label(roleInput), flags[roleInput], flags[roleTemp])}}
}

// movement counts the rows in which a column changes, and gives its largest
// change as a share of its range; beyond so many changes it gives up.
func movement(v []float64, atMost int) (changes int, leap float64) {
	lo, hi, before, most := math.Inf(1), math.Inf(-1), math.NaN(), 0.0
	for _, x := range v {
		if x != x {
			continue
		}
		if before == before && x != before {
			if changes++; changes > atMost {
				return changes, 0
			}
			most = max(most, math.Abs(x-before))
		}
		lo, hi, before = min(lo, x), max(hi, x), x
	}
	if changes == 0 {
		return 0, 0
	}
	return changes, most / (hi - lo)
}
