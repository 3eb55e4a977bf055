package report

import "math"

// rangeOf is the lowest and highest finite value, 0 and 0 of none.
func rangeOf(v []float64) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, x := range v {
		if finite(x) {
			low, high = math.Min(low, x), math.Max(high, x)
		}
	}
	if low > high {
		return 0, 0
	}
	return low, high
}

func last(v []float64) float64 {
	if len(v) == 0 {
		return 0
	}
	return v[len(v)-1]
}

func ptr(v float64) *float64 { return &v }
