package fit

import (
	"math"
	"slices"
)

const (
	// kernelCentres is the number of kernels of a proposal.
	kernelCentres = 32

	// roundSize is the number of proposals between two adaptations.
	roundSize = 64

	// leastEffective is the share of a pool that its effective number of draws must
	// reach before it counts as it is; below, its weights are evened out.
	leastEffective = 0.2

	// lessons are the rounds that only teach, from kernels wider by lessonWidth, so
	// that what lies further out is found.
	lessons     = 3
	lessonWidth = 2
	keptWidth   = 1.4 // of the rounds that are kept: wide enough that no weight stands out

	// enoughEffective is how many effective draws there must be for each plant taken,
	// unless mostRounds come before.
	enoughEffective = 1.5
	mostRounds      = 24
)

// kernels are proposals from equal Student's t densities around some places: a
// picture of the posterior drawn by the places that it is known at.
type kernels struct {
	q       *posterior
	centres [][]float64 // eta
	root    [][]float64 // of the covariance of a kernel
	seen    [][]float64 // the centres, in units of root
	logdet  float64     // of root
}

// adapt takes count places where lags are nearly exchangeable or pressed against
// zero, and one Student's t is no picture of the posterior: from a mixture of kernels
// around the places known so far, weighted by posterior over proposal density, in
// rounds (population Monte Carlo: Cappé, Guillin, Marin and Robert 2004, from
// memory). The places are drawn in proportion to their weights, so that some come
// twice.
func (q *posterior) adapt(pool proposals, count int) []plantAt {
	optimum := q.at(q.b.p.eta)
	if math.IsInf(optimum.density, -1) { // not even the optimum is plausible: no other place is
		return q.alone(count)
	}
	pool = pool.and(proposals{[]plantAt{optimum}, []float64{optimum.density}})
	for range lessons {
		pool = q.around(pool, lessonWidth).propose(roundSize)
		if pool.effective() < 1.5 { // one place, or none, has it all
			pool = pool.and(proposals{[]plantAt{optimum}, []float64{pool.top(optimum.density)}})
		}
	}
	kept := roomFor(4 * roundSize)
	for range mostRounds - lessons {
		kept = kept.and(q.around(pool, keptWidth).propose(roundSize))
		if kept.effective() > enoughEffective*float64(count) {
			break
		}
		if !math.IsInf(kept.top(math.Inf(-1)), -1) {
			pool = kept
		}
	}
	if math.IsInf(kept.top(math.Inf(-1)), -1) {
		return q.alone(count)
	}
	return kept.drawn(kept.shares(1), count, q.rng.Float64())
}

// alone is the optimum, so many times.
func (q *posterior) alone(count int) []plantAt {
	p := q.e.eval(q.b.p.eta, false)
	return slices.Repeat([]plantAt{{eta: p.eta, gain: p.gain, gg: p.gg}}, count)
}

// drawn are count places in proportion to their shares, evenly spaced in their sum
// from the start u on; the same place may come twice.
func (p proposals) drawn(shares []float64, count int, u float64) []plantAt {
	out := make([]plantAt, 0, count)
	sum, i := 0.0, -1
	for k := range count {
		for at := (float64(k) + u) / float64(count); i < 0 || sum < at && i < len(shares)-1; {
			i++
			sum += shares[i]
		}
		out = append(out, p.at[i])
	}
	return out
}

// shares are the weights to a power, scaled to a sum of 1; places without a finite
// weight have none.
func (p proposals) shares(power float64) []float64 {
	top := p.top(0)
	out := make([]float64, len(p.weight))
	sum := 0.0
	for i, w := range p.weight {
		if isFinite(w) {
			out[i] = math.Exp(power * (w - top))
		}
		sum += out[i]
	}
	sum = max(sum, 1) // the greatest is 1
	for i := range out {
		out[i] /= sum
	}
	return out
}

// top is the greatest finite weight, or the one given where there is none.
func (p proposals) top(none float64) float64 {
	top, found := math.Inf(-1), false
	for _, w := range p.weight {
		if isFinite(w) {
			top, found = max(top, w), true
		}
	}
	if !found {
		return none
	}
	return top
}

// effective is the number of equal draws that weighted ones are worth, 1/Σw²
// (Kong 1992, from memory); 0 where no share is above 0.
func effective(shares []float64) float64 {
	squares := dot(shares, shares)
	if squares == 0 {
		return 0
	}
	return 1 / squares
}

// effective is that number for the weights as they are.
func (p proposals) effective() float64 {
	top := p.top(0)
	sum, squares := 0.0, 0.0
	for _, w := range p.weight {
		if isFinite(w) {
			share := math.Exp(w - top)
			sum += share
			squares += share * share
		}
	}
	if squares == 0 {
		return 0
	}
	return sum * sum / squares
}

// around lays kernels around the places of a pool. Their width is that of a normal
// reference (Silverman 1986, from memory) for as many draws as the pool is worth,
// or wider.
func (q *posterior) around(pool proposals, wider float64) *kernels {
	d := len(q.free)
	power := 1.0
	shares := pool.shares(power)
	for effective(shares) < leastEffective*float64(len(shares)) && power > 0.01 {
		power /= 2
		shares = pool.shares(power)
	}
	worth := effective(shares)
	k := &kernels{q: q, root: q.root}
	if spread := q.covariance(pool, shares); spread != nil {
		width := wider * math.Pow(4/(float64(d+2)*worth), 1/float64(d+4))
		for i := range spread {
			for j := range spread[i] {
				spread[i][j] *= width
			}
		}
		k.root = spread
	}
	for i := range d {
		k.logdet += math.Log(k.root[i][i])
	}
	for _, c := range pool.drawn(shares, kernelCentres, q.rng.Float64()) {
		k.centres = append(k.centres, c.eta)
		k.seen = append(k.seen, k.units(c.eta))
	}
	return k
}

// covariance is the square root of that of the free parameters in a pool, nil
// where it has none.
func (q *posterior) covariance(pool proposals, shares []float64) [][]float64 {
	d := len(q.free)
	mean, cov := make([]float64, d), columns(d, d)
	for pass := range 2 {
		for n, s := range shares {
			if s == 0 {
				continue
			}
			eta := pool.at[n].eta
			for i, j := range q.free {
				if pass == 0 {
					mean[i] += s * eta[j]
					continue
				}
				for l, m := range q.free[:i+1] {
					cov[i][l] += s * (eta[j] - mean[i]) * (eta[m] - mean[l])
				}
			}
		}
	}
	for i := range d {
		for l := range i {
			cov[l][i] = cov[i][l]
		}
	}
	all := make([]int, d)
	for i := range all {
		all[i] = i
	}
	var ch damped
	if !ch.factor(cov, all, 1e-9) {
		return nil
	}
	return ch.l
}

// units are the free parameters of an eta in multiples of the kernels' width.
func (k *kernels) units(eta []float64) []float64 {
	x := make([]float64, len(k.q.free))
	for i, j := range k.q.free {
		x[i] = eta[j]
		for l := range i {
			x[i] -= k.root[i][l] * x[l]
		}
		x[i] /= k.root[i][i]
	}
	return x
}

// propose draws n proposals, from every kernel as many.
func (k *kernels) propose(n int) proposals {
	q := k.q
	out := roomFor(n)
	for i := range n {
		eta, _ := q.scattered(k.centres[i%len(k.centres)], k.root)
		w := q.at(eta)
		weight := w.density
		if weight > math.Inf(-1) {
			weight -= k.density(eta)
		}
		out.at, out.weight = append(out.at, w), append(out.weight, weight)
	}
	return out
}

// density is the logarithm of that of the proposals at eta, up to a constant.
func (k *kernels) density(eta []float64) float64 {
	x := k.units(eta)
	sum := 0.0
	for _, c := range k.seen {
		r2 := 0.0
		for i, v := range c {
			r2 += (x[i] - v) * (x[i] - v)
		}
		sum += studentKernel(r2, len(x))
	}
	return math.Log(sum) - k.logdet
}

// studentKernel is the density of the proposals' Student's t in d dimensions at the
// squared distance r2, up to a constant: (1 + r2/ν)^(-(ν+d)/2), multiplied out.
func studentKernel(r2 float64, d int) float64 {
	x := 1 + r2/proposalFreedom
	power := 1.0
	if (proposalFreedom+d)%2 == 1 {
		power = math.Sqrt(x)
	}
	for n := (proposalFreedom + d) / 2; n > 0; n /= 2 {
		if n%2 == 1 {
			power *= x
		}
		x *= x
	}
	return 1 / power
}
