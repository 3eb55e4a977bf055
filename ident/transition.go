package ident

import "math"

// The state of a chain. With x0 the delayed input and xi the output of
// element i of n, dxi/dt = (x(i−1) − xi)/tau_i, the elements taken shortest
// lag first. Measured from the input, ei = xi − x0, the chain is autonomous
// between two changes of the input,
//
//	dei/dt = (e(i−1) − ei)/tau_i,  e0 = 0,
//
// and a change du only takes du off every ei. Hence e(t+h) = Phi(h)·e(t) with
//
//	Phi_ij(h) = Π_{k=j+1..i} h/tau_k · exp[a_j, …, a_i],  a_k = −h/tau_k, i ≥ j,
//
// the divided differences of exp (see divided.go), all between 0 and 1; for n
// equal lags Phi_ij(h) = e^−x·x^(i−j)/(i−j)! with x = h/tau. The response is
// y = x0 + en and its slope (e(n−1) − en)/tau_n, which is well conditioned
// because the longest lag comes last.
//
// Sensitivities. From dG/dtau_i = −s/(tau_i·s + 1)·G, the sensitivity
// vi = dy/dtau_i is minus the slope after one more lag tau_i,
//
//	dvi/dt = (−slope − vi)/tau_i,
//
// n times that for n equal lags, and −slope itself for a lag of zero. A
// change of the input leaves vi where it is. With
// Pj(m, i) = Π_{k=j+1..m} h/tau_k · h/tau_i · exp[a_j, …, a_m, a_i], the
// response of the extra lag to element j through element m,
//
//	vi(t+h) = e^(−h/tau_i)·vi(t) + Σ_j (Pj(n, i) − Pj(n−1, i))/tau_n · ej(t).
//
// dy/dtheta is −slope. The derivations are the project's own.

// maxStates is nine: the eight elements of equal8 and one sensitivity.
const maxStates = maxElements + 1

// A matrix is lower triangular; row i starts at i·maxStates.
type matrix [maxStates * maxStates]float64

// A state holds e1 … en and then v1 … vq.
type state [maxStates]float64

// A chain is a lag chain made ready for simulation: its elements with a lag,
// shortest first, and which sensitivities to carry.
type chain struct {
	n     int  // elements with a lag
	q     int  // sensitivity states
	equal bool // all elements share tau[0]
	order int  // lags of the structure, zero ones included

	tau  [maxElements]float64 // shortest first
	rate state                // 1/lag of every state, per s
	// of[i] is the sensitivity state of the structure's lag parameter i, or −1
	// for a lag of zero
	of    [maxLags]int
	table expTable
}

// leastLag is the lag in s below which an element passes its input through,
// as one with a lag of zero does: h/tau to the power of the order stays finite.
const leastLag = 1e-60

// set prepares the chain; ok is false when a lag is negative or not a number.
func (c *chain) set(st Structure, lags []float64, sensitivities bool) (ok bool) {
	c.n, c.q = 0, 0
	c.equal = st.equal || st.order == 1
	c.order = st.order
	var rank [maxLags]int // rank[k] is the parameter of element k
	for i := range st.NumLags() {
		tau := lags[i]
		if !(tau >= 0) {
			return false
		}
		c.of[i] = -1
		if tau < leastLag {
			continue
		}
		k := c.n
		for k > 0 && c.tau[k-1] > tau {
			c.tau[k], rank[k] = c.tau[k-1], rank[k-1]
			k--
		}
		c.tau[k], rank[k] = tau, i
		c.n++
	}
	for k := range c.n {
		c.of[rank[k]] = k
	}
	if sensitivities {
		c.q = c.n
	}
	if c.equal && c.n == 1 {
		c.n = st.order
	}
	for i := range c.n + c.q {
		c.rate[i] = 1 / c.lag(i)
	}
	return true
}

// last is the lag of the last element, the longest.
func (c *chain) last() float64 {
	if c.equal {
		return c.tau[0]
	}
	return c.tau[c.n-1]
}

// lag is the lag of state i.
func (c *chain) lag(i int) float64 {
	switch {
	case c.equal:
		return c.tau[0]
	case i < c.n:
		return c.tau[i]
	}
	return c.tau[i-c.n]
}

// transition sets f to the matrix that carries the state over h ≥ 0 s.
func (c *chain) transition(f *matrix, h float64) {
	if c.equal {
		c.equalTransition(f, h)
		return
	}
	n := c.n
	var a [maxLags]float64
	for k := range n {
		a[k] = -h / c.tau[k]
	}
	c.table.fill(a[:n], c.q > 0)
	for j := range n {
		product, shorter := 1.0, 0.0 // Π_{k=j+1..i} h/tau_k for i, and for i−1
		for i := j; i < n; i++ {
			if i > j {
				shorter = product
				product *= h / c.tau[i]
			}
			f[i*maxStates+j] = product * c.table.plain[j][i]
		}
		for i := range c.q {
			through := product * c.table.extra[i][j][n-1]
			if j < n-1 {
				through -= shorter * c.table.extra[i][j][n-2]
			}
			f[(n+i)*maxStates+j] = h / c.tau[i] * through / c.tau[n-1]
		}
	}
	for i := range c.q {
		f[(n+i)*maxStates+n+i] = f[i*maxStates+i]
	}
}

// equalTransition is transition for n equal lags.
func (c *chain) equalTransition(f *matrix, h float64) {
	n, x := c.n, h/c.tau[0]
	var p [maxElements + 1]float64 // p[k] = e^−x·x^k/k!
	p[0] = math.Exp(-x)
	if p[0] > 0 { // beyond that x^k could only spoil the zero
		for k := 1; k <= n; k++ {
			p[k] = p[k-1] * x / float64(k)
		}
	}
	for i := range n {
		for j := 0; j <= i; j++ {
			f[i*maxStates+j] = p[i-j]
		}
	}
	if c.q == 0 {
		return
	}
	scale := float64(n) / c.tau[0]
	row := f[n*maxStates:]
	for j := range n - 1 {
		row[j] = scale * (p[n-j] - p[n-1-j])
	}
	row[n-1] = scale * p[1]
	row[n] = p[0]
}

// advance applies a transition to the state.
func (c *chain) advance(f *matrix, x *state) {
	n := c.n
	for i := c.q - 1; i >= 0; i-- {
		row := f[(n+i)*maxStates : (n+i+1)*maxStates]
		sum := row[n+i] * x[n+i]
		for j := range n {
			sum += row[j] * x[j]
		}
		x[n+i] = sum
	}
	for i := n - 1; i >= 0; i-- {
		row := f[i*maxStates : (i+1)*maxStates]
		sum := 0.0
		for j := 0; j <= i; j++ {
			sum += row[j] * x[j]
		}
		x[i] = sum
	}
}

// kick sets v to what a change of −1 of the delayed input leaves in the state
// some time later: f is the transition over that time.
func (c *chain) kick(v *state, f *matrix) {
	for i := range c.n + c.q {
		sum := 0.0
		for j := range min(i+1, c.n) {
			sum += f[i*maxStates+j]
		}
		v[i] = sum
	}
}
