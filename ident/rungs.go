package ident

import (
	"math"
	"math/bits"
)

// A long log is averaged into rows of 1, 2, 4, … samples of one spacing, row after
// row. Such rows are walked rung by rung. With Phi the transition over the spacing
// and F(k) = Phi^(2^k), each the square of the one before, the mean over 2^k samples
// from a state x is
//
//	(1/2^k)·ΣPhi^i·x = (I + F(k−1))/2 · … · (I + F(0))/2 · x,
//
// k steps on one state. It commutes with F(k), so that the means of a rung follow
// from row to row as samples do, while the state itself leaps over the whole rung.

// A rung is a series of rows of 2^k samples, each of which begins where the one
// before ends.
type rung struct {
	lo, hi int
	k      int
	gap    float64 // s, left out between the row before and row lo
}

// rungsOf arranges rows in rungs of samples h apart; none when their spacing
// differs, when they overlap, or when their numbers of samples are no powers of two.
func rungsOf(rows []Row, tolerance float64) (rungs []rung, h float64) {
	if h = spacing(rows); h == 0 {
		return nil, 0
	}
	from, samples := rows[0].T, 0 // where the rows have followed one another since
	for i, r := range rows {
		k := bits.TrailingZeros(uint(r.M))
		gap := r.T - (from + float64(samples)*h)
		switch {
		case gap < -tolerance:
			return nil, 0
		case gap > tolerance:
			from, samples = r.T, 0
		default:
			gap = 0
		}
		samples += r.M
		if last := len(rungs) - 1; last >= 0 && gap == 0 && rungs[last].k == k {
			rungs[last].hi++
			continue
		}
		rungs = append(rungs, rung{lo: i, hi: i + 1, k: k, gap: gap})
	}
	return rungs, h
}

// spacing is that of the samples of all rows, 0 when there is none or they are
// no ladder.
func spacing(rows []Row) float64 {
	h := 0.0
	for _, r := range rows {
		if r.M < 1 || r.M&(r.M-1) != 0 || r.M >= 1<<longestRung {
			return 0
		}
		if r.M > 1 && h == 0 {
			h = r.H
		}
		if r.M > 1 && r.H != h {
			return 0
		}
	}
	return h
}

// longestRung is the k from which rows are not arranged in rungs.
const longestRung = 24

// afresh is the number of squarings after which a transition is computed from
// scratch: every one doubles the relative error, 1e-16 at first.
const afresh = 10

// powers are the transitions over 1, 2, 4, … samples.
type powers struct {
	h      float64
	most   int // how many there can be
	over   []matrix
	filled int
}

// mostPowers is the number of powers that walking the rungs may take: a leap over a
// whole one is of 2^k rows of 2^k samples at most.
func mostPowers(rungs []rung) int {
	most := 0
	for _, r := range rungs {
		most = max(most, r.k+bits.Len(uint(r.hi-r.lo)))
	}
	return most
}

// get returns F(k).
func (p *powers) get(c *chain, k int) *matrix {
	if p.over == nil {
		p.over = make([]matrix, p.most)
	}
	for ; p.filled <= k; p.filled++ {
		f := &p.over[p.filled]
		if c.equal || p.filled%afresh == 0 {
			c.transition(f, math.Ldexp(p.h, p.filled))
		} else {
			c.square(f, &p.over[p.filled-1])
		}
	}
	return &p.over[k]
}

// square sets f to a·a for a matrix of the form of a transition: no sensitivity
// acts on another.
func (c *chain) square(f, a *matrix) {
	n := c.n
	for i := range n {
		row, out := a[i*maxStates:(i+1)*maxStates], f[i*maxStates:(i+1)*maxStates]
		for j := 0; j <= i; j++ {
			sum := 0.0
			for k := j; k <= i; k++ {
				sum += row[k] * a[k*maxStates+j]
			}
			out[j] = sum
		}
	}
	for i := n; i < n+c.q; i++ {
		row, out := a[i*maxStates:(i+1)*maxStates], f[i*maxStates:(i+1)*maxStates]
		own := row[i]
		for j := range n {
			sum := own * row[j]
			for k := j; k < n; k++ {
				sum += row[k] * a[k*maxStates+j]
			}
			out[j] = sum
		}
		clear(out[n:i])
		out[i] = own * own
	}
}

// climb fills the outputs of all rows, rung by rung.
func (s *Simulator) climb(o *outputs) {
	s.powers.filled = 0
	for _, r := range s.rungs {
		if r.gap > 0 {
			s.overStep(r.gap)
		}
		for k := r.lo; k < r.hi; {
			s.arrive(k)
			if whole := s.wholeRows(k, r); whole > 0 {
				s.runRung(o, k, k+whole, r.k)
				k += whole
				continue
			}
			s.emitMean(o, k, &s.x)
			k++
		}
	}
	s.row = len(s.t)
}

// wholeRows counts the rows of the rung from row k on whose samples all lie before
// the next change.
func (s *Simulator) wholeRows(k int, r rung) int {
	if s.next == len(s.in.At) {
		return r.hi - k
	}
	change := s.arrival(s.next)
	before := func(row int) bool { return s.rows[row].last() < change }
	length := math.Ldexp(s.powers.h, r.k)
	count := int(min(max((change-s.t[k])/length, 0), float64(r.hi-k)))
	for count > 0 && !before(k+count-1) {
		count--
	}
	for k+count < r.hi && before(k+count) {
		count++
	}
	return count
}

// runRung writes rows of 2^k samples, which no change reaches, from the state at
// the first sample of row lo, and carries it to the sample after them.
func (s *Simulator) runRung(o *outputs, lo, hi, k int) {
	if s.settle() {
		s.hold(o, lo, hi)
		return
	}
	c, x := &s.chain, s.x
	for j := range k {
		half := s.x
		c.advance(s.powers.get(c, j), &half)
		for i := range c.n + c.q {
			s.x[i] = (s.x[i] + half[i]) / 2
		}
	}
	s.emit(o, lo, &s.x, s.level)
	if hi-lo > 1 {
		s.setStep(s.powers.get(c, k), math.Ldexp(s.powers.h, k), hi-lo)
		s.runSamples(o, lo+1, hi)
	}
	s.x = x
	if hi < len(s.t) {
		s.leapRows(hi-lo, k)
	}
}

// leapRows carries the state over a number of rows of 2^k samples, a power of two
// of them at a time.
func (s *Simulator) leapRows(count, k int) {
	for ; count > 0; count >>= 1 {
		if count&1 == 1 {
			s.chain.advance(s.powers.get(&s.chain, k), &s.x)
		}
		k++
	}
}
