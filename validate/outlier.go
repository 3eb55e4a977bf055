package validate

import (
	"fmt"
	"math"
)

// apartBy is how many standard errors a run must lie off the runs around it to
// be named. The tests look for changes that last, and a single bad test, or
// the first run after a change, is none (common practice, no source: far
// enough out that a long history without change names next to no run).
const apartBy = 6

// around is how many runs on either side a run is compared with.
const around = 2

// fewestAround is the fewest runs that a run is compared with: of two, one
// could be the one that is off.
const fewestAround = 3

// apart names the runs whose estimate stands apart from those around it: the
// distance from the median of its neighbours, over the standard error of the
// run and of a neighbour together. A change that was found explains itself:
// across a step no runs are compared, and along a slope they are compared
// with what it has moved them by taken off. Only a step that leaves a single
// run on one side explains nothing: that run may as well be one bad test.
func (tr *track) apart(d *Drift) []string {
	h, w := tr.history, tr.history.weights()
	var out []string
	for k := range h.x {
		var x, variance []float64
		for _, j := range tr.neighbours(k) {
			x, variance = append(x, h.x[j]+tr.movedBetween(j, k)), append(variance, 1/w[j])
		}
		if len(x) < fewestAround {
			continue
		}
		level := median(x)
		if math.Abs(h.x[k]-level) <= apartBy*math.Sqrt(1/w[k]+median(variance)) {
			continue
		}
		out = append(out, fmt.Sprintf("%s of %s is %s, the runs around it give %s: look at that test, or for what changed there",
			wordFor(tr.name), clean(d.Runs[tr.at[k]].title()), quantity(tr.from(h.x[k]), tr.unit), quantity(tr.from(level), tr.unit)))
	}
	return out
}

// neighbours are the runs on both sides of run k, on the same side of a step
// that was found; at the ends as many from one side.
func (tr *track) neighbours(k int) (out []int) {
	from, to := 0, len(tr.at)
	switch step := tr.found.step; {
	case step == nil || step.first == 1 || step.first == to-1:
	case k < step.first:
		to = step.first
	default:
		from = step.first
	}
	first := max(from, min(k-around, to-1-2*around))
	for j := first; j < min(to, first+2*around+1); j++ {
		if j != k {
			out = append(out, j)
		}
	}
	return out
}

// movedBetween is how far the slope that was found moves from run j to run k.
func (tr *track) movedBetween(j, k int) float64 {
	if tr.found.slope == nil {
		return 0
	}
	return tr.found.slope.effect * (tr.history.t[k] - tr.history.t[j])
}
