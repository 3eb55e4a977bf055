package data

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// oddNumbers refuses elapsed time of which the name of the column, or the
// numbers, say that it is counted in no unit that is known.
func oddNumbers(v []float64, c column) error {
	if _, known := timeUnits[c.unit]; !known {
		if unit := oddUnit(c.label); unit != "" {
			return fmt.Errorf("column %q counts time in %q, which is no unit that is known: if its numbers are seconds or another unit, say which with --time-format seconds, ms, min or hours; else export time in one of these", c.label, unit)
		}
	}
	if n := len(v); n > 1 && v[n-1] < v[0] && countdown.in(c) {
		return fmt.Errorf("column %q counts down by its name: export the time that went by, or name another clock with %s", c.label, flags[roleTime])
	}
	if c.unit != "s" && c.unit != "ms" && arePointed(v) {
		return fmt.Errorf("column %q goes on evenly only if what stands behind the point is a number of sixtieths (1.30 for 1:30): export it with a colon, or say --time-format seconds, min or hours if these are decimals", c.label)
	}
	return nil
}

// countdown are words for time that is left.
var countdown = vocabulary{words: []string{"remaining", "left", "countdown", "remain", "restzeit", "verbleibend", "restant", "restante", "rimanente", "resterend"}}

// oddUnits are what stands in the brackets of a clock in place of a unit; m
// could be minutes, months or a misprint.
var oddUnits = []string{"m", "cs", "ds", "tick", "ticks", "count", "counts", "sample", "samples", "scan", "scans", "cycle", "cycles", "x"}

// oddUnit is the unit in brackets at the end of a name if it is one of these,
// or holds a factor: (100 ms), [x10ms].
func oddUnit(label string) string {
	label = strings.TrimSpace(fullWidth.Replace(label))
	open := strings.LastIndexAny(label, "([{")
	if open < 0 || !strings.ContainsAny(label[len(label)-1:], ")]}") {
		return ""
	}
	inside := strings.TrimSpace(label[open+1 : len(label)-1])
	if slices.Contains(oddUnits, strings.ToLower(inside)) {
		return inside
	}
	unit := strings.TrimLeft(inside, "x*0123456789., ")
	if _, ofTime := timeUnits[unitOption(unit)]; ofTime && unit != inside {
		return inside
	}
	return ""
}

// arePointed tells numbers whose two decimals are sixtieths: they stay below
// 60, and the clock goes on evenly only when read so.
func arePointed(v []float64) bool {
	read := make([]float64, len(v))
	for i, x := range v {
		cents := math.Round(100 * x)
		if x < 0 || math.Abs(100*x-cents) > 1e-6 || math.Mod(cents, 100) >= 60 {
			return false
		}
		read[i] = 60*math.Trunc(cents/100) + math.Mod(cents, 100)
	}
	return evenOnlyAs(read, v)
}
