package ident

import "math"

// Ragged rows: intervals that differ from row to row, and changes of the input
// that fall anywhere between rows. A transition from scratch for each would
// cost about a microsecond, so transitions are remembered by their length and
// the small rest is made up for by the exponential's own Taylor series on the
// state, which is as exact: x(h + d) = Σ (d·A)^k/k! · x(h).

// nudgeable is the greatest |d|·‖A‖ that the series makes up for.
const nudgeable = 0.5

// nudge carries the state over a short d, of either sign.
func (c *chain) nudge(x *state, d float64) {
	n, rate := c.n, &c.rate
	share := rate[n-1] // of the slope in a sensitivity
	if c.equal {
		share *= float64(n)
	}
	size, term := 1.0, *x
	z := math.Abs(d) * c.norm()
	for k := 1; size > 1e-17; k++ {
		h := d * inverse[k]
		before := 0.0
		if n > 1 {
			before = term[n-2]
		}
		slope := (before - term[n-1]) * share
		for i := n; i < n+c.q; i++ {
			term[i] = -h * (slope + term[i]) * rate[i]
			x[i] += term[i]
		}
		for i := n - 1; i > 0; i-- {
			term[i] = h * (term[i-1] - term[i]) * rate[i]
			x[i] += term[i]
		}
		term[0] *= -h * rate[0]
		x[0] += term[0]
		size *= z * inverse[k]
	}
}

// inverse[k] is 1/k, for more terms than the series of nudge has.
var inverse = func() (f [32]float64) {
	for k := 1; k < len(f); k++ {
		f[k] = 1 / float64(k)
	}
	return f
}()

// norm bounds the rate at which the state changes, per s.
func (c *chain) norm() float64 { return 2 * c.rate[0] }

// spanKey is the first few bits of a length: 64 keys for every factor of two.
func spanKey(h float64) uint64 { return math.Float64bits(h) >> (52 - 6) }

// A stepCache remembers transitions over intervals between rows.
type stepCache struct {
	evaluation uint64
	equal      matrix // work space
	entry      [128]struct {
		evaluation uint64 // that filled it
		h          float64
		f          matrix
	}
}

// over carries the state over h s. Equal lags need no memory, their transition
// being cheap.
func (s *stepCache) over(c *chain, x *state, h, tolerance float64) {
	if c.equal {
		c.equalTransition(&s.equal, h)
		c.advance(&s.equal, x)
		return
	}
	e := &s.entry[spanKey(h)%uint64(len(s.entry))]
	if e.evaluation != s.evaluation || (math.Abs(h-e.h)*c.norm() > nudgeable && math.Abs(h-e.h) > tolerance) {
		e.evaluation, e.h = s.evaluation, h
		c.transition(&e.f, h)
	}
	c.advance(&e.f, x)
	if d := h - e.h; math.Abs(d) > tolerance {
		c.nudge(x, d)
	}
}

// A kickCache remembers what a change of the input leaves in the state some
// time later. When the changes fall on the rows, there is only one such time, and
// the table is not needed.
type kickCache struct {
	evaluation uint64
	recent     kick // used last
	nudged     state
	table      *[128]kick
}

type kick struct {
	evaluation uint64
	since      float64
	state      state
}

// after returns what a change of −1 of the delayed input leaves in the state
// since s later. It is valid until the next call.
func (s *kickCache) after(c *chain, since, tolerance float64) *state {
	e := &s.recent
	if e.evaluation == s.evaluation {
		if math.Abs(since-e.since) <= tolerance {
			return &e.state
		}
		if s.table == nil {
			s.table = new([128]kick)
		}
		s.table[s.place(e.since)] = *e
		*e = s.table[s.place(since)]
	}
	d := since - e.since
	switch {
	case e.evaluation == s.evaluation && math.Abs(d) <= tolerance:
		return &e.state
	case e.evaluation == s.evaluation && math.Abs(d)*c.norm() <= nudgeable:
		s.nudged = e.state
		c.nudge(&s.nudged, d)
		return &s.nudged
	}
	e.evaluation, e.since = s.evaluation, since
	if since*c.norm() <= nudgeable { // soon after the change itself
		e.state = state{}
		for i := range c.n {
			e.state[i] = 1
		}
		c.nudge(&e.state, since)
		return &e.state
	}
	var f matrix
	c.transition(&f, since)
	c.kick(&e.state, &f)
	return &e.state
}

func (s *kickCache) place(since float64) int { return int(spanKey(since) % uint64(len(s.table))) }

// overStep carries the state over h s.
func (s *Simulator) overStep(h float64) {
	if s.steps == nil { // as large as all the rest of a simulator, and seldom needed by blocks
		s.steps = &stepCache{evaluation: s.evaluation}
	}
	s.steps.over(&s.chain, &s.x, h, s.tolerance)
}

// runRagged is run for rows of a ragged stretch, which may follow changes of the
// input.
func (s *Simulator) runRagged(o *outputs, lo, hi int) {
	for k := lo; k < hi; k++ {
		s.overStep(s.t[k] - s.t[k-1])
		s.arrive(k)
		s.emitRow(o, k)
	}
}

// emitPair writes the outputs of row k, the mean of two samples, from the state at
// the first. The state stays where it is.
func (s *Simulator) emitPair(o *outputs, k int) {
	c, r := &s.chain, s.rows[k]
	x, next, level := s.x, s.next, s.level
	s.overStep(r.H)
	_, second := s.takeChanges(&s.x, next, level, r.sample(1))
	for i := range c.n + c.q {
		s.x[i] = (x[i] + s.x[i]) / 2
	}
	s.emit(o, k, &s.x, (level+second)/2)
	s.x = x
}
