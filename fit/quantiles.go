package fit

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// normalQuantile returns z with P(Z ≤ z) = p for a standard normal Z; −Inf at
// p = 0, +Inf at 1, NaN for p outside [0, 1].
func normalQuantile(p float64) float64 {
	if !(p >= 0 && p <= 1) {
		return math.NaN()
	}
	return distuv.UnitNormal.Quantile(p)
}

// expandedFreedom is where the expansion for many degrees of freedom takes
// over: from there on it is good to 1e-14 for p in [0.0001, 0.9999], while the
// inversion of the incomplete beta function loses digits as they grow.
const expandedFreedom = 1e4

// tQuantile returns t with P(T ≤ t) = p for Student's t with nu > 0 degrees of
// freedom, whole or not; +Inf degrees are the normal's. It returns −Inf at
// p = 0, +Inf at 1, and NaN for p outside [0, 1] and where nu ≤ 0: there is no
// interval without a degree of freedom.
func tQuantile(p, nu float64) float64 {
	if !(nu > 0) || !(p >= 0 && p <= 1) {
		return math.NaN()
	}
	z := normalQuantile(p)
	switch {
	case math.IsInf(z, 0):
		return z
	case nu > expandedFreedom:
		return expandedT(z, nu)
	}
	return distuv.StudentsT{Sigma: 1, Nu: nu}.Quantile(p)
}

// expandedT is the expansion of the t quantile in 1/ν around the normal
// quantile z: Abramowitz and Stegun, Handbook of Mathematical Functions, 26.7.5
// (from memory), to the third power.
func expandedT(z, nu float64) float64 {
	zz := z * z
	first := z * (zz + 1) / 4
	second := z * ((5*zz+16)*zz + 3) / 96
	third := z * (((3*zz+19)*zz+17)*zz - 15) / 384
	return z + (first+(second+third/nu)/nu)/nu
}

// limitFreedom is where F's second degrees of freedom count as infinite: the
// error of the limit, of order 1/d2, is then below that of the inversion.
const limitFreedom = 1e8

// fQuantile returns f with P(F ≤ f) = p for the F distribution with d1 and d2
// degrees of freedom, both above 0, whole or not; d1 must be finite. NaN
// outside of that and for p outside [0, 1]; +Inf at p = 1.
func fQuantile(p, d1, d2 float64) float64 {
	switch {
	case !(d1 > 0) || !(d2 > 0) || math.IsInf(d1, 1) || !(p >= 0 && p <= 1):
		return math.NaN()
	case p == 1:
		return math.Inf(1)
	case d2 >= limitFreedom:
		return chi2Quantile(p, d1) / d1
	}
	return distuv.F{D1: d1, D2: d2}.Quantile(p)
}

// chi2Quantile returns x with P(X ≤ x) = p for the χ² distribution with k > 0
// degrees of freedom, whole or not; +Inf at p = 1, NaN outside of that.
func chi2Quantile(p, k float64) float64 {
	switch {
	case !(k > 0) || math.IsInf(k, 1) || !(p >= 0 && p <= 1):
		return math.NaN()
	case p == 1:
		return math.Inf(1)
	}
	return distuv.ChiSquared{K: k}.Quantile(p)
}

// chi2Tail returns P(X > x), the p-value of a χ² statistic x with k > 0 degrees
// of freedom; NaN where x is NaN or k is not positive.
func chi2Tail(x, k float64) float64 {
	switch {
	case !(k > 0) || math.IsInf(k, 1) || math.IsNaN(x):
		return math.NaN()
	case x <= 0:
		return 1
	}
	return distuv.ChiSquared{K: k}.Survival(x)
}
