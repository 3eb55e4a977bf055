package data

import (
	"bytes"
	"fmt"
	"math"
)

// spelling is a less usual way to write a number.
type spelling int

const (
	usualSpelling  spelling = iota
	minusBehind             // 24.1-, as accounting systems export
	bracketedMinus          // (24.1), as spreadsheets show negative amounts
	letterD                 // 2.41D+01, as Fortran prints doubles
)

// respell writes a number of a less usual spelling in the usual one; any other
// cell comes back as it is.
func respell(cell []byte) ([]byte, spelling) {
	n := len(cell)
	if n < 2 {
		return cell, usualSpelling
	}
	switch {
	case cell[n-1] == '-' && isMagnitude(cell[:n-1]):
		return append([]byte{'-'}, trimBlanks(cell[:n-1])...), minusBehind
	case cell[0] == '(' && cell[n-1] == ')' && isMagnitude(trimBlanks(cell[1:n-1])):
		return append([]byte{'-'}, trimBlanks(cell[1:n-1])...), bracketedMinus
	}
	if i := bytes.IndexAny(cell, "Dd"); i > 0 && i+2 < n && (cell[i+1] == '+' || cell[i+1] == '-') && cell[i+2]-'0' <= 9 {
		cell = bytes.Clone(cell)
		cell[i] = 'E'
		return cell, letterD
	}
	return cell, usualSpelling
}

// isMagnitude tells that a text begins and ends with a digit, or begins with a
// decimal mark.
func isMagnitude(b []byte) bool {
	b = trimBlanks(b)
	return len(b) > 0 && (b[0]-'0' <= 9 || b[0] == '.' || b[0] == ',') && b[len(b)-1]-'0' <= 9
}

// spellings counts cells of input and temperature that were read from a less
// usual spelling, and keeps the line of the first.
type spellings struct {
	count, first [letterD + 1]int
}

func (s *spellings) look(cell []byte, line int) {
	last := cell[len(cell)-1]
	if last != '-' && last != ')' {
		return
	}
	_, how := respell(cell)
	if s.count[how]++; s.count[how] == 1 {
		s.first[how] = line
	}
}

func (s *spellings) say(info *reading) {
	if n := s.count[minusBehind]; n > 0 {
		info.note("minus-behind", s.first[minusBehind], "%d numbers with the minus behind them (24.1-) were read as negative", n)
	}
	if n := s.count[bracketedMinus]; n > 0 {
		info.note("minus-brackets", s.first[bracketedMinus], "%d numbers in round brackets were read as negative, as spreadsheets write amounts; if the brackets mark something else, export without them", n)
	}
}

// bracketed are the rows of a column whose number stands in round brackets.
type bracketed map[role][]int

func (b bracketed) add(r role, row int, cell []byte) bracketed {
	if cell[len(cell)-1] != ')' {
		return b
	}
	if b == nil {
		b = bracketed{}
	}
	b[r] = append(b[r], row)
	return b
}

// What a bracket marks shows beside it (common practice, no source): a number
// within a quarter of the bare one in the next row did not pass through zero,
// unless that is no more than three usual steps away.
const (
	nearBare  = 0.25
	usualLeap = 3
)

// markRatherThanMinus refuses a column in which round brackets mark something
// else than a minus, as the values beside them show: bare ones of the same
// magnitude, or with a minus of their own.
func (b bracketed) markRatherThanMinus(r role, v []float64, line func(row int) int, label string) error {
	if len(b[r]) == 0 {
		return nil
	}
	inside := make([]bool, len(v))
	for _, i := range b[r] {
		inside[i] = true
	}
	minus := false
	var steps []float64 // of which both ends are written alike
	for i, x := range v {
		minus = minus || !inside[i] && x < 0 && x > -fillLimit
		if i > 0 && inside[i] == inside[i-1] && x-v[i-1] == x-v[i-1] {
			steps = append(steps, math.Abs(x-v[i-1]))
		}
	}
	usual := usualLeap * medianOf(steps)
	for _, i := range b[r] {
		x := math.Abs(v[i])
		for _, k := range []int{i - 1, i + 1} {
			if k < 0 || k >= len(v) || inside[k] || !(x > 0) {
				continue
			}
			if minus || math.Abs(v[k]-x) <= nearBare*x && !(v[k]+x <= usual) {
				return &lineError{line(i), fmt.Errorf("column %q holds (%g) beside %g: round brackets stand for a minus, or mark a value: export without them, or with the minus in front", label, x, v[k])}
			}
		}
	}
	return nil
}

// fillLimit is the least of the large numbers that stand for no value.
const fillLimit = 9990
