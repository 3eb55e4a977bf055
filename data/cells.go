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
	i := bytes.IndexByte(line, delim)
	if i < 0 {
		return trimBlanks(line), nil, false
	}
	return trimBlanks(line[:i]), line[i+1:], true
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
			return append(dst, line)
		}
		dst = append(dst, line[:n])
		line = line[n:]
	}
}

func unquote(b []byte) []byte {
	b = b[1 : len(b)-1]
	if bytes.Contains(b, []byte(`""`)) {
		b = bytes.ReplaceAll(b, []byte(`""`), []byte(`"`))
	}
	return trimBlanks(b)
}
