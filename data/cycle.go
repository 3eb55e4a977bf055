package data

import "time"

// cycleMean replaces the input of a drive that switches on and off in a fixed
// cycle by its mean over each cycle, weighted with time. Cycles begin where
// the drive switches on, so that the first switching on sets their phase. The
// part of a cycle at the start gets the mean of the first whole cycle, the
// part at the end the mean of the last stretch as long as a cycle.
func (r *rows) cycleMean(cycle time.Duration) {
	n := len(r.t)
	if cycle <= 0 || n < 2 || r.t[n-1]-r.t[0] < int64(cycle) {
		return
	}
	c := int64(cycle)
	u := r.v[roleInput]
	sum := newIntegral(r.t, u)
	phase := r.t[0] + modulo(switchOn(r.t, u)-r.t[0], c)
	last := r.t[n-1]
	out := make([]float64, n)
	for i := 0; i < n; {
		start := phase + floorDiv(r.t[i]-phase, c)*c
		end := start + c
		lo, hi := start, end
		if lo < r.t[0] {
			lo, hi = end, end+c
		}
		if hi > last {
			lo, hi = last-c, last
		}
		mean := (sum.at(hi) - sum.at(lo)) / (float64(c) / 1e9)
		for ; i < n && r.t[i] < end; i++ {
			out[i] = mean
		}
	}
	r.v[roleInput] = out
	r.notes = append(r.notes, Note{Code: "cycle-mean", Text: "the input is the mean over each switching cycle of " + cycle.String()})
}

// switchOn is the time of the first rise of the input, else of its first row.
func switchOn(t []int64, u []float64) int64 {
	for i := 1; i < len(u); i++ {
		if u[i] > u[i-1] {
			return t[i]
		}
	}
	return t[0]
}

func floorDiv(a, b int64) int64 { return (a - modulo(a, b)) / b }

// integral is the running integral of an input held between its rows; times
// must be asked for in rising order, up to a cycle back.
type integral struct {
	t   []int64
	u   []float64
	sum []float64 // up to row i, input unit · s
}

func newIntegral(t []int64, u []float64) *integral {
	sum := make([]float64, len(t))
	for i := 1; i < len(t); i++ {
		sum[i] = sum[i-1] + u[i-1]*float64(t[i]-t[i-1])/1e9
	}
	return &integral{t, u, sum}
}

func (s *integral) at(t int64) float64 {
	lo, hi := 0, len(s.t)
	for lo < hi {
		mid := (lo + hi) / 2
		if s.t[mid] <= t {
			lo = mid + 1
		} else {
			hi = mid
		}
	}
	i := max(lo-1, 0)
	return s.sum[i] + s.u[i]*float64(t-s.t[i])/1e9
}
