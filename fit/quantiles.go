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
