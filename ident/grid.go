package ident

import "math"

// A stretch is a series of rows lo ≤ k < hi. Unless it is ragged they each
// follow the row before them by the same step, in s.
type stretch struct {
	lo, hi int
	step   float64
	ragged bool
}

// timeTolerance is the uncertainty of a difference of two rounded times: rows
// that lie no further off an arithmetic series are uniform, and a change that
// falls no further from a row falls on it.
func timeTolerance(t []float64) float64 {
	if len(t) == 0 {
		return 0
	}
	greatest := max(math.Abs(t[0]), math.Abs(t[len(t)-1]))
	return 4 * (math.Nextafter(greatest, math.Inf(1)) - greatest)
}

// fewestUniform is the length from which a uniform stretch is worth a
// transition of its own.
const fewestUniform = 4

// stretches splits the rows 1 … len(t)−1 into uniform and ragged stretches; t
// is strictly ascending. The work is of order len(t).
func stretches(t []float64, tolerance float64) []stretch {
	var out []stretch
	for lo := 1; lo < len(t); {
		s := longestSeries(t, lo, tolerance)
		s.ragged = s.hi-s.lo < fewestUniform
		if last := len(out) - 1; s.ragged && last >= 0 && out[last].ragged {
			out[last].hi = s.hi
		} else {
			out = append(out, s)
		}
		lo = s.hi
	}
	return out
}

// longestSeries returns the uniform stretch that starts with row lo: its
// length is multiplied by four while it can be, and then found by bisection.
func longestSeries(t []float64, lo int, tolerance float64) stretch {
	try := func(hi int) (stretch, bool) {
		step := (t[hi-1] - t[lo-1]) / float64(hi-lo)
		return stretch{lo: lo, hi: hi, step: step}, isSeries(t[lo-1:hi], step, tolerance)
	}
	best, _ := try(lo + 1)
	tooLong := len(t) + 1
	for size := fewestUniform; best.hi < len(t); size *= 4 {
		s, ok := try(min(lo+size, len(t)))
		if !ok {
			tooLong = s.hi
			break
		}
		best = s
	}
	for best.hi+1 < tooLong && best.hi < len(t) {
		s, ok := try(best.hi + (tooLong-best.hi)/2)
		if ok {
			best = s
		} else {
			tooLong = s.hi
		}
	}
	return best
}

func isSeries(t []float64, step, tolerance float64) bool {
	for k := range t {
		if math.Abs(t[k]-(t[0]+float64(k)*step)) > tolerance {
			return false
		}
	}
	return true
}
