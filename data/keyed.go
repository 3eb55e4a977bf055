package data

import (
	"bytes"
	"fmt"
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

// A stamp has at most so many words, and a line of pairs so many that
// belong to none, in one place.
const (
	stampWords = 7
	maxFront   = 20
)

// stampKey is the name of a stamp that stands in front of the first pair.
const stampKey = "timestamp"

// findKeys tells a file most of whose lines are two pairs or more, and nil for
// any other. Numbers in them that can be read in two ways are an error.
func findKeys(path string, lines []line) (*keyed, error) {
	for _, sign := range []byte{'=', ':'} {
		k := &keyed{sign: sign}
		n := 0
		var doubt error
		for i, l := range lines {
			if 2*(n+len(lines)-i) <= len(lines) { // too few are left
				break
			}
			if bytes.IndexByte(l.text, sign) < 0 {
				continue
			}
			pairs, err := k.pairs(l.text)
			if len(pairs) < 2 || len(k.names) > maxKeys {
				continue
			}
			if n++; err != nil && doubt == nil {
				doubt = fmt.Errorf("%s:%d: %w", path, l.number, err)
			}
			for _, p := range pairs {
				if !slices.Contains(k.names, p.key) {
					k.names = append(k.names, p.key)
				}
			}
		}
		if 2*n > len(lines) && len(k.names) <= maxKeys {
			return k, doubt
		}
	}
	return nil, nil
}

// row rewrites a line of pairs; a line without any comes back as it is, as does
// one that can be read in two ways, and blank if it is a bracket of JSON.
func (k *keyed) row(line []byte) []byte {
	pairs, doubt := k.pairs(line)
	if len(pairs) == 0 || doubt != nil {
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

// pairs cuts a line into pairs. A value is one word; what follows it is a
// remark, but for the time of day behind a date, and a unit. The words in front
// of the first pair must begin with a stamp. Numbers that stand in the line as
// in columns make it the row of something else: it has no pairs then, nor has
// one that names a key twice.
func (k *keyed) pairs(line []byte) (out []pair, doubt error) {
	var front []looseWord
	var g gaps
	if bytes.HasPrefix(bytes.TrimLeft(line, " \t"), []byte("{'")) { // a dictionary as Python prints it
		line = bytes.ReplaceAll(line, []byte{'\''}, []byte{'"'})
	}
	for rest := line; ; {
		rest = g.skip(rest, len(out) > 0)
		if len(rest) == 0 {
			break
		}
		word, after := k.word(rest, true)
		if value := bytes.TrimLeft(after, " "); isKey(rest[0]) && len(value) > 0 && value[0] == k.sign {
			p := pair{key: decodeName(word)}
			p.value, rest = k.value(value[1:])
			if len(out) >= maxKeys || slices.ContainsFunc(out, func(q pair) bool { return q.key == p.key }) {
				return nil, nil
			}
			out = append(out, p)
			continue
		}
		if len(after) == len(rest) {
			return nil, nil
		}
		rest = after
		words := &front
		if len(out) > 0 {
			words = &out[len(out)-1].behind
		}
		if len(*words) > maxFront {
			return nil, nil
		}
		*words = append(*words, looseWord{word, g.depth > 0, g.parted})
	}
	return k.settle(front, out, g)
}

// settle decides what the words between the pairs are.
func (k *keyed) settle(front []looseWord, out []pair, g gaps) (_ []pair, doubt error) {
	for i := range out {
		ok, err := out[i].settle(g)
		if !ok {
			return nil, nil
		}
		if doubt == nil {
			doubt = err
		}
	}
	stamp, n := longestStamp(nil, front)
	if slices.ContainsFunc(front[n:], looseWord.isNumber) {
		return nil, nil
	}
	if n > 0 {
		out = append([]pair{{key: stampKey, value: stamp}}, out...)
	}
	return out, doubt
}

// word takes a word, quoted or not, off a line: a name ends at the sign too.
func (k *keyed) word(b []byte, name bool) (word, rest []byte) {
	if len(b) > 1 && b[0] == '"' {
		if n := closingQuote(b[1:]); n >= 0 {
			return unescaped(b[1 : n+1]), b[n+2:]
		}
	}
	n := wordEnd(b)
	if i := bytes.IndexByte(b[:n], k.sign); name && i > 0 && isKey(b[0]) {
		n = i
	} else if name && bytes.Count(b[:n], []byte{':'}) == 2 { // the seconds of a stamp may have a decimal comma
		if m := numberEnd(b, n); m == len(b) || b[m] == ' ' {
			n = m
		}
	}
	return b[:n], b[n:]
}

func isKey(c byte) bool { return isLetter(c) || c == '_' || c == '"' || c >= 0x80 }

// value takes the value behind the sign off a line; a blank and another pair
// behind the sign leave it empty.
func (k *keyed) value(b []byte) (value, rest []byte) {
	next := bytes.TrimLeft(b, " ")
	if k.sign == '=' && len(next) < len(b) && len(next) > 0 && isKey(next[0]) {
		if _, after := k.word(next, true); len(after) > 0 && after[0] == k.sign {
			return nil, next
		}
	}
	if value, rest = k.word(next, false); len(next) > 0 && next[0] == '"' {
		return value, rest
	}
	n := numberEnd(next, len(value))
	return next[:n], next[n:]
}
