package report

import (
	"fmt"
	"html"
	"image"
	"image/color"
	"io"
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
)

// svgCanvas is a vg.Canvas that writes SVG for the page: inks become classes,
// coordinates have one decimal, text keeps its anchor. The library's own SVG
// canvas fixes colours and fonts in every element, which neither follows a
// dark page nor stays small.
type svgCanvas struct {
	w, h  vg.Length
	body  strings.Builder
	state svgState
	stack []svgState
	attrs string // attributes of the next path, see tag
}

type svgState struct {
	color  color.Color
	width  vg.Length
	dashes []vg.Length
	matrix [6]float64 // a b c d e f, as in SVG
}

func newSVG(w, h vg.Length) *svgCanvas {
	c := &svgCanvas{w: w, h: h}
	c.state.matrix = [6]float64{1, 0, 0, 1, 0, 0}
	vg.Initialize(c)
	return c
}

func (c *svgCanvas) Size() (w, h vg.Length)                 { return c.w, c.h }
func (c *svgCanvas) SetLineWidth(w vg.Length)               { c.state.width = w }
func (c *svgCanvas) SetLineDash(d []vg.Length, _ vg.Length) { c.state.dashes = d }
func (c *svgCanvas) SetColor(k color.Color)                 { c.state.color = k }
func (c *svgCanvas) Push()                                  { c.stack = append(c.stack, c.state) }

func (c *svgCanvas) Pop() {
	c.state = c.stack[len(c.stack)-1]
	c.stack = c.stack[:len(c.stack)-1]
}

func (c *svgCanvas) Rotate(rad float64) {
	sin, cos := math.Sincos(rad)
	c.transform([6]float64{cos, sin, -sin, cos, 0, 0})
}

func (c *svgCanvas) Translate(p vg.Point) {
	c.transform([6]float64{1, 0, 0, 1, float64(p.X), float64(p.Y)})
}

func (c *svgCanvas) Scale(x, y float64) { c.transform([6]float64{x, 0, 0, y, 0, 0}) }

func (c *svgCanvas) transform(m [6]float64) {
	a := c.state.matrix
	c.state.matrix = [6]float64{
		a[0]*m[0] + a[2]*m[1], a[1]*m[0] + a[3]*m[1],
		a[0]*m[2] + a[2]*m[3], a[1]*m[2] + a[3]*m[3],
		a[0]*m[4] + a[2]*m[5] + a[4], a[1]*m[4] + a[3]*m[5] + a[5],
	}
}

// place brings a point to SVG coordinates, whose y runs downward.
func (c *svgCanvas) place(p vg.Point) (x, y float64) {
	m := c.state.matrix
	x = m[0]*float64(p.X) + m[2]*float64(p.Y) + m[4]
	y = m[1]*float64(p.X) + m[3]*float64(p.Y) + m[5]
	return x, float64(c.h) - y
}

// open starts a group with the given attributes; close ends it.
func (c *svgCanvas) open(attrs string) { fmt.Fprintf(&c.body, "<g %s>\n", attrs) }
func (c *svgCanvas) close()            { c.body.WriteString("</g>\n") }

// tag gives the next path attributes, such as the name the read-out shows.
func (c *svgCanvas) tag(attrs string) { c.attrs = attrs }

func (c *svgCanvas) Stroke(p vg.Path) {
	if c.state.width <= 0 {
		return
	}
	c.path(p, "s", "stroke-opacity", func() {
		fmt.Fprintf(&c.body, ` stroke-width="%s"`, decimal(float64(c.state.width)))
		if len(c.state.dashes) > 0 {
			d := make([]string, len(c.state.dashes))
			for i, l := range c.state.dashes {
				d[i] = decimal(float64(l))
			}
			fmt.Fprintf(&c.body, ` stroke-dasharray="%s"`, strings.Join(d, " "))
		}
	})
}

func (c *svgCanvas) Fill(p vg.Path) { c.path(p, "f", "fill-opacity", func() {}) }

func (c *svgCanvas) path(p vg.Path, kind, opacity string, more func()) {
	c.body.WriteString("<path ")
	c.paint(kind, opacity)
	more()
	if c.attrs != "" {
		c.body.WriteString(" " + c.attrs)
		c.attrs = ""
	}
	c.body.WriteString(` d="`)
	c.pathData(p)
	c.body.WriteString("\"/>\n")
}

// paint writes the ink as a class, any other colour as it is.
func (c *svgCanvas) paint(kind, opacity string) {
	var alpha uint8
	if k, ok := c.state.color.(ink); ok {
		fmt.Fprintf(&c.body, `class="%s-%s"`, kind, k.role)
		alpha = k.alpha
	} else {
		n := color.NRGBAModel.Convert(c.state.color).(color.NRGBA)
		property := map[string]string{"s": "fill:none;stroke", "f": "fill"}[kind]
		fmt.Fprintf(&c.body, `style="%s:#%02x%02x%02x"`, property, n.R, n.G, n.B)
		alpha = n.A
	}
	if alpha != 255 {
		fmt.Fprintf(&c.body, ` %s="%.2f"`, opacity, float64(alpha)/255)
	}
}

func (c *svgCanvas) pathData(p vg.Path) {
	last := byte(0)
	command := func(k byte) {
		switch {
		case k == last && (k == 'L' || k == 'M'):
			c.body.WriteByte(' ')
		case k == 'L' && last == 'M': // what follows a move is a line already
			c.body.WriteByte(' ')
		default:
			c.body.WriteByte(k)
		}
		last = k
	}
	for _, e := range p {
		switch e.Type {
		case vg.MoveComp:
			last = 0
			command('M')
			c.point(e.Pos)
		case vg.LineComp:
			command('L')
			c.point(e.Pos)
		case vg.ArcComp:
			c.arc(e, command)
		case vg.CurveComp:
			command("  QC"[len(e.Control)+1])
			for _, q := range append(e.Control, e.Pos) {
				c.point(q)
				c.body.WriteByte(' ')
			}
		case vg.CloseComp:
			command('Z')
		}
	}
}

// arc writes an arc in two halves, for SVG cannot draw a full turn in one.
func (c *svgCanvas) arc(e vg.PathComp, command func(byte)) {
	at := func(angle float64) vg.Point {
		sin, cos := math.Sincos(angle)
		return e.Pos.Add(vg.Point{X: e.Radius * vg.Length(cos), Y: e.Radius * vg.Length(sin)})
	}
	command('L')
	c.point(at(e.Start))
	sweep := 1
	if e.Angle > 0 { // counterclockwise upward is clockwise downward
		sweep = 0
	}
	r := decimal(float64(e.Radius))
	for _, half := range []float64{0.5, 1} {
		command('A')
		fmt.Fprintf(&c.body, "%s %s 0 0 %d ", r, r, sweep)
		c.point(at(e.Start + half*e.Angle))
	}
}

func (c *svgCanvas) point(p vg.Point) {
	x, y := c.place(p)
	c.body.WriteString(decimal(x) + "," + decimal(y))
}

func (c *svgCanvas) FillString(f font.Face, at vg.Point, s string) {
	c.text(f, at, s, "", false)
}

// text writes a line of text; anchor is "", "middle" or "end".
func (c *svgCanvas) text(f font.Face, at vg.Point, s, anchor string, bold bool) {
	x, y := c.place(at)
	fmt.Fprintf(&c.body, `<text x="%s" y="%s" font-size="%s" `, decimal(x), decimal(y), decimal(float64(f.Font.Size)))
	if anchor != "" {
		fmt.Fprintf(&c.body, `text-anchor="%s" `, anchor)
	}
	if bold {
		c.body.WriteString(`font-weight="bold" `)
	}
	c.paint("f", "fill-opacity")
	c.body.WriteString(">" + html.EscapeString(s) + "</text>\n")
}

// DrawImage draws nothing: no figure of the house holds an image.
func (c *svgCanvas) DrawImage(vg.Rectangle, image.Image) {}

// WriteTo writes the drawing as a file of its own, with its style inside.
func (c *svgCanvas) WriteTo(w io.Writer) (int64, error) {
	n, err := fmt.Fprintf(w, `<svg xmlns="http://www.w3.org/2000/svg" width="%[1]s" height="%[2]s" viewBox="0 0 %[1]s %[2]s" font-family='%[3]s'>
<style>%[4]s%[5]s</style>
<rect class="f-paper" width="100%%" height="100%%"/>
%[6]s</svg>
`, decimal(float64(c.w)), decimal(float64(c.h)), figureFonts, paletteCSS(":root"), inkCSS(), c.body.String())
	return int64(n), err
}

// decimal writes a coordinate with at most one decimal.
func decimal(v float64) string {
	v = math.Round(v*10) / 10
	if v == 0 {
		return "0" // not -0
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}
