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
		return [][]float64{{t, d}, {(tau + dead) / (n + 1), dead / (n + 1)}, e.shared(tau + dead)}
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

// shared is the best place of a scan among equal lags that share a delay with the dead time,
// all of it or somewhat less: the sum of squares has more than one valley along that line.
func (e *engine) shared(delay float64) []float64 {
	var best []float64
	least := math.Inf(1)
	for _, all := range []float64{delay, 0.8 * delay} {
		for _, lags := range []float64{0.15, 0.3, 0.45, 0.6, 0.8, 1} {
			eta := []float64{lags * all / float64(e.st.Order()), (1 - lags) * all}
			for j := range eta {
				eta[j] = math.Min(math.Max(eta[j], e.lower[j]), e.upper[j])
			}
			if s := e.eval(eta, false).s; best == nil || s < least {
				best, least = eta, s
			}
		}
	}
	return best
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
