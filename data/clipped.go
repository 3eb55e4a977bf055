package data

import (
	"fmt"
	"math"
)

// A temperature stands at a limit where it stays exactly at its highest or
// lowest value for clippedRows rows or more, clippedTimes as long as it keeps
// any other value (common practice, no source).
const (
	clippedRows  = 20
	clippedTimes = 5
)

// clippedNote says that the temperature stands at the limit of an instrument:
// a noisy reading does not stay still, so a long still stretch at the very end
// of its range is where it was cut off. ok is false when there is none, and in
// a log without noise, where standing still means nothing.
func clippedNote(y []float64) (n Note, ok bool) {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range y {
		if v <= lo || v >= hi {
			lo, hi = min(lo, v), max(hi, v)
		}
	}
	if !mayClip(y, lo, hi) {
		return Note{}, false
	}
	atLo, atHi, other := 0, 0, 0 // longest stretches of one value
	start := 0
	for i := 1; i <= len(y); i++ {
		if i < len(y) && y[i] == y[start] {
			continue
		}
		switch n := i - start; {
		case y[start] == lo:
			atLo = max(atLo, n)
		case y[start] == hi:
			atHi = max(atHi, n)
		default:
			other = max(other, n)
		}
		start = i
	}
	end, value, rows, rest := "highest", hi, atHi, max(other, atLo)
	if atLo > atHi {
		end, value, rows, rest = "lowest", lo, atLo, max(other, atHi)
	}
	if rows < clippedRows || rows < clippedTimes*rest || !noisy(y, value) {
		return Note{}, false
	}
	return Note{Code: "temperature-clipped", Text: fmt.Sprintf("the temperature stands at exactly %.6g, its %s, for %d rows in a row: the instrument or its range ends there, and what it cut off cannot be fitted; keep the part before with --to, or widen the range and repeat the test", value, end, rows)}, true
}

// mayClip tells that a value at one end of the range stands where every
// stretch of clippedRows has a row: without one no stretch is that long.
func mayClip(y []float64, lo, hi float64) bool {
	for i := 0; i+1 < len(y); i += clippedRows / 2 {
		if v := y[i]; v == y[i+1] && (v == lo || v == hi) {
			return true
		}
	}
	return false
}

// noisy tells that the readings other than value go up and down from row to
// row: at least one turn in four.
func noisy(y []float64, value float64) bool {
	steps, turns := 0, 0
	last := 0.0
	for i := 1; i < len(y); i++ {
		if y[i] == value || y[i-1] == value {
			continue
		}
		d := y[i] - y[i-1]
		if d != d || d == 0 {
			continue
		}
		steps++
		if d*last < 0 {
			turns++
		}
		last = d
	}
	return steps >= clippedRows && 4*turns >= steps
}
