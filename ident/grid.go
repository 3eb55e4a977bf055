package ident

import "math"

// A stretch is a series of rows lo ≤ k < hi that each follow the row before
// them by the same step, in s.
type stretch struct {
	lo, hi int
	step   float64
}

// uniformTolerance is how far, in steps, the rows of a stretch may lie off an
// exact arithmetic series, besides the rounding of the time stamps. It leaves
// an error below 1e-11 of the span.
const uniformTolerance = 1e-11

// timeTolerance is the uncertainty of a difference of two rounded times.
func timeTolerance(t []float64) float64 {
	if len(t) == 0 {
		return 0
	}
	greatest := max(math.Abs(t[0]), math.Abs(t[len(t)-1]))
	return 4 * (math.Nextafter(greatest, math.Inf(1)) - greatest)
}

// stretches splits the rows 1 … len(t)−1 into uniform stretches, as long as
// they can be found cheaply; t is strictly ascending.
func stretches(t []float64, tolerance float64) []stretch {
	var out []stretch
	for lo := 1; lo < len(t); {
		s := longestStretch(t, lo, tolerance)
		out = append(out, s)
		lo = s.hi
	}
	return out
}

// longestStretch returns a uniform stretch that starts with row lo.
func longestStretch(t []float64, lo int, tolerance float64) stretch {
	step := t[lo] - t[lo-1]
	hi := lo + 1
	for hi < len(t) && math.Abs(t[hi]-t[hi-1]-step) <= tolerance+1e-9*step {
		hi++
	}
	// Equal steps may still drift; the step is measured over the whole.
	for ; hi > lo+1; hi = lo + (hi-lo)/2 {
		step = (t[hi-1] - t[lo-1]) / float64(hi-lo)
		if isSeries(t[lo-1:hi], step, tolerance+uniformTolerance*step) {
			return stretch{lo, hi, step}
		}
	}
	return stretch{lo, lo + 1, t[lo] - t[lo-1]}
}

func isSeries(t []float64, step, tolerance float64) bool {
	for k := range t {
		if math.Abs(t[k]-(t[0]+float64(k)*step)) > tolerance {
			return false
		}
	}
	return true
}
