package validate

import (
	"math"

	"lagwright/data"
)

// maxBridge is the longest stretch of missing temperatures, in rows, that is
// bridged by a straight line (common practice, no source); a longer one
// splits the run.
const maxBridge = 3

// minSegment is the fewest rows worth a replay.
const minSegment = 10

// A segment is an unbroken part of a run: rows lo ≤ i < hi.
type segment struct {
	lo, hi  int
	bridged int // rows whose missing temperature is bridged
}

// segments splits a run at the gaps of its clock and where the temperature is
// missing for more than maxBridge rows. Segments start and end with a
// temperature. Parts of fewer than minSegment rows are left out; dropped
// counts their rows and those without a temperature.
func segments(run *data.Run) (out []segment, dropped int) {
	covered := 0
	for _, part := range run.Segments() {
		for _, s := range splitMissing(run.Y, part[0], part[1]) {
			if s.hi-s.lo >= minSegment {
				out = append(out, s)
				covered += s.hi - s.lo
			}
		}
	}
	return out, len(run.T) - covered
}

// splitMissing splits the rows lo ≤ i < hi at long stretches without a temperature.
func splitMissing(y []float64, lo, hi int) []segment {
	var out []segment
	open, last := false, 0 // inside a segment; last row with a temperature
	for i := lo; i < hi; i++ {
		if math.IsNaN(y[i]) {
			continue
		}
		if missing := i - last - 1; open && missing <= maxBridge {
			out[len(out)-1].bridged += missing
		} else {
			out = append(out, segment{lo: i})
			open = true
		}
		last = i
		out[len(out)-1].hi = i + 1
	}
	return out
}

// bridge fills the missing values of y in place by straight lines over t. The
// first and last value must be present.
func bridge(t, y []float64) {
	last := 0
	for i := range y {
		if math.IsNaN(y[i]) {
			continue
		}
		for j := last + 1; j < i; j++ {
			y[j] = y[last] + (y[i]-y[last])*(t[j]-t[last])/(t[i]-t[last])
		}
		last = i
	}
}
