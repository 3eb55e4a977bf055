package data

import (
	"bytes"
	"slices"
	"unicode/utf8"
)

// between are the words that languages put between the parts of a stamp: 14 de
// marzo de 2026, 14. März 2026 um 10:22, March 14, 2026 at 10:22.
var between = []string{" de ", " del ", " a las ", " um ", " à ", " às ", " at ", " alle ", " alle ore ", " ore ", " om ", " kl. ", " kl ", " klo "}

// withoutWords takes such words out of a stamp, and what makes an ordinal of a
// day (14th, 1er), and puts AM or PM that stands in front of the time behind it.
func withoutWords(b []byte) []byte {
	if !slices.ContainsFunc(b, isLetter) || bytes.IndexByte(b, ' ') < 0 {
		return b
	}
	if !utf8.Valid(b) {
		b = []byte(decodeName(b))
	}
	for _, w := range between {
		b = bytes.ReplaceAll(b, []byte(w), []byte{' '})
	}
	b = withoutOrdinal(b)
	for _, half := range []string{" AM ", " PM ", " am ", " pm "} {
		if date, tod, ok := bytes.Cut(b, []byte(half)); ok && len(tod) > 0 && tod[0]-'0' <= 9 {
			return slices.Concat(date, []byte{' '}, tod, []byte(half[:3]))
		}
	}
	return b
}

// withoutRemark takes the name of a zone in brackets off the end of a stamp, as
// browsers print it; an offset in them stays.
func withoutRemark(b []byte) []byte {
	i := bytes.LastIndex(b, []byte(" ("))
	if i < 0 || b[len(b)-1] != ')' {
		return b
	}
	inside := b[i+2 : len(b)-1]
	if _, ok := zoneOffset(inside); ok {
		return slices.Concat(b[:i+1], inside)
	}
	if len(inside) == 0 || !isLetter(inside[0]) {
		return b
	}
	return b[:i]
}

// withoutOrdinal takes the letters off behind a day of one or two digits.
func withoutOrdinal(b []byte) []byte {
	for _, letters := range []string{"st", "nd", "rd", "th", "er"} {
		i := bytes.Index(b, []byte(letters))
		if i < 1 || b[i-1]-'0' > 9 || i > 2 && b[i-2]-'0' <= 9 && b[i-3]-'0' <= 9 {
			continue
		}
		if rest := b[i+len(letters):]; len(rest) > 0 && (rest[0] == ' ' || rest[0] == ',') {
			return slices.Concat(b[:i], rest)
		}
	}
	return b
}

// fromHours rewrites a time of day with letters for its marks behind a date or
// by itself: 10h22m31s, 10h22:31, 10h22.
func fromHours(b []byte) ([]byte, bool) {
	at := bytes.LastIndexByte(b, ' ') + 1
	tod := b[at:]
	n := bytes.IndexByte(tod, 'h')
	if at == 0 || n < 1 || n > 2 || len(tod) < n+3 || !isPairOf(tod, n+1) {
		return nil, false
	}
	out := slices.Concat(b[:at], tod[:n], []byte{':'}, tod[n+1:n+3])
	rest := bytes.TrimPrefix(bytes.TrimPrefix(tod[n+3:], []byte("m")), []byte("in"))
	if len(rest) == 0 {
		return out, true
	}
	rest = bytes.TrimSuffix(bytes.TrimPrefix(rest, []byte(":")), []byte("s"))
	if len(rest) < 2 || !isPairOf(rest, 0) {
		return nil, false
	}
	return slices.Concat(out, []byte{':'}, rest), true
}
