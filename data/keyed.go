package data

import (
	"bytes"
	"slices"
)

// Some loggers write the name in front of every value: time=0.5 drive_V=1.5,
// or an object of JSON on each line. Such a line is rewritten as a row of cells
// in the order of the names.

// keyed are the names in a file of such lines.
type keyed struct {
	sign  byte // between name and value: '=' or ':'
	names []string
}

// maxKeys bounds the names in a file of pairs.
const maxKeys = 1000

// A stamp has at most so many words, and a line of pairs so many in front of
// its first one.
const (
	stampWords = 7
	maxFront   = 20
	maxValue   = 200 // bytes of a value that is put together from words
)

// stampKey is the name of a stamp that stands in front of the first pair.
const stampKey = "timestamp"

// findKeys tells a file most of whose lines are two pairs or more, and nil for
// any other.
func findKeys(lines []line) *keyed {
	for _, sign := range []byte{'=', ':'} {
		k := &keyed{sign: sign}
		n := 0
		for i, l := range lines {
			if 2*(n+len(lines)-i) <= len(lines) { // too few are left
				break
			}
			if bytes.IndexByte(l.text, sign) < 0 {
				continue
			}
			pairs := k.pairs(l.text)
			if len(pairs) < 2 || len(k.names) > maxKeys {
				continue
			}
			n++
			for _, p := range pairs {
				if !slices.Contains(k.names, p.key) {
					k.names = append(k.names, p.key)
				}
			}
		}
		if 2*n > len(lines) && len(k.names) <= maxKeys {
			return k
		}
	}
	return nil
}

type pair struct {
	key   string
	value []byte
}

// row rewrites a line of pairs; a line without any comes back as it is, and
// blank if it is a bracket of JSON.
func (k *keyed) row(line []byte) []byte {
	pairs := k.pairs(line)
	if len(pairs) == 0 {
		if len(bytes.Trim(line, "[]{}, \t\r")) == 0 {
			return nil
		}
		return line
	}
	cells := make([][]byte, len(k.names))
	for _, p := range pairs {
		if i := slices.Index(k.names, p.key); i >= 0 {
			cells[i] = bytes.ReplaceAll(p.value, []byte{'\t'}, []byte{' '})
		}
	}
	return bytes.Join(cells, []byte{'\t'})
}

// pairs cuts a line into pairs. Words that belong to none go with the value in
// front of them (the time of day behind a date, a unit); those in front of the
// first pair must begin with a stamp. Numbers there make the line a row of
// something else: it has no pairs then, nor has one that names a key twice.
func (k *keyed) pairs(line []byte) (out []pair) {
	var front [][]byte
	for rest := line; ; {
		rest = bytes.TrimLeft(rest, " \t\r,;|{}[]")
		if len(rest) == 0 {
			break
		}
		word, after := k.word(rest, true)
		value := bytes.TrimLeft(after, " ")
		if isKey(rest[0]) && len(value) > 0 && value[0] == k.sign {
			var p pair
			p.key = decodeName(word)
			p.value, rest = k.word(bytes.TrimLeft(value[1:], " "), false)
			if len(out) >= maxKeys || slices.ContainsFunc(out, func(q pair) bool { return q.key == p.key }) {
				return nil
			}
			out = append(out, p)
			continue
		}
		if len(after) == len(rest) || len(front) > maxFront {
			return nil
		}
		rest = after
		if len(out) == 0 {
			front = append(front, word)
			continue
		}
		last := &out[len(out)-1]
		if len(last.value) > maxValue {
			return nil
		}
		last.value = slices.Concat(last.value, []byte{' '}, word)
	}
	return k.withFront(front, out)
}

// word takes a word, quoted or not, off a line: a name ends at the sign too.
func (k *keyed) word(b []byte, name bool) (word, rest []byte) {
	if len(b) > 1 && b[0] == '"' {
		if n := bytes.IndexByte(b[1:], '"'); n >= 0 {
			return b[1 : n+1], b[n+2:]
		}
	}
	n := bytes.IndexAny(b, " \t,;|{}[]\r")
	if n < 0 {
		n = len(b)
	}
	if i := bytes.IndexByte(b[:n], k.sign); name && i > 0 && isKey(b[0]) {
		n = i
	}
	return b[:n], b[n:]
}

func isKey(c byte) bool { return isLetter(c) || c == '_' || c == '"' || c >= 0x80 }

// withFront adds the stamp that the words in front of the pairs begin with.
func (k *keyed) withFront(front [][]byte, out []pair) []pair {
	for n := min(len(front), stampWords); n > 0; n-- {
		if stamp := bytes.Join(front[:n], []byte{' '}); isStamp(stamp) {
			return append([]pair{{stampKey, stamp}}, out...)
		}
	}
	for _, w := range front {
		if looseClass(w) == numbers {
			return nil
		}
	}
	return out
}
