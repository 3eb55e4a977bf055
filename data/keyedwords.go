package data

import (
	"bytes"
	"encoding/json"
	"fmt"
	"slices"
)

// In lines of name=value some words belong to no pair: a unit, the time of day
// behind a date, a remark. This file tells them apart.

type pair struct {
	key    string
	value  []byte
	behind []looseWord // the words up to the next pair
}

// looseWord is a word outside of the pairs.
type looseWord struct {
	text      []byte
	bracketed bool // in square brackets, as a process number or an array is
	parted    bool // by more than blanks from what stands in front of it
}

// isNumber tells a number that stands in the line by itself.
func (w looseWord) isNumber() bool { return !w.bracketed && looseClass(w.text) == numbers }

// gaps is what stood between the words of a line so far.
type gaps struct {
	depth       int  // of square brackets
	parted      bool // the last gap holds more than blanks
	frontCommas bool // commas part what stands in front of the pairs
	commas      bool // commas without a blank part the pairs
}

// skip takes the gap off in front of a word.
func (g *gaps) skip(b []byte, inPairs bool) []byte {
	rest := bytes.TrimLeft(b, " \t\r,;|{}[]")
	gap := b[:len(b)-len(rest)]
	g.depth = max(0, g.depth+bytes.Count(gap, []byte{'['})-bytes.Count(gap, []byte{']'}))
	g.parted = bytes.ContainsAny(gap, "\t,;|")
	if n := len(gap); n > 0 && gap[n-1] == ',' && len(rest) > 0 {
		g.frontCommas = g.frontCommas || !inPairs
		g.commas = true
	}
	return rest
}

// settle takes the words that belong to a value to it: the rest of a stamp, a
// unit, more words behind a word. ok is false where the others are the cells of
// a row.
func (p *pair) settle(g gaps) (ok bool, doubt error) {
	if bytes.IndexByte(p.value, ',') >= 0 && looseClass(p.value) == numbers {
		if g.frontCommas {
			return false, nil
		}
		if g.commas {
			doubt = fmt.Errorf("%s=%s: commas part the pairs, and this one could be a decimal mark too: export with a decimal point, or part the pairs by semicolons", p.key, p.value)
		}
	} else if bytes.IndexByte(p.value, ',') >= 0 && looseClass(p.value) != stamps && digitBeside(p.value) {
		return false, nil
	}
	kind := looseClass(p.value)
	words := p.behind
	if stamp, n := longestStamp(p.value, words); n > 0 {
		p.value, words = stamp, words[n:]
	} else if len(words) > 0 && kind == numbers && isUnitSuffix(words[0].text) {
		p.value, words = slices.Concat(p.value, []byte{' '}, words[0].text), words[1:]
	} else if len(words) > 0 && areThousands(p.value, words[0]) {
		doubt = fmt.Errorf("%s=%s %s: the blank could be a thousands mark, and %s a remark: export the number without blanks, or the remark in square brackets",
			p.key, p.value, words[0].text, words[0].text)
	}
	for i, w := range words {
		if w.isNumber() && (w.parted || i > 0 && words[i-1].isNumber()) {
			return false, nil
		}
		if kind == texts && len(p.value) > 0 && isLetter(p.value[0]) {
			p.value = slices.Concat(p.value, []byte{' '}, w.text)
		}
	}
	return true, doubt
}

// longestStamp joins a value and the words behind it to the longest stamp, of n
// of the words.
func longestStamp(value []byte, words []looseWord) (stamp []byte, n int) {
	var parts [][]byte
	if value != nil {
		parts = append(parts, value)
	}
	first := len(parts)
	for _, w := range words[:min(len(words), stampWords)] {
		parts = append(parts, w.text)
	}
	for n := len(parts); n > first; n-- {
		if stamp := bytes.Join(parts[:n], []byte{' '}); looseClass(stamp) == stamps || isYearless(stamp) {
			return stamp, n - first
		}
	}
	return nil, 0
}

// areThousands tells a value and a word that together are a number with a blank
// for its thousands mark.
func areThousands(value []byte, w looseWord) bool {
	digits := bytes.TrimLeft(value, "+-")
	return !w.bracketed && !w.parted && len(w.text) == 3 && areDigits(w.text) &&
		len(digits) > 0 && len(digits) <= 3 && digits[0] != '0' && areDigits(digits)
}

func areDigits(b []byte) bool {
	return !slices.ContainsFunc(b, func(c byte) bool { return c-'0' > 9 })
}

// wordEnd is where an unquoted word ends.
func wordEnd(b []byte) int {
	if n := bytes.IndexAny(b, " \t,;|{}[]\r"); n >= 0 {
		return n
	}
	return len(b)
}

// numberEnd goes on from the end of a word over commas between two digits.
func numberEnd(b []byte, n int) int {
	for n > 0 && n+1 < len(b) && b[n] == ',' && b[n-1]-'0' <= 9 && b[n+1]-'0' <= 9 {
		n += 1 + wordEnd(b[n+1:])
	}
	return n
}

// digitBeside tells a comma between two digits.
func digitBeside(b []byte) bool {
	i := bytes.IndexByte(b, ',')
	return numberEnd(b, i) > i
}

// closingQuote finds the quote that ends a text, which is not one behind a
// backslash unless all are.
func closingQuote(b []byte) int {
	for i := 0; i < len(b); i++ {
		switch b[i] {
		case '\\':
			i++
		case '"':
			return i
		}
	}
	return bytes.IndexByte(b, '"')
}

// unescaped reads the escapes of JSON in a quoted text; a text with a backslash
// that is none stays as it is.
func unescaped(b []byte) []byte {
	if bytes.IndexByte(b, '\\') < 0 {
		return b
	}
	var text string
	if json.Unmarshal(slices.Concat([]byte{'"'}, b, []byte{'"'}), &text) != nil {
		return b
	}
	return []byte(text)
}
