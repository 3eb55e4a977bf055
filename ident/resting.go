package ident

import "math"

// restingState is the part of the greatest change of the input below which an element no
// longer shows in a response, whose digits end at 1e-16 of it.
const restingState = 1e-20

// Resting tells whether the response that [Simulator.Pieces] walks is a straight line over
// so many of the next rows, and its level at the first of them and slope per s: no change
// of the input reaches them, all lags have died away, and the rows are evenly spaced. Its
// derivatives are then zero, but for that with respect to the dead time, which is minus
// the slope. ok is false for the first row of a log or of an even stretch, and for rows
// that are means, even where the response rests.
func (s *Simulator) Resting(rows int) (level, slope float64, ok bool) {
	end := s.row + rows
	if !s.valid || s.rows != nil || rows < 1 || s.row == 0 || end > len(s.t) {
		return 0, 0, false
	}
	if s.next < len(s.in.At) && s.arrival(s.next) <= s.t[end-1] {
		return 0, 0, false
	}
	if s.integrating {
		return s.area + s.level*(s.t[s.row]-s.areaUntil), s.level, true
	}
	if s.chain.n == 0 {
		return s.level, 0, true
	}
	if r := s.stretches[s.stretch]; r.ragged || s.row <= r.lo || end > r.hi {
		return 0, 0, false
	}
	for i := range s.chain.n + s.chain.q {
		if math.Abs(s.x[i]) > restingState*s.greatest {
			return 0, 0, false
		}
	}
	return s.level, 0, true
}

// Rest passes so many of the next rows, over which the response is [Simulator.Resting].
func (s *Simulator) Rest(rows int) {
	s.x = state{}
	s.row += rows
}
