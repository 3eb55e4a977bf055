package fit

import "math"

// The affine-invariant ensemble (Goodman and Weare 2010, from memory): a slow but
// different way to the plausible plants, to hold them against.

// walkers are n places spread as widely as the starting covariance, drawn in
// where the density there is next to nothing.
func (q *posterior) walkers(n int) []plantAt {
	out := make([]plantAt, n)
	for i := range out {
		size := 1.0
		for range 40 {
			if out[i] = q.at(q.start(size)); out[i].density > -60 {
				break
			}
			size *= 0.7
		}
		if math.IsInf(out[i].density, -1) {
			out[i] = q.at(q.b.p.eta)
		}
	}
	return out
}

// start is an eta around the optimum, by a multiple of the starting covariance.
func (q *posterior) start(size float64) []float64 {
	e := q.b.e
	eta := append([]float64(nil), q.b.p.eta...)
	z := make([]float64, len(q.free))
	for k := range z {
		z[k] = q.rng.NormFloat64() * size
	}
	for k, j := range q.free {
		for l := range z {
			eta[j] += q.root[k][l] * z[l]
		}
		if eta[j] < e.lower[j] {
			eta[j] = math.Min(2*e.lower[j]-eta[j], e.upper[j])
		}
	}
	return eta
}

// sweep moves every walker once, each half along lines through the other.
func (q *posterior) sweep(ws []plantAt) {
	half, d := len(ws)/2, len(q.free)
	for side := range 2 {
		for i := range half {
			k := side*half + i
			other := ws[(1-side)*half+q.rng.IntN(half)]
			u := q.rng.Float64()
			z := (1 + u) * (1 + u) / 2 // density ∝ 1/√z on [1/2, 2]
			eta := append([]float64(nil), q.b.p.eta...)
			for _, j := range q.free {
				eta[j] = other.eta[j] + z*(ws[k].eta[j]-other.eta[j])
			}
			accept := q.rng.Float64()
			next := q.at(eta)
			if math.Log(accept) < float64(d-1)*math.Log(z)+next.density-ws[k].density {
				ws[k] = next
			}
		}
	}
}
