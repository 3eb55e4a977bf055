package report

import (
	"fmt"
	"math"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/tune"
)

// StepFigure draws the loop's answer to a step of the setpoint, with the
// requirement drawn in.
func StepFigure(r *Response, g *tune.Gains) *Figure {
	f := &Figure{Name: "step-response"}
	temp, input := responsePanels(r, g, "Temperature rise")
	q := g.Requirement
	bandHalf := settlingBand(q) * math.Abs(r.Size)
	setpoint := rule{label: "setpoint", at: r.Size, ink: inkOther}
	end := last(r.T)
	if q.Settling != nil {
		for _, b := range []box{
			{*q.Settling, math.Inf(1), math.Inf(-1), r.Size - bandHalf},
			{*q.Settling, math.Inf(1), r.Size + bandHalf, math.Inf(1)},
		} {
			temp.marks = append([]mark{zone{name: fmt.Sprintf("not allowed after %s", format.Duration(*q.Settling)), box: b, ink: inkLimit}}, temp.marks...)
		}
		if *q.Settling < end {
			temp.marks = append(temp.marks, rule{label: "settled by " + format.Duration(*q.Settling), at: *q.Settling, vertical: true, low: true, ink: inkLimit})
		}
	}
	if q.Overshoot != nil {
		top := r.Size * (1 + *q.Overshoot/100)
		temp.y.grace = 0.1 // room for the label
		temp.marks = append(temp.marks, rule{label: format.Short(*q.Overshoot, 3) + " % overshoot", at: top, ink: inkLimit})
	} else {
		temp.marks = append(temp.marks, setpoint)
	}
	f.panels = []*panel{temp, input}
	f.Finding = stepFinding(r, g)
	f.Alt = "Line charts of temperature and input after a setpoint step, best fit and band over the plausible plants. " + f.Finding
	return f
}

func stepFinding(r *Response, g *tune.Gains) string {
	s := fmt.Sprintf("After a setpoint step of %s", format.Amount(r.Size, kelvin(g.Units.Temperature), 3))
	m, w := g.Nominal, g.Worst
	if m == nil {
		return s + "."
	}
	switch {
	case !m.Stable:
		return s + " the loop is not stable on the best-fit plant."
	case m.Settling == nil:
		s += " the best fit does not settle in the time drawn"
	default:
		s += " the best fit settles in " + format.Duration(*m.Settling)
	}
	if m.Overshoot != nil {
		s += fmt.Sprintf(" with %s %% overshoot", format.Short(*m.Overshoot, 2))
	}
	if w != nil && w.Settling != nil {
		s += fmt.Sprintf("; %s of the plausible plants within %s", format.Percent(g.Assurance), format.Duration(*w.Settling))
	}
	return s + "."
}

// LoadFigure draws the loop's answer to a step of load at the plant's input.
func LoadFigure(r *Response, g *tune.Gains) *Figure {
	f := &Figure{Name: "load-response"}
	temp, input := responsePanels(r, g, "Temperature deviation")
	temp.marks = append(temp.marks, rule{at: 0, ink: inkOther})
	f.panels = []*panel{temp, input}
	low, high := rangeOf(r.Temperature.Best)
	worst := high
	if -low > high {
		worst = low
	}
	f.Finding = fmt.Sprintf("A load step worth %s of input moves the temperature by %s at most on the best fit.",
		format.Amount(r.Size, g.Units.Input, 3), format.Amount(worst, kelvin(g.Units.Temperature), 2))
	f.Alt = "Line charts of temperature and input after a load step, best fit and band over the plausible plants. " + f.Finding
	return f
}

func responsePanels(r *Response, g *tune.Gains, label string) (temp, input *panel) {
	x := elapsed("Time after the step", span(r.T))
	temp = &panel{x: x, y: yAxis(label, kelvin(g.Units.Temperature)), height: 170, marks: ensemble(r.T, r.Temperature)}
	input = &panel{x: x, y: yAxis("Input change", g.Units.Input), height: 80, marks: ensemble(r.T, r.Input)}
	return temp, input
}

// ensemble are the marks of one signal over the plausible plants.
func ensemble(t []float64, e Ensemble) []mark {
	var m []mark
	if len(e.Low) == len(t) && len(e.High) == len(t) {
		m = append(m, band{name: "plausible plants", x: t, low: e.Low, high: e.High, ink: inkModel})
	}
	return append(m, trace{name: "best fit", x: t, y: e.Best, ink: inkModel, width: 1.8})
}

// settlingBand is the half-width of the band a step settles into, as a share
// of the step.
func settlingBand(q tune.Requirement) float64 {
	if q.Band == 0 {
		return 0.02
	}
	return q.Band
}
