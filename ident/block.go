package ident

import (
	"math"
	"math/bits"
)

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

// doublings is one more than the greatest power of two of samples for which a
// block follows by doubling.
const doublings = 24

// afresh is the number of doublings after which a block is computed from
// scratch: every doubling doubles the relative error, 1e-16 at first.
const afresh = 10

// A blockCache remembers the last few blocks, and those of 1, 2, 4, … samples
// of one spacing, each made from the one before.
type blockCache struct {
	entry [4]block
	used  int

	one  matrix // transition over h
	oneH float64

	power  []block // power[k] is the block of 2^k samples oneH apart
	filled int
}

func (s *blockCache) clear() { s.used, s.oneH, s.filled = 0, -1, 0 }

// doubled returns the block of 2^k samples: its transition is the square of
// that of half as many, its mean the mean of the two halves.
func (s *blockCache) doubled(c *chain, h float64, k int) *block {
	if len(s.power) <= k {
		s.power = append(s.power, make([]block, k+1-len(s.power))...)
	}
	for s.filled <= k {
		b := &s.power[s.filled]
		b.h, b.m = h, 1<<s.filled
		if s.filled%afresh == 0 {
			c.setBlock(b, &s.one)
		} else {
			half := &s.power[s.filled-1]
			c.product(&b.over, &half.over, &half.over)
			c.product(&b.mean, &half.mean, &half.over)
			for i := range c.n + c.q {
				for j := 0; j <= i; j++ {
					b.mean[i*maxStates+j] = (b.mean[i*maxStates+j] + half.mean[i*maxStates+j]) / 2
				}
			}
		}
		s.filled++
	}
	return &s.power[k]
}

// product sets f to a·b for matrices of the form of a transition: no
// sensitivity acts on another.
func (c *chain) product(f, a, b *matrix) {
	for i := range c.n + c.q {
		elements := min(i+1, c.n)
		for j := range elements {
			sum := 0.0
			for k := j; k < elements; k++ {
				sum += a[i*maxStates+k] * b[k*maxStates+j]
			}
			if i >= c.n {
				sum += a[i*maxStates+i] * b[i*maxStates+j]
			}
			f[i*maxStates+j] = sum
		}
		for j := elements; j < i; j++ {
			f[i*maxStates+j] = 0
		}
		if i >= c.n {
			f[i*maxStates+i] = a[i*maxStates+i] * b[i*maxStates+i]
		}
	}
}

func (s *blockCache) get(c *chain, h float64, m int) *block {
	if m&(m-1) == 0 && m < 1<<doublings {
		if s.oneH != h {
			c.transition(&s.one, h)
			s.oneH, s.filled = h, 0
		}
		return s.doubled(c, h, bits.TrailingZeros(uint(m)))
	}
	for i := range min(s.used, len(s.entry)) {
		if e := &s.entry[i]; e.m == m && e.h == h {
			return e
		}
	}
	e := &s.entry[s.used%len(s.entry)]
	s.used++
	if s.oneH != h {
		c.transition(&s.one, h)
		s.oneH, s.filled = h, 0
	}
	e.h, e.m = h, m
	c.setBlock(e, &s.one)
	return e
}

// fewestMeans is the number of rows of equal shape from which carrying their
// means is worth its own start.
const fewestMeans = 4

// runMeans is run for rows of equal shape that are means. The mean of a row is
// B·x of the state x at its first sample, and B, a sum of powers of Phi(h),
// commutes with the transition F from row to row: the means themselves follow
// B·x(k+1) = F·B·x(k). They are run like samples, while the state leaps over
// all the rows at once.
func (s *Simulator) runMeans(o *outputs, lo, hi int) {
	b := s.blocks.get(&s.chain, s.rows[lo].H, s.rows[lo].M)
	if hi-lo < fewestMeans || !s.powerOfTwo(b) || s.departed(lo+1, s.stepLength) == nil {
		s.runMeansSingly(o, b, lo, hi)
		return
	}
	s.chain.advance(&s.step, &s.x) // to the first sample of row lo
	x := s.x
	s.chain.advance(&b.mean, &s.x)
	s.emit(o, lo, &s.x, s.level)
	s.runSamples(o, lo+1, hi)
	s.x = x
	s.leapBlocks(b, hi-1-lo)
}

// runMeansSingly is runMeans for a few rows, or rows that do not follow on
// one another.
func (s *Simulator) runMeansSingly(o *outputs, b *block, lo, hi int) {
	for k := lo; k < hi; k++ {
		s.chain.advance(&s.step, &s.x)
		x := s.x
		s.chain.advance(&b.mean, &x)
		s.emit(o, k, &x, s.level)
	}
}

// powerOfTwo reports whether a block is one of those that follow by doubling.
func (s *Simulator) powerOfTwo(b *block) bool {
	return b.m&(b.m-1) == 0 && b.m < 1<<(doublings-1) && b.h == s.blocks.oneH
}

// leapBlocks carries the state over a number of blocks like b, a power of two
// at a time.
func (s *Simulator) leapBlocks(b *block, count int) {
	k := bits.TrailingZeros(uint(b.m))
	for k+bits.Len(uint(count)) > doublings {
		s.chain.advance(&s.blocks.power[k].over, &s.x)
		count--
	}
	for ; count > 0; count >>= 1 {
		if count&1 == 1 {
			s.chain.advance(&s.blocks.doubled(&s.chain, b.h, k).over, &s.x)
		}
		k++
	}
}

// departed returns the block of the row before row k when the step to row k is
// just its length, else nil.
func (s *Simulator) departed(k int, step float64) *block {
	if s.rows == nil {
		return nil
	}
	row := s.rows[k-1]
	if row.M == 1 {
		row.H = s.rows[k].H // a single sample before a block of the same spacing
	}
	if row.H > 0 && math.Abs(step-float64(row.M)*row.H) <= s.tolerance {
		return s.blocks.get(&s.chain, row.H, row.M)
	}
	return nil
}

// emitMean writes the outputs of row k, which is a mean, from the state at its
// first sample; the row is taken apart at the changes inside it. The state
// stays where it is.
func (s *Simulator) emitMean(o *outputs, k int) {
	c, r := &s.chain, s.rows[k]
	x, level, next := s.x, s.level, s.next
	if r.M == 1 {
		s.emit(o, k, &x, level)
		return
	}
	var sum state
	levels := 0.0
	for p := 0; p < r.M; {
		count := r.M - p
		if next < len(s.in.At) {
			count = r.before(s.arrival(next), p)
		}
		b := s.blocks.get(c, r.H, count)
		part := x
		c.advance(&b.mean, &part)
		weight := float64(count) / float64(r.M)
		for i := range c.n + c.q {
			sum[i] += weight * part[i]
		}
		levels += weight * level
		if p += count; p < r.M {
			c.advance(&b.over, &x)
			next, level = s.takeChanges(&x, next, level, r.sample(p))
		}
	}
	s.emit(o, k, &sum, levels)
}
