package report

import (
	"html"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
)

// trace is a line through samples, broken where one is missing.
type trace struct {
	name  string
	x, y  []float64
	ink   ink
	width vg.Length // 0 means 1.5
	dash  bool
	hold  bool // each value holds until the next sample
}

func (m trace) extent() box { return extentOf(m.x, m.y) }

func (m trace) key() []keyEntry {
	s := sampleLine
	if m.dash {
		s = sampleDash
	}
	return []keyEntry{{m.name, m.ink, s}}
}

func (m trace) draw(p *pane) {
	s := stroke{ink: m.ink, width: m.width}
	if s.width == 0 {
		s.width = 1.5
	}
	if m.dash {
		s.dash = dashes
	}
	whole := pieces(len(m.y), func(i int) bool { return finite(m.x[i]) && finite(m.y[i]) })
	for _, w := range whole {
		x, y := thin(m.x[w[0]:w[1]], m.y[w[0]:w[1]], p.buckets(len(m.y), w))
		for _, l := range p.clip().ClipLinesXY(p.points(x, y, m.hold)) {
			p.curve(s, nameAttr(m.name), l)
		}
	}
}

// buckets is the share of a stretch in the buckets of a whole trace: one for
// every two points of the pane's width.
func (p *pane) buckets(n int, stretch [2]int) int {
	all := float64(p.rect.Max.X-p.rect.Min.X) / 2
	return max(1, int(all*float64(stretch[1]-stretch[0])/float64(n)))
}

func (p *pane) points(x, y []float64, hold bool) []vg.Point {
	pts := make([]vg.Point, 0, len(x))
	for i := range x {
		q := vg.Point{X: p.px(x[i]), Y: p.py(y[i])}
		if hold && i > 0 {
			if q.Y == pts[len(pts)-1].Y && i < len(x)-1 {
				continue // nothing changed
			}
			pts = append(pts, vg.Point{X: q.X, Y: pts[len(pts)-1].Y})
		}
		pts = append(pts, q)
	}
	return pts
}

func nameAttr(name string) string {
	if name == "" {
		return ""
	}
	return `data-name="` + html.EscapeString(name) + `"`
}

// band is the area between two lines over the same x.
type band struct {
	name         string
	x, low, high []float64
	ink          ink
	hold         bool
}

func (m band) extent() box     { return extentOf(m.x, m.low).join(extentOf(m.x, m.high)) }
func (m band) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleBand}} }

func (m band) draw(p *pane) {
	whole := pieces(len(m.x), func(i int) bool { return finite(m.low[i]) && finite(m.high[i]) })
	for _, w := range whole {
		x, low, high := thinBand(m.x[w[0]:w[1]], m.low[w[0]:w[1]], m.high[w[0]:w[1]], p.buckets(len(m.x), w))
		ring := p.points(x, high, m.hold)
		under := p.points(x, low, m.hold)
		for i := len(under) - 1; i >= 0; i-- {
			ring = append(ring, under[i])
		}
		p.area(m.ink.faint(), ring)
	}
}

// area fills a polygon, clipped.
func (p *pane) area(k ink, ring []vg.Point) {
	ring = p.clip().ClipPolygonXY(ring)
	if len(ring) < 3 {
		return
	}
	path := polyline(ring)
	path.Close()
	p.fill(k, path)
}

// rule is a straight line across the pane at a limit or an event.
type rule struct {
	name     string // in the key; "" keeps it out
	label    string // beside the line
	at       float64
	vertical bool
	low      bool // the label stands at the foot of an upright line
	ink      ink
	solid    bool
	loose    bool // the axis does not stretch to show it
}

func (m rule) extent() box {
	if m.vertical || m.loose {
		return nowhere
	}
	return box{nowhere.x0, nowhere.x1, m.at, m.at}
}

func (m rule) key() []keyEntry {
	if m.solid {
		return []keyEntry{{m.name, m.ink, sampleLine}}
	}
	return []keyEntry{{m.name, m.ink, sampleDash}}
}

func (m rule) draw(p *pane) {
	s := stroke{ink: m.ink, width: 1.2, dash: dashes}
	if m.solid {
		s.dash = nil
	}
	letters := noteLetters
	letters.ink = m.ink
	from, to := vg.Point{X: p.rect.Min.X, Y: p.py(m.at)}, vg.Point{X: p.rect.Max.X, Y: p.py(m.at)}
	if m.vertical {
		from, to = vg.Point{X: p.px(m.at), Y: p.rect.Min.Y}, vg.Point{X: p.px(m.at), Y: p.rect.Max.Y}
	}
	if !p.inside(from) {
		return
	}
	p.line(s, from, to)
	if m.vertical && m.low {
		to.Y = from.Y + 18
	}
	if m.vertical {
		p.sideLabel(letters, m.label, to)
		return
	}
	p.text(letters, m.label, vg.Point{X: to.X, Y: p.clearOf(to.Y)}, alignRight)
}

// clearOf is the base of a label beside a level: above, below at the top.
func (p *pane) clearOf(y vg.Length) vg.Length {
	if y+14 > p.rect.Max.Y {
		return y - 12
	}
	return y + 4
}

// sideLabel writes beside the top of an upright line, on the side with room.
// What would run into the label of another line is left out.
func (p *pane) sideLabel(l lettering, s string, top vg.Point) {
	at, align := vg.Point{X: top.X + 4, Y: top.Y - 11}, alignLeft
	if at.X+l.room(s) > p.rect.Max.X {
		at.X, align = top.X-4, alignRight
	}
	from := vg.Point{X: at.X, Y: at.Y}
	if align == alignRight {
		from.X -= l.room(s)
	}
	here := vg.Rectangle{Min: from, Max: vg.Point{X: from.X + l.room(s), Y: at.Y + 11}}
	if s == "" || slices.ContainsFunc(p.side, func(r vg.Rectangle) bool { return overlap(r, here) }) {
		return
	}
	p.side = append(p.side, here)
	p.text(l, s, at, align)
}

func overlap(a, b vg.Rectangle) bool {
	return a.Min.X < b.Max.X && b.Min.X < a.Max.X && a.Min.Y < b.Max.Y && b.Min.Y < a.Max.Y
}

// zone is a shaded region between straight sides; infinite sides run to the
// pane's edge.
type zone struct {
	name string
	box  box
	ink  ink
}

func (m zone) extent() box     { return nowhere }
func (m zone) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleBand}} }

func (m zone) draw(p *pane) {
	x0, x1 := math.Max(m.box.x0, p.x.min), math.Min(m.box.x1, p.x.max)
	y0, y1 := math.Max(m.box.y0, p.y.min), math.Min(m.box.y1, p.y.max)
	if x0 >= x1 || y0 >= y1 {
		return
	}
	p.area(m.ink.fainter(), []vg.Point{
		{X: p.px(x0), Y: p.py(y0)}, {X: p.px(x1), Y: p.py(y0)},
		{X: p.px(x1), Y: p.py(y1)}, {X: p.px(x0), Y: p.py(y1)},
	})
}

// dots are samples on their own. Far more than the pane can show apart are
// drawn thinned.
type dots struct {
	name   string
	x, y   []float64
	ink    ink
	radius vg.Length
	cross  bool
}

func (m dots) extent() box { return extentOf(m.x, m.y) }
func (m dots) key() []keyEntry {
	if m.cross {
		return []keyEntry{{m.name, m.ink, sampleCross}}
	}
	return []keyEntry{{m.name, m.ink, sampleDot}}
}

func (m dots) draw(p *pane) {
	for i := range m.x {
		if !finite(m.x[i]) || !finite(m.y[i]) {
			continue
		}
		at := vg.Point{X: p.px(m.x[i]), Y: p.py(m.y[i])}
		switch {
		case !p.inside(at):
		case m.cross:
			p.cross(stroke{ink: m.ink, width: 1.5}, at, m.radius)
		default:
			p.dot(m.ink, at, m.radius)
		}
	}
}

// stems are upright lines from zero.
type stems struct {
	name string
	x, y []float64
	ink  ink
}

func (m stems) extent() box     { return extentOf(m.x, m.y).join(box{nowhere.x0, nowhere.x1, 0, 0}) }
func (m stems) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleLine}} }

func (m stems) draw(p *pane) {
	for i := range m.x {
		from, to := vg.Point{X: p.px(m.x[i]), Y: p.py(0)}, vg.Point{X: p.px(m.x[i]), Y: p.py(m.y[i])}
		for _, l := range p.clip().ClipLinesXY([]vg.Point{from, to}) {
			p.line(stroke{ink: m.ink, width: 2}, l...)
		}
	}
}

// whisker is an interval with its best value on one row of a pane. An end
// that does not exist is drawn as an arrow to the edge.
type whisker struct {
	name      string
	row       float64
	value     float64
	low, high *float64
	ink       ink
}

func (m whisker) extent() box {
	b := box{m.value, m.value, m.row, m.row}
	for _, v := range []*float64{m.low, m.high} {
		if v != nil {
			b = b.join(box{*v, *v, m.row, m.row})
		}
	}
	return b
}

func (m whisker) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleDot}} }

func (m whisker) draw(p *pane) {
	y := p.py(m.row)
	end := func(v *float64, edge vg.Length, inward vg.Length) vg.Length {
		if v != nil {
			x := p.px(*v)
			p.line(stroke{ink: m.ink, width: 2}, vg.Point{X: x, Y: y - 4}, vg.Point{X: x, Y: y + 4})
			return x
		}
		tip := vg.Point{X: edge, Y: y}
		p.line(stroke{ink: m.ink, width: 2}, tip.Add(vg.Point{X: inward, Y: 4}), tip, tip.Add(vg.Point{X: inward, Y: -4}))
		return edge
	}
	from, to := end(m.low, p.rect.Min.X, 5), end(m.high, p.rect.Max.X, -5)
	p.line(stroke{ink: m.ink, width: 2}, vg.Point{X: from, Y: y}, vg.Point{X: to, Y: y})
	p.dot(m.ink, vg.Point{X: p.px(m.value), Y: y}, 4)
}

func extentOf(x, y []float64) box {
	b := nowhere
	for i := range x {
		if finite(x[i]) && finite(y[i]) {
			b = b.join(box{x[i], x[i], y[i], y[i]})
		}
	}
	return b
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

// polygon is a shaded region with any outline; infinite coordinates run to
// the pane's edge.
type polygon struct {
	name string
	x, y []float64
	ink  ink
}

func (m polygon) extent() box     { return nowhere }
func (m polygon) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleBand}} }

func (m polygon) draw(p *pane) {
	ring := make([]vg.Point, len(m.x))
	for i := range m.x {
		x := math.Min(math.Max(m.x[i], p.x.min), p.x.max)
		y := m.y[i]
		if math.IsInf(y, 0) {
			y = math.Min(math.Max(y, p.y.min), p.y.max)
		}
		ring[i] = vg.Point{X: p.px(x), Y: p.py(y)}
	}
	p.area(m.ink.faint(), ring)
}

// errorBars are values with upright intervals; an end that does not exist
// runs to the pane's edge.
type errorBars struct {
	name      string
	x, y      []float64
	low, high []*float64
	ink       ink
}

func (m errorBars) extent() box {
	b := extentOf(m.x, m.y)
	for i := range m.x {
		for _, v := range []*float64{m.low[i], m.high[i]} {
			if v != nil {
				b = b.join(box{m.x[i], m.x[i], *v, *v})
			}
		}
	}
	return b
}

func (m errorBars) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleDot}} }

func (m errorBars) draw(p *pane) {
	for i := range m.x {
		x := p.px(m.x[i])
		from, to := p.rect.Min.Y, p.rect.Max.Y
		if m.low[i] != nil {
			from = p.py(*m.low[i])
		}
		if m.high[i] != nil {
			to = p.py(*m.high[i])
		}
		p.line(stroke{ink: m.ink, width: 1.5}, vg.Point{X: x, Y: from}, vg.Point{X: x, Y: to})
		p.dot(m.ink, vg.Point{X: x, Y: p.py(m.y[i])}, 3.5)
	}
}
