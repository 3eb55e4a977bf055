package report

import (
	"fmt"
	"html"
	"math"
	"strings"

	"gonum.org/v1/plot/vg"

	"lagwright/cmd/lagwright/internal/format"
)

// Figure is a drawing that knows no size and no file format yet: panels that
// stand below each other, or side by side where there is room.
type Figure struct {
	Name    string // stem of a file name: "log", "step-response"
	Finding string // what the figure shows, one sentence
	Alt     string // what someone who cannot see it should know

	panels  []*panel
	columns int // panels side by side on a wide drawing; 0 means 1
}

// panel is one pair of axes with its marks. Panels of a stack that share x
// are labelled once, at the lowest.
type panel struct {
	heading string // "" means the vertical axis's title
	x       *axis
	y       axis
	height  vg.Length // of the plotting area
	marks   []mark
}

// mark is something drawn between axes.
type mark interface {
	extent() box     // in data coordinates
	draw(p *pane)    // inside the pane, clipped
	key() []keyEntry // what the key says of it, if anything
}

// box is a range in data coordinates. Infinite sides ask for nothing.
type box struct{ x0, x1, y0, y1 float64 }

var nowhere = box{math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)}

func (b box) join(o box) box {
	return box{math.Min(b.x0, o.x0), math.Max(b.x1, o.x1), math.Min(b.y0, o.y0), math.Max(b.y1, o.y1)}
}

// Layout, in points.
const (
	wideWidth   = 720
	narrowWidth = 350

	gapPanels  = 14 // between panels
	lineHeight = 17 // of heading and key
	tickGap    = 6  // between an axis and its labels
	sampleWide = 18 // of a sample in the key
	marginSide = 10
)

// pane is a panel being drawn: its rectangle and what brings data to it.
type pane struct {
	*painter
	rect vg.Rectangle
	x, y *axis
	side []vg.Rectangle // where labels stand beside upright lines
}

func (p *pane) px(v float64) vg.Length {
	return p.rect.Min.X + vg.Length(p.x.norm(v))*(p.rect.Max.X-p.rect.Min.X)
}

func (p *pane) py(v float64) vg.Length {
	return p.rect.Min.Y + vg.Length(p.y.norm(v))*(p.rect.Max.Y-p.rect.Min.Y)
}

// scale sets the ranges of all axes from their marks.
func (f *Figure) scale() {
	extents := map[*axis]box{}
	for _, p := range f.panels {
		b := nowhere
		for _, m := range p.marks {
			b = b.join(m.extent())
		}
		p.y.fit(b.y0, b.y1)
		if e, ok := extents[p.x]; ok {
			b = b.join(e)
		}
		extents[p.x] = b
	}
	for x, b := range extents {
		x.fit(b.x0, b.x1)
	}
}

// cells are the panels in rows of the columns a width allows.
func (f *Figure) cells(width vg.Length) (rows [][]*panel, cell vg.Length) {
	columns := max(f.columns, 1)
	if width < 500 {
		columns = 1
	}
	for i := 0; i < len(f.panels); i += columns {
		rows = append(rows, f.panels[i:min(i+columns, len(f.panels))])
	}
	return rows, (width - vg.Length(columns-1)*2*gapPanels) / vg.Length(columns)
}

// height of the figure at a width.
func (f *Figure) height(width vg.Length) vg.Length {
	f.scale()
	rows, cell := f.cells(width)
	var h vg.Length
	for i, row := range rows {
		h += f.rowHeight(row, cell, i == len(rows)-1)
	}
	return h
}

func (f *Figure) rowHeight(row []*panel, cell vg.Length, last bool) vg.Length {
	var h vg.Length
	for _, p := range row {
		_, lines := p.header(cell)
		ph := vg.Length(lines)*lineHeight + p.height + f.footer(p)
		h = max(h, ph)
	}
	if !last {
		h += gapPanels
	}
	return h
}

// footer is the room for labels below a panel: none where the next panel has
// the same horizontal axis.
func (f *Figure) footer(p *panel) vg.Length {
	if f.sharesBelow(p) {
		return 0
	}
	return 2*lineHeight + 2
}

func (f *Figure) sharesBelow(p *panel) bool {
	for i, q := range f.panels[:len(f.panels)-1] {
		if q == p {
			return f.panels[i+1].x == p.x
		}
	}
	return false
}

// draw draws the figure over the whole of a canvas of the size given.
func (f *Figure) draw(t *painter, width, height vg.Length) {
	f.scale()
	rows, cell := f.cells(width)
	top := height
	for i, row := range rows {
		left := f.leftMargin(rows, cell)
		for j, p := range row {
			x := vg.Length(j) * (cell + 2*gapPanels)
			f.drawPanel(t, p, vg.Rectangle{Min: vg.Point{X: x}, Max: vg.Point{X: x + cell, Y: top}}, left)
		}
		top -= f.rowHeight(row, cell, i == len(rows)-1)
	}
}

// leftMargin is the room that the widest label of any vertical axis takes.
func (f *Figure) leftMargin(rows [][]*panel, cell vg.Length) vg.Length {
	var w vg.Length
	for _, row := range rows {
		for _, p := range row {
			for _, m := range p.y.marks(p.yTicks()) {
				w = max(w, tickLetters.room(m.label))
			}
		}
	}
	return min(w+tickGap, cell/2)
}

func (p *panel) yTicks() int { return max(3, int(p.height/32)) }

func (f *Figure) drawPanel(t *painter, p *panel, cell vg.Rectangle, left vg.Length) {
	keys, lines := p.header(cell.Max.X - cell.Min.X)
	top := cell.Max.Y - vg.Length(lines)*lineHeight
	rect := vg.Rectangle{
		Min: vg.Point{X: cell.Min.X + left, Y: top - p.height},
		Max: vg.Point{X: cell.Max.X - marginSide, Y: top},
	}
	pn := &pane{painter: t, rect: rect, x: p.x, y: &p.y}
	t.text(headingLetters, p.title(), vg.Point{X: cell.Min.X, Y: cell.Max.Y - 11}, alignLeft)
	for _, k := range keys {
		t.keySample(k.keyEntry, vg.Point{X: cell.Min.X + k.x, Y: cell.Max.Y - vg.Length(k.line)*lineHeight - 11})
	}
	pn.open(p)
	pn.grid(p, !f.sharesBelow(p))
	for _, m := range p.marks {
		m.draw(pn)
	}
	t.close()
}

func (p *panel) title() string {
	if p.heading != "" {
		return p.heading
	}
	return p.y.title()
}

// grid draws rules at the ticks, their labels and, below the lowest panel of a
// stack, the labels and the title of the horizontal axis.
func (p *pane) grid(of *panel, below bool) {
	line := stroke{ink: inkGrid, width: 1}
	for _, m := range p.y.marks(of.yTicks()) {
		if n := p.y.norm(m.at); n < -1e-9 || n > 1+1e-9 {
			continue
		}
		y := p.py(m.at)
		p.line(line, vg.Point{X: p.rect.Min.X, Y: y}, vg.Point{X: p.rect.Max.X, Y: y})
		p.text(tickLetters, m.label, vg.Point{X: p.rect.Min.X - tickGap, Y: y - 4}, alignRight)
	}
	width := p.rect.Max.X - p.rect.Min.X
	ticks := p.x.marks(max(2, int(width/66)))
	for _, m := range ticks {
		x := p.px(m.at)
		p.line(line, vg.Point{X: x, Y: p.rect.Min.Y}, vg.Point{X: x, Y: p.rect.Max.Y})
	}
	base := stroke{ink: inkMuted, width: 1}
	p.line(base, p.rect.Min, vg.Point{X: p.rect.Max.X, Y: p.rect.Min.Y})
	if !below {
		return
	}
	for _, m := range ticks {
		p.tickBelow(m)
	}
	p.text(tickLetters, p.x.title(), vg.Point{X: p.rect.Min.X, Y: p.rect.Min.Y - 2*lineHeight + 3}, alignLeft)
}

// tickBelow writes a label under its tick, inside the drawing.
func (p *pane) tickBelow(m tick) {
	x, half := p.px(m.at), tickLetters.room(m.label)/2
	x = min(x, p.rect.Max.X+marginSide-half)
	p.text(tickLetters, m.label, vg.Point{X: x, Y: p.rect.Min.Y - lineHeight + 3}, alignMiddle)
}

// open starts the panel's group, which tells the read-out its scales.
func (p *pane) open(of *panel) {
	if p.svg == nil {
		return
	}
	x0, y0 := p.svg.place(vg.Point{X: p.rect.Min.X, Y: p.rect.Max.Y})
	x1, y1 := p.svg.place(vg.Point{X: p.rect.Max.X, Y: p.rect.Min.Y})
	attrs := fmt.Sprintf(`class="panel" data-box="%s %s %s %s" data-x="%g %g" data-y="%g %g" data-yu="%s"`,
		decimal(x0), decimal(y0), decimal(x1), decimal(y1), p.x.min, p.x.max, p.y.min, p.y.max,
		html.EscapeString(format.Unit(of.y.unit)))
	attrs += fmt.Sprintf(` data-xl="%s"`, html.EscapeString(p.x.readout()))
	if p.x.log {
		attrs += ` data-xlog="1"`
	}
	if p.y.log {
		attrs += ` data-ylog="1"`
	}
	p.svg.open(attrs)
}

// readout says how the read-out writes a horizontal place: "clock 3600" for
// a clock that shows one o'clock at zero, else the unit's factor and name.
func (a *axis) readout() string {
	if a.clock != nil {
		end := a.clock.Add(seconds(a.max))
		_, o1 := a.clock.Zone()
		_, o2 := end.Zone()
		if o1 == o2 {
			s := a.clock.Hour()*3600 + a.clock.Minute()*60 + a.clock.Second()
			return fmt.Sprintf("clock %g", float64(s)+float64(a.clock.Nanosecond())/1e9)
		}
	}
	for _, u := range timeUnits {
		if a.unit == u.name {
			return fmt.Sprintf("%g %s", u.seconds, u.name)
		}
	}
	return strings.TrimSpace("1 " + format.Unit(a.unit))
}
