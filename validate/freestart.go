package validate

import (
	"slices"

	"lagwright/ident"
)

// A recording may begin in the middle of a move. What the heater then still
// carries of its past is free, as in a fit: an unknown state of every lag, and
// the first dead time left out, whose input came before the log.

// firstKnown is the first row that owes nothing to inputs before the log but
// the state it starts from. A log too short to be cut keeps all its rows.
func (p *plan) firstKnown(t []float64, g ident.Plant) int {
	first, _ := slices.BinarySearch(t, t[0]+g.DeadTime*(1-1e-9))
	if len(t)-first < max(minSegment, len(t)/2) {
		return 0
	}
	return first
}

// freeStart returns the columns of a start from times t on: a constant, and
// what an unknown state of each lag of plant g leaves, longest lag first.
func freeStart(t []float64, g ident.Plant) [][]float64 {
	ones := make([]float64, len(t))
	fill(ones, 1)
	states := make([][]float64, g.Structure.Order())
	for j := range states {
		states[j] = make([]float64, len(t))
	}
	ident.NewSimulator(t, ident.Input{}).FreeStates(states, g.Structure, g.Lags, g.DeadTime)
	out := [][]float64{ones}
	for _, x := range states {
		if slices.Max(x) != slices.Min(x) { // an integrator's state is a level
			out = append(out, x)
		}
	}
	return out
}

// fadeResponses is how many response times a start is seen for: after them less
// than a hundredth of it is left.
const fadeResponses = 5

// takeStart takes the start that fits best, level aside, out of left. It is
// found in the rows that it can be seen in, so that a load later on does not
// pass for it. Where these cannot tell the states of all lags apart, those of
// the shortest are left out.
func (p *plan) takeStart(t, left []float64, g ident.Plant) {
	step := medianInterval(t)
	end, _ := slices.BinarySearch(t, t[0]+fadeResponses*response(g))
	end = max(end, min(minSegment, len(t)))
	for columns := freeStart(t, g); len(columns) > 1; columns = columns[:len(columns)-1] {
		seen := make([][]float64, len(columns))
		for j := range columns {
			seen[j] = columns[j][:end]
		}
		beta, _, ok := instrumental(t[:end], step, p.cardCorrelation(step), left[:end], seen, seen)
		if !ok {
			continue
		}
		for i := range left {
			for j := 1; j < len(columns); j++ {
				left[i] -= beta[j] * columns[j][i]
			}
		}
		return
	}
}
