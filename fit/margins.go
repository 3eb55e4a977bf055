package fit

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// margin is what one parameter is under one noise shape: Student's t around centre,
// counted from the optimum.
type margin struct{ weight, centre, sd, dof float64 }

// margins is the mixture of a parameter over noise shapes, the weights adding up to 1.
type margins []margin

// mixtureOf is the mixture of parameter i over the members.
func mixtureOf(ms []member, i int) margins {
	out := make(margins, len(ms))
	for k, m := range ms {
		out[k] = margin{m.weight, m.shift[i], math.Sqrt(m.cov[i][i]), m.dof}
	}
	return out
}

// fixedMixture is the mixture of the coefficient of fixed column j over the nodes.
func fixedMixture(nodes []node, j int) margins {
	out := make(margins, len(nodes))
	for k, n := range nodes {
		out[k] = n.fixed[j]
		out[k].weight = n.weight
	}
	return out
}

// mean is that of the mixture.
func (ms margins) mean() float64 {
	mean := 0.0
	for _, m := range ms {
		mean += m.weight * m.centre
	}
	return mean
}

// sd is the standard deviation of the mixture, each margin's sd taken as such.
func (ms margins) sd() float64 {
	mean, square := ms.mean(), 0.0
	for _, m := range ms {
		square += m.weight * (m.sd*m.sd + (m.centre-mean)*(m.centre-mean))
	}
	return math.Sqrt(square)
}

// quantile returns the p quantile, 0 where the mixture has no width. On the scale of
// the normal quantile of the probability the distribution function of a mixture is
// nearly straight, so that few steps find it.
func (ms margins) quantile(p float64) float64 {
	scale := ms.sd()
	if !(scale > 0) {
		return 0
	}
	goal := normalQuantile(p)
	away := func(x float64) float64 {
		return math.Min(math.Max(normalQuantile(ms.cdf(x)), -9), 9) - goal
	}
	guess := ms.mean() + goal*scale
	lo, hi := guess-0.3*scale, guess+0.3*scale
	fl, fh := away(lo), away(hi)
	for range 60 {
		switch {
		case fl >= 0:
			lo, hi, fh = lo-2*(hi-lo), lo, fl
			fl = away(lo)
		case fh <= 0:
			lo, hi, fl = hi, hi+2*(hi-lo), fh
			fh = away(hi)
		}
		if fl < 0 && fh > 0 {
			break
		}
	}
	if !(fl < 0 && fh > 0) {
		return (lo + hi) / 2
	}
	b := bracket{lo: lo, hi: hi, fl: fl, fh: fh}
	for range 50 {
		x := b.next()
		f := away(x)
		if math.Abs(f) < 1e-7 || b.hi-b.lo < 1e-9*scale {
			return x
		}
		b.take(x, f)
	}
	return b.middle()
}

// cdf is the probability below x; margins without a width have none.
func (ms margins) cdf(x float64) float64 {
	s := 0.0
	for _, m := range ms {
		if m.sd > 0 {
			s += m.weight * studentCDF((x-m.centre)/m.sd, m.dof)
		}
	}
	return math.Min(s, 1) // the weights add up to 1 but for their rounding
}

// studentCDF is the distribution function of Student's t. Above 30 degrees of
// freedom it uses the normal approximation of Abramowitz and Stegun 26.7.8
// (from memory), good to 2e-5 there.
func studentCDF(x, nu float64) float64 {
	if math.IsInf(nu, 1) {
		return 0.5 * math.Erfc(-x/math.Sqrt2)
	}
	if nu > 30 {
		z := x * (1 - 1/(4*nu)) / math.Sqrt(1+x*x/(2*nu))
		return 0.5 * math.Erfc(-z/math.Sqrt2)
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: math.Max(nu, 1)}.CDF(x)
}
