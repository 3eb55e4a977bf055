package data

import (
	"bytes"
	"slices"
	"unicode/utf8"
)

// withoutMarks removes thousands marks that stand where they belong, turns a
// typographic minus into a hyphen and takes away blanks behind the sign. ok is
// false when there is nothing to remove or a mark stands anywhere else.
func (f numberFormat) withoutMarks(cell []byte) (plain []byte, ok bool) {
	if !utf8.Valid(cell) { // a no-break space or a dash of Windows-1252
		cell = []byte(decodeName(cell))
	}
	other := ','
	if f.point == ',' {
		other = '.'
	}
	whole, decimals := cell, []byte(nil)
	if i := bytes.IndexByte(cell, f.point); i >= 0 {
		whole, decimals = cell[:i], cell[i:]
	}
	var mark rune
	groups := []int{0} // digits between the marks
	for len(whole) > 0 {
		r, n := utf8.DecodeRune(whole)
		whole = whole[n:]
		switch {
		case '0' <= r && r <= '9':
			plain = append(plain, byte(r))
			groups[len(groups)-1]++
		case r == '+' || isMinus(r):
			if len(plain) > 0 {
				return nil, false
			}
			plain = append(plain, sign(r))
		case isBlank(r) && groups[0] == 0 && len(plain) == 1: // behind the sign
		case r == other || isBlank(r) || r == '\'' || r == '’':
			if mark != 0 && mark != r {
				return nil, false
			}
			mark, groups = r, append(groups, 0)
		default:
			return nil, false
		}
	}
	if len(groups) > 1 && !areGroups(groups, mark) {
		return nil, false
	}
	return append(plain, decimals...), true
}

// areGroups tells digits in groups of three, of which the first may be shorter;
// between commas also one group of three behind groups of two, as in India:
// 1,50,000.
func areGroups(digits []int, mark rune) bool {
	first, inner, last := digits[0], digits[1:len(digits)-1], digits[len(digits)-1]
	all := func(n int) bool { return !slices.ContainsFunc(inner, func(d int) bool { return d != n }) }
	switch {
	case first == 0 || last != 3:
		return false
	case all(3):
		return first <= 3
	}
	return mark == ',' && all(2) && first <= 2
}

func isBlank(r rune) bool {
	return r == ' ' || r == '\u00a0' || r == '\u202f' || r == '\u2009'
}

// isMinus tells the hyphen, the minus, and the dashes that word processors put
// in their place.
func isMinus(r rune) bool {
	return r == '-' || r == '−' || r == '–' || r == '\u2010' || r == '\u2011' || r == '－'
}

func sign(r rune) byte {
	if r == '+' {
		return '+'
	}
	return '-'
}
