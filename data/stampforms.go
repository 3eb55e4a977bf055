package data

import (
	"bytes"
	"slices"
)

// plainStamp rewrites a stamp of a less usual form in the usual characters:
// brackets around it, the prefix of a literal of IEC 61131-3 (DT#, from
// memory), signs for year, month and day in place of marks, the half of the
// day in front of the time, words between and behind, a week or a day of the
// year. It returns b itself when there is nothing to rewrite.
func plainStamp(b []byte) []byte {
	if n := len(b); n > 2 && (b[0] == '[' && b[n-1] == ']' || b[0] == '<' && b[n-1] == '>' || b[0] == '(' && b[n-1] == ')') {
		b = trimBlanks(b[1 : n-1])
	}
	b = withoutLiteral(b)
	b = bytes.TrimSuffix(b, []byte(" Uhr"))
	if slices.ContainsFunc(b, func(c byte) bool { return c >= 0x80 }) {
		b = withoutSigns(bytes.Map(func(r rune) rune {
			if isInvisible(r) {
				return -1
			}
			return r
		}, []byte(decodeName(b))))
	}
	b = withoutWords(withoutRemark(b))
	for _, read := range []func([]byte) ([]byte, bool){fromWeek, fromDayOfYear, fromHours} {
		if plain, ok := read(b); ok {
			return plain
		}
	}
	return dashedTime(b)
}

// literals are the prefixes of dates and times in IEC 61131-3.
var literals = []string{"DATE_AND_TIME#", "LDATE_AND_TIME#", "DT#", "LDT#", "DTL#", "D#", "DATE#", "TOD#", "LTOD#", "TIME_OF_DAY#"}

func withoutLiteral(b []byte) []byte {
	i := bytes.IndexByte(b, '#')
	if i < 1 || i > 15 || !slices.Contains(literals, string(bytes.ToUpper(b[:i+1]))) {
		return b
	}
	return b[i+1:]
}

// signs are what Chinese, Japanese and Korean dates have in place of marks.
var signs = []struct{ from, to string }{
	{"年", "-"}, {"月", "-"}, {"日", " "}, {"년 ", "-"}, {"월 ", "-"}, {"년", "-"}, {"월", "-"}, {"일", " "},
	{"时", ":"}, {"時", ":"}, {"分", ":"}, {"秒", ""},
}

// halves are the words for AM and PM that stand in front of the time.
var halves = []struct{ word, mark string }{
	{"上午", "AM"}, {"下午", "PM"}, {"午前", "AM"}, {"午後", "PM"}, {"오전", "AM"}, {"오후", "PM"},
}

func withoutSigns(b []byte) []byte {
	for _, s := range signs {
		b = bytes.ReplaceAll(b, []byte(s.from), []byte(s.to))
	}
	for _, h := range halves {
		if before, after, ok := bytes.Cut(b, []byte(h.word)); ok {
			b = slices.Concat(bytes.TrimRight(before, " "), []byte{' '}, trimBlanks(after), []byte{' '}, []byte(h.mark))
		}
	}
	return trimBlanks(b)
}

// dashedTime rewrites the time of day behind a date of ten characters, or of
// eight digits, that is set apart by a dash or has dashes or points in place of
// colons: 2026-12-01-20-20-05.250, 01/12/2026 20.20.05, 20261201-202005. Behind
// a blank the date may be shorter: 1.12.2026 20.20.05.
func dashedTime(b []byte) []byte {
	n := 10
	if _, _, _, w := basicDate(b[:min(8, len(b))]); w == 8 {
		n = 8
	} else if i := bytes.IndexByte(b, ' '); i == 8 || i == 9 {
		n = i
	}
	if len(b) < n+5 || b[n] != '-' && !isStampGap(b[n]) {
		return b
	}
	tod := b[n+1:]
	if len(tod) < 8 || !isPairOf(tod, 0) || !isPairOf(tod, 3) || !isPairOf(tod, 6) || tod[2] != tod[5] || tod[2] != '-' && tod[2] != '.' {
		if b[n] != '-' {
			return b
		}
		return slices.Concat(b[:n], []byte{' '}, tod)
	}
	return slices.Concat(b[:n], []byte{' '}, tod[:2], []byte{':'}, tod[3:5], []byte{':'}, tod[6:])
}

func isPairOf(b []byte, i int) bool { return b[i]-'0' <= 9 && b[i+1]-'0' <= 9 }
