package format

import (
	"fmt"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Text makes text from a file safe to show on one line: control characters,
// marks that turn the writing direction, invisible characters and bytes that
// are not UTF-8 become visible escapes such as \x1b and \u202e. Joiners that
// some scripts need between letters stay.
func Text(s string) string {
	if plain(s) {
		return s
	}
	var b strings.Builder
	for i, r := range s {
		switch {
		case r == utf8.RuneError && invalidAt(s, i):
			fmt.Fprintf(&b, `\x%02x`, s[i])
		case !hidden(r):
			b.WriteRune(r)
		case r == '\n':
			b.WriteString(`\n`)
		case r == '\t':
			b.WriteString(`\t`)
		case r < 0x80:
			fmt.Fprintf(&b, `\x%02x`, r)
		case r <= 0xffff:
			fmt.Fprintf(&b, `\u%04x`, r)
		default:
			fmt.Fprintf(&b, `\U%08x`, r)
		}
	}
	return b.String()
}

// Clip shortens text to at most n runes, the last one then being "…".
func Clip(s string, n int) string {
	if utf8.RuneCountInString(s) <= n {
		return s
	}
	r := []rune(s)
	return string(r[:n-1]) + "…"
}

func plain(s string) bool {
	return utf8.ValidString(s) && strings.IndexFunc(s, hidden) < 0
}

func invalidAt(s string, i int) bool {
	_, size := utf8.DecodeRuneInString(s[i:])
	return size == 1
}

// hidden tells a rune that is not seen but acts: controls (Cc), format
// characters (Cf) but for the two joiners, line and paragraph separators.
func hidden(r rune) bool {
	const nonJoiner, joiner = 0x200c, 0x200d
	if r == nonJoiner || r == joiner {
		return false
	}
	return unicode.In(r, unicode.Cc, unicode.Cf, unicode.Zl, unicode.Zp)
}
