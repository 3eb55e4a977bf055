package data

import (
	"fmt"
	"math"
	"strings"
	"unicode"
)

// K in the name of a temperature is the kelvin, or the type of the
// thermocouple, or the unit of a difference.

// leastKelvin is colder than any air, K.
const leastKelvin = 150.0

// kelvinOrType refuses a temperature in K where the letter may be the type of
// the thermocouple: behind words that say so, and where kelvin would be colder
// than any air. Zero and less are readings that failed.
func kelvinOrType(y []float64, label string) ([]Note, error) {
	least := math.Inf(1)
	for _, x := range y {
		if x > 0 {
			least = min(least, x)
		}
	}
	_, typed := typeInName(withoutDigits(label))
	inBrackets := strings.HasSuffix(label, ")") || strings.HasSuffix(label, "]")
	switch {
	case math.IsInf(least, 1):
		return nil, nil
	case least < leastKelvin && difference.in(column{name: label}):
		return nil, fmt.Errorf("column %q seems to be a difference: a temperature of %.6g K would be %.6g °C; name the column of the temperature itself with %s, or, to fit the difference, say --temp-unit C, for a difference in K is the same in °C",
			label, least, least-273.15, flags[roleTemp])
	case least < leastKelvin || typed && !inBrackets:
		return nil, fmt.Errorf("column %q: K could be kelvin or the type of the thermocouple, and its lowest value of %.6g K would be %.6g °C: say which unit it is with --temp-unit C, F or K",
			label, least, least-273.15)
	case typed:
		return []Note{{Code: "kelvin-or-type", Text: fmt.Sprintf("column %q was read in kelvin; if K is the type of the thermocouple, say --temp-unit C or F", label)}}, nil
	}
	return nil, nil
}

// withoutDigits takes the number out of TC1_K.
func withoutDigits(name string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsDigit(r) {
			return -1
		}
		return r
	}, name)
}

// difference are words for how far a temperature lies above another.
var difference = vocabulary{words: []string{"rise", "delta", "dt", "diff", "difference", "differenz", "temperaturdifferenz", "erwärmung", "übertemperatur", "écart", "élévation", "diferencia", "differenza", "verschil"}}
