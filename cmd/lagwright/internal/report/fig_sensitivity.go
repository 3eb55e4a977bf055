package report

import (
	"fmt"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/tune"
)

// SensitivityFigure draws |S| against frequency with the limit on its peak.
func SensitivityFigure(s *Sensitivity, g *tune.Gains) *Figure {
	f := &Figure{Name: "sensitivity"}
	p := &panel{
		heading: "Sensitivity |S|",
		x:       &axis{label: "Frequency", unit: "rad/s", log: true},
		y:       yAxis("Sensitivity |S|", ""), height: 160,
		marks: ensemble(s.W, s.S),
	}
	p.y.hold[0] = new(float64)
	p.marks = append(p.marks, rule{at: 1, ink: inkMuted, solid: true})
	_, peak := rangeOf(s.S.Best)
	f.Finding = fmt.Sprintf("Disturbances are amplified by at most %s on the best fit", format.Short(peak, 3))
	if len(s.S.High) > 0 {
		_, worst := rangeOf(s.S.High)
		f.Finding += fmt.Sprintf(" and %s over the band", format.Short(worst, 3))
	}
	if limit := g.Requirement.Ms; limit != nil {
		p.marks = append(p.marks, rule{label: "Ms limit " + format.Short(*limit, 3), at: *limit, ink: inkLimit})
		f.Finding += fmt.Sprintf("; the limit is %s", format.Short(*limit, 3))
	}
	f.Finding += "."
	f.panels = []*panel{p}
	f.Alt = "Line chart of sensitivity against frequency. " + f.Finding
	return f
}
