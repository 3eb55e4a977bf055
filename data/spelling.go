package data

import "bytes"

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
