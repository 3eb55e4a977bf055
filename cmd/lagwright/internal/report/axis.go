package report

import (
	"fmt"
	"math"
	"time"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/data"
)

// axis is one direction of a panel. Its range is that of the marks when min
// and max are equal.
type axis struct {
	label    string
	unit     string
	min, max float64
	log      bool
	ticks    ticker
	names    []string    // labels of the rows 0, 1, …, instead of ticks
	clock    *time.Time  // clock time at zero, for the read-out
	grace    float64     // share of the range added at both ends
	hold     [2]*float64 // values the range must include
}

// title is what stands beside the axis: "Temperature, °C".
func (a *axis) title() string {
	switch {
	case a.unit == "":
		return a.label
	case a.label == "":
		return format.Unit(a.unit)
	}
	return a.label + ", " + format.Unit(a.unit)
}

// norm brings a value to the unit range of the axis.
func (a *axis) norm(v float64) float64 {
	if a.log {
		return math.Log(v/a.min) / math.Log(a.max/a.min)
	}
	return (v - a.min) / (a.max - a.min)
}

// fit sets the range from what is drawn: grace at both ends, and never empty.
func (a *axis) fit(low, high float64) {
	if a.min != a.max {
		return
	}
	for _, v := range a.hold {
		if v != nil {
			low, high = math.Min(low, *v), math.Max(high, *v)
		}
	}
	if low > high { // nothing drawn
		low, high = 0, 1
	}
	switch {
	case a.log:
		low, high = math.Max(low, 1e-12), math.Max(high, 2e-12)
		f := math.Pow(high/low, a.grace)
		a.min, a.max = low/f, high*f
	case high-low <= 1e-12*math.Max(math.Abs(low), math.Abs(high)):
		a.min, a.max = low-1, high+1
	default:
		a.min, a.max = low-a.grace*(high-low), high+a.grace*(high-low)
	}
}

func (a *axis) marks(n int) []tick {
	if a.names != nil {
		out := make([]tick, len(a.names))
		for i, s := range a.names {
			out[i] = tick{float64(i), s}
		}
		return out
	}
	switch {
	case a.ticks != nil:
		return a.ticks(a.min, a.max, n)
	case a.log:
		return logTicks(a.min, a.max, n)
	}
	return numberTicks(a.min, a.max, n)
}

// yAxis is a vertical axis that leaves a little air above and below.
func yAxis(label, unit string) axis { return axis{label: label, unit: unit, grace: 0.06} }

// elapsed is an axis of seconds, labelled in a unit that fits the span.
func elapsed(label string, span float64) *axis {
	u := elapsedUnit(span)
	return &axis{label: label, unit: u.name, ticks: elapsedTicks(u)}
}

// runTime is the time axis of a run: the clock when the log has one.
func runTime(r *data.Run) *axis {
	if r.Start.IsZero() || len(r.T) == 0 {
		return elapsed("Time from the first row", span(r.T))
	}
	start := r.Start
	if r.Zone != nil {
		start = start.In(r.Zone)
	}
	return clockAxis(start, span(r.T))
}

// clockAxis is an axis of seconds after start, labelled with the clock. Spans
// of a few seconds are labelled as elapsed time.
func clockAxis(start time.Time, span float64) *axis {
	if span < 4 {
		return elapsed("Time from the first row", span)
	}
	label := "Clock time, " + start.Format("2006-01-02")
	if end := start.Add(seconds(span)); end.Format(time.DateOnly) != start.Format(time.DateOnly) {
		label += " to " + end.Format("01-02")
		if end.Year() != start.Year() {
			label = fmt.Sprintf("Clock time, %s to %s", start.Format(time.DateOnly), end.Format(time.DateOnly))
		}
	}
	if z := zoneName(start); z != "" {
		label += " (" + z + ")"
	}
	return &axis{label: label, ticks: clockTicks(start), clock: &start}
}

func span(t []float64) float64 {
	if len(t) == 0 {
		return 0
	}
	return t[len(t)-1] - t[0]
}
