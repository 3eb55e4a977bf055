package fit

import (
	"io"
	"strings"
	"unicode/utf8"
)

// pageWidth is the width of text for a terminal, in columns.
const pageWidth = 80

// page collects text for a terminal: headings, paragraphs broken at the width,
// and tables.
type page struct{ b strings.Builder }

func (p *page) heading(s string) {
	if p.b.Len() > 0 {
		p.b.WriteString("\n")
	}
	p.b.WriteString(s + "\n")
}

// paragraph writes words broken at the width: mark before the first line, as
// many blanks before the others.
func (p *page) paragraph(mark, text string) {
	indent := strings.Repeat(" ", utf8.RuneCountInString(mark))
	line := mark
	length := utf8.RuneCountInString(mark)
	empty := true
	for _, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		if !empty && length+1+n > pageWidth {
			p.b.WriteString(strings.TrimRight(line, " ") + "\n")
			line, length, empty = indent, len(indent), true
		}
		if !empty {
			line += " "
			length++
		}
		line += word
		length += n
		empty = false
	}
	p.b.WriteString(strings.TrimRight(line, " ") + "\n")
}

// table writes rows of cells, two blanks between columns; columns in right are
// set to the right.
func (p *page) table(indent string, rows [][]string, right ...int) {
	var width []int
	for _, r := range rows {
		for i, c := range r {
			if i == len(width) {
				width = append(width, 0)
			}
			width[i] = max(width[i], utf8.RuneCountInString(c))
		}
	}
	toRight := map[int]bool{}
	for _, i := range right {
		toRight[i] = true
	}
	for _, r := range rows {
		line := indent
		for i, c := range r {
			pad := strings.Repeat(" ", width[i]-utf8.RuneCountInString(c))
			if toRight[i] {
				line += pad + c
			} else {
				line += c + pad
			}
			line += "  "
		}
		p.b.WriteString(strings.TrimRight(line, " ") + "\n")
	}
}

func (p *page) writeTo(w io.Writer) error {
	_, err := io.WriteString(w, p.b.String())
	return err
}

// alignPoints pads numbers with blanks so that their decimal points stand
// under each other.
func alignPoints(numbers []string) {
	before := func(s string) int {
		if i := strings.IndexAny(s, ".e"); i >= 0 {
			return i
		}
		return len(s)
	}
	most := 0
	for _, s := range numbers {
		most = max(most, before(s))
	}
	for i, s := range numbers {
		numbers[i] = strings.Repeat(" ", most-before(s)) + s
	}
}
