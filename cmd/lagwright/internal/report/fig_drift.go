package report

import (
	"fmt"
	"strings"
	"time"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/validate"
)

// DriftFigure is a control chart: every parameter over the runs, with its
// intervals, the level found and the limits about it.
func DriftFigure(d *validate.Drift) *Figure {
	f := &Figure{Name: "drift"}
	x, at := driftTime(d)
	var moved []string
	for i := range d.Parameters {
		p := &d.Parameters[i]
		f.panels = append(f.panels, driftPanel(p, x, at))
		if p.Alarm {
			moved = append(moved, strings.ToLower(parameterName(p.Name)))
		}
	}
	f.Finding = fmt.Sprintf("No parameter moved over %s by more than its intervals explain.", format.Count(len(d.Runs), "run", "runs"))
	if len(moved) > 0 {
		f.Finding = fmt.Sprintf("Over %s these moved by more than their intervals explain: %s.", format.Count(len(d.Runs), "run", "runs"), strings.Join(moved, ", "))
	}
	f.Alt = "Control chart of each parameter over the runs, with intervals and limits. " + f.Finding
	return f
}

func driftPanel(p *validate.DriftParameter, x *axis, at []float64) *panel {
	pn := &panel{x: x, y: yAxis(parameterName(p.Name), p.Unit), height: 110}
	n := len(p.Points)
	centre, least, most := make([]*float64, n), make([]*float64, n), make([]*float64, n)
	bars := errorBars{name: "estimate with interval", ink: inkModel}
	for i, q := range p.Points {
		centre[i], least[i], most[i] = q.Centre, q.Least, q.Most
		if q.Value != nil {
			bars.x, bars.y = append(bars.x, at[i]), append(bars.y, *q.Value)
			bars.low, bars.high = append(bars.low, q.Low), append(bars.high, q.High)
		}
	}
	pn.marks = []mark{
		band{name: "limits", x: at, low: gaps(least), high: gaps(most), ink: inkLogged, hold: true},
		trace{name: "level", x: at, y: gaps(centre), ink: inkLogged, hold: true},
		bars,
	}
	if s := p.Step; s != nil && s.Alarm && s.Run != nil && *s.Run < n {
		pn.marks = append(pn.marks, rule{label: "changed", at: at[*s.Run], vertical: true, ink: inkLimit})
	}
	return pn
}

// driftTime places the runs: by date where the logs have a clock, else one
// after the other.
func driftTime(d *validate.Drift) (*axis, []float64) {
	at := make([]float64, len(d.Runs))
	if d.Clock && len(d.Runs) > 0 && d.Runs[0].Start != nil {
		if start, err := time.Parse(time.RFC3339, *d.Runs[0].Start); err == nil {
			for i, r := range d.Runs {
				at[i] = r.Day * 86400
			}
			x := clockAxis(start, last(at))
			x.label, x.clock, x.grace = "Date, from "+start.Format(time.DateOnly), nil, 0.03
			return x, at
		}
	}
	for i := range at {
		at[i] = float64(i + 1)
	}
	return &axis{label: "Run, in order", grace: 0.03}, at
}
