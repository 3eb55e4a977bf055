package report

import (
	"fmt"
	"math"
	"time"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/tune"
	"lagwright/validate"
)

// ReplayFigure draws a run as logged and as the proposed gains would have run
// it. The run must hold a trace.
func ReplayFigure(r *validate.RunReplay, g *tune.Gains, q tune.Requirement) *Figure {
	t := r.Trace
	x := replayTime(r)
	temp := &panel{x: x, y: yAxis("Temperature", g.Units.Temperature), height: 170}
	temp.marks = []mark{
		band{name: "proposed, plausible plants", x: t.T, low: gaps(t.Low), high: gaps(t.High), ink: inkModel},
		trace{name: "logged", x: t.T, y: gaps(t.Logged), ink: inkLogged, width: 1.2},
		trace{name: "setpoint", x: t.T, y: gaps(t.Setpoint), ink: inkOther, dash: true, hold: true},
		trace{name: "proposed, median", x: t.T, y: gaps(t.Median), ink: inkModel, width: 1.4},
	}
	temp.limit("highest allowed", q.TempMax, t.Low, t.High, t.Logged, t.Setpoint)
	input := &panel{x: x, y: yAxis("Input", g.Units.Input), height: 90}
	input.marks = []mark{
		band{x: t.T, low: gaps(t.LowIn), high: gaps(t.HighIn), ink: inkModel, hold: true},
		trace{name: "logged", x: t.T, y: gaps(t.LoggedIn), ink: inkLogged, width: 1.2, hold: true},
		trace{name: "proposed, median", x: t.T, y: gaps(t.MedianIn), ink: inkModel, width: 1.4, hold: true},
	}
	input.limit("lowest output", g.Limits.Min, t.LowIn, t.HighIn, t.LoggedIn)
	input.limit("highest output", g.Limits.Max, t.LowIn, t.HighIn, t.LoggedIn)
	f := &Figure{Name: "replay", panels: []*panel{temp, input}, Finding: replayFinding(r, g)}
	f.Alt = "Line charts of temperature and input over time, logged against proposed. " + f.Finding
	return f
}

// limit draws a limit of the signals in a panel and names it with its value
// above. Where the line would lie so far off that the axis had to flatten the
// signals, the name alone says where it is.
func (p *panel) limit(name string, at *float64, signals ...[]*float64) {
	if at == nil {
		return
	}
	r := rule{name: name + " " + format.Amount(*at, p.y.unit, 4), at: *at, ink: inkLimit}
	all := rangeOfAll(signals)
	switch grace := 0.5 * (all.y1 - all.y0); { // common practice, no source
	case *at > all.y1+grace:
		r.name, r.loose = r.name+", above the scale", true
	case *at < all.y0-grace:
		r.name, r.loose = r.name+", below the scale", true
	}
	p.marks = append(p.marks, r)
}

// rangeOfAll is the range of signals, times aside.
func rangeOfAll(signals [][]*float64) box {
	b := nowhere
	for _, s := range signals {
		v := gaps(s)
		b = b.join(extentOf(v, v))
	}
	return b
}

func replayTime(r *validate.RunReplay) *axis {
	if r.Start != nil {
		if start, err := time.Parse(time.RFC3339, *r.Start); err == nil {
			return clockAxis(start, span(r.Trace.T))
		}
	}
	return elapsed("Time from the first row", span(r.Trace.T))
}

func replayFinding(r *validate.RunReplay, g *tune.Gains) string {
	switch {
	case r.Undecided():
		return runName(r) + ": the requirement could not be judged on this run."
	case !r.Judged:
		return runName(r) + ": this run shows nothing that the requirement asks for."
	}
	s := fmt.Sprintf("%s: under the proposed gains the requirement holds on %s of the plausible plants", runName(r), format.Percent(r.Probability))
	was, now := r.Logged.Deviation, r.Proposed.Median.Deviation
	if was != nil && now != nil {
		unit := kelvin(g.Units.Temperature)
		s += fmt.Sprintf("; the largest deviation was %s and would have been %s", format.Amount(*was, unit, 2), format.Amount(*now, unit, 2))
	}
	return s + "."
}

func runName(r *validate.RunReplay) string {
	return fileAndRun(r.File, r.Name)
}

// gaps makes holes of what does not exist.
func gaps(v []*float64) []float64 {
	out := make([]float64, len(v))
	for i, p := range v {
		out[i] = math.NaN()
		if p != nil {
			out[i] = *p
		}
	}
	return out
}
