// Package sketch draws small plots on a terminal, in braille characters: two
// by four dots to a cell.
package sketch

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"lagwright/cmd/lagwright/internal/format"
)

// Series is a line over time. NaN breaks it.
type Series struct {
	T, Y []float64
	Hold bool   // the value holds until the next row: draw steps
	Ink  string // ANSI colour such as "36", used where colour is wanted
}

// Panel is one plot; panels beneath each other share the time axis.
type Panel struct {
	Title  string
	Height int // rows of text
	Series []Series
}

// margin holds the numbers of the vertical axis.
const margin = 9

// Draw writes the panels, width columns wide, with the time axis in s below.
func Draw(w io.Writer, width int, colour bool, panels ...Panel) error {
	b := bufio.NewWriter(w)
	from, to := timeSpan(panels)
	cells := width - margin - 1
	if cells < 10 || !(from < to) {
		return nil // nothing that could be seen
	}
	for _, p := range panels {
		g := newGrid(cells, p.Height, from, to, p.Series)
		fmt.Fprintf(b, "%*s %s\n", margin, "", p.Title)
		for row := range p.Height {
			fmt.Fprintf(b, "%*s %s\n", margin, g.label(row), g.text(row, colour))
		}
	}
	left, right := format.Duration(from), format.Duration(to)
	gap := max(cells-utf8.RuneCountInString(left)-utf8.RuneCountInString(right), 1)
	fmt.Fprintf(b, "%*s %s%s%s\n", margin, "", left, strings.Repeat(" ", gap), right)
	return b.Flush()
}

func timeSpan(panels []Panel) (from, to float64) {
	from, to = math.Inf(1), math.Inf(-1)
	for _, p := range panels {
		for _, s := range p.Series {
			if len(s.T) > 0 {
				from, to = min(from, s.T[0]), max(to, s.T[len(s.T)-1])
			}
		}
	}
	return from, to
}

// grid is the dots of one panel.
type grid struct {
	cells, rows        int
	from, to, low, top float64
	dots               [][]uint8  // by row and cell: the braille bits
	ink                [][]string // of the series drawn last
}

func newGrid(cells, rows int, from, to float64, series []Series) *grid {
	g := &grid{cells: cells, rows: rows, from: from, to: to}
	g.low, g.top = valueSpan(series)
	for range rows {
		g.dots = append(g.dots, make([]uint8, cells))
		g.ink = append(g.ink, make([]string, cells))
	}
	for _, s := range series {
		g.draw(s)
	}
	return g
}

// valueSpan is the range of all values; of a constant, one around it.
func valueSpan(series []Series) (low, top float64) {
	low, top = math.Inf(1), math.Inf(-1)
	for _, s := range series {
		for _, y := range s.Y {
			if !math.IsNaN(y) {
				low, top = min(low, y), max(top, y)
			}
		}
	}
	switch {
	case low > top:
		return 0, 1
	case low == top:
		return low - 0.5, top + 0.5
	}
	return low, top
}

func (g *grid) draw(s Series) {
	for i := range s.Y {
		if math.IsNaN(s.Y[i]) {
			continue
		}
		x, y := g.column(s.T[i]), g.line(s.Y[i])
		if i == 0 || math.IsNaN(s.Y[i-1]) {
			g.dot(x, y, s.Ink)
			continue
		}
		x0, y0 := g.column(s.T[i-1]), g.line(s.Y[i-1])
		if s.Hold {
			g.stroke(x0, y0, x, y0, s.Ink)
			x0 = x
		}
		g.stroke(x0, y0, x, y, s.Ink)
	}
}

// column and line bring time and value to dots, from the left and the top.
func (g *grid) column(t float64) int {
	return int(math.Round((t - g.from) / (g.to - g.from) * float64(2*g.cells-1)))
}

func (g *grid) line(y float64) int {
	return int(math.Round((g.top - y) / (g.top - g.low) * float64(4*g.rows-1)))
}

// stroke draws a straight line of dots.
func (g *grid) stroke(x0, y0, x1, y1 int, ink string) {
	n := max(abs(x1-x0), abs(y1-y0), 1)
	for i := range n + 1 {
		f := float64(i) / float64(n)
		g.dot(x0+int(math.Round(f*float64(x1-x0))), y0+int(math.Round(f*float64(y1-y0))), ink)
	}
}

// bits of the braille cell (Unicode block U+2800), by line and column.
var bits = [4][2]uint8{{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}}

func (g *grid) dot(x, y int, ink string) {
	if x < 0 || y < 0 || x >= 2*g.cells || y >= 4*g.rows {
		return
	}
	g.dots[y/4][x/2] |= bits[y%4][x%2]
	g.ink[y/4][x/2] = ink
}

// label is the number beside the first and the last row.
func (g *grid) label(row int) string {
	switch row {
	case 0:
		return format.Short(g.top, 4)
	case g.rows - 1:
		return format.Short(g.low, 4)
	}
	return ""
}

func (g *grid) text(row int, colour bool) string {
	var b strings.Builder
	now := ""
	for i, bits := range g.dots[row] {
		if ink := g.ink[row][i]; colour && ink != now {
			b.WriteString("\x1b[" + ink + "m") // an empty code ends colour
			now = ink
		}
		if bits == 0 {
			b.WriteByte(' ')
		} else {
			b.WriteRune(rune(0x2800 + int(bits)))
		}
	}
	if now != "" {
		b.WriteString("\x1b[m")
	}
	return strings.TrimRight(b.String(), " ")
}

func abs(n int) int { return max(n, -n) }
