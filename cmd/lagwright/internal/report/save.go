package report

import (
	"fmt"
	"image/color"
	"io"
	"path/filepath"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgpdf"
)

// pngDPI makes a figure 1440 pixels wide.
const pngDPI = 144

// border is the white rim around a figure in a file of its own.
const border = 12

// Write draws the figure into w in the format that the ending of name says:
// .svg, .png or .pdf. The same figure gives the same bytes.
func (f *Figure) Write(w io.Writer, name string) error {
	width, height := vg.Length(wideWidth), f.height(wideWidth)
	outerW, outerH := width+2*border, height+2*border
	var c interface {
		vg.Canvas
		io.WriterTo
	}
	t := &painter{}
	switch ext := strings.ToLower(filepath.Ext(name)); ext {
	case ".svg":
		t.svg = newSVG(outerW, outerH)
		c = t.svg
	case ".png":
		c = vgimg.PngCanvas{Canvas: vgimg.NewWith(vgimg.UseWH(outerW, outerH), vgimg.UseDPI(pngDPI), vgimg.UseBackgroundColor(color.White))}
	case ".pdf":
		fixPDF()
		c = vgpdf.New(outerW, outerH)
		t.pdf = true
	default:
		return fmt.Errorf("%s: no figure can be written as %q; name it .svg, .png or .pdf", name, ext)
	}
	t.c = c
	c.Translate(vg.Point{X: border, Y: border})
	f.draw(t, width, height)
	if _, err := c.WriteTo(w); err != nil {
		return fmt.Errorf("draw %s: %w", name, err)
	}
	return nil
}

// inline draws the figure for a page, at a width in CSS pixels.
func (f *Figure) inline(width vg.Length) *svgCanvas {
	c := newSVG(width, f.height(width))
	f.draw(&painter{c: c, svg: c}, width, c.h)
	return c
}
