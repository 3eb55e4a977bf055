package validate

import "slices"

// medianInterval returns the median of the intervals of t, 0 when there is none.
func medianInterval(t []float64) float64 {
	if len(t) < 2 {
		return 0
	}
	d := make([]float64, len(t)-1)
	for i := range d {
		d[i] = t[i+1] - t[i]
	}
	return median(d)
}

// median returns the middle one of x, of an even number the upper of the two.
func median(x []float64) float64 {
	sorted := slices.Clone(x)
	slices.Sort(sorted)
	return sorted[len(sorted)/2]
}
