package tune

import "math"

// transition is the exact motion of a lag chain over a time dt while its
// input is held: x(t+dt) = phi·x(t) + gamma·u. phi is lower triangular,
// stored by rows (n×n); states are the outputs of the elements in order.
type transition struct {
	n     int
	phi   []float64
	gamma []float64
}

// newTransition returns the transition of a chain of first-order elements
// with the given lags (s), or of one integrator where integrating.
//
// The chain with its input as state 0 has a generator with nothing negative
// off its diagonal, so exp(A·dt) = exp(−q·dt)·exp((A+qI)·dt) is a sum of
// positive terms: no cancellation for lags that are equal, nearly equal or
// decades apart (uniformization, Jensen 1953, citation from memory).
func newTransition(lags []float64, integrating bool, dt float64) transition {
	n := len(lags)
	if integrating {
		n = 1
	}
	size := n + 1
	a := make([]float64, size*size)
	q := 0.0
	for i := 1; i < size; i++ {
		if integrating {
			a[i*size+i-1] = 1
			continue
		}
		rate := 1 / lags[i-1]
		a[i*size+i-1] = rate
		a[i*size+i] = -rate
		q = max(q, rate)
	}
	e := expChain(a, size, q, dt)
	t := transition{n: n, phi: make([]float64, n*n), gamma: make([]float64, n)}
	for i := range n {
		t.gamma[i] = e[(i+1)*size]
		copy(t.phi[i*n:(i+1)*n], e[(i+1)*size+1:(i+2)*size])
	}
	return t
}

// expChain returns exp(a·dt) of a lower triangular size×size matrix whose
// entries off the diagonal are not negative and whose diagonal is ≥ −q.
func expChain(a []float64, size int, q, dt float64) []float64 {
	norm := q
	for i := range size {
		for j := range i {
			norm = max(norm, a[i*size+j])
		}
	}
	halvings := 0
	for h := norm * dt; h > 0.5 && halvings < 200; h /= 2 {
		halvings++
	}
	h := math.Ldexp(dt, -halvings)

	b := make([]float64, size*size)
	for i := range size {
		for j := 0; j <= i; j++ {
			b[i*size+j] = a[i*size+j] * h
		}
		b[i*size+i] += q * h
	}
	sum, term := identity(size), identity(size)
	product := make([]float64, size*size)
	for k := 1; k <= 20; k++ {
		mulLower(product, term, b, size)
		for i := range product {
			term[i] = product[i] / float64(k)
			sum[i] += term[i]
		}
	}
	shrink := math.Exp(-q * h)
	for i := range sum {
		sum[i] *= shrink
	}
	for range halvings {
		mulLower(product, sum, sum, size)
		sum, product = product, sum
	}
	return sum
}

func identity(size int) []float64 {
	m := make([]float64, size*size)
	for i := range size {
		m[i*size+i] = 1
	}
	return m
}

// mulLower sets dst = a·b for lower triangular size×size matrices.
func mulLower(dst, a, b []float64, size int) {
	for i := range size {
		for j := 0; j <= i; j++ {
			s := 0.0
			for k := j; k <= i; k++ {
				s += a[i*size+k] * b[k*size+j]
			}
			dst[i*size+j] = s
		}
	}
}

// apply returns phi·x.
func (t transition) apply(x []float64) []float64 {
	y := make([]float64, t.n)
	for i := range t.n {
		for j := 0; j <= i; j++ {
			y[i] += t.phi[i*t.n+j] * x[j]
		}
	}
	return y
}
