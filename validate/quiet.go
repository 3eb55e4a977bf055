package validate

import (
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/ident"
)

// Settling and overshoot are asked of a setpoint move, not of noise and loads.
// They are therefore judged on the response of each plausible plant to the
// run's setpoint moves alone: the same controller with its limits, the same
// moves, and a disturbance that stays what it was at the start. Measured on the
// noisy replay they would have to be granted an allowance for the noise, which
// lets pass what misses by less (see [yardstick.allowance]); that figure is
// kept beside, as [RunReplay].WithNoise.

// quietCourses returns for each course the one without noise and loads, nil
// where no setpoint moves.
func (p *plan) quietCourses(courses []*course, m yardstick) []*course {
	out := make([]*course, len(courses))
	for i, c := range courses {
		if len(moves(c.signal(c.y, c.u), m)) > 0 {
			out[i] = p.quietCourse(c)
		}
	}
	return out
}

// quietCourse rests at the setpoint, with the first input held.
func (p *plan) quietCourse(c *course) *course {
	q := c.atRest(c.before, c.u[0], c.phi[0])
	q.rest = q.before
	return q
}

// atRest is the course of a heater that rests at the level with the input u,
// phi(u) being given, without noise and loads.
func (c *course) atRest(level, u, phi float64) *course {
	q := *c
	q.y, q.u, q.phi, q.log = make([]float64, len(c.y)), make([]float64, len(c.u)), make([]float64, len(c.phi)), make([]float64, len(c.log))
	fill(q.y, level)
	fill(q.log, level)
	fill(q.u, u)
	fill(q.phi, phi)
	return &q
}

// on returns the quiet course for plant g. A run that starts in mid-move is not
// at rest in its first row: the input with which the plant would rest at the
// first setpoint is found from the whole log c, so that the moves start there
// with as much of the input's range left as they have. So does where a P
// controller rests, which stands off its setpoint.
func (p *plan) on(g ident.Plant, quiet, c *course) *course {
	midway := c.rest != c.before && c.stepped == 0
	if !midway && p.gains.Ti != nil {
		return quiet
	}
	held := startLevel(c.y) // temperature with the first input held
	switch {
	case c.stepped != 0:
		held = c.before
	case midway:
		held = p.startOf(c, g).level
	}
	if p.gains.Ti != nil {
		u := p.inputFor(g, c.before, held, c.u[0])
		return quiet.atRest(c.before, u, p.law.Apply(u))
	}
	rest := func(r float64) (y, u float64) { return p.restUnder(g, r, held, c.u[0]) }
	y, u := rest(c.before)
	q := *quiet.atRest(y, u, p.law.Apply(u))
	q.final = func(r float64) float64 { y, _ := rest(r); return y }
	return &q
}

// inputFor is the input, within the limits, with which plant g rests at the
// level, given that it rests at held with the input u0.
func (p *plan) inputFor(g ident.Plant, level, held, u0 float64) float64 {
	u := p.law.Apply(u0) + (level-held)/g.Gain
	if p.law == ident.Power {
		u = math.Sqrt(max(0, u))
	}
	if most := p.gains.Limits.Max; most != nil {
		u = min(u, *most)
	}
	if least := p.gains.Limits.Min; least != nil {
		u = max(u, *least)
	}
	return u
}

// restUnder is where plant g comes to rest under the P controller with the
// setpoint r, given that it rests at held with the input u0.
func (p *plan) restUnder(g ident.Plant, r, held, u0 float64) (y, u float64) {
	k, limits := p.gains, p.gains.Limits
	at := func(u float64) float64 { return held + g.Gain*(p.law.Apply(u)-p.law.Apply(u0)) }
	more := func(u float64) bool { return k.Kc*(k.SetpointWeight*r-at(u))+k.Bias > u } // asks for more than u
	low, high := math.Inf(-1), math.Inf(1)
	if limits.Min != nil {
		low = *limits.Min
	}
	if limits.Max != nil {
		high = *limits.Max
	}
	size := max(1, math.Abs(u0), math.Abs(k.Bias))
	from, to := max(low, u0-size), min(high, u0+size)
	for range 60 {
		if more(from) || from <= low {
			break
		}
		size *= 2
		from = max(low, u0-size)
	}
	for range 60 {
		if !more(to) || to >= high {
			break
		}
		size *= 2
		to = min(high, u0+size)
	}
	for range 100 {
		if u = (from + to) / 2; more(u) {
			from = u
		} else {
			to = u
		}
	}
	return at(u), u
}

// A start is the temperature of a plant whose input is held from the first
// row on, at the time t0: the level it comes to, what fades with the longest
// lag, and what a change of input in the first row still does.
type start struct {
	plant              ident.Plant
	t0, fade           float64 // s
	level, above, rise float64
}

// at returns the temperature at ascending times.
func (s start) at(times []float64) []float64 {
	if len(times) == 0 {
		return nil
	}
	out := s.columns(times)[2]
	for i, t := range times {
		out[i] = s.level + s.above*math.Exp(-(t-s.t0)/s.fade) + s.rise*out[i]
	}
	return out
}

// columns are the three parts of a start, for one unit of each.
func (s start) columns(times []float64) [][]float64 {
	ones, fading := make([]float64, len(times)), make([]float64, len(times))
	for i, t := range times {
		ones[i], fading[i] = 1, math.Exp(-(t-s.t0)/s.fade)
	}
	step := ident.Input{At: []float64{s.t0}, Value: []float64{1}}
	rising := ident.NewSimulator(times, step).Response(nil, s.plant.Structure, s.plant.Lags, s.plant.DeadTime)
	return [][]float64{ones, fading, rising}
}

// startOf finds how the log starts, seen from plant g: least squares on what
// the response to the logged input leaves, whitened by the card's correlation.
// What noise explains in 99% of logs counts as a start at rest. The level is
// set by the median in the end, so that a load in a part of the run does not
// shift the rest.
func (p *plan) startOf(c *course, g ident.Plant) start {
	s := start{plant: g, t0: c.t[0], fade: p.longest()}
	left := ident.NewSimulator(c.t, ident.HeldInput(c.t, c.u, p.law)).Response(nil, g.Structure, g.Lags, g.DeadTime)
	for i := range left {
		left[i] = c.y[i] - g.Gain*left[i]
	}
	step := medianInterval(c.t)
	columns := s.columns(c.t)
	if beta, cov, ok := instrumental(c.t, step, p.cardCorrelation(step), left, columns, columns); ok && stands(beta[1:], cov.Slice(1, 3, 1, 3)) {
		s.level, s.above, s.rise = beta[0], beta[1], beta[2]
	}
	for i, v := range s.at(c.t) {
		left[i] -= v
	}
	s.level += median(left)
	return s
}

// stands tells whether estimates of that covariance differ from zero by more
// than chance explains in 99%.
func stands(beta []float64, cov mat.Matrix) bool {
	v := mat.NewVecDense(len(beta), beta)
	var solved mat.VecDense
	if solved.SolveVec(cov, v) != nil {
		return false
	}
	return mat.Dot(v, &solved) > distuv.ChiSquared{K: float64(len(beta))}.Quantile(0.99)
}

// quiet measures as m does, but grants nothing to noise: there is none.
func (m yardstick) quiet() yardstick {
	m.noiseless = true
	return m
}

// judgeQuiet puts settling and overshoot of the quiet replay in the place of
// those of the noisy one, which are kept beside.
func (f *figures) judgeQuiet(q figures) {
	f.noisy.settling, f.noisy.overshoot = f.settling, f.overshoot
	f.settling, f.overshoot = q.settling, q.overshoot
	f.moves, f.small = q.moves, q.small
	f.cut, f.unsettled, f.offset = q.cut, q.unsettled, q.offset
}
