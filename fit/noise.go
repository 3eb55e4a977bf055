package fit

import (
	"math"
	"math/bits"

	"lagwright/ident"
)

// shape is the shape of the noise: its autocorrelation apart from the size.
// The noise is the sum of a first-order correlated part (an
// Ornstein-Uhlenbeck process, autocorrelation exp(-|t|/tc)) and a white part
// that carries the fraction white of the variance:
//
//	rho(t) = (1 - white)·exp(-|t|/tc) for t ≠ 0, and 1 at 0
//
// In continuous time the correlated part is exact for uneven sampling and
// gaps. white = 1 is white noise, whatever tc. On top of it the temperature may
// wander: a random walk (Wiener process) from 0 at the first row, of the
// variance walk·t relative to that of the rest, for what is slower than the log
// can tell the time of: ambient air, supply voltage.
type shape struct {
	tc    float64 // s
	white float64 // fraction of the variance, 0..1
	walk  float64 // 1/s
}

// unfiltered reports whether rows are independent under the shape.
func (s shape) unfiltered() bool { return s.white >= 1 && s.walk == 0 }

var whiteShape = shape{tc: 1, white: 1}

// filter turns a column of noise of a given shape and variance 1 into
// independent values of variance 1: the innovations of a scalar Kalman
// filter divided by their standard deviation,
//
//	out[k] = (x[k] - a2[k]·a)·isd[k],  a ← decay[k]·a + gain[k]·x[k]
//
// where a is the predicted correlated part at the last sample seen. With a walk
// b of predicted value b,
//
//	e = x[k] - a2[k]·a - b,  out[k] = e·isd[k]
//	a ← decay[k]·a + gain[k]·(x[k] - b),  b ← b + follow[k]·e
//
// A row that is the mean of M samples is treated exactly (see rowMoments).
type filter struct {
	decay, a2, gain, isd []float64
	follow               []float64 // nil without a walk
	logdet               float64   // log determinant of the correlation matrix of the rows
	white                bool      // nothing to do apart from the weights isd
	plain                bool      // white and every weight 1

	ladder []rowMoments // memory of the next set
}

// rowMoments are the moments of a row that is the mean of m samples spaced h:
// with c0 the correlated part one gap before the first sample, phi0 the decay
// over that gap and xi independent of the past,
//
//	last sample  = phiM·phi0·c0 + ..., variance vLL
//	mean         = g·phi0·c0 + ...,    variance vMM, covariance with last vLM
//
// split into the share that scales with the gap (1-phi0²) and the rest.
type rowMoments struct {
	phiM, g       float64
	vLL, vLM, vMM float64 // parts from the noise inside the row, unit variance
}

// momentsOf are those of m samples, phi the decay from one to the next and one = 1-phi².
func momentsOf(phi, one float64, m int) rowMoments {
	r := rowMoments{phiM: 1, g: 1}
	// q is 1 + phi + … + phi^(l), pl is phi^l, l counted from the last sample back.
	q, pl := 0.0, 1.0
	n := float64(m)
	for l := 0; l <= m-2; l++ {
		q += pl
		r.vLL += pl * pl * one
		r.vLM += pl * q * one / n
		r.vMM += q * q * one / (n * n)
		pl *= phi
	}
	q += pl
	r.phiM = pl
	r.g = q / n
	return r
}

// doubled is the moments of twice as many samples. The first sample of the
// second half is phi times the last of the first half plus noise of variance
// one, and the mean is that of the halves' means.
func (r rowMoments) doubled(phi, one float64) rowMoments {
	through := phi*phi*r.vLL + one
	return rowMoments{
		phiM: r.phiM * phi * r.phiM,
		g:    (r.g + r.g*phi*r.phiM) / 2,
		vLL:  r.phiM*r.phiM*through + r.vLL,
		vLM:  (r.phiM*phi*r.vLM + r.phiM*r.g*through + r.vLM) / 2,
		vMM:  (2*r.vMM + 2*r.g*phi*r.vLM + r.g*r.g*through) / 4,
	}
}

// walkMoments are those of a random walk of variance 1 a second over a row of m
// samples h apart that comes gap after the last sample seen, counted from its
// value there: the variance of the last sample and of the mean, and their
// covariance. The j-th step inside the row stands in m-j of its m samples, and
// Σ(m-j) = m(m-1)/2, Σ(m-j)² = m(m-1)(2m-1)/6.
func walkMoments(gap, h float64, m int) (last, cross, mean float64) {
	n := float64(m)
	return gap + (n-1)*h, gap + h*(n-1)/2, gap + h*(n-1)*(2*n-1)/(6*n)
}

// kalman walks over the rows of a record and gives the filter's coefficients
// row by row.
type kalman struct {
	s     shape
	usual float64 // s, what intervals close to it count as; 0: each counts as it is

	// Covariance, given the past, of the correlated part and of the walk at the
	// last sample.
	p, pw, w float64

	// Of rows like the last one: the decay over the gap before them, and their
	// moments.
	lastGap, phi float64
	lastM        int
	mom          rowMoments

	// Of the samples inside such a row: their distance, the decay over it and what it
	// leaves to be new, 1 - phiH².
	lastH, phiH, oneH float64
	ladder            []rowMoments // of 1, 2, 4, … of them

	// What follows from these for the update: the last sample and the mean against
	// the last sample seen, and the variances that the row itself brings.
	a1, a2                 float64
	ownLast, ownCross, own float64
	walkLast, walkCross    float64

	prevEnd         float64
	started, steady bool

	// Of the row just passed, variance its.
	decay, gain, follow, isd, variance float64
}

func newKalman(s shape) kalman {
	return kalman{s: s, p: max(1-s.white, 0), lastGap: -1, lastH: -1, lastM: -1}
}

// interval is what an interval counts as: jitter that scatters about the usual
// one changes the correlation by (jitter/tc)²/2, and spares a log with ten
// thousands of rows as many exponentials.
func (k *kalman) interval(gap float64) float64 {
	if math.Abs(gap-k.usual) <= jitterShare*k.usual {
		return k.usual
	}
	return gap
}

// next passes the row r.
func (k *kalman) next(r ident.Row) {
	m := max(r.M, 1)
	gap, known := 0.0, k.started
	if k.started {
		gap = k.interval(r.T - k.prevEnd)
		// Equally spaced stamps differ by their rounding.
		if math.Abs(gap-k.lastGap) > 1e-7*k.lastGap || k.lastGap < 0 {
			k.lastGap, k.phi, known = gap, math.Exp(-gap/k.s.tc), false
		}
	}
	if m != k.lastM || (m > 1 && r.H != k.lastH) {
		if m > 1 && r.H != k.lastH {
			k.lastH, k.phiH, k.oneH = r.H, math.Exp(-r.H/k.s.tc), -math.Expm1(-2*r.H/k.s.tc)
			k.ladder = k.ladder[:0]
		}
		k.mom = k.moments(m)
		k.lastM, known = m, false
	}
	k.prevEnd = r.T
	if m > 1 {
		k.prevEnd += float64(m-1) * r.H
	}
	if !known {
		k.prepare(gap, r.H, m)
	}
	k.again()
	k.started = true
}

// moments are those of a row of m samples like the last one's; those of a ladder are
// remembered, for rows go up and down it.
func (k *kalman) moments(m int) rowMoments {
	rung := bits.TrailingZeros(uint(m))
	if m != 1<<rung {
		return momentsOf(k.phiH, k.oneH, m)
	}
	for len(k.ladder) <= rung {
		next := rowMoments{phiM: 1, g: 1}
		if last := len(k.ladder) - 1; last >= 0 {
			next = k.ladder[last].doubled(k.phiH, k.oneH)
		}
		k.ladder = append(k.ladder, next)
	}
	return k.ladder[rung]
}

// prepare finds what the rows from now on have in common.
func (k *kalman) prepare(gap, h float64, m int) {
	phi, w := k.phi, k.s.white // phi is 0 before the first row
	v := max(1-w, 0)
	one := v * (1 - phi*phi)
	k.a1, k.a2 = k.mom.phiM*phi, k.mom.g*phi
	k.ownLast = k.mom.phiM*k.mom.phiM*one + v*k.mom.vLL
	k.ownCross = k.mom.phiM*k.mom.g*one + v*k.mom.vLM
	k.own = k.mom.g*k.mom.g*one + v*k.mom.vMM + w/float64(m)
	if k.s.walk > 0 {
		last, cross, mean := walkMoments(gap, h, m)
		k.walkLast, k.walkCross = last*k.s.walk, cross*k.s.walk
		k.own += mean * k.s.walk
	}
	k.steady = false
}

// again passes a row like the last one.
func (k *kalman) again() {
	if k.steady {
		return
	}
	p, pw, w := k.p, k.pw, k.w
	// What is predicted has the covariance u with the correlated part and v with the walk
	// at the last sample. Each row waits for the division of the one before it, and
	// so as little as can be stands behind it.
	u, v := k.a2*p+pw, k.a2*pw+w
	sv := k.a2*u + (v + k.own)
	withLast, withWalk := k.a1*u+k.ownCross, v+k.walkCross
	inverse := 1 / sv
	k.gain, k.follow = withLast*inverse, withWalk*inverse
	k.p = k.a1*k.a1*p + k.ownLast - withLast*k.gain
	k.pw = k.a1*pw - withLast*k.follow
	k.w = w + k.walkLast - withWalk*k.follow
	if k.p < 0 {
		k.p = 0
	}
	if k.w < 0 {
		k.w = 0
	}
	k.decay = k.a1 - k.gain*k.a2
	k.isd, k.variance = math.Sqrt(inverse), sv
	// Equal rows bring the filter to a steady state; then its figures repeat. The
	// walk nears it by a part 2·follow a row, so that what is left of w is 1e-8/(2·follow)
	// of it, and 1e-8 of the variance of a row. Without one, what is left of p is 1e-12
	// over a part that is 1e-3 or more wherever the log can tell the correlation time.
	settled := 1e-12
	if k.s.walk > 0 {
		settled = 1e-10
	}
	k.steady = k.started && math.Abs(k.p-p) <= settled*(1-k.s.white) && math.Abs(k.w-w) <= 1e-8*k.w
}

// set makes f the filter for rows under the shape s, in the memory it has.
func (f *filter) set(rows []ident.Row, s shape) {
	n := len(rows)
	f.logdet, f.white, f.plain = 0, s.unfiltered(), s.unfiltered()
	if f.white {
		for _, r := range rows {
			f.plain = f.plain && r.M <= 1
		}
		if f.plain {
			return
		}
		f.isd = resize(f.isd, n)
		for k, r := range rows {
			f.isd[k] = math.Sqrt(float64(max(r.M, 1)))
			f.logdet -= math.Log(float64(max(r.M, 1)))
		}
		return
	}
	f.decay, f.a2, f.gain, f.isd = resize(f.decay, n), resize(f.a2, n), resize(f.gain, n), resize(f.isd, n)
	f.follow = f.follow[:0]
	k := newKalman(s)
	k.ladder = f.ladder[:0]
	product := newLogProduct()
	for i, r := range rows {
		k.next(r)
		f.decay[i], f.a2[i], f.gain[i], f.isd[i] = k.decay, k.a2, k.gain, k.isd
		if s.walk > 0 {
			f.follow = append(f.follow, k.follow)
		}
		product.times(k.variance)
	}
	f.logdet, f.ladder = product.log(), k.ladder
}

// logDeterminant is that of the correlation matrix of the rows passed.
func (w *whitener) logDeterminant() float64 { return w.variances.log() }

// logProduct is the logarithm of a product of many factors, taken now and then.
type logProduct struct{ sum, product float64 }

func newLogProduct() logProduct { return logProduct{product: 1} }

func (l *logProduct) times(x float64) {
	l.product *= x
	if l.product < 1e-250 || l.product > 1e250 {
		l.sum += math.Log(l.product)
		l.product = 1
	}
}

func (l *logProduct) power(x float64, n int) { l.sum += float64(n) * math.Log(x) }

func (l *logProduct) log() float64 { return l.sum + math.Log(l.product) }

// whitener filters the rows of a log in place, one sample a row, without
// keeping coefficients: the rows come in pieces, one after the other.
type whitener struct {
	k    kalman
	even bool // the log is evenly sampled, without gaps

	carried   // of a column passed alone
	variances logProduct
}

func (r *record) whitener(s shape) whitener {
	w := whitener{k: newKalman(s), even: r.even, variances: newLogProduct()}
	w.k.usual = r.usual
	return w
}

// carried is what one column carries from row to row.
type carried struct {
	a, b float64 // predicted correlated part at the last sample, and walk
	sum  float64 // of squares, where it is passed alone
}

// pass filters the next rows x at the times t.
func (w *whitener) pass(x, t []float64) {
	own := [1]carried{w.carried}
	w.passAll([][]float64{x}, own[:], t)
	w.carried = own[0]
}

// passAll filters the next rows of several columns, each with what it carries.
func (w *whitener) passAll(cols [][]float64, carry []carried, t []float64) {
	k := &w.k
	if k.s.unfiltered() {
		for j, x := range cols {
			carry[j].sum += dot(x, x)
		}
		return
	}
	for i := 0; i < len(t); {
		if w.even && i >= 2 { // the gap is that of the row before
			k.again()
			k.prevEnd = t[i]
		} else {
			k.next(ident.Row{T: t[i], M: 1})
		}
		end := i + 1
		switch {
		case k.steady && w.even && i > 0: // a part may begin after a gap
			end = len(t)
			k.prevEnd = t[end-1]
		case k.steady:
			end = k.evenUntil(t, i)
		}
		if end == i+1 {
			w.variances.times(k.variance)
		} else {
			w.variances.power(k.variance, end-i)
		}
		j := 0
		for ; k.s.walk == 0 && j+4 <= len(cols) && end-i >= 4; j += 4 {
			steadilyFour(k, carry[j:j+4], cols[j][i:end], cols[j+1][i:end], cols[j+2][i:end], cols[j+3][i:end])
		}
		for ; j < len(cols); j++ {
			if k.s.walk > 0 {
				carry[j].following(k, cols[j][i:end])
			} else {
				carry[j].steadily(k, cols[j][i:end])
			}
		}
		i = end
	}
}

// steadily filters rows under the coefficients in force. The recursion of what is
// predicted, u ← decay·u + a2·gain·x with u = a2·a, waits for itself; four rows at a
// time it waits once.
func (c *carried) steadily(k *kalman, x []float64) {
	a2, isd, d, g := k.a2, k.isd, k.decay, k.gain
	a, sum := c.a, 0.0
	if len(x) >= 4 && a2 > 1e-150 { // below, u keeps too few digits of a
		u, h := a2*a, a2*g
		d2, d3, d4 := d*d, d*d*d, d*d*d*d
		for ; len(x) >= 4; x = x[4:] {
			v0, v1, v2, v3 := x[0], x[1], x[2], x[3]
			c1 := h * v0
			c2 := d*c1 + h*v1
			c3 := d*c2 + h*v2
			c4 := d*c3 + h*v3
			e0 := v0 - u
			e1 := v1 - c1 - d*u
			e2 := v2 - c2 - d2*u
			e3 := v3 - c3 - d3*u
			u = d4*u + c4
			sum += (e0*e0 + e1*e1) + (e2*e2 + e3*e3)
			x[0], x[1], x[2], x[3] = e0*isd, e1*isd, e2*isd, e3*isd
		}
		a = u / a2
	}
	for i, v := range x {
		e := v - a2*a
		a = d*a + g*v
		x[i] = e * isd
		sum += e * e
	}
	c.a = a
	c.sum += sum * isd * isd
}

// steadilyFour is steadily for four columns side by side, which wait together, and
// without their sums.
func steadilyFour(k *kalman, c []carried, x0, x1, x2, x3 []float64) {
	a2, isd, d, g := k.a2, k.isd, k.decay, k.gain
	a, b, e, f := c[0].a, c[1].a, c[2].a, c[3].a
	n := len(x0)
	x1, x2, x3 = x1[:n], x2[:n], x3[:n]
	for i, v0 := range x0 {
		v1, v2, v3 := x1[i], x2[i], x3[i]
		x0[i], x1[i] = (v0-a2*a)*isd, (v1-a2*b)*isd
		x2[i], x3[i] = (v2-a2*e)*isd, (v3-a2*f)*isd
		a, b, e, f = d*a+g*v0, d*b+g*v1, d*e+g*v2, d*f+g*v3
	}
	c[0].a, c[1].a, c[2].a, c[3].a = a, b, e, f
}

// following is steadily for noise that wanders.
func (c *carried) following(k *kalman, x []float64) {
	a2, isd, d, g, f := k.a2, k.isd, k.decay, k.gain, k.follow
	a, b, sum := c.a, c.b, 0.0
	for i, v := range x {
		v -= b
		e := v - a2*a
		a = d*a + g*v
		b += f * e
		e *= isd
		x[i] = e
		sum += e * e
	}
	c.a, c.b = a, b
	c.sum += sum
}

// evenUntil passes the rows after row i that keep its distance, and returns
// the first that does not.
func (k *kalman) evenUntil(t []float64, i int) int {
	for i++; i < len(t) && math.Abs(k.interval(t[i]-k.prevEnd)-k.lastGap) <= 1e-7*k.lastGap; i++ {
		k.prevEnd = t[i]
	}
	return i
}

// apply filters src into dst (they may be the same slice).
func (f *filter) apply(dst, src []float64) {
	switch {
	case f.plain:
		copy(dst, src)
	case f.white:
		for k, w := range f.isd {
			dst[k] = src[k] * w
		}
	case len(f.follow) > 0:
		f.applyFollowing(dst, src)
	default:
		n := len(src)
		decay, a2, g, isd := f.decay[:n], f.a2[:n], f.gain[:n], f.isd[:n]
		dst = dst[:n]
		a := 0.0
		for k, x := range src {
			dst[k] = (x - a2[k]*a) * isd[k]
			a = decay[k]*a + g[k]*x
		}
	}
}

// applyFollowing is apply for noise that wanders.
func (f *filter) applyFollowing(dst, src []float64) {
	n := len(src)
	decay, a2, g, isd, follow := f.decay[:n], f.a2[:n], f.gain[:n], f.isd[:n], f.follow[:n]
	dst = dst[:n]
	a, b := 0.0, 0.0
	for k, x := range src {
		x -= b
		e := x - a2[k]*a
		dst[k] = e * isd[k]
		a = decay[k]*a + g[k]*x
		b += follow[k] * e
	}
}

// applyAll filters columns in place, four side by side: one recursion alone
// waits for its own last value most of the time.
func (f *filter) applyAll(cols [][]float64) {
	wanders := len(f.follow) > 0
	single := f.white || wanders
	for !f.white && len(cols) >= 4 {
		if wanders {
			f.followFour(cols[0], cols[1], cols[2], cols[3])
		} else {
			f.applyFour(cols[0], cols[1], cols[2], cols[3])
		}
		cols = cols[4:]
	}
	if !single && len(cols) >= 2 {
		f.applyTwo(cols[0], cols[1])
		cols = cols[2:]
	}
	for _, c := range cols {
		f.apply(c, c)
	}
}

func (f *filter) applyFour(x0, x1, x2, x3 []float64) {
	n := len(x0)
	decay, a2, g, isd := f.decay[:n], f.a2[:n], f.gain[:n], f.isd[:n]
	x1, x2, x3 = x1[:n], x2[:n], x3[:n]
	var b0, b1, b2, b3 float64
	for k, v0 := range x0 {
		v1, v2, v3 := x1[k], x2[k], x3[k]
		a, w, d, h := a2[k], isd[k], decay[k], g[k]
		x0[k] = (v0 - a*b0) * w
		x1[k] = (v1 - a*b1) * w
		x2[k] = (v2 - a*b2) * w
		x3[k] = (v3 - a*b3) * w
		b0 = d*b0 + h*v0
		b1 = d*b1 + h*v1
		b2 = d*b2 + h*v2
		b3 = d*b3 + h*v3
	}
}

// followFour is applyFour for noise that wanders.
func (f *filter) followFour(x0, x1, x2, x3 []float64) {
	n := len(x0)
	decay, a2, g, isd, follow := f.decay[:n], f.a2[:n], f.gain[:n], f.isd[:n], f.follow[:n]
	x1, x2, x3 = x1[:n], x2[:n], x3[:n]
	var c0, c1, c2, c3, b0, b1, b2, b3 float64
	for k, v0 := range x0 {
		p, w, d, h, f := a2[k], isd[k], decay[k], g[k], follow[k]
		v0, v1, v2, v3 := v0-b0, x1[k]-b1, x2[k]-b2, x3[k]-b3
		e0, e1, e2, e3 := v0-p*c0, v1-p*c1, v2-p*c2, v3-p*c3
		x0[k], x1[k], x2[k], x3[k] = e0*w, e1*w, e2*w, e3*w
		c0, c1, c2, c3 = d*c0+h*v0, d*c1+h*v1, d*c2+h*v2, d*c3+h*v3
		b0, b1, b2, b3 = b0+f*e0, b1+f*e1, b2+f*e2, b3+f*e3
	}
}

func (f *filter) applyTwo(x0, x1 []float64) {
	n := len(x0)
	decay, a2, g, isd := f.decay[:n], f.a2[:n], f.gain[:n], f.isd[:n]
	x1 = x1[:n]
	var b0, b1 float64
	for k, v0 := range x0 {
		v1 := x1[k]
		a, w, d, h := a2[k], isd[k], decay[k], g[k]
		x0[k] = (v0 - a*b0) * w
		x1[k] = (v1 - a*b1) * w
		b0 = d*b0 + h*v0
		b1 = d*b1 + h*v1
	}
}

// logLikelihood is the Gaussian log likelihood of a column of noise under the
// shape, its variance at the maximum: -n/2·(ln(2π·rss/n) + 1) - ln|R|/2.
func logLikelihood(rss, logdet float64, n int) float64 {
	m := float64(n)
	return -0.5 * (m*(math.Log(2*math.Pi*rss/m)+1) + logdet)
}
