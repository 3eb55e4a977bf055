package ident

import "math"

// A Simulator computes the responses of lag chains of unit gain to one input
// at the rows of one log. It is exact at the rows for an input held between
// its changes: any sampling, any dead time, lags that are equal, nearly equal
// or decades apart. It keeps its work space, so an evaluation allocates
// nothing and a Simulator must not be used by two goroutines at once; give
// each its own [Simulator.Clone].
type Simulator struct {
	t         []float64 // time of each row, of its first sample when rows are means
	rows      []Row     // nil when rows are samples
	stretches []stretch
	tolerance float64 // of a difference of times

	in       Input
	change   []float64 // of the input at in.At
	greatest float64   // |change|; 1 without a change

	valid      bool   // the parameters of the evaluation
	evaluation uint64 // counts the evaluations, to tell what is remembered from which

	chain chain
	x     state
	level float64 // delayed input less in.Before
	next  int     // next change of the delayed input

	integrating bool
	deadTime    float64
	row         int // the next to be written
	stretch     int // that it belongs to
	area        float64
	areaUntil   float64 // of the delayed input, up to its last change

	step       *matrix // transition over stepLength, the step of the stretch
	stepLength float64
	long       bool   // the stretch leaps
	leap       matrix // transition over runRows steps, when it does
	own        matrix // where step points to unless it is one of the powers

	steps  *stepCache // of ragged rows, nil before the first
	kicks  kickCache
	blocks *blockCache // of rows that are means
	rungs  []rung      // these rows as rungs, none when they are not like that
	powers powers      // of the rungs
}

// NewSimulator returns a simulator for the rows at t in s, strictly
// ascending, and the input in. Changes of the input before t[0] count; the
// chain is at rest before the first. t and in are kept, not copied.
func NewSimulator(t []float64, in Input) *Simulator {
	s := &Simulator{t: t, tolerance: timeTolerance(t)}
	s.stretches = stretches(t, s.tolerance)
	s.setInput(in)
	return s
}

func (s *Simulator) setInput(in Input) {
	s.in, s.greatest = in, 0
	s.change = make([]float64, len(in.At))
	before := in.Before
	for j, v := range in.Value {
		s.change[j] = v - before
		s.greatest = max(s.greatest, math.Abs(s.change[j]))
		before = v
	}
	if s.greatest == 0 {
		s.greatest = 1
	}
}

// Clone returns a simulator of the same log for another goroutine.
func (s *Simulator) Clone() *Simulator {
	clone := *s
	clone.kicks = kickCache{}
	if s.blocks != nil {
		clone.blocks = new(blockCache)
	}
	clone.steps, clone.step = nil, nil
	clone.powers.over = nil
	return &clone
}

// WithInput returns a simulator of the same rows for another input.
func (s *Simulator) WithInput(in Input) *Simulator {
	clone := s.Clone()
	clone.setInput(in)
	return clone
}

// outputs are the columns an evaluation fills; dtheta and v are nil when only
// the response is wanted.
type outputs struct {
	from   int // row of the first element
	y      []float64
	dtheta []float64          // dy/dtheta, minus the slope
	v      [maxLags][]float64 // by sensitivity state
}

// Response sets dst to the response of the chain with unit gain to the input
// less its first value: y(t) for G(s) = e^(−deadTime·s)/Π(lag·s + 1), or
// e^(−deadTime·s)/s for ipdt. lags are in s, in any order, st.NumLags() of
// them, and may be zero. A nil dst is allocated; otherwise it has one element a
// row. A negative or NaN lag, or a dead time that is not finite, gives NaN.
func (s *Simulator) Response(dst []float64, st Structure, lags []float64, deadTime float64) []float64 {
	if dst == nil {
		dst = make([]float64, len(s.t))
	}
	if !s.prepare(st, lags, deadTime, false) {
		fillNaN(dst)
		return dst
	}
	s.walk(&outputs{y: dst})
	return dst
}

// Sensitivities sets dst[0] to the response as in [Simulator.Response],
// dst[1+i] to its derivative with respect to lags[i] and the last, dst[1+
// st.NumLags()], to that with respect to the dead time, per s. At a kink, where
// a change of the input reaches a row of a chain of one element, the
// derivative is the one from the right in time. The derivative at a lag of
// zero is the one towards positive lags.
func (s *Simulator) Sensitivities(dst [][]float64, st Structure, lags []float64, deadTime float64) {
	if !s.prepare(st, lags, deadTime, true) {
		for _, column := range dst[:st.NumLags()+2] {
			fillNaN(column)
		}
		return
	}
	s.rowsWithSensitivities(dst, st.NumLags(), len(s.t))
}

// Pieces returns a function that writes the response, and with sensitivities
// what [Simulator.Sensitivities] writes, of the next rows into dst, as many as
// its columns have elements, and returns how many it wrote: a long log in
// bounded memory. Another evaluation of s ends it.
func (s *Simulator) Pieces(st Structure, lags []float64, deadTime float64, sensitivities bool) func(dst [][]float64) int {
	s.prepare(st, lags, deadTime, sensitivities)
	return func(dst [][]float64) int {
		rows := min(len(dst[0]), len(s.t)-s.row)
		switch {
		case !s.valid:
			for _, column := range dst {
				fillNaN(column)
			}
			s.row += rows
		case sensitivities:
			s.rowsWithSensitivities(dst, st.NumLags(), rows)
		default:
			s.walkTo(&outputs{from: s.row, y: dst[0]}, s.row+rows)
		}
		return rows
	}
}

// rowsWithSensitivities writes the next rows and their derivatives.
func (s *Simulator) rowsWithSensitivities(dst [][]float64, lagCount, rows int) {
	o := outputs{from: s.row, y: dst[0], dtheta: dst[1+lagCount]}
	for i, k := range s.chain.of[:lagCount] {
		if k >= 0 {
			o.v[k] = dst[1+i]
		}
	}
	s.walkTo(&o, s.row+rows)
	for i, k := range s.chain.of[:lagCount] {
		if k < 0 {
			copy(dst[1+i], o.dtheta[:rows])
		}
	}
}

func fillNaN(x []float64) {
	for i := range x {
		x[i] = math.NaN()
	}
}

func (s *Simulator) prepare(st Structure, lags []float64, deadTime float64, sensitivities bool) bool {
	s.evaluation++
	s.kicks.evaluation = s.evaluation
	if s.steps != nil {
		s.steps.evaluation = s.evaluation
	}
	if s.blocks != nil {
		s.blocks.clear()
	}
	s.integrating, s.deadTime = st.integrating, deadTime
	s.rewind()
	s.valid = finite(deadTime) && s.chain.set(st, lags, sensitivities)
	return s.valid
}

// rewind goes back to before the first row, at rest.
func (s *Simulator) rewind() {
	s.x, s.level, s.next = state{}, 0, 0
	s.row, s.stretch, s.area, s.areaUntil = 0, 0, 0, 0
}

// walk fills the outputs, all rows from the first on.
func (s *Simulator) walk(o *outputs) { s.walkTo(o, len(s.t)) }

// walkTo fills the outputs from where the last walk ended up to row end.
func (s *Simulator) walkTo(o *outputs, end int) {
	if s.integrating || s.chain.n == 0 {
		s.walkWithoutLags(o, end)
		return
	}
	if s.rungs != nil && s.row == 0 && end == len(s.t) {
		s.climb(o)
		return
	}
	if s.row == 0 && end > 0 {
		s.arrive(0)
		s.emitRow(o, 0)
		s.row = 1
	}
	for s.row < end {
		r := s.stretches[s.stretch]
		if s.row == r.hi {
			s.stretch++
			continue
		}
		s.walkStretch(o, r, min(r.hi, end))
	}
}

// walkStretch fills the outputs of a stretch up to row end.
func (s *Simulator) walkStretch(o *outputs, r stretch, end int) {
	if r.ragged {
		s.runRagged(o, s.row, end)
		s.row = end
		return
	}
	if s.row == r.lo {
		s.chain.transition(&s.own, r.step)
		s.setStep(&s.own, r.step, r.hi-r.lo)
	}
	for k := s.row; k < end; {
		free := min(s.freeRows(k, r), end-k)
		s.run(o, k, k+free)
		k += free
		if k < end {
			if driven := s.runDriven(o, k, end, r); driven > k {
				k = driven
				continue
			}
			s.chain.advance(s.step, &s.x)
			s.arrive(k)
			s.emitRow(o, k)
			k++
		}
	}
	s.row = end
}

// freeRows counts the rows of the stretch from row k on that the next change
// comes after.
func (s *Simulator) freeRows(k int, r stretch) int {
	if s.next == len(s.in.At) {
		return r.hi - k
	}
	change := s.arrival(s.next)
	if s.rows != nil {
		change -= s.rows[k].last() - s.rows[k].T
	}
	if s.t[k] >= change {
		return 0
	}
	steps := math.Ceil((change - s.t[k]) / r.step)
	free := int(min(steps, float64(r.hi-k)))
	for free > 0 && s.t[k+free-1] >= change {
		free--
	}
	for k+free < r.hi && s.t[k+free] < change {
		free++
	}
	return free
}

// arrival is the time from which on change j of the delayed input counts: a
// change that rounding puts just after a row is on that row.
func (s *Simulator) arrival(j int) float64 {
	return s.in.At[j] + s.deadTime - s.tolerance
}

// arrive applies the changes of the delayed input up to row k to a state that
// has been carried to row k without them.
func (s *Simulator) arrive(k int) {
	s.next, s.level = s.takeChanges(&s.x, s.next, s.level, s.t[k])
}

// takeChanges applies the changes of the delayed input, from change next on and
// up to the time, to a state that has been carried to that time without them. It
// returns the next change and the level of the input.
func (s *Simulator) takeChanges(x *state, next int, level, time float64) (int, float64) {
	c := &s.chain
	for ; next < len(s.in.At) && s.arrival(next) <= time; next++ {
		since := max(time-(s.in.At[next]+s.deadTime), 0)
		du := s.change[next]
		kick := s.kicks.after(c, since, s.tolerance)
		for i := range c.n + c.q {
			x[i] -= du * kick[i]
		}
		level = s.in.Value[next] - s.in.Before
	}
	return next, level
}

// emitRow writes the outputs of row k from the state at its first sample.
func (s *Simulator) emitRow(o *outputs, k int) {
	if s.rows == nil || s.rows[k].M == 1 {
		s.emit(o, k, &s.x, s.level)
		return
	}
	if s.rows[k].M == 2 {
		s.emitPair(o, k)
		return
	}
	x, next, level := s.x, s.next, s.level
	s.emitMean(o, k, &x)
	s.next, s.level = next, level
}

// emit writes the outputs of row k that a state and an input level make.
func (s *Simulator) emit(o *outputs, k int, x *state, level float64) {
	n := s.chain.n
	k -= o.from
	o.y[k] = level + x[n-1]
	for i := range s.chain.q {
		o.v[i][k] = x[n+i]
	}
	if o.dtheta == nil {
		return
	}
	before := 0.0
	if n > 1 {
		before = x[n-2]
	}
	o.dtheta[k] = (x[n-1] - before) / s.chain.last()
}

// walkWithoutLags is walk for ipdt, whose response is the integral of the
// delayed input less its first value and whose slope is that input; and for a
// chain with no lag at all, whose response is that input and whose slope is
// zero between the changes.
func (s *Simulator) walkWithoutLags(o *outputs, end int) {
	for ; s.row < end; s.row++ {
		r := s.sampleRow(s.row)
		levels, areas := 0.0, 0.0 // sums over the row's samples
		for p := 0; p < r.M; {
			for s.next < len(s.in.At) && s.arrival(s.next) <= r.sample(p) {
				change := s.in.At[s.next] + s.deadTime
				s.area += s.level * (change - s.areaUntil)
				s.areaUntil = change
				s.level = s.in.Value[s.next] - s.in.Before
				s.next++
			}
			count := r.M - p
			if s.next < len(s.in.At) {
				count = r.before(s.arrival(s.next), p)
			}
			middle := (r.sample(p) + r.sample(p+count-1)) / 2
			levels += float64(count) * s.level
			areas += float64(count) * (s.area + s.level*(middle-s.areaUntil))
			p += count
		}
		k := s.row - o.from
		levels, areas = levels/float64(r.M), areas/float64(r.M)
		if s.integrating {
			o.y[k] = areas
		} else {
			o.y[k] = levels
		}
		if o.dtheta != nil {
			o.dtheta[k] = 0
			if s.integrating {
				o.dtheta[k] = -levels
			}
		}
	}
}
