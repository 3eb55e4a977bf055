package data

import "bytes"

// delimiters in the order in which they are preferred when two fit equally.
var delimiters = []byte{'\t', ';', '|', ',', ' '}

// findDelimiter takes the delimiter that makes most of the text numbers and
// times: the bytes in such cells, times the squared share of such cells.
func findDelimiter(lines []line) (delim byte, fields int) {
	lines = lines[max(len(lines)/2, len(lines)-400):] // the header is no measure
	delim, fields, share := bestDelimiter(lines, plausibleDelimiters(lines))
	if share < goodShare { // a tab behind every comma, say
		delim, fields, _ = bestDelimiter(lines, delimiters)
	}
	return delim, fields
}

// goodShare is the least share of numbers and times among the cells for which
// a delimiter is taken because it stands equally often in all lines.
const goodShare = 0.5

func bestDelimiter(lines []line, among []byte) (delim byte, fields int, goodest float64) {
	best := 0.0
	for _, d := range among {
		type tally struct{ goodBytes, good, all float64 }
		byCount := map[int]*tally{}
		var cells [][]byte
		for _, l := range lines {
			if isComment(l.text, d) {
				continue
			}
			if cells = splitCells(cells[:0], l.text, d); len(cells) < 2 {
				continue
			}
			t := byCount[len(cells)]
			if t == nil {
				t = &tally{}
				byCount[len(cells)] = t
			}
			for _, c := range cells {
				k := looseClass(c)
				if k == numbers || k == stamps {
					t.good++
					t.goodBytes += float64(len(c))
				}
				if len(c) > 0 && !(k == texts && isTerm(c)) {
					t.all++
				}
			}
		}
		for n, t := range byCount {
			if t.good == 0 {
				continue
			}
			share := t.good / t.all
			score := t.goodBytes * share * share
			if d == ' ' { // blanks stand in stamps and words too
				score /= 2
			}
			if score > best || score == best && d == delim && n > fields {
				best, delim, fields, goodest = score, d, n, share
			}
		}
	}
	return delim, fields, goodest
}

// isTerm tells text that logs hold beside numbers: a word for a value or for no
// value, a status, a unit.
func isTerm(cell []byte) bool {
	_, missing := knownMissing(cell)
	_, unit := canonicalUnit(decodeName(cell))
	return missing || unit || isWord(cell) || isBadStatus(cell) || isGoodStatus(cell)
}

// plausibleDelimiters are those of tab, semicolon and bar that stand twice or
// more, and equally often, in nine lines of ten: no text does that by chance.
// Where there is none, all are.
func plausibleDelimiters(lines []line) []byte {
	var found []byte
	for _, d := range []byte{'\t', ';', '|'} {
		times := map[int]int{}
		for _, l := range lines {
			times[bytes.Count(l.text, []byte{d})]++
		}
		for n, k := range times {
			if n >= 2 && 10*k >= 9*len(lines) {
				found = append(found, d)
			}
		}
	}
	if len(found) == 0 {
		return delimiters
	}
	return found
}

// looseClass classes a cell before the decimal mark is known.
func looseClass(cell []byte) class {
	cell = trimBlanks(cell)
	if len(cell) == 0 {
		return blankCells
	}
	for _, point := range []byte{'.', ','} {
		if _, n, ok := scanDecimal(cell, point); ok && (n == len(cell) || isUnitSuffix(cell[n:])) {
			return numbers
		}
	}
	if _, ok := (numberFormat{'.'}).parse(cell); ok && bytes.IndexByte(cell, ' ') < 0 {
		return numbers
	}
	if _, ok := (numberFormat{','}).parse(cell); ok && bytes.IndexByte(cell, ' ') < 0 {
		return numbers
	}
	if isStamp(cell) {
		return stamps
	}
	return texts
}

// isStamp tells that a cell is a date, a time of day, or both.
func isStamp(cell []byte) bool {
	var c clock
	if _, _, ok := c.parseCalendar(cell); ok && bytes.ContainsAny(cell, "/.-: T_W") {
		return true
	}
	_, ok := parseTimeOfDay(cell, false)
	return ok
}

func isUnitSuffix(rest []byte) bool {
	if len(rest) > 12 {
		return false
	}
	rest = trimBlanks(rest)
	if len(rest) == 0 {
		return false
	}
	_, known := canonicalUnit(decodeName(rest))
	return known
}
