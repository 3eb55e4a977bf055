package report

import "gonum.org/v1/plot/vg"

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
	x, line := headingLetters.width(p.title())+20, 0
	seen := map[string]bool{}
	for _, m := range p.marks {
		for _, k := range m.key() {
			if seen[k.name] || k.name == "" {
				continue
			}
			seen[k.name] = true
			w := sampleWide + 4 + keyLetters.width(k.name)
			if x+w > width && x > 0 {
				x, line = 0, line+1
			}
			keys = append(keys, placedKey{k, x, line})
			x += w + 14
		}
	}
	return keys, line + 1
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
	}
	t.text(keyLetters, k.name, vg.Point{X: at.X + sampleWide + 4, Y: at.Y}, alignLeft)
}
