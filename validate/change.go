package validate

import (
	"math"
	"math/rand/v2"
	"slices"
)

// A history is one parameter run by run: estimates x with standard errors se
// at ascending times t. On a scale where errors are near normal: the
// logarithm for gain and lags, seconds for dead time.
type history struct{ t, x, se []float64 }

// honestRuns is the number of runs from which the scatter between runs is
// judged by the runs themselves. With fewer the test has to believe the
// intervals of the fits.
const honestRuns = 8

// draws is the number of histories without change that a small p-value is
// counted on; a large one stops much earlier, see pvalues.
const draws = 9999

// A change is the outcome of one test for change.
type change struct {
	p      float64 // of a history without change giving as much; not corrected for the other tests
	first  int     // step: index of the first run after it
	effect float64 // step: after − before; slope: per unit of t; on the history's scale
	se     float64 // of effect, with the scatter between runs in it
	taken  float64 // weighted sum of squares that it takes out
}

// test looks for one step at an unknown run and for one slope.
//
// The step is sought by the greatest standardised difference of the weighted
// means before and after, over all places (the likelihood-ratio test for a
// shift at an unknown place: K. J. Worsley, J. Amer. Statist. Assoc. 74 (1979)
// 365–367, from memory); the slope by weighted least squares on t. Weights
// are 1/(se² + between²), between² the variance between runs that the
// successive differences show beyond the standard errors.
//
// Each is computed twice: against the stated standard errors, and, from
// honestRuns on, against the scatter left about the change itself, which does
// not depend on how wide the runs scatter or on whether the fits' intervals
// are right. Both must be improbable: p is the larger. Their distribution
// without change has no closed form; it is drawn with the history's own times
// and weights.
func (h history) test(rng *rand.Rand) (step, slope change) {
	w := h.weights()
	seen := h.statistics(h.x, w)
	step.p, slope.p = h.pvalues(seen, w, rng)
	step.first = seen.first
	step.taken, slope.taken = seen.step, seen.slope
	step.effect, step.se = h.stepEffect(seen, w)
	slope.effect, slope.se = h.slopeEffect(seen, w)
	return step, slope
}

// weights returns 1/(se² + between²).
func (h history) weights() []float64 {
	between := 0.0
	if len(h.x) >= honestRuns {
		between = h.betweenVariance()
	}
	w := make([]float64, len(h.se))
	for i, s := range h.se {
		w[i] = 1 / (s*s + between)
	}
	return w
}

// betweenVariance returns the variance between runs at which the median of
// (x[i+1] − x[i])²/(se[i]² + se[i+1]² + 2·variance) is that of χ² with one
// degree of freedom; 0 when the standard errors alone explain the scatter. A
// step moves one difference only, so it does not pass for scatter.
func (h history) betweenVariance() float64 {
	const medianChiSquare = 0.454936 // of χ² with 1 degree of freedom
	ratios := make([]float64, len(h.x)-1)
	excess := func(v float64) float64 {
		for i := range ratios {
			d := h.x[i+1] - h.x[i]
			ratios[i] = d * d / (h.se[i]*h.se[i] + h.se[i+1]*h.se[i+1] + 2*v)
		}
		slices.Sort(ratios)
		return (ratios[(len(ratios)-1)/2]+ratios[len(ratios)/2])/2 - medianChiSquare
	}
	if excess(0) <= 0 {
		return 0
	}
	lo, hi := 0.0, 0.0
	for i := 1; i < len(h.x); i++ {
		d := h.x[i] - h.x[i-1]
		hi = max(hi, d*d/medianChiSquare)
	}
	for range 60 {
		if mid := (lo + hi) / 2; excess(mid) > 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi
}

// statistics of one history, in weighted sums of squares.
type statistics struct {
	total float64 // about the weighted mean
	step  float64 // taken out by the best step, (W1·W2/W)·(m2 − m1)²
	slope float64 // taken out by the slope
	first int     // of the best step: first run after it
}

func (h history) statistics(x, w []float64) statistics {
	var sw, swx, swt float64
	for i := range x {
		sw += w[i]
		swx += w[i] * x[i]
		swt += w[i] * h.t[i]
	}
	mean, centre := swx/sw, swt/sw
	var s statistics
	var before, beforeX, stt, stx float64 // sums of w, w·(x − mean) over the runs so far
	for i := range x {
		if i > 0 {
			// with Σw(x − mean) = 0 the difference of means is −beforeX·(1/W1 + 1/W2)
			if b := beforeX * beforeX * sw / (before * (sw - before)); b > s.step {
				s.step, s.first = b, i
			}
		}
		d, dt := x[i]-mean, h.t[i]-centre
		before += w[i]
		beforeX += w[i] * d
		s.total += w[i] * d * d
		stt += w[i] * dt * dt
		stx += w[i] * dt * d
	}
	if stt > 0 {
		s.slope = stx * stx / stt
	}
	return s
}

// pvalues counts how often histories without change reach the statistics
// seen. Counting stops when both have been reached often enough (sequential
// Monte Carlo p-values: J. Besag, P. Clifford, Biometrika 78 (1991) 301–304,
// from memory).
func (h history) pvalues(seen statistics, w []float64, rng *rand.Rand) (step, slope float64) {
	const enough = 50
	n := len(h.x)
	x := make([]float64, n)
	var known, free [2]int // draws that reach the statistic, with known and with free scale
	total := 0
	for total < draws && (fewest(known, free, n, 0) < enough || fewest(known, free, n, 1) < enough) {
		for i := range x {
			x[i] = rng.NormFloat64() / math.Sqrt(w[i])
		}
		s := h.statistics(x, w)
		total++
		count(&known[0], s.step >= seen.step)
		count(&known[1], s.slope >= seen.slope)
		count(&free[0], s.step*seen.total >= seen.step*s.total)
		count(&free[1], s.slope*seen.total >= seen.slope*s.total)
	}
	p := func(k int) float64 {
		hits := known[k]
		if n >= honestRuns {
			hits = max(hits, free[k])
		}
		return float64(hits+1) / float64(total+1)
	}
	return p(0), p(1)
}

// fewest is the count that decides when statistic k has been reached often enough.
func fewest(known, free [2]int, n, k int) int {
	if n >= honestRuns {
		return max(known[k], free[k])
	}
	return known[k]
}

func count(n *int, hit bool) {
	if hit {
		*n++
	}
}

// stepEffect returns the difference of the weighted means after and before
// the best step and its standard error.
func (h history) stepEffect(s statistics, w []float64) (effect, se float64) {
	var w1, x1, w2, x2 float64
	for i, x := range h.x {
		if i < s.first {
			w1 += w[i]
			x1 += w[i] * x
		} else {
			w2 += w[i]
			x2 += w[i] * x
		}
	}
	return x2/w2 - x1/w1, math.Sqrt(1/w1+1/w2) * h.scatter(s.total-s.step)
}

// slopeEffect returns the slope per unit of t and its standard error.
func (h history) slopeEffect(s statistics, w []float64) (effect, se float64) {
	var sw, swt, stt, stx float64
	for i := range w {
		sw += w[i]
		swt += w[i] * h.t[i]
	}
	for i := range w {
		dt := h.t[i] - swt/sw
		stt += w[i] * dt * dt
		stx += w[i] * dt * h.x[i]
	}
	if stt == 0 {
		return 0, math.Inf(1)
	}
	return stx / stt, h.scatter(s.total-s.slope) / math.Sqrt(stt)
}

// scatter returns by how much the runs scatter more about the change than
// their weights say, at least 1 (the Birge ratio).
func (h history) scatter(left float64) float64 {
	if len(h.x) < honestRuns {
		return 1
	}
	return max(1, math.Sqrt(left/float64(len(h.x)-2)))
}
