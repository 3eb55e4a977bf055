package validate

import (
	"errors"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
)

// ErrNoSetpoint is wrapped when a run has no setpoint and none was given.
var ErrNoSetpoint = errors.New("no setpoint: name its column, or give --setpoint or --setpoint-step")

// startRows is the number of rows whose median is the level a segment starts from.
const startRows = 9

// setSetpoint gives the course its setpoint: the logged one, else the one
// given, else the starting level and a step of it at the first row. logged has
// the rows of the segment, or is nil.
func (c *course) setSetpoint(logged []float64, given, step *float64) error {
	level := startLevel(c.y)
	c.r = make([]float64, len(c.t))
	switch {
	case hasValue(logged):
		copyHeld(c.r, logged)
	case given != nil:
		fill(c.r, *given)
	case step != nil:
		fill(c.r, level+*step)
		c.before, c.rest, c.stepped = level, level, *step
		return nil
	default:
		return ErrNoSetpoint
	}
	c.before, c.rest = c.r[0], c.r[0]
	if math.Abs(c.r[0]-level) > startBand(c.y) && (!hasValue(logged) || goesHalfway(c.y, level, c.r[0])) {
		c.rest = level // it starts in the middle of a move
	}
	return nil
}

// goesHalfway tells a segment that heats up (or cools down) to its setpoint
// from one that stands off it, as under a P controller.
func goesHalfway(y []float64, level, setpoint float64) bool {
	return slices.ContainsFunc(y, func(v float64) bool {
		return math.Abs(v-level) >= math.Abs(setpoint-level)/2 && (v-level)*(setpoint-level) > 0
	})
}

// startLevel is the median of the first rows.
func startLevel(y []float64) float64 { return median(y[:min(startRows, len(y))]) }

// startBand is how far from its setpoint a segment may start and still count
// as being at it: four times the scatter of its first rows about a straight
// line, since in mid-move they climb.
func startBand(y []float64) float64 {
	first := slices.Clone(y[:min(startRows, len(y))])
	rows := make([]float64, len(first))
	for i := range rows {
		rows[i] = float64(i)
	}
	level, climb := stat.LinearRegression(rows, first, nil, false)
	for i := range first {
		first[i] -= level + climb*rows[i]
	}
	return 4 * (slices.Max(first) - slices.Min(first))
}

func fill(x []float64, v float64) {
	for i := range x {
		x[i] = v
	}
}

func hasValue(x []float64) bool {
	return slices.ContainsFunc(x, func(v float64) bool { return !math.IsNaN(v) })
}

// copyHeld copies src to dst; a missing value repeats the one before it, and
// those before the first repeat the first.
func copyHeld(dst, src []float64) {
	first := slices.IndexFunc(src, func(v float64) bool { return !math.IsNaN(v) })
	last := src[first]
	for i, v := range src {
		if !math.IsNaN(v) {
			last = v
		}
		dst[i] = last
	}
}
