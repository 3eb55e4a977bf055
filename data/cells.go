package data

import "bytes"

// splitCells appends the cells of a line to dst: between delimiters, or
// between runs of blanks when delim is a space. Blanks around a cell and
// quotes around it are taken away.
func splitCells(dst [][]byte, line []byte, delim byte) [][]byte {
	if delim == ' ' {
		return splitBlanks(dst, line)
	}
	for {
		cell, rest, more := cutCell(line, delim)
		dst = append(dst, cell)
		if !more {
			return dst
		}
		line = rest
	}
}

// cutCell takes the first cell off a line; more tells that a delimiter
// followed it.
func cutCell(line []byte, delim byte) (cell, rest []byte, more bool) {
	trimmed := bytes.TrimLeft(line, " ")
	if len(trimmed) > 0 && trimmed[0] == '"' {
		if n := quotedLength(trimmed, delim); n > 0 {
			cell = unquote(trimmed[:n])
			rest = bytes.TrimLeft(trimmed[n:], " \r")
			if len(rest) > 0 && rest[0] == delim {
				return cell, rest[1:], true
			}
			return cell, nil, false
		}
	}
	from := protectedLength(trimmed, delim)
	if from > 0 {
		line = trimmed
	}
	i := bytes.IndexByte(line[from:], delim)
	if i < 0 {
		return unprotect(trimBlanks(line)), nil, false
	}
	return unprotect(trimBlanks(line[:from+i])), line[from+i+1:], true
}

func splitBlanks(dst [][]byte, line []byte) [][]byte {
	for {
		line = bytes.TrimLeft(line, " \t")
		if len(line) == 0 {
			return dst
		}
		n := bytes.IndexAny(line, " \t")
		if line[0] == '"' {
			if q := quotedLength(line, ' '); q > 0 {
				dst = append(dst, unquote(line[:q]))
				line = line[q:]
				continue
			}
		}
		if n < 0 {
			return append(dst, unprotect(line))
		}
		dst = append(dst, unprotect(line[:n]))
		line = line[n:]
	}
}

func unquote(b []byte) []byte {
	b = b[1 : len(b)-1]
	if bytes.Contains(b, []byte(`""`)) {
		b = bytes.ReplaceAll(b, []byte(`""`), []byte(`"`))
	}
	return unprotect(trimBlanks(b))
}

// protectedLength is the length of ="…" at the start of b, 0 when b begins
// with anything else: a delimiter may stand inside.
func protectedLength(b []byte, delim byte) int {
	if len(b) < 3 || b[0] != '=' || b[1] != '"' {
		return 0
	}
	return 1 + max(quotedLength(b[1:], delim), 0)
}

// unprotect takes away what keeps a spreadsheet from turning a cell into
// something else (="007", '1.5) and quotes of one stroke ('1.5').
func unprotect(cell []byte) []byte {
	if len(cell) < 2 || cell[0] != '=' && cell[0] != '\'' {
		return cell
	}
	last := cell[len(cell)-1]
	switch inside := cell[1:]; {
	case cell[0] == '\'' && last == '\'':
		return trimBlanks(inside[:len(inside)-1])
	case cell[0] == '\'':
		return trimBlanks(inside)
	case len(inside) > 1 && inside[0] == '"' && last == '"':
		return trimBlanks(inside[1 : len(inside)-1])
	case inside[0]-'0' <= 9 || bytes.IndexByte([]byte("+-."), inside[0]) >= 0:
		return inside
	}
	return cell
}
