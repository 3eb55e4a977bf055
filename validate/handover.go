package validate

import (
	"fmt"
	"math"
)

// Settling and overshoot are asked after a setpoint step. A recording that
// begins in the middle of a move, or of heating up, makes none there: the way
// that is left depends on where the recorder was switched on, so it is told as
// a figure of its own and not judged.

// handOverOf is the hand-over that lies farthest off its setpoint, with the
// slowest way from one; nil where no segment starts in mid-move.
func handOverOf(courses []*course, all []figures, logged figures) *HandOver {
	ways := valuesOf(all, func(f figures) float64 { return f.handOver })
	if len(ways) == 0 {
		return nil
	}
	h := &HandOver{Settling: finite(spreadOf(ways, 0.95).median), Logged: finite(logged.handOver)}
	for _, c := range courses {
		if away := c.before - c.rest; math.Abs(away) > math.Abs(h.Away) {
			h.Away = away
		}
	}
	return h
}

// words says what the run begins with.
func (h *HandOver) words(unit string) string {
	text := fmt.Sprintf("hand-over in mid-move, not judged: it begins %s off its setpoint", quantity(math.Abs(h.Away), unit))
	if h.Settling == nil {
		text += ", and the replay does not settle from there"
	} else {
		text += fmt.Sprintf("; from there the replay settles in %s", quantity(*h.Settling, "s"))
	}
	if h.Logged != nil {
		text += fmt.Sprintf(" (logged %s)", quantity(*h.Logged, "s"))
	}
	return text
}
