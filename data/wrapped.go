package data

import (
	"bytes"
	"slices"
)

// Some exports quote each row as a whole, because a spreadsheet held it in one
// cell: "0,1.5,24.1", with quotes inside doubled.

// unwrapLine returns the row inside a line that is one quoted cell, in the
// memory of the line; any other line comes back as it is. Delimiters behind the
// quote are the blank cells beside the one cell.
func unwrapLine(line []byte) []byte {
	text := bytes.TrimLeft(bytes.TrimPrefix(line, []byte("\xEF\xBB\xBF")), " ")
	text = bytes.TrimRight(text, " \t\r,;|")
	if len(text) < 2 || text[0] != '"' || quotedLength(text, 0) != len(text) {
		return line
	}
	text = text[1 : len(text)-1]
	out := text[:0]
	for i := 0; i < len(text); i++ {
		out = append(out, text[i])
		if text[i] == '"' { // the first of two
			i++
		}
	}
	return out
}

// Other exports put each row into brackets, as a program prints a list:
// [0, 1.5, 24.1] or (0, 1.5, 24.1), or into single quotes, the row as a whole or
// each of its cells.

// unwrappers rewrite such lines; any other line comes back as it is.
var unwrappers = []func(line []byte) []byte{unwrapLine, unwrapSingle, unwrapCells, unwrapBrackets}

// findWrapping is the rewrite that fits most lines, nil where none does.
func findWrapping(lines []line) func(line []byte) []byte {
	wrapped := slices.DeleteFunc(slices.Clone(lines), func(l line) bool {
		text := bytes.TrimLeft(bytes.TrimPrefix(l.text, []byte("\xEF\xBB\xBF")), " \t")
		return len(text) == 0 || bytes.IndexByte([]byte(`"'[(`), text[0]) < 0
	})
	if 2*len(wrapped) <= len(lines) {
		return nil
	}
	for _, unwrap := range unwrappers {
		n := 0
		for _, l := range wrapped {
			row := unwrap(bytes.Clone(l.text))
			if !bytes.Equal(row, l.text) && bytes.ContainsAny(row, ",;\t|") {
				n++
			}
		}
		if 2*n > len(lines) {
			return unwrap
		}
	}
	return nil
}

// unwrapBrackets takes the brackets off a row, and the comma behind them.
func unwrapBrackets(line []byte) []byte {
	text := bytes.Trim(line, " \t\r,;")
	n := len(text)
	if n < 2 || !(text[0] == '[' && text[n-1] == ']' || text[0] == '(' && text[n-1] == ')') || bytes.ContainsAny(text[1:n-1], "[]()") {
		return line
	}
	return bytes.TrimRight(text[1:n-1], " ,")
}

// unwrapSingle takes single quotes off around a row that holds no others.
func unwrapSingle(line []byte) []byte {
	text := bytes.Trim(line, " \t\r")
	n := len(text)
	if n < 2 || text[0] != '\'' || text[n-1] != '\'' || bytes.IndexByte(text[1:n-1], '\'') >= 0 {
		return line
	}
	return text[1 : n-1]
}

// unwrapCells puts double quotes in place of single ones where every cell of a
// row has them, and some holds a comma.
func unwrapCells(line []byte) []byte {
	text := bytes.Trim(line, " \t\r")
	n := len(text)
	if n < 3 || text[0] != '\'' || text[n-1] != '\'' || bytes.IndexByte(text, '"') >= 0 || bytes.Count(text, []byte{'\''})%2 != 0 {
		return line
	}
	inside, comma := false, false
	for _, c := range text {
		switch {
		case c == '\'':
			inside = !inside
		case inside:
			comma = comma || c == ','
		case c != ',' && c != ';' && c != '\t' && c != '|' && c != ' ':
			return line
		}
	}
	if !comma {
		return line
	}
	return bytes.ReplaceAll(text, []byte{'\''}, []byte{'"'})
}
