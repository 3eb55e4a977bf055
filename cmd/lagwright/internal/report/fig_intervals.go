package report

import (
	"fmt"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/fit"
)

// IntervalFigure draws the interval of every parameter of a model on an axis
// of its own, under its profile where one is given.
func IntervalFigure(m *fit.Model, profiles []Profile, confidence float64) *Figure {
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
		f.Finding = fmt.Sprintf("Each %s interval ends where the profile reaches the limit: the fit may get that much worse and no more.",
			format.Percent(confidence))
	}
	f.Alt = "Interval chart of the parameters: " + strings.Join(said, "; ") + "."
	return f
}

func intervalPanel(p fit.Parameter, pr *Profile) *panel {
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
	pn.y = axis{label: "Loss of fit", min: -0.18 * 2 * pr.Limit, max: 2 * pr.Limit}
	w.row = -0.09 * 2 * pr.Limit
	pn.marks = []mark{
		rule{label: "limit", at: pr.Limit, ink: inkLimit},
		trace{x: pr.Value, y: pr.Drop, ink: inkModel, width: 1.8},
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

func profileOf(all []Profile, name string) *Profile {
	for i := range all {
		if all[i].Parameter == name {
			return &all[i]
		}
	}
	return nil
}
