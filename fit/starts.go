package fit

import "math"

// starts returns places from which to fit structure e.st, given the best
// single-lag plant (tau, dead) and, for a chain, the best of the chain with
// one lag fewer (nil when there is none).
//
// A chain spreads the delay of the single-lag plant over its lags: the mean of
// its impulse response is dead time plus the sum of lags, the variance the sum
// of squared lags, so n equal lags of tau/√n have the same variance
// (identification.md §3 of the references).
func (e *engine) starts(tau, dead float64, shorter []float64) [][]float64 {
	n := float64(e.st.Order())
	if e.st.Equal() {
		t := tau / math.Sqrt(n)
		d := math.Max(tau+dead-n*t, 0)
		return [][]float64{{t, d}, {(tau + dead) / (n + 1), dead / (n + 1)}}
	}
	total := tau + dead
	var out [][]float64
	if shorter != nil {
		k := len(shorter) - 1
		last, d := shorter[k-1], shorter[k]
		for _, x := range []float64{0.3, 0.9} {
			s := append([]float64(nil), shorter[:k]...)
			extra := math.Max(x*d, 0.2*last)
			s = append(s, math.Min(extra, last), math.Max(d-extra, 0))
			out = append(out, s)
		}
		s := append([]float64(nil), shorter[:k]...)
		s = append(s, last/2, d)
		s[k-1] = last / 2
		out = append(out, s)
	}
	t := math.Max(tau/math.Sqrt(n), 1e-3*total)
	s := make([]float64, int(n)+1)
	for i := range int(n) {
		s[i] = t * math.Pow(0.8, float64(i))
	}
	s[int(n)] = math.Max(total-n*t, 0)
	return append(out, s)
}

// patterns lists the ways in which lags of a chain can coincide, as groups;
// the fit of a chain has its optimum either where all lags differ or on one
// of these. All lags distinct is not listed.
func patterns(n int) [][]int {
	switch n {
	case 2:
		return [][]int{{0, 0}}
	case 3:
		return [][]int{{0, 0, 0}, {0, 1, 1}, {0, 0, 1}}
	case 4:
		return [][]int{{0, 0, 0, 0}, {0, 1, 1, 1}, {0, 0, 0, 1}, {0, 0, 1, 1}, {0, 1, 1, 2}, {0, 1, 2, 2}, {0, 0, 1, 2}}
	}
	return nil
}
