package ident

import "math"

// Runs: the rows between two changes of the input on a uniform stretch, where
// nearly all the time of a fit is spent. The chains of one, two and three
// distinct lags and the equal-lag chain have their recursion written out, which
// is three to five times as fast as the loops of advance (see
// BenchmarkSensitivities).

// runRows is how many rows are run before the state is looked at.
const runRows = 256

// settledState is the part of the greatest change of the input below which an
// element counts as settled. It lies far below the precision of any sum it could
// enter, and keeps the recursion away from denormal numbers, which are slow.
const settledState = 1e-100

// run carries the state through the rows lo ≤ k < hi of a uniform stretch,
// which no change precedes, and writes their outputs.
func (s *Simulator) run(o *outputs, lo, hi int) {
	if s.rows != nil {
		s.runMeans(o, lo, hi)
		return
	}
	for lo < hi {
		if s.settle() {
			s.hold(o, lo, hi)
			return
		}
		end := min(lo+runRows, hi)
		s.runPiece(o, lo, end)
		lo = end
	}
}

// settle sets the parts of the state that have died away to zero and tells
// whether all have.
func (s *Simulator) settle() bool {
	all := true
	for i := range s.chain.n + s.chain.q {
		if math.Abs(s.x[i]) < settledState*s.greatest {
			s.x[i] = 0
		}
		all = all && s.x[i] == 0
	}
	return all
}

// hold is run for a settled state.
func (s *Simulator) hold(o *outputs, lo, hi int) {
	for k := range o.y[lo:hi] {
		o.y[lo+k] = s.level
	}
	if o.dtheta != nil {
		clear(o.dtheta[lo:hi])
	}
	for i := range s.chain.q {
		clear(o.v[i][lo:hi])
	}
}

func (s *Simulator) runPiece(o *outputs, lo, hi int) {
	n, sensitivities := s.chain.n, s.chain.q > 0 && o.dtheta != nil
	y := o.y[lo:hi]
	switch {
	case !sensitivities && s.chain.q == 0 && n <= 3:
		s.runResponse(y)
	case sensitivities && n == 1:
		s.run1(y, o.dtheta[lo:hi], o.v[0][lo:hi])
	case sensitivities && s.chain.equal && s.step[0] > 0:
		s.runEqual(y, o.dtheta[lo:hi], o.v[0][lo:hi])
	case sensitivities && n == 2:
		s.run2(y, o.dtheta[lo:hi], o.v[0][lo:hi], o.v[1][lo:hi])
	case sensitivities && n == 3:
		s.run3(y, o.dtheta[lo:hi], o.v[0][lo:hi], o.v[1][lo:hi], o.v[2][lo:hi])
	default:
		for k := lo; k < hi; k++ {
			s.chain.advance(&s.step, &s.x)
			s.emit(o, k, &s.x, s.level)
		}
	}
}

// runResponse runs up to three elements without sensitivities: a shorter
// chain is one of three whose first elements are at rest.
func (s *Simulator) runResponse(y []float64) {
	f, n, level := &s.step, s.chain.n, s.level
	var a [3][3]float64
	var x [3]float64
	for i := range n {
		x[3-n+i] = s.x[i]
		for j := 0; j <= i; j++ {
			a[3-n+i][3-n+j] = f[i*maxStates+j]
		}
	}
	a11, a21, a22, a31, a32, a33 := a[0][0], a[1][0], a[1][1], a[2][0], a[2][1], a[2][2]
	e1, e2, e3 := x[0], x[1], x[2]
	for k := range y {
		e3 = a31*e1 + a32*e2 + a33*e3
		e2 = a21*e1 + a22*e2
		e1 = a11 * e1
		y[k] = level + e3
	}
	x = [3]float64{e1, e2, e3}
	copy(s.x[:n], x[3-n:])
}

// run1 runs one element. Even and odd rows are carried by two recursions of
// two steps each, which do not wait for one another.
func (s *Simulator) run1(y, dtheta, v []float64) {
	f, level, rate := &s.step, s.level, 1/s.chain.last()
	p, c := f[0], f[maxStates]
	pp, pc := p*p, 2*p*c
	e, w := s.x[0], s.x[1]
	odd, oddW := p*e, c*e+p*w // the row after the state's, and every second from there
	even, evenW := pp*e, pc*e+pp*w
	dtheta, v = dtheta[:len(y)], v[:len(y)]
	k := 1
	for ; k < len(y); k += 2 {
		y[k-1], dtheta[k-1], v[k-1] = level+odd, odd*rate, oddW
		y[k], dtheta[k], v[k] = level+even, even*rate, evenW
		e, w = even, evenW
		oddW = pc*odd + pp*oddW
		odd *= pp
		evenW = pc*even + pp*evenW
		even *= pp
	}
	if k == len(y) {
		y[k-1], dtheta[k-1], v[k-1] = level+odd, odd*rate, oddW
		e, w = odd, oddW
	}
	s.x[0], s.x[1] = e, w
}

// run2 runs two distinct elements.
func (s *Simulator) run2(y, dtheta, v1, v2 []float64) {
	f, level, rate := &s.step, s.level, 1/s.chain.last()
	a11, a21, a22 := f[0], f[maxStates], f[maxStates+1]
	b11, b12 := f[2*maxStates], f[2*maxStates+1]
	b21, b22 := f[3*maxStates], f[3*maxStates+1]
	e1, e2, w1, w2 := s.x[0], s.x[1], s.x[2], s.x[3]
	dtheta, v1, v2 = dtheta[:len(y)], v1[:len(y)], v2[:len(y)]
	for k := range y {
		w1 = b11*e1 + b12*e2 + a11*w1
		w2 = b21*e1 + b22*e2 + a22*w2
		e2 = a21*e1 + a22*e2
		e1 = a11 * e1
		y[k] = level + e2
		dtheta[k] = (e2 - e1) * rate
		v1[k] = w1
		v2[k] = w2
	}
	s.x[0], s.x[1], s.x[2], s.x[3] = e1, e2, w1, w2
}

// run3 runs three distinct elements.
func (s *Simulator) run3(y, dtheta, v1, v2, v3 []float64) {
	f, level, rate := &s.step, s.level, 1/s.chain.last()
	a11 := f[0]
	a21, a22 := f[maxStates], f[maxStates+1]
	a31, a32, a33 := f[2*maxStates], f[2*maxStates+1], f[2*maxStates+2]
	b11, b12, b13 := f[3*maxStates], f[3*maxStates+1], f[3*maxStates+2]
	b21, b22, b23 := f[4*maxStates], f[4*maxStates+1], f[4*maxStates+2]
	b31, b32, b33 := f[5*maxStates], f[5*maxStates+1], f[5*maxStates+2]
	e1, e2, e3, w1, w2, w3 := s.x[0], s.x[1], s.x[2], s.x[3], s.x[4], s.x[5]
	dtheta, v1, v2, v3 = dtheta[:len(y)], v1[:len(y)], v2[:len(y)], v3[:len(y)]
	for k := range y {
		w1 = b11*e1 + b12*e2 + b13*e3 + a11*w1
		w2 = b21*e1 + b22*e2 + b23*e3 + a22*w2
		w3 = b31*e1 + b32*e2 + b33*e3 + a33*w3
		e3 = a31*e1 + a32*e2 + a33*e3
		e2 = a21*e1 + a22*e2
		e1 = a11 * e1
		y[k] = level + e3
		dtheta[k] = (e3 - e2) * rate
		v1[k] = w1
		v2[k] = w2
		v3[k] = w3
	}
	s.x[0], s.x[1], s.x[2], s.x[3], s.x[4], s.x[5] = e1, e2, e3, w1, w2, w3
}

// runEqual runs n equal elements. With z the time from the state on in lags,
//
//	en = e^−z·A(z),  A(z) = Σ_j ej(0)·z^(n−j)/(n−j)!,  e(n−1) = e^−z·A'(z),
//	v = e^−z·(v(0) + n/tau·(∫A dz − A + A(0))),
//
// so that a row costs one Horner scheme of degree n for ∫A with its first two
// derivatives instead of a matrix of n²/2 numbers. All terms are bounded by the
// state, hence so is the error.
func (s *Simulator) runEqual(y, dtheta, v []float64) {
	n, level, tau := s.chain.n, s.level, s.chain.last()
	rate, scale := 1/tau, float64(n)/tau
	var a [maxElements + 1]float64 // a[i]: coefficient of z^i in ∫A
	factorial := 1.0
	for i := 1; i <= n; i++ {
		factorial *= float64(i)
		a[i] = s.x[n-i] / factorial
	}
	start := s.x[n]/scale + s.x[n-1]
	decay, step := s.step[0], s.stepLength/tau
	dtheta, v = dtheta[:len(y)], v[:len(y)]
	q, z := 1.0, 0.0
	for k := range y {
		q *= decay
		z = float64(k+1) * step
		sum, first, second := a[n], 0.0, 0.0 // ∫A, A, A'/2
		for i := n - 1; i >= 0; i-- {
			second = second*z + first
			first = first*z + sum
			sum = sum*z + a[i]
		}
		y[k] = level + q*first
		dtheta[k] = q * (first - 2*second) * rate
		v[k] = q * (start + sum - first) * scale
	}
	var over matrix
	s.chain.transition(&over, float64(len(y))*s.stepLength)
	s.chain.advance(&over, &s.x)
}
