package report

import (
	"fmt"
	"math"

	"lagwright/cmd/lagwright/internal/format"
)

// PoleFigure draws the dominant closed-loop poles with the region they must
// lie in. Poles come in pairs; the upper half is drawn.
func PoleFigure(ps *Poles) *Figure {
	f := &Figure{Name: "poles"}
	p := &panel{
		heading: "Poles: imaginary part, rad/s",
		x:       &axis{label: "Real part", unit: "1/s", grace: 0.08, hold: [2]*float64{new(float64)}},
		y:       axis{label: "Imaginary part", unit: "rad/s", grace: 0.08, hold: [2]*float64{new(float64)}},
		height:  220,
	}
	if ps.Decay > 0 || ps.Damping > 0 {
		p.marks = append(p.marks, ps.region())
	}
	p.marks = append(p.marks, rule{label: "stable to the left", at: 0, vertical: true, ink: inkLimit})
	if len(ps.Locus) > 0 {
		x, y := parts(ps.Locus)
		p.marks = append(p.marks, trace{name: "locus for growing gain", x: x, y: y, ink: inkOther, width: 1.2, dash: true})
	}
	x, y := parts(ps.Plausible)
	p.marks = append(p.marks, dots{name: "plausible plants", x: x, y: y, ink: inkLogged, radius: 1.8})
	x, y = parts(ps.Best)
	p.marks = append(p.marks, dots{name: "best fit", x: x, y: y, ink: inkModel, radius: 5, cross: true})
	f.panels = []*panel{p}
	f.Finding = ps.finding()
	f.Alt = "Map of poles in the complex plane. " + f.Finding
	return f
}

// region is where every pole must lie: real part at most −Decay, and an angle
// from the negative real axis of at most acos(Damping).
func (ps *Poles) region() mark {
	const far = -1e9
	m := polygon{name: "required region", ink: inkGood}
	slope := math.Inf(1)
	if ps.Damping > 0 {
		slope = math.Sqrt(1-ps.Damping*ps.Damping) / ps.Damping
	}
	if math.IsInf(slope, 0) {
		m.x = []float64{-ps.Decay, far, far, -ps.Decay}
		m.y = []float64{0, 0, slope, slope}
		return m
	}
	return sector{m.name, ps.Decay, slope, m.ink}
}

func (ps *Poles) inside(z complex128) bool {
	if real(z) > -ps.Decay {
		return false
	}
	return ps.Damping == 0 || -real(z) >= ps.Damping*math.Hypot(real(z), imag(z))
}

func (ps *Poles) finding() string {
	unstable, out := 0, 0
	for _, z := range ps.Plausible {
		if real(z) >= 0 {
			unstable++
		}
		if !ps.inside(z) {
			out++
		}
	}
	n := len(ps.Plausible)
	switch {
	case n == 0:
		return "Poles of the best-fit plant."
	case unstable > 0:
		return fmt.Sprintf("%d of %s are unstable.", unstable, format.Count(n, "plausible pole", "plausible poles"))
	case ps.Decay == 0 && ps.Damping == 0:
		return "Every plausible plant gives a stable loop."
	case out == 0:
		return "Every plausible pole lies in the required region."
	}
	return fmt.Sprintf("%d of %s lie outside the required region.", out, format.Count(n, "plausible pole", "plausible poles"))
}

// sector is the wedge left of −decay under a line of the given slope.
type sector struct {
	name         string
	decay, slope float64
	ink          ink
}

func (m sector) extent() box     { return nowhere }
func (m sector) key() []keyEntry { return []keyEntry{{m.name, m.ink, sampleBand}} }

func (m sector) draw(p *pane) {
	left := p.x.min
	polygon{
		x: []float64{-m.decay, left, left, -m.decay},
		y: []float64{0, 0, -left * m.slope, m.decay * m.slope}, ink: m.ink,
	}.draw(p)
}

func parts(z []complex128) (re, im []float64) {
	for _, v := range z {
		re, im = append(re, real(v)), append(im, math.Abs(imag(v)))
	}
	return re, im
}
