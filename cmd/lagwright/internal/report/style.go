package report

import (
	"fmt"
	"image/color"
	"strings"
	"sync"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
)

// ink is a colour with a role. PNG and PDF draw its light shade; SVG refers
// to the role, so that the same drawing follows a light or a dark page.
type ink struct {
	role        string
	light, dark uint32 // 0xRRGGBB
	alpha       uint8  // 255 is opaque
}

// The house palette. The hues of the lines are those of Okabe and Ito's
// colour-blind-safe set (from memory), darkened or lightened until every line
// stands out from its page by at least 3:1 and every text by 4.5:1 (WCAG 2.2,
// 1.4.3 and 1.4.11; style_test.go measures both). Role never rests on hue
// alone: limits are dashed and labelled, bands are filled, the log is grey.
var (
	inkPaper  = ink{"paper", 0xffffff, 0x14181c, 255}
	inkText   = ink{"text", 0x1b2026, 0xe8ebee, 255}
	inkMuted  = ink{"muted", 0x545d67, 0xa3adb8, 255}
	inkGrid   = ink{"grid", 0xe4e7eb, 0x2b323a, 255}
	inkLogged = ink{"logged", 0x6a7480, 0x97a1ac, 255} // what was recorded
	inkModel  = ink{"model", 0x0067a5, 0x5bb4ea, 255}  // what a model or a proposal says
	inkOther  = ink{"other", 0x9a5b00, 0xe6a23c, 255}  // a second thing beside the model
	inkLimit  = ink{"limit", 0xa3266b, 0xea8fc0, 255}  // requirements and limits
	inkGood   = ink{"good", 0x00694f, 0x3fcf9f, 255}
	inkBad    = ink{"bad", 0xb03a00, 0xff9a62, 255}
)

var palette = []ink{inkPaper, inkText, inkMuted, inkGrid, inkLogged, inkModel, inkOther, inkLimit, inkGood, inkBad}

// RGBA is the light shade, which makes an ink a color.Color.
func (k ink) RGBA() (r, g, b, a uint32) {
	return color.NRGBA{uint8(k.light >> 16), uint8(k.light >> 8), uint8(k.light), k.alpha}.RGBA()
}

// faint is the same ink as a wash for bands and regions.
func (k ink) faint() ink {
	k.alpha = 46
	return k
}

// fainter is a wash for large regions.
func (k ink) fainter() ink {
	k.alpha = 24
	return k
}

// paletteCSS declares the palette as custom properties: light, dark where the
// reader's system is dark, and light again on paper.
func paletteCSS(root string) string {
	shades := func(pick func(ink) uint32) string {
		var b strings.Builder
		for _, k := range palette {
			fmt.Fprintf(&b, "--%s:#%06x;", k.role, pick(k))
		}
		return b.String()
	}
	light := shades(func(k ink) uint32 { return k.light })
	dark := shades(func(k ink) uint32 { return k.dark })
	return root + "{" + light + "color-scheme:light dark}\n" +
		"@media screen and (prefers-color-scheme:dark){" + root + "{" + dark + "}}\n"
}

// inkCSS gives every ink a class for lines (s-role) and one for fills (f-role).
func inkCSS() string {
	var b strings.Builder
	for _, k := range palette {
		fmt.Fprintf(&b, ".s-%[1]s{fill:none;stroke:var(--%[1]s)}.f-%[1]s{fill:var(--%[1]s)}", k.role)
	}
	return b.String() + "\n"
}

// figureFonts is what an SVG asks for: the fonts whose widths the layout was
// measured with, or one as wide.
const figureFonts = `"Liberation Sans",Arial,Helvetica,sans-serif`

// lettering of the figures, in points (CSS pixels on the page).
type lettering struct {
	size vg.Length
	bold bool
	ink  ink
}

var (
	tickLetters    = lettering{11, false, inkMuted}
	keyLetters     = lettering{11, false, inkText}
	headingLetters = lettering{12, true, inkText}
	noteLetters    = lettering{11, false, inkLimit}
)

// fonts are read when the first text is drawn: it takes longer than all else
// that a command does before it begins.
var fonts = sync.OnceValue(func() *font.Cache { return font.NewCache(liberation.Collection()) })

func (l lettering) face() font.Face {
	f := font.Font{Typeface: "Liberation", Variant: "Sans", Size: l.size}
	if l.bold {
		f.Weight = 3 // bold, as golang.org/x/image/font numbers it
	}
	return fonts().Lookup(f, l.size)
}

// room is the width to leave for a text. A reader without the fonts measured
// here sees wider ones; DejaVu Sans, the usual last resort, is wider by up to
// this factor.
func (l lettering) room(s string) vg.Length {
	const slack = 1.2
	f := l.face()
	return slack * f.Width(s)
}
