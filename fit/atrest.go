package fit

import (
	"math"
	"slices"
)

// startsAtRest reports whether every record holds still before its first
// change of the input, for the few rows it takes to tell: a straight line
// through them has a slope that is lost in the noise and the resolution, or
// that over the lag tau amounts to less than a tenth of the swing.
func startsAtRest(recs []*record, tau float64) bool {
	for _, r := range recs {
		n := 0
		for n < len(r.t) && r.t[n] < r.input.At[0] {
			n++
		}
		if n < 4 {
			return false
		}
		slope, se := lineSlope(r.t[:n], r.y[:n])
		lost := 2.5*se + r.run.Quality.Quantum/(r.t[n-1]-r.t[0])
		if math.Abs(slope) > lost && math.Abs(slope)*tau > 0.1*r.rise() {
			return false
		}
	}
	return true
}

// lineSlope is the least-squares slope of y over t and its standard error.
func lineSlope(t, y []float64) (slope, se float64) {
	n := float64(len(t))
	var mt, my, stt, sty, ss float64
	for i := range t {
		mt += t[i] / n
		my += y[i] / n
	}
	for i := range t {
		stt += (t[i] - mt) * (t[i] - mt)
		sty += (t[i] - mt) * (y[i] - my)
	}
	slope = sty / stt
	for i := range t {
		d := y[i] - my - slope*(t[i]-mt)
		ss += d * d
	}
	return slope, math.Sqrt(ss / math.Max(n-2, 1) / stt)
}

// elsewhereShare is the part of what a fit from rest leaves that an earlier input must
// explain for it to be tried: what remains of correlated noise of fifty independent
// values gives it a fiftieth.
const elsewhereShare = 0.05

// comesFromElsewhere reports whether an answer to a change at the first row, of the
// size that suits, explains much of what f leaves of a log.
func (f *fitted) comesFromElsewhere() bool {
	p := f.e.eval(f.p.eta, true)
	for i, r := range f.e.recs {
		_, _, left := r.solveLinear(&f.e.work[i], p.gain)
		start := r.sim.WithInput(r.fromFirstRow()).Response(nil, f.st, f.e.lags(p.eta), 0)
		var basis [][]float64
		for _, c := range slices.Concat(r.fixed, f.e.work[i].raw) {
			w := make([]float64, len(c))
			r.filter.apply(w, c)
			addToBasis(&basis, w)
		}
		white := make([]float64, len(left))
		r.filter.apply(white, left)
		r.filter.apply(start, start)
		before := dot(start, start)
		project(start, basis)
		project(start, basis)
		after, along := dot(start, start), dot(start, white)
		if after > 1e-8*before && along*along > elsewhereShare*after*dot(white, white) {
			return true
		}
	}
	return false
}
