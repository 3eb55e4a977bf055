package main

import (
	"strings"
	"unicode/utf8"
)

// columns is the width of text, on a terminal and in a pipe alike.
const columns = 80

// wrapLine breaks a line of prose that is too wide; what follows is indented
// two columns further. A line of a table, with blanks between columns, stays.
func wrapLine(line string, width int) []string {
	text := strings.TrimLeft(line, " ")
	if utf8.RuneCountInString(line) <= width || strings.Contains(text, "  ") {
		return []string{line}
	}
	indent := line[:len(line)-len(text)]
	broken := wrap(text, width-len(indent)-2)
	for i := range broken {
		if i > 0 {
			broken[i] = "  " + broken[i]
		}
		broken[i] = indent + broken[i]
	}
	return broken
}

// wrap breaks text at blanks into lines of at most width characters; a longer
// word gets a line of its own.
func wrap(text string, width int) []string {
	var lines []string
	line := ""
	for word := range strings.FieldsSeq(text) {
		if line != "" && utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) > width {
			lines = append(lines, line)
			line = ""
		}
		if line != "" {
			line += " "
		}
		line += word
	}
	return append(lines, line)
}
