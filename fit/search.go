package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

const (
	firstDamping = 1e-3 // λ of the first step, in units of the scaled JᵀJ; common practice, no source
	lastDamping  = 1e20 // a step this damped no longer moves p

	// enoughGain is the share of the promised reduction for which a step is
	// taken (Moré 1978, from memory).
	enoughGain = 1e-4

	// straightGain is the promised reduction, as a share of the sum of squares,
	// below which a step is so short that its path needs no bending.
	straightGain = 1e-6

	// hiddenGain is the reduction in reach, as a share of the sum of squares,
	// below which sums of squares are too much rounded to be compared, and the
	// relative offset takes over as the judge of a step.
	hiddenGain = 1e-12

	// resolved is how many times the resolution of the parameters a residual
	// may be to count as rounding: a model of some dozen operations loses six
	// bits (common practice, no source).
	resolved = 64
)

// place is a point of the search with all that is known there.
type place struct {
	p         []float64
	residuals []float64
	sse       float64

	linear linearised
	free   []bool  // parameters that no bound holds
	offset float64 // relative offset over the free parameters
}

// search is one run of LeastSquares.
type search struct {
	pr       Problem
	settings Settings
	start    []float64
	at       place

	scale   []float64 // longest column of J so far for each parameter: D of linearised.step
	damping float64   // λ of the next step
	raise   float64   // factor on λ if that step fails

	jacobian    [][]float64
	trial, a, b []float64 // scratch of M numbers

	iterations, evaluations int
}

func newSearch(pr Problem, start []float64, settings Settings) *search {
	if settings.MaxIterations == 0 {
		settings.MaxIterations = 5000
	}
	if settings.Offset == 0 {
		settings.Offset = 1e-10
	}
	s := &search{
		pr: pr, settings: settings,
		start:   start,
		scale:   make([]float64, pr.N),
		damping: firstDamping, raise: 2,
		jacobian: make([][]float64, pr.N),
		trial:    make([]float64, pr.M), a: make([]float64, pr.M), b: make([]float64, pr.M),
	}
	for i := range s.jacobian {
		s.jacobian[i] = make([]float64, pr.M)
	}
	s.at.p = append([]float64(nil), start...)
	pr.clamp(s.at.p)
	s.at.residuals = make([]float64, pr.M)
	s.at.sse = s.evaluate(s.at.residuals, s.at.p)
	return s
}

// evaluate fills r with the residuals at p and returns their sum of squares.
func (s *search) evaluate(r, p []float64) float64 {
	s.evaluations++
	s.pr.Residuals(r, p)
	return floats.Dot(r, r)
}

// run goes downhill until there is a reason to stop.
func (s *search) run() Stop {
	if !s.linearise() {
		return StopNotFinite
	}
	s.restrain()
	for s.iterations < s.settings.MaxIterations {
		switch reach := s.at.linear.reach(s.at.free); {
		case s.at.offset <= s.settings.Offset:
			return StopOffset
		case reach*reach <= hiddenGain*s.at.sse:
			return s.polish()
		case s.damping > lastDamping && reach <= resolved*s.resolution():
			return StopResolution
		case s.damping > lastDamping:
			return StopStuck
		}
		if s.advance() && !s.linearise() {
			return StopNotFinite
		}
	}
	return StopIterations
}

// linearise takes the derivatives where the search is, and says whether they
// are finite.
func (s *search) linearise() bool {
	precision := 0x1p-52
	if s.pr.Jacobian != nil {
		s.pr.Jacobian(s.jacobian, s.at.p)
	} else {
		precision = differencePrecision
		s.evaluations += s.pr.differences(s.jacobian, s.at.p, s.start, s.at.residuals, s.a, s.b)
	}
	copy(s.a, s.at.residuals)
	s.at.linear = linearise(s.jacobian, s.a, precision)
	if !s.at.linear.finite() {
		return false
	}
	s.at.free = make([]bool, s.pr.N)
	for i, g := range s.at.linear.gradient() {
		lower, upper := s.pr.bounds(i)
		x := s.at.p[i]
		s.at.free[i] = lower < upper && !(x == lower && g >= 0) && !(x == upper && g <= 0)
		s.scale[i] = max(s.scale[i], s.at.linear.length[i])
	}
	s.at.offset = s.at.linear.offset(s.at.free, s.pr.M)
	return true
}

// restrain raises the damping until the first step is no longer than the
// start itself, both scaled. From afar the straight step may end where the
// residuals no longer depend on a parameter, from where no slope leads back.
func (s *search) restrain() {
	size := s.length(s.at.p)
	low, high := s.room(s.at.p)
	for size > 0 && s.damping < lastDamping {
		d := s.at.linear.step(s.damping, s.scale, s.at.free, low, high)
		if s.length(d) <= size {
			return
		}
		s.damping *= 3
	}
}

// length returns ‖D·x‖.
func (s *search) length(x []float64) float64 {
	sum := 0.0
	for i := range x {
		sum += (s.scale[i] * x[i]) * (s.scale[i] * x[i])
	}
	return math.Sqrt(sum)
}

// room returns how far p may go in each direction.
func (s *search) room(p []float64) (low, high []float64) {
	low, high = make([]float64, len(p)), make([]float64, len(p))
	for i, x := range p {
		lower, upper := s.pr.bounds(i)
		low[i], high[i] = lower-x, upper-x
	}
	return low, high
}

// resolution returns how much of the residuals (a length) the last binary
// digits of p can move: ε·Σ ‖∂r/∂pᵢ‖·|pᵢ|.
func (s *search) resolution() float64 {
	sum := 0.0
	for i, x := range s.at.p {
		sum += s.at.linear.length[i] * math.Abs(x)
	}
	return 0x1p-52 * sum
}

// advance tries one damped step, and moves and returns true where it helps.
// The damping follows Nielsen (1999, from memory): it falls with the share of
// the promise that was kept, at most to a third, and rises ever faster while
// steps fail.
func (s *search) advance() bool {
	s.iterations++
	low, high := s.room(s.at.p)
	d := s.at.linear.step(s.damping, s.scale, s.at.free, low, high)
	promised := s.at.linear.reduction(d)
	q, ok := s.destination(d, promised)
	if ok {
		sse := s.evaluate(s.trial, q)
		if gain := (s.at.sse - sse) / promised; gain >= enoughGain && isFinite(sse) {
			s.damping *= max(1.0/3, 1-math.Pow(2*gain-1, 3))
			s.raise = 2
			s.move(q, sse)
			return true
		}
	}
	s.damping *= s.raise
	s.raise *= 2
	return false
}

// destination returns where the step d leads along a path that bends with the
// residuals, or false where the bend says that d goes too far to be trusted.
func (s *search) destination(d []float64, promised float64) (q []float64, ok bool) {
	q = floats.AddTo(make([]float64, len(d)), s.at.p, d)
	if promised > straightGain*s.at.sse {
		bend, ok := s.acceleration(d)
		if !ok {
			return nil, false
		}
		floats.Add(q, bend)
	}
	s.pr.clamp(q)
	return q, true
}

// move takes the trial residuals, of sum of squares sse, and their parameters
// q as the new place.
func (s *search) move(q []float64, sse float64) {
	s.at.p, s.at.sse = q, sse
	s.at.residuals, s.trial = s.trial, s.at.residuals
}

// polish takes plain Gauss–Newton steps as long as each lowers the relative
// offset: what they gain in the sum of squares is hidden by rounding, what
// they gain in the parameters is not.
func (s *search) polish() Stop {
	for s.iterations < s.settings.MaxIterations {
		if s.at.linear.covariance(s.at.free) == nil {
			return StopRounding
		}
		s.iterations++
		before := s.at
		low, high := s.room(s.at.p)
		q := s.at.linear.step(0, s.scale, s.at.free, low, high)
		floats.Add(q, s.at.p)
		s.pr.clamp(q)
		s.move(q, s.evaluate(s.trial, q))
		if !(s.at.sse <= before.sse*(1+1e3*hiddenGain)) || !s.linearise() || s.at.offset >= before.offset {
			s.at = before
			return StopRounding
		}
		if s.at.offset <= s.settings.Offset {
			return StopOffset
		}
	}
	return StopIterations
}

// result sums up the place where the search ended.
func (s *search) result(stop Stop) Result {
	r := Result{
		P: s.at.p, SSE: s.at.sse, Offset: s.at.offset,
		AtBound: make([]bool, s.pr.N), StdDev: make([]float64, s.pr.N),
		Stop: stop, Iterations: s.iterations, Evaluations: s.evaluations,
	}
	left := s.pr.M
	for i := range r.P {
		r.StdDev[i] = math.NaN()
		r.AtBound[i] = s.at.free != nil && !s.at.free[i]
		if !r.AtBound[i] {
			left--
		}
	}
	r.S2 = math.NaN()
	if left > 0 {
		r.S2 = r.SSE / float64(left)
	}
	if s.at.free == nil { // no derivatives at all
		return r
	}
	r.Covariance = s.at.linear.covariance(s.at.free)
	for i := range r.Covariance {
		if !r.AtBound[i] {
			r.StdDev[i] = math.Sqrt(r.S2 * r.Covariance[i][i])
		}
	}
	return r
}
