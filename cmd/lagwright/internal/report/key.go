package report

import (
	"slices"

	"gonum.org/v1/plot/vg"
)

// keyEntry explains one mark in the line above a panel.
type keyEntry struct {
	name   string
	ink    ink
	sample sample
}

type sample int

const (
	sampleLine sample = iota
	sampleDash
	sampleBand
	sampleDot
	sampleCross
)

// placedKey is a key entry at its place in the header: x from the panel's
// left edge, line from its top.
type placedKey struct {
	keyEntry
	x    vg.Length
	line int
}

// header places the panel's key beside its heading, and below where the
// width asks for it. Entries of one name are told once.
func (p *panel) header(width vg.Length) (keys []placedKey, lines int) {
	x, line := headingLetters.room(p.title())+10, 0
	for _, k := range p.entries() {
		w := sampleWide + 4 + keyLetters.room(k.name)
		if x+w > width && x > 0 {
			x, line = 0, line+1
		}
		keys = append(keys, placedKey{k, x, line})
		x += w + 12
	}
	return keys, line + 1
}

// entries of the key, each name once. A single line explains itself by the
// heading.
func (p *panel) entries() []keyEntry {
	var out []keyEntry
	for _, m := range p.marks {
		for _, k := range m.key() {
			if k.name != "" && !slices.ContainsFunc(out, func(o keyEntry) bool { return o.name == k.name }) {
				out = append(out, k)
			}
		}
	}
	if len(out) == 1 && out[0].sample == sampleLine {
		return nil
	}
	return out
}

// keySample draws a sample with its name; at is the start of the text's base.
func (t *painter) keySample(k keyEntry, at vg.Point) {
	mid := at.Y + 4
	from, to := vg.Point{X: at.X, Y: mid}, vg.Point{X: at.X + sampleWide, Y: mid}
	switch k.sample {
	case sampleLine:
		t.line(stroke{ink: k.ink, width: 2}, from, to)
	case sampleDash:
		t.line(stroke{ink: k.ink, width: 1.5, dash: dashes}, from, to)
	case sampleBand:
		t.fill(k.ink.faint(), vg.Rectangle{Min: from.Add(vg.Point{Y: -5}), Max: to.Add(vg.Point{Y: 5})}.Path())
	case sampleDot:
		t.dot(k.ink, vg.Point{X: at.X + sampleWide/2, Y: mid}, 3)
	case sampleCross:
		t.cross(stroke{ink: k.ink, width: 1.5}, vg.Point{X: at.X + sampleWide/2, Y: mid}, 4)
	}
	t.text(keyLetters, k.name, vg.Point{X: at.X + sampleWide + 4, Y: at.Y}, alignLeft)
}
