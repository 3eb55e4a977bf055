package report

import (
	"strings"
	"unicode"
	"unicode/utf8"

	"lagwright/cmd/lagwright/internal/format"
)

// parameterName is a parameter's name as people say it: "dead_time" is "Dead time".
func parameterName(name string) string {
	s := strings.ReplaceAll(format.Text(name), "_", " ")
	if rest, ok := strings.CutPrefix(s, "lag"); ok && rest != "" && rest[0] >= '0' && rest[0] <= '9' {
		s = "lag " + rest
	}
	return sentenceCase(s)
}

// sentenceCase begins a text with a capital, unless its first word is a name
// such as that of a file.
func sentenceCase(s string) string {
	word, _, _ := strings.Cut(s, " ")
	if strings.ContainsFunc(word, func(r rune) bool { return !unicode.IsLetter(r) && r != ',' && r != ':' }) {
		return s
	}
	r, size := utf8.DecodeRuneInString(s)
	if size == 0 {
		return s
	}
	return string(unicode.ToUpper(r)) + s[size:]
}
