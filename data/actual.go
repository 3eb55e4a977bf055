package data

import (
	"fmt"
	"slices"
)

// Names of temperatures that say more than that they are one.
var (
	// actualWords mark the measured value of a loop, beside its setpoint.
	actualWords = vocabulary{words: []string{"ist", "istwert", "pv", "actual", "process_value", "measured_value", "effectif", "reale", "ärvärde", "är"}}
	// airWords name a place in the air's way, which may lie before the heater
	// as well as behind it.
	airWords = vocabulary{words: []string{"zuluft", "zulufttemperatur", "abluft", "umluft", "fortluft", "lufttemperatur",
		"supply_air", "return_air", "exhaust_air", "extract_air", "soufflage"}}
)

func (v vocabulary) in(c column) bool { return v.hit(c.name, wordsOf(c.name)) > 1 }

// actualOverAir settles candidates for the temperature of which some are
// called by the air alone: a column called the actual value goes before
// those, however well their words are known, and stands beside the others.
func actualOverAir(cols []column, taken map[int]bool, found []int) []int {
	air := func(i int) bool { return airWords.in(cols[i]) }
	actual := func(i int) bool { return actualWords.in(cols[i]) }
	if !slices.ContainsFunc(found, air) {
		return found
	}
	pool := slices.Clone(found)
	for i, c := range cols {
		if r, _ := roleOf(c); r == roleTemp && !taken[i] && fits(c.class, r) && actual(i) && !slices.Contains(found, i) {
			pool = append(pool, i)
		}
	}
	if !slices.ContainsFunc(pool, actual) {
		return found
	}
	return slices.DeleteFunc(pool, func(i int) bool { return air(i) && !actual(i) })
}

// passedOver notes the columns that could have had the role of the one chosen
// by its name, in a unit of their own, unless their names say that they are
// something else.
func passedOver(cols []column, taken map[int]bool, used int, r role) []Note {
	var left []int
	for i, c := range cols {
		if is, _ := roleOf(c); is == r && c.unit != "" && !taken[i] && !words[roleOther].in(c) && fits(c.class, r) {
			left = append(left, i)
		}
	}
	if len(left) == 0 {
		return nil
	}
	return []Note{{Code: "column-passed-over", Text: fmt.Sprintf("column %q was taken for the %s by its name, not %s; %s says otherwise",
		cols[used].label, roleNames[r], listColumns(cols, left), flags[r])}}
}
