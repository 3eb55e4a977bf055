package fit

import (
	"cmp"
	"math"
	"math/bits"
	"slices"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/stat"
)

// autocorrelation returns the autocorrelation of r at the lags 0 to maxLag,
//
//	r_k = Σ_{t>k} (e_t − ē)(e_{t−k} − ē) / Σ_t (e_t − ē)²,
//
// with the mean removed and the whole sum of squares below the line whatever
// the lag: Box and Jenkins' estimate (from memory). Lags are counted in rows.
// It is 0 at lags that r does not reach, and throughout where r is constant.
func autocorrelation(r []float64, maxLag int) []float64 {
	acf := make([]float64, maxLag+1)
	e := centred(r)
	whole := floats.Dot(e, e)
	if whole == 0 {
		return acf
	}
	for k := 0; k <= maxLag && k < len(e); k++ {
		acf[k] = floats.Dot(e[k:], e[:len(e)-k]) / whole
	}
	return acf
}

// centred returns r less its mean.
func centred(r []float64) []float64 {
	e := append([]float64(nil), r...)
	floats.AddConst(-stat.Mean(r, nil), e)
	return e
}

// ljungBox returns the statistic of Ljung and Box (Biometrika 65 (1978) 297–303),
//
//	Q = n(n+2) Σ_{k=1..lags} r_k²/(n−k),
//
// and its p-value by χ² with lags − fitted degrees of freedom, where fitted
// counts the parameters of the noise model that whitened r. A small p says
// that r is not white. p is NaN where no degree of freedom is left or r has no
// more than lags values.
func ljungBox(r []float64, lags, fitted int) (q, p float64) {
	n := len(r)
	if n <= lags {
		return math.NaN(), math.NaN()
	}
	acf := autocorrelation(r, lags)
	for k := 1; k <= lags; k++ {
		q += acf[k] * acf[k] / float64(n-k)
	}
	q *= float64(n) * float64(n+2)
	return q, chi2Tail(q, float64(lags-fitted))
}

// effectiveSampleSize returns the number of independent values whose mean is
// as well known as that of n values with the autocorrelation rho^k at lag k,
//
//	n_eff = n / (1 + 2 Σ_{k<n} (1 − k/n) rho^k),
//
// −1 < rho ≤ 1. For many values it is n(1−rho)/(1+rho). Bayley and Hammersley,
// Suppl. J. R. Stat. Soc. 8 (1946) 184 (from memory).
func effectiveSampleSize(n int, rho float64) float64 {
	sum, power := 0.0, 1.0
	for k := 1; k < n; k++ {
		power *= rho
		if math.Abs(power) < 1e-20 {
			break
		}
		sum += (1 - float64(k)/float64(n)) * power
	}
	return float64(n) / (1 + 2*sum)
}

// crossCorrelationP returns the p-value of a test whether r, the whitened
// residuals of a model, still depends on the present and past changes of the
// input, whose basis is that of changeBasis for the same rows. A small p says
// that the model has not explained all the input does.
//
// Outliers are tamed first: each residual is replaced by the normal score of its
// rank (van der Waerden 1952, from memory). Q is the squared length of the scores'
// projection on the windowed changes over the scores' variance, which under
// exchangeable residuals follows χ² with as many degrees of freedom as there
// are independent windows. Parameters fitted to the same residuals make the
// test lose a little of its size, never gain.
//
// NaN where the input does not change or there are too few rows.
func crossCorrelationP(r []float64, basis [][]float64) float64 {
	n := len(r)
	if len(basis) == 0 || n < 2*len(basis)+2 {
		return math.NaN()
	}
	scores := normalScores(r)
	variance := floats.Dot(scores, scores) / float64(n-1)
	if variance == 0 {
		return 1
	}
	q := 0.0
	for _, column := range basis {
		c := floats.Dot(column, scores)
		q += c * c
	}
	return chi2Tail(q/variance, float64(len(basis)))
}

// changeBasis is an orthonormal basis, free of the mean, of the changes du of the
// input by rows, du[t] = u[t] − u[t−1], in so many windows of past rows.
//
// A log has few changes of the input, so single lags would rest on a handful
// of residuals and a misfit that lasts would hide among them. The lags
// are therefore taken in windows that double, 0, 1–2, 3–6, 7–14, …, and in each
// window the residuals are compared with the changes that lie in it.
func changeBasis(du []float64, windows int) [][]float64 {
	if len(du) == 0 {
		return nil
	}
	ones := make([]float64, len(du))
	floats.AddConst(1, ones)
	return orthonormal(append([][]float64{ones}, windowedChanges(du, windows)...), 1e-8)[1:]
}

// windowsTo is the number of windows that hold the lags 0 to the given one.
func windowsTo(lag int) int { return bits.Len(uint(lag + 1)) }

// windowedChanges returns, for so many of the windows 0, 1–2, 3–6, … of lags, the
// sum of du over the window before each row.
func windowedChanges(du []float64, windows int) [][]float64 {
	level := make([]float64, len(du)+1) // level[t] = Σ du[:t]
	for t, d := range du {
		level[t+1] = level[t] + d
	}
	out := columns(windows, len(du))
	for w, column := range out {
		first, next := 1<<w-1, 1<<(w+1)-1
		for t := range column {
			column[t] = level[max(t-first+1, 0)] - level[max(t-next+1, 0)]
		}
	}
	return out
}

// normalScores replaces each value by the normal quantile of rank/(n+1), ties
// by their mean rank, and takes the mean off.
func normalScores(r []float64) []float64 {
	n := len(r)
	order := ordered(r)
	scores := make([]float64, n)
	for a := 0; a < n; {
		b := a + 1
		for b < n && order[b].value == order[a].value {
			b++
		}
		z := normalQuantile((float64(a+b) + 1) / 2 / float64(n+1))
		for _, e := range order[a:b] {
			scores[e.at] = z
		}
		a = b
	}
	floats.AddConst(-stat.Mean(scores, nil), scores)
	return scores
}

// placed is a value with its place.
type placed struct {
	value float64
	at    int
}

// ordered is r in ascending order. The values are dealt out into as many even classes as
// there are values, which are then sorted one by one: residuals leave few in most.
func ordered(r []float64) []placed {
	n := len(r)
	lo, hi := rangeOf(r)
	class := func(v float64) int {
		if c := (v - lo) / (hi - lo) * float64(n); c > 0 { // not where all are the same
			return int(math.Min(c, float64(n-1)))
		}
		return 0
	}
	next := make([]int, n+1) // where the next value of a class goes
	for _, v := range r {
		next[class(v)+1]++
	}
	for c := 1; c < n; c++ {
		next[c] += next[c-1]
	}
	out := make([]placed, n)
	for t, v := range r {
		c := class(v)
		out[next[c]] = placed{v, t}
		next[c]++
	}
	for c, from := 0, 0; c < n; c++ { // next[c] is now the end of the class
		slices.SortFunc(out[from:next[c]], func(a, b placed) int { return cmp.Compare(a.value, b.value) })
		from = next[c]
	}
	return out
}
