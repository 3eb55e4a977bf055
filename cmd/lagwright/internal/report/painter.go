package report

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// painter draws lines, areas and text on any canvas.
type painter struct {
	c   vg.Canvas
	svg *svgCanvas // c, where c writes SVG; else nil
	pdf bool       // c writes PDF, see pdf.go
}

func (t *painter) color(k ink) color.Color {
	if t.pdf {
		return straight{k}
	}
	return k
}

// stroke is the look of a line.
type stroke struct {
	ink   ink
	width vg.Length
	dash  []vg.Length
}

var dashes = []vg.Length{5, 3}

type align float64

const (
	alignLeft   align = 0
	alignMiddle align = 0.5
	alignRight  align = 1
)

// text writes one line whose base starts, centres or ends at a point.
func (t *painter) text(l lettering, s string, at vg.Point, a align) {
	if t.pdf {
		l.bold = false // the PDF canvas registers bold fonts under a name it does not find again
	}
	face := l.face()
	if t.svg != nil {
		t.svg.SetColor(l.ink)
		anchor := map[align]string{alignMiddle: "middle", alignRight: "end"}[a]
		t.svg.text(face, at, s, anchor, l.bold)
		return
	}
	at.X -= face.Width(s) * vg.Length(a)
	t.c.SetColor(t.color(l.ink))
	if t.pdf {
		s = windows1252(s)
	}
	t.c.FillString(face, at, s)
}

// line draws a polyline.
func (t *painter) line(s stroke, pts ...vg.Point) {
	if len(pts) < 2 {
		return
	}
	t.c.SetLineWidth(s.width)
	t.c.SetLineDash(s.dash, 0)
	t.c.SetColor(t.color(s.ink))
	t.c.Stroke(polyline(pts))
}

// longest is the number of points drawn as one path on pixels: rendering a
// noisy line of 5000 points in one path at 300 dpi takes a minute, in pieces
// of 100 points half a second.
const longest = 100

// curve draws a long polyline in pieces that overlap by one point, so that
// rasters stay fast; SVG gets it whole, named for the read-out.
func (t *painter) curve(s stroke, attrs string, pts []vg.Point) {
	if t.svg != nil {
		t.svg.tag(attrs)
		t.line(s, pts...)
		return
	}
	if len(s.dash) > 0 { // dashes would start anew in each piece
		t.line(s, pts...)
		return
	}
	for from := 0; from < len(pts)-1; from += longest - 1 {
		t.line(s, pts[from:min(from+longest, len(pts))]...)
	}
}

func (t *painter) fill(k ink, p vg.Path) {
	t.c.SetColor(t.color(k))
	t.c.Fill(p)
}

func (t *painter) dot(k ink, at vg.Point, radius vg.Length) {
	var p vg.Path
	p.Move(at.Add(vg.Point{X: radius}))
	p.Arc(at, radius, 0, 2*math.Pi)
	p.Close()
	t.fill(k, p)
}

// cross draws an ×, the sign of a pole.
func (t *painter) cross(s stroke, at vg.Point, radius vg.Length) {
	t.line(s, at.Add(vg.Point{X: -radius, Y: -radius}), at.Add(vg.Point{X: radius, Y: radius}))
	t.line(s, at.Add(vg.Point{X: -radius, Y: radius}), at.Add(vg.Point{X: radius, Y: -radius}))
}

func (t *painter) close() {
	if t.svg != nil {
		t.svg.close()
	}
}

func polyline(pts []vg.Point) vg.Path {
	var p vg.Path
	for i, q := range pts {
		if i == 0 {
			p.Move(q)
		} else {
			p.Line(q)
		}
	}
	return p
}

// clip is the pane's rectangle as the library's clipping wants it.
func (p *pane) clip() *draw.Canvas { return &draw.Canvas{Canvas: p.c, Rectangle: p.rect} }

// inside tells whether a point lies in the pane.
func (p *pane) inside(at vg.Point) bool { return p.clip().Contains(at) }
