package ident

import "math"

// Runs: the rows between two changes of the input on a uniform stretch, where
// nearly all the time of a fit is spent. The chains of one, two and three
// distinct lags and the equal-lag chain have their recursion written out, which
// is three to five times as fast as the loops of advance (see
// BenchmarkSensitivities).

// runRows is how many rows are run before the state is looked at.
const runRows = 256

// longStretch is the number of rows from which a uniform stretch leaps from
// piece to piece with a transition of its own. Row after row the rounding of one
// transition, 1e-16 of it, would build up to 1e-11 in 1e5 rows when the lags are
// as long as the stretch.
const longStretch = 16 * runRows

// settledState is the part of the greatest change of the input below which an
// element counts as settled. It lies far below the precision of any sum it could
// enter, and keeps the recursion away from denormal numbers, which are slow.
const settledState = 1e-100

// setStep puts the transition over length s, the step of a uniform stretch of
// rows, in place.
func (s *Simulator) setStep(step *matrix, length float64, rows int) {
	s.step, s.stepLength = step, length
	if s.long = rows >= longStretch; s.long {
		s.chain.transition(&s.leap, runRows*length)
	}
}

// run carries the state through the rows lo ≤ k < hi of a uniform stretch,
// which no change precedes, and writes their outputs.
func (s *Simulator) run(o *outputs, lo, hi int) {
	if s.rows == nil || lo == hi || s.rows[lo].M == 1 {
		s.runSamples(o, lo, hi)
		return
	}
	b := s.blocks.get(&s.chain, s.rows[lo].H, s.rows[lo].M)
	for k := lo; k < hi; k++ {
		s.chain.advance(s.step, &s.x)
		x := s.x
		s.chain.advance(&b.mean, &x)
		s.emit(o, k, &x, s.level)
	}
}

// runSamples carries the state step by step, what it stands at being the output.
func (s *Simulator) runSamples(o *outputs, lo, hi int) {
	for lo < hi {
		if s.settle() {
			s.hold(o, lo, hi)
			return
		}
		end, x := min(lo+runRows, hi), s.x
		s.runPiece(o, lo, end)
		if end-lo == runRows && s.long {
			s.x = x
			s.chain.advance(&s.leap, &s.x)
		}
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
	lo, hi = lo-o.from, hi-o.from
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
	from := lo
	lo, hi = lo-o.from, hi-o.from
	n, y := s.chain.n, o.y[lo:hi]
	if s.chain.q == 0 {
		if s.chain.equal && n > 1 && s.step[0] > 0 {
			s.runEqualResponse(y)
			return
		}
		if n <= maxLags {
			s.runResponse(y)
			return
		}
	} else if o.dtheta != nil {
		dtheta, v := o.dtheta[lo:hi], &o.v
		switch {
		case n == 1:
			s.run1(y, dtheta, v[0][lo:hi])
			return
		case s.chain.equal && s.step[0] > 0: // beyond that z^n could overflow
			s.runEqual(y, dtheta, v[0][lo:hi])
			return
		case !s.chain.equal && n == 2:
			s.run2(y, dtheta, v[0][lo:hi], v[1][lo:hi])
			return
		case !s.chain.equal && n == 3:
			s.run3(y, dtheta, v[0][lo:hi], v[1][lo:hi], v[2][lo:hi])
			return
		case !s.chain.equal && n == 4:
			s.run4(y, dtheta, v[0][lo:hi], v[1][lo:hi], v[2][lo:hi], v[3][lo:hi])
			return
		}
	}
	for k := range y {
		s.chain.advance(s.step, &s.x)
		s.emit(o, from+k, &s.x, s.level)
	}
}

// runResponse runs up to four elements without sensitivities: a shorter
// chain is one of four whose first elements are at rest.
func (s *Simulator) runResponse(y []float64) {
	f, n, level := s.step, s.chain.n, s.level
	var a [4][4]float64
	var x [4]float64
	for i := range n {
		x[4-n+i] = s.x[i]
		for j := 0; j <= i; j++ {
			a[4-n+i][4-n+j] = f[i*maxStates+j]
		}
	}
	a11, a21, a22, a31, a32, a33 := a[0][0], a[1][0], a[1][1], a[2][0], a[2][1], a[2][2]
	a41, a42, a43, a44 := a[3][0], a[3][1], a[3][2], a[3][3]
	e1, e2, e3, e4 := x[0], x[1], x[2], x[3]
	for k := range y {
		e4 = a41*e1 + a42*e2 + a43*e3 + a44*e4
		e3 = a31*e1 + a32*e2 + a33*e3
		e2 = a21*e1 + a22*e2
		e1 = a11 * e1
		y[k] = level + e4
	}
	x = [4]float64{e1, e2, e3, e4}
	copy(s.x[:n], x[4-n:])
}

// run1 runs one element. Even and odd rows are carried by two recursions of
// two steps each, which do not wait for one another.
func (s *Simulator) run1(y, dtheta, v []float64) {
	f, level, rate := s.step, s.level, 1/s.chain.last()
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
	f, level, rate := s.step, s.level, 1/s.chain.last()
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
	f, level, rate := s.step, s.level, 1/s.chain.last()
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

// run4 runs four distinct elements.
func (s *Simulator) run4(y, dtheta, v1, v2, v3, v4 []float64) {
	f, level, rate := s.step, s.level, 1/s.chain.last()
	a11 := f[0]
	a21, a22 := f[maxStates], f[maxStates+1]
	a31, a32, a33 := f[2*maxStates], f[2*maxStates+1], f[2*maxStates+2]
	a41, a42, a43, a44 := f[3*maxStates], f[3*maxStates+1], f[3*maxStates+2], f[3*maxStates+3]
	b11, b12, b13, b14 := f[4*maxStates], f[4*maxStates+1], f[4*maxStates+2], f[4*maxStates+3]
	b21, b22, b23, b24 := f[5*maxStates], f[5*maxStates+1], f[5*maxStates+2], f[5*maxStates+3]
	b31, b32, b33, b34 := f[6*maxStates], f[6*maxStates+1], f[6*maxStates+2], f[6*maxStates+3]
	b41, b42, b43, b44 := f[7*maxStates], f[7*maxStates+1], f[7*maxStates+2], f[7*maxStates+3]
	e1, e2, e3, e4, w1, w2, w3, w4 := s.x[0], s.x[1], s.x[2], s.x[3], s.x[4], s.x[5], s.x[6], s.x[7]
	dtheta, v1, v2, v3, v4 = dtheta[:len(y)], v1[:len(y)], v2[:len(y)], v3[:len(y)], v4[:len(y)]
	for k := range y {
		w1 = b11*e1 + b12*e2 + b13*e3 + b14*e4 + a11*w1
		w2 = b21*e1 + b22*e2 + b23*e3 + b24*e4 + a22*w2
		w3 = b31*e1 + b32*e2 + b33*e3 + b34*e4 + a33*w3
		w4 = b41*e1 + b42*e2 + b43*e3 + b44*e4 + a44*w4
		e4 = a41*e1 + a42*e2 + a43*e3 + a44*e4
		e3 = a31*e1 + a32*e2 + a33*e3
		e2 = a21*e1 + a22*e2
		e1 = a11 * e1
		y[k] = level + e4
		dtheta[k] = (e4 - e3) * rate
		v1[k] = w1
		v2[k] = w2
		v3[k] = w3
		v4[k] = w4
	}
	s.x = state{e1, e2, e3, e4, w1, w2, w3, w4}
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
	n, tau := s.chain.n, s.chain.last()
	rate, scale := 1/tau, float64(n)/tau
	a := s.equalPolynomial()
	start, startV := s.x[n-1], s.x[n]
	decay, step := s.step[0], s.stepLength/tau
	dtheta, v = dtheta[:len(y)], v[:len(y)]
	q := 1.0
	for k := range y {
		q *= decay
		z := float64(k+1) * step
		sum, first, second := a[n], 0.0, 0.0 // ∫A, A, A'/2
		for i := n - 1; i >= 0; i-- {
			second = second*z + first
			first = first*z + sum
			sum = sum*z + a[i]
		}
		y[k] = s.level + q*first
		dtheta[k] = q * (first - 2*second) * rate
		v[k] = q * (startV + scale*(start+sum-first))
	}
	s.skip(len(y))
}

// runEqualResponse is runEqual without the sensitivities.
func (s *Simulator) runEqualResponse(y []float64) {
	n := s.chain.n
	a := s.equalPolynomial()
	for i := 1; i <= n; i++ { // from ∫A to A
		a[i-1] = a[i] * float64(i)
	}
	decay, step := s.step[0], s.stepLength/s.chain.last()
	q := 1.0
	for k := range y {
		q *= decay
		z := float64(k+1) * step
		sum := a[n-1]
		for i := n - 2; i >= 0; i-- {
			sum = sum*z + a[i]
		}
		y[k] = s.level + q*sum
	}
	s.skip(len(y))
}

// equalPolynomial returns the coefficients of ∫A in powers of z.
func (s *Simulator) equalPolynomial() (a [maxElements + 1]float64) {
	factorial := 1.0
	for i := 1; i <= s.chain.n; i++ {
		factorial *= float64(i)
		a[i] = s.x[s.chain.n-i] / factorial
	}
	return a
}

// skip carries the state over rows of the uniform stretch in one go.
func (s *Simulator) skip(rows int) {
	var over matrix
	s.chain.transition(&over, float64(rows)*s.stepLength)
	s.chain.advance(&over, &s.x)
}
