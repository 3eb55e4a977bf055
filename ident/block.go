package ident

import "math"

// A Row of a block simulator stands for M samples H s apart, the first at T:
// its response is their mean. A row of one sample has M = 1, and its H does not
// matter.
type Row struct {
	T float64 // s
	H float64 // s, above 0 when M > 1
	M int     // 1 or more
}

// NewBlockSimulator returns a simulator whose rows are the means of samples,
// as they arise when a long log is averaged where little happens. The means
// are exact, also over a block inside which the delayed input changes, and the
// work does not depend on the number of samples in a block. rows are in
// order and do not overlap; they and in are kept, not copied.
func NewBlockSimulator(rows []Row, in Input) *Simulator {
	t := make([]float64, len(rows))
	for k, r := range rows {
		t[k] = r.T
	}
	s := NewSimulator(t, in)
	s.rows = rows
	s.stretches = splitByShape(s.stretches, rows)
	if n := len(rows); n > 0 {
		s.tolerance = timeTolerance([]float64{t[0], rows[n-1].last()})
	}
	return s
}

// last is the time of the row's last sample.
func (r Row) last() float64 { return r.sample(r.M - 1) }

// sample is the time of the row's sample p. The product is kept from H = NaN
// or infinity in a row of one sample.
func (r Row) sample(p int) float64 {
	if p == 0 {
		return r.T
	}
	return r.T + float64(p)*r.H
}

// before counts the row's samples, from sample p on, that lie before the time.
func (r Row) before(time float64, p int) int {
	if r.sample(p) >= time {
		return 0
	}
	if r.last() < time {
		return r.M - p
	}
	count := int(math.Ceil((time - r.sample(p)) / r.H))
	for count > 0 && r.sample(p+count-1) >= time {
		count--
	}
	for p+count < r.M && r.sample(p+count) < time {
		count++
	}
	return count
}

// splitByShape splits uniform stretches so that all rows of one have the same
// shape.
func splitByShape(in []stretch, rows []Row) []stretch {
	var out []stretch
	for _, s := range in {
		if s.ragged {
			out = append(out, s)
			continue
		}
		lo := s.lo
		for k := s.lo + 1; k <= s.hi; k++ {
			if k == s.hi || rows[k].M != rows[lo].M || rows[k].H != rows[lo].H {
				out = append(out, stretch{lo: lo, hi: k, step: s.step})
				lo = k
			}
		}
	}
	return out
}

// row returns row k, of one sample when the rows are samples.
func (s *Simulator) row(k int) Row {
	if s.rows == nil {
		return Row{T: s.t[k], M: 1}
	}
	return s.rows[k]
}

// meanTransition sets f to the mean of Phi(h)^0, …, Phi(h)^(m−1), extended by
// the sensitivities: what turns the state at the first of m samples into the
// mean state. As (Phi(h) − I)·ΣPhi(h)^k = Phi(m·h) − I, it follows by forward
// substitution; the diagonal of both sides is expm1(−h/tau), so that nothing
// is lost when h is short against every lag.
func (c *chain) meanTransition(f *matrix, h float64, m int) {
	size := c.n + c.q
	if m == 1 {
		*f = matrix{}
		for i := range size {
			f[i*maxStates+i] = 1
		}
		return
	}
	var one, all matrix
	c.transition(&one, h)
	c.transition(&all, float64(m)*h)
	for i := range size {
		tau := c.lag(i)
		leaves := -math.Expm1(-h / tau)
		if leaves == 0 { // an endless lag: the element keeps its state
			clear(f[i*maxStates : i*maxStates+i])
			f[i*maxStates+i] = 1
			continue
		}
		for j := 0; j <= i; j++ {
			sum := all[i*maxStates+j]
			if j == i {
				sum = math.Expm1(-float64(m) * h / tau)
			}
			for k := j; k < i; k++ {
				sum -= one[i*maxStates+k] * f[k*maxStates+j] * float64(m)
			}
			f[i*maxStates+j] = -sum / (leaves * float64(m))
		}
	}
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

// A meanCache remembers the last few mean transitions.
type meanCache struct {
	h    [4]float64
	m    [4]int
	mean [4]matrix
	used int
}

func (b *meanCache) clear() { b.used = 0 }

func (b *meanCache) get(c *chain, h float64, m int) *matrix {
	for i := range min(b.used, len(b.m)) {
		if b.m[i] == m && (m == 1 || b.h[i] == h) {
			return &b.mean[i]
		}
	}
	i := b.used % len(b.m)
	b.used++
	b.h[i], b.m[i] = h, m
	c.meanTransition(&b.mean[i], h, m)
	return &b.mean[i]
}

// runMeans is run for rows of equal shape that are means.
func (s *Simulator) runMeans(o *outputs, lo, hi int) {
	if lo == hi {
		return
	}
	mean := s.means.get(&s.chain, s.rows[lo].H, s.rows[lo].M)
	for k := lo; k < hi; k++ {
		s.chain.advance(&s.step, &s.x)
		x := s.x
		s.chain.advance(mean, &x)
		s.emit(o, k, &x, s.level)
	}
}

// emitMean writes the outputs of row k, which is a mean, from the state at its
// first sample; the row is taken apart at the changes inside it. The state
// stays where it is.
func (s *Simulator) emitMean(o *outputs, k int, deadTime float64) {
	c, r := &s.chain, s.rows[k]
	x, level, next := s.x, s.level, s.next
	var sum state
	levels := 0.0
	for p := 0; p < r.M; {
		count := r.M - p
		if next < len(s.in.At) {
			count = r.before(s.arrival(next, deadTime), p)
		}
		part := x
		c.advance(s.means.get(c, r.H, count), &part)
		weight := float64(count) / float64(r.M)
		for i := range c.n + c.q {
			sum[i] += weight * part[i]
		}
		levels += weight * level
		if p += count; p == r.M {
			break
		}
		var f matrix
		c.transition(&f, float64(count)*r.H)
		c.advance(&f, &x)
		next, level = s.takeChanges(&x, next, level, r.sample(p), deadTime)
	}
	s.emit(o, k, &sum, levels)
}
