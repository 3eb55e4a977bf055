package fit

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

const (
	// proposalFreedom is the degrees of freedom of the proposals: tails heavier
	// than the posterior's.
	proposalFreedom = 8

	// firstProposals is how many proposals tell how close they are to the posterior.
	firstProposals = 64

	// leastAcceptance is the share of proposals accepted below which they are
	// too far from the posterior for the greatest weight to be a bound.
	leastAcceptance = 0.3
)

// proposals are draws from a multivariate Student's t around the optimum, with
// the logarithm of the weight of each: posterior over proposal density.
type proposals struct {
	at     []plantAt
	weight []float64
}

// roomFor is no proposal, and memory for n.
func roomFor(n int) proposals {
	return proposals{make([]plantAt, 0, n), make([]float64, 0, n)}
}

// and are the proposals and more of them.
func (p proposals) and(more proposals) proposals {
	return proposals{append(p.at, more.at...), append(p.weight, more.weight...)}
}

// propose draws n proposals.
func (q *posterior) propose(n int) proposals {
	out := roomFor(n)
	for range n {
		eta, r2 := q.scattered(q.b.p.eta, q.root)
		w := q.at(eta)
		out.at = append(out.at, w)
		out.weight = append(out.weight, w.density+0.5*(proposalFreedom+float64(len(q.free)))*math.Log1p(r2/proposalFreedom))
	}
	return out
}

// scattered draws an eta from a Student's t around another, root that of its
// covariance among the free parameters, and returns its squared distance too.
func (q *posterior) scattered(around []float64, root [][]float64) (eta []float64, r2 float64) {
	eta = append([]float64(nil), around...)
	scale := math.Sqrt(proposalFreedom / distuv.ChiSquared{K: proposalFreedom, Src: q.rng}.Rand())
	z := make([]float64, len(q.free))
	for k := range z {
		z[k] = q.rng.NormFloat64() * scale
		r2 += z[k] * z[k]
	}
	for k, j := range q.free {
		for l := range k + 1 {
			eta[j] += root[k][l] * z[l]
		}
	}
	return eta, r2
}

// reject takes count places by rejection, proposing more as needed; ok is false
// where proposals of great weight keep turning up. The bound on the weight is
// the greatest one met (Caffo, Booth and Davis 2002, from memory: empirical
// supremum rejection sampling).
func (q *posterior) reject(pool proposals, count int) (out []plantAt, ok bool) {
	var u []float64
	for {
		for len(u) < len(pool.at) {
			u = append(u, math.Log(q.rng.Float64()))
		}
		out = pool.accepted(u)
		tried := len(pool.at)
		switch {
		case len(out) >= count:
			return out[:count], true
		case float64(len(out)) < leastAcceptance*float64(tried):
			return nil, false
		}
		pool = pool.and(q.propose((count-len(out))*tried/max(len(out), 1) + 8))
	}
}

// accepted are the places that the uniform draws of logarithm u accept, held
// against the greatest weight.
func (p proposals) accepted(u []float64) (out []plantAt) {
	top := slices.Max(p.weight)
	for i, w := range p.weight {
		if u[i] < w-top {
			out = append(out, p.at[i])
		}
	}
	return out
}
