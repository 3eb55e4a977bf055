package validate

import (
	"math"
	"slices"
)

// quantile returns the p-quantile of sorted values at position p·(n+1)
// (definition 6 of R. J. Hyndman, Y. Fan, The American Statistician 50 (1996)
// 361–365, from memory), the ends where that position lies outside. At these
// positions, where they are whole numbers, the interval between two quantiles
// of a sample holds one more value drawn alike with just the stated
// probability, which is what a band over plausible plants must do; in between
// it holds it slightly more often. Values of +Inf sort last; NaN is not allowed.
func quantile(sorted []float64, p float64) float64 {
	n := len(sorted)
	if n == 0 {
		return math.NaN()
	}
	at := p * float64(n+1)
	k := int(math.Floor(at))
	switch {
	case k < 1:
		return sorted[0]
	case k >= n:
		return sorted[n-1]
	case sorted[k-1] == sorted[k]:
		return sorted[k]
	case math.IsInf(sorted[k], 1):
		if at == float64(k) {
			return sorted[k-1]
		}
		return sorted[k]
	}
	return sorted[k-1] + (at-float64(k))*(sorted[k]-sorted[k-1])
}

// spread is a low, a median and a high value.
type spread struct{ low, median, high float64 }

// spreadOf sorts values in place and returns their median and the ends of the
// middle share `level` of them.
func spreadOf(values []float64, level float64) spread {
	slices.Sort(values)
	return spread{
		low:    quantile(values, (1-level)/2),
		median: quantile(values, 0.5),
		high:   quantile(values, (1+level)/2),
	}
}

// finite returns a pointer to x, nil for NaN and infinities: a figure that
// does not exist is null in every file.
func finite(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}
