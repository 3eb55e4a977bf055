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

// apart names the runs whose estimate stands apart from those around it: the
// distance from the median of its neighbours, over the standard error of the
// run and of a neighbour together.
func (tr *track) apart(d *Drift) []string {
	h, w := tr.history, tr.history.weights()
	var out []string
	n := len(h.x)
	if n <= 2*around {
		return nil
	}
	for k := range h.x {
		var x, variance []float64
		first := max(0, min(k-around, n-1-2*around)) // at the ends, as many from one side
		for j := first; j <= first+2*around; j++ {
			if j != k {
				x, variance = append(x, h.x[j]), append(variance, 1/w[j])
			}
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
