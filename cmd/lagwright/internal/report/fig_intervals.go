package report

import (
	"fmt"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/fit"
)

// IntervalFigure draws the interval of every parameter of a model on an axis
// of its own, under its profile where the card has one.
func IntervalFigure(m *fit.Model, profiles []fit.Profile, confidence float64) *Figure {
	f := &Figure{Name: "intervals", columns: 2}
	var said []string
	for _, p := range m.Parameters {
		if p.Fixed || p.Name == "baseline" {
			continue
		}
		f.panels = append(f.panels, intervalPanel(p, profileOf(profiles, p.Name)))
		said = append(said, parameterName(p.Name)+" "+format.Value(p.Value, p.Low, p.High, p.Unit))
	}
	f.Finding = fmt.Sprintf("Each %s interval, drawn on its own scale.", format.Percent(confidence))
	if len(profiles) > 0 {
		f.Finding = fmt.Sprintf("Each %s interval ends where its curve reaches 1: the fit may get that much worse and no more.",
			format.Percent(confidence))
	}
	f.Alt = "Interval chart of the parameters: " + strings.Join(said, "; ") + "."
	return f
}

// mostLoss is the loss of fit at the top of a profile's panel, in units of the
// loss at the interval's ends.
const mostLoss = 1.6

func intervalPanel(p fit.Parameter, pr *fit.Profile) *panel {
	pn := &panel{
		heading: parameterName(p.Name) + ": " + format.Value(p.Value, p.Low, p.High, p.Unit),
		x:       &axis{label: parameterName(p.Name), unit: p.Unit, grace: 0.15},
		y:       axis{names: []string{}, min: -1, max: 1},
		height:  26,
	}
	w := whisker{value: p.Value, low: p.Low, high: p.High, ink: inkModel}
	if pr == nil {
		pn.marks = []mark{w}
		return pn
	}
	pn.height = 96
	pn.y = axis{label: "Loss of fit", min: -0.18 * mostLoss, max: mostLoss}
	w.row = -0.09 * mostLoss
	x, loss := lossCurve(pr)
	pn.marks = []mark{
		rule{label: "limit", at: 1, ink: inkLimit},
		trace{x: x, y: loss, ink: inkModel, width: 1.8},
		w,
	}
	pn.y.ticks = func(low, high float64, n int) []tick {
		var out []tick
		for _, t := range numberTicks(low, high, n) {
			if t.at >= 0 {
				out = append(out, t)
			}
		}
		return out
	}
	return pn
}

// lossCurve is the square of a profile's root, up to the top of the panel. The
// root is nearly straight between its points (D. M. Bates, D. G. Watts,
// Nonlinear Regression Analysis and Its Applications, 1988, ch. 6; from
// memory), so that few points carry a smooth curve.
func lossCurve(pr *fit.Profile) (x, loss []float64) {
	const between = 16
	for i := 1; i < min(len(pr.Value), len(pr.Root)); i++ {
		for k := range between + 1 {
			share := float64(k) / between
			r := pr.Root[i-1] + share*(pr.Root[i]-pr.Root[i-1])
			if r*r <= mostLoss {
				x = append(x, pr.Value[i-1]+share*(pr.Value[i]-pr.Value[i-1]))
				loss = append(loss, r*r)
			}
		}
	}
	return x, loss
}

func profileOf(all []fit.Profile, name string) *fit.Profile {
	for i := range all {
		if all[i].Parameter == name && len(all[i].Value) > 2 {
			return &all[i]
		}
	}
	return nil
}
