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
	s.rows, s.blocks = rows, new(blockCache)
	s.stretches = splitByShape(s.stretches, rows)
	if n := len(rows); n > 0 {
		s.tolerance = timeTolerance([]float64{t[0], rows[n-1].last()})
		s.rungs, s.powers.h = rungsOf(rows, s.tolerance)
		s.powers.most = mostPowers(s.rungs)
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

// sampleRow returns row k, of one sample when the rows are samples.
func (s *Simulator) sampleRow(k int) Row {
	if s.rows == nil {
		return Row{T: s.t[k], M: 1}
	}
	return s.rows[k]
}

// A block holds what m samples h s apart do to a state.
type block struct {
	h    float64
	m    int
	mean matrix // turns the state at the first sample into the mean state
	over matrix // carries the state over the m samples, to the one that follows
}

// setBlock fills a block from one, the transition over its h. The mean is that
// of Phi(h)^0, …, Phi(h)^(m−1), extended by the sensitivities. As (Phi(h) −
// I)·ΣPhi(h)^k = Phi(m·h) − I, it follows by forward substitution; the
// diagonal of both sides is expm1(−h/tau), so that nothing is lost when h is
// short against every lag.
func (c *chain) setBlock(b *block, one *matrix) {
	size, m := c.n+c.q, float64(b.m)
	if b.m == 1 {
		b.over, b.mean = *one, matrix{}
		for i := range size {
			b.mean[i*maxStates+i] = 1
		}
		return
	}
	c.transition(&b.over, m*b.h)
	for i := range size {
		tau := c.lag(i)
		row := b.mean[i*maxStates : (i+1)*maxStates]
		leaves := -math.Expm1(-b.h / tau)
		if leaves == 0 { // an endless lag: the element keeps its state
			clear(row[:i])
			row[i] = 1
			continue
		}
		elements := min(i, c.n) // no sensitivity acts on another
		for j := range elements {
			sum := -b.over[i*maxStates+j]
			for k := j; k < elements; k++ {
				sum += one[i*maxStates+k] * b.mean[k*maxStates+j] * m
			}
			row[j] = sum / (leaves * m)
		}
		row[i] = -math.Expm1(-m*b.h/tau) / (leaves * m)
	}
}

// A blockCache remembers the last few blocks.
type blockCache struct {
	entry [4]block
	used  int
	one   matrix // transition over oneH
	oneH  float64
}

func (s *blockCache) clear() { s.used, s.oneH = 0, -1 }

func (s *blockCache) get(c *chain, h float64, m int) *block {
	for i := range min(s.used, len(s.entry)) {
		if e := &s.entry[i]; e.m == m && e.h == h {
			return e
		}
	}
	e := &s.entry[s.used%len(s.entry)]
	s.used++
	if s.oneH != h {
		c.transition(&s.one, h)
		s.oneH = h
	}
	e.h, e.m = h, m
	c.setBlock(e, &s.one)
	return e
}

// emitMean writes the outputs of row k, which is a mean, from the state at its
// first sample, and carries x and the input to the sample after it; the row is
// taken apart at the changes inside.
func (s *Simulator) emitMean(o *outputs, k int, x *state) {
	c, r := &s.chain, s.rows[k]
	var sum state
	levels := 0.0
	for p := 0; p < r.M; {
		count := r.M - p
		if s.next < len(s.in.At) {
			count = r.before(s.arrival(s.next), p)
		}
		b := s.blocks.get(c, r.H, count)
		part := *x
		c.advance(&b.mean, &part)
		weight := float64(count) / float64(r.M)
		for i := range c.n + c.q {
			sum[i] += weight * part[i]
		}
		levels += weight * s.level
		c.advance(&b.over, x)
		if p += count; p < r.M {
			s.next, s.level = s.takeChanges(x, s.next, s.level, r.sample(p))
		}
	}
	s.emit(o, k, &sum, levels)
}
