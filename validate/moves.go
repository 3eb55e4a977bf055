package validate

import "math"

// A move is a change of setpoint with the rows that follow it, up to the next
// move: from ≤ i < to.
type move struct {
	from, to int
	target   float64 // setpoint after the move
	size     float64 // target − setpoint before
}

// moves finds the setpoint moves of a segment. Changes that follow each other
// within one response time (a ramp, or a setpoint typed in digit by digit)
// are one move, counted from its first change. A segment that starts away
// from its setpoint starts with a move only if that step is made there: what
// is left of an earlier move, or of heating up, is none.
func moves(s signal, m yardstick) []move {
	var out []move
	before := s.r0
	if s.midway {
		before = s.r[0]
	}
	changed := math.Inf(-1) // time of the last change seen
	for i, r := range s.r {
		if r == before || math.IsNaN(r) {
			continue
		}
		if n := len(out); n > 0 && s.t[i]-changed <= m.response {
			out[n-1].target = r
			out[n-1].size += r - before
		} else {
			out = append(out, move{from: i, target: r, size: r - before})
		}
		before, changed = r, s.t[i]
	}
	for i := range out {
		out[i].to = len(s.t)
		if i+1 < len(out) {
			out[i].to = out[i+1].from
		}
	}
	return dropReturns(out)
}

// dropReturns leaves out moves that ended where they began.
func dropReturns(all []move) []move {
	kept := all[:0]
	for _, mv := range all {
		if mv.size != 0 {
			kept = append(kept, mv)
		}
	}
	return kept
}
