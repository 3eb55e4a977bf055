package report

import (
	"fmt"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/data"
	"lagwright/fit"
)

// LogFigure draws a run: temperature over input, the bumps, and, where c is
// not nil, the fitted output with its band. m is the model c was made with.
func LogFigure(r *data.Run, c *fit.Curves, m *fit.Model) *Figure {
	f := &Figure{Name: "log"}
	x := runTime(r)
	unit := r.Units.Temperature
	temp := &panel{x: x, y: yAxis("Temperature", unit), height: 190}
	input := &panel{x: x, y: yAxis("Input", r.Units.Input), height: 80}
	f.panels = []*panel{temp, input}

	if c != nil {
		temp.marks = append(temp.marks, band{name: "band of the model", x: c.T, low: c.Low, high: c.High, ink: inkModel})
	}
	temp.marks = append(temp.marks, trace{name: "logged", x: r.T, y: r.Y, ink: inkLogged, width: 1.2})
	if r.Setpoint != nil {
		temp.marks = append(temp.marks, trace{name: "setpoint", x: r.T, y: r.Setpoint, ink: inkOther, dash: true, hold: true})
	}
	if c != nil {
		temp.marks = append(temp.marks, trace{name: "fitted", x: c.T, y: c.Fitted, ink: inkModel, width: 1.8})
		for i, b := range c.Bumps {
			label := fmt.Sprintf("bump %d", i+1)
			if len(c.Bumps) > 6 {
				label = fmt.Sprint(i + 1)
			}
			temp.marks = append(temp.marks, rule{label: label, at: b.Time, vertical: true, ink: inkOther})
			input.marks = append(input.marks, rule{at: b.Time, vertical: true, ink: inkOther})
		}
	}
	input.marks = append(input.marks, trace{name: "input", x: r.T, y: r.U, ink: inkLogged, hold: true})
	f.Finding, f.Alt = logWords(r, c, m)
	return f
}

func logWords(r *data.Run, c *fit.Curves, m *fit.Model) (finding, alt string) {
	tl, th := rangeOf(r.Y)
	ul, uh := rangeOf(r.U)
	what := fmt.Sprintf("%s of log: temperature from %s to %s, input from %s to %s",
		format.Duration(span(r.T)), format.Short(tl, 4), format.Amount(th, r.Units.Temperature, 4),
		format.Short(ul, 4), format.Amount(uh, r.Units.Input, 4))
	if c == nil || m == nil {
		return what + ".", "Line chart over time. " + what + "."
	}
	finding = fmt.Sprintf("The %s model follows the log to %s rms, %s.", m.Structure,
		format.Amount(m.RMSE, kelvin(r.Units.Temperature), 2), format.Count(len(c.Bumps), "bump found", "bumps found"))
	return finding, fmt.Sprintf("Line chart over time. %s. %s", what, finding)
}

// kelvin is the unit of a difference of temperatures.
func kelvin(unit string) string {
	if unit == "degC" {
		return "K"
	}
	return unit
}
