package data

import (
	"fmt"
	"math"
)

// Readings that no air has: beyond the melting point of tungsten, about 3422 °C
// (from memory), below absolute zero, or so small that only bytes read in the
// wrong order give them.
const (
	hottest  = 3500.0
	coldest  = -273.15
	smallest = 1e-30
)

// setImpossibleAside makes such temperatures, in degC, missing.
func (r *rows) setImpossibleAside(y []float64) {
	for i, x := range y {
		kind := ""
		switch {
		case x > hottest:
			kind = tooHot
		case x < coldest:
			kind = tooCold
		case x != 0 && math.Abs(x) < smallest:
			kind = tooSmall
		default:
			continue
		}
		count(r.missing, kind, 1)
		y[i] = math.NaN()
	}
}

const (
	tooHot   = "above 3500 °C"
	tooCold  = "below absolute zero"
	tooSmall = "no reading, below 1e-30"
)

// impossibleCure says what may have gone wrong where a log lost its
// temperatures so.
func impossibleCure(missing map[string]int) string {
	if missing[tooHot]+missing[tooCold] == 0 {
		return ""
	}
	return ": is a decimal mark, a factor of ten, the unit or the sign of a 16-bit number lost in the export? say the unit with --temp-unit, or export again"
}

// notePercent says that an input in % may hold fractions of one.
func notePercent(u []float64, label string) []Note {
	most := 0.0
	for _, x := range u {
		if x == x {
			most = max(most, math.Abs(x))
		}
	}
	if most == 0 || most > 1 {
		return nil
	}
	return []Note{{Code: "percent-below-one", Text: fmt.Sprintf("column %q is in %% and never exceeds %.3g %%: if it holds fractions of one, all gains are a hundred times too large; export it in %%", label, most)}}
}
