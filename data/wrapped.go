package data

import "bytes"

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

// areWrapped tells that most lines are one quoted cell that holds a delimiter:
// a remark in quotes among other lines is none.
func areWrapped(lines []line) bool {
	n := 0
	for _, l := range lines {
		if bytes.IndexByte(l.text, '"') < 0 {
			continue
		}
		row := unwrapLine(bytes.Clone(l.text))
		if len(row) < len(l.text) && bytes.ContainsAny(row, ",;\t|") {
			n++
		}
	}
	return 2*n > len(lines)
}
