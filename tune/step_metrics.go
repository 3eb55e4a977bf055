package tune

import (
	"math"

	"lagwright/ident"
)

// stepFigures are what one run shows. Times in s, NaN where there is none.
type stepFigures struct {
	settling  float64 // time from which the temperature stays inside the band; NaN: not in the time simulated
	overshoot float64 // beyond the final value, fraction of the way there
	peak      float64 // largest deviation of the temperature from where it began
	peakTime  float64
	inputHigh float64 // largest and smallest output
	inputLow  float64
	iae       float64 // ∫|r − y|dt
	final     float64 // temperature it comes to
	offset    float64 // r − final
	short     float64 // input that the step needs beyond a limit, as a part of what the limit leaves; 0 where it is within reach
	touched   bool    // whether a limit kept the output from what the controller wanted
}

// maxSamples bounds a run that does not come to rest.
const maxSamples = 400_000

// watch accumulates stepFigures from the samples of a run. Between samples
// the temperature is a straight line for settling and area; the peak is that
// of the parabola through three samples.
type watch struct {
	stepFigures
	r, target, uEnd float64 // setpoint, final temperature and output
	band            float64 // half width, temperature
	scale           float64 // temperature per input, to weigh the output
	quiet           float64 // s for which everything must be at rest

	last, before sample
	n            int
	direction    float64 // +1 or −1: the way of the largest deviation to watch
	largest      float64
	outside      float64 // last time outside the band
	stirring     float64 // last time not at rest
	horizon      float64
	rest         float64 // remaining deviation, a fraction of the largest so far, at which a run has ended
	deadline     float64 // time after which being outside the band ends the run
}

func (w *watch) see(s sample) bool {
	if w.n == 0 {
		w.last = sample{t: 0, y: 0, u: s.u}
		if s.t > 0 {
			w.add(sample{t: s.t, y: s.y, u: s.u})
			return true
		}
		w.last = s
		w.n = 1
		w.note(s)
		return true
	}
	w.add(s)
	late := s.t > w.deadline && math.Abs(s.y-w.target) > w.band
	return !late && w.n < maxSamples && s.t < w.horizon && (s.t-w.stirring < w.quiet || s.t < 2*w.quiet)
}

func (w *watch) add(s sample) {
	w.area(w.last, s)
	w.settle(w.last, s)
	if w.n >= 2 {
		w.parabola(w.before, w.last, s)
	}
	w.before, w.last = w.last, s
	w.n++
	w.note(s)
}

func (w *watch) note(s sample) {
	w.largest = max(w.largest, math.Abs(s.y))
	w.top(s.y, s.t)
	w.inputHigh = max(w.inputHigh, s.u)
	w.inputLow = min(w.inputLow, s.u)
	still := w.rest * max(w.largest, math.Abs(w.target))
	if math.Abs(s.y-w.target) > still || math.Abs(s.u-w.uEnd)*w.scale > still {
		w.stirring = s.t
	}
}

func (w *watch) top(y, t float64) {
	if y*w.direction > w.peak {
		w.peak, w.peakTime = y*w.direction, t
	}
}

// area adds ∫|r − y|dt of a straight line, split where it changes sign.
func (w *watch) area(a, b sample) {
	ea, eb, dt := w.r-a.y, w.r-b.y, b.t-a.t
	if ea*eb >= 0 {
		w.iae += math.Abs(ea+eb) / 2 * dt
		return
	}
	w.iae += (ea*ea + eb*eb) / math.Abs(ea-eb) / 2 * dt
}

// settle moves the last time outside the band.
func (w *watch) settle(a, b sample) {
	da, db := math.Abs(a.y-w.target), math.Abs(b.y-w.target)
	switch {
	case db > w.band:
		w.outside = b.t
	case da > w.band:
		w.outside = a.t + (da-w.band)/(da-db)*(b.t-a.t)
	}
}

// parabola looks for a peak between three samples.
func (w *watch) parabola(a, b, c sample) {
	ya, yb, yc := a.y*w.direction, b.y*w.direction, c.y*w.direction
	if !(yb >= ya && yb > yc) || b.t-a.t < 0.75*(c.t-b.t) {
		return
	}
	h := c.t - b.t
	bend := ya - 2*yb + yc
	shift := (ya - yc) / (2 * bend)
	w.top((yb-(ya-yc)*shift/4)*w.direction, b.t+shift*h)
}

// A runPlan is how long (s) and how finely a stable loop is simulated.
type runPlan struct {
	step, horizon, quiet float64
	rest, deadline       float64 // see watch
}

// plan returns the plan for a stable loop; fine is the step times the highest
// angular frequency that matters.
func (l *openLoop) plan(fine float64) runPlan {
	return l.planAt(l.fastest(1/l.spread()), fine)
}

// spread is the sum of the loop's times, s.
func (l *openLoop) spread() float64 {
	spread := l.delay + l.reset()
	for _, t := range l.lags {
		spread += t
	}
	return spread
}

// reset is the integral time of a loop with an integrator, s.
func (l *openLoop) reset() float64 {
	if l.integrators == 0 {
		return 0
	}
	return l.q1
}

// planAt is plan for a known highest gain crossover w, rad/s, 0 for none.
// Where dead time dominates the output moves faster than the loop does: in
// the time of the lags, once every dead time.
func (l *openLoop) planAt(w, fine float64) runPlan {
	spread := l.spread()
	w = max(w, 1/spread)
	if lags := spread - l.delay - l.reset(); l.delay > 0 && lags > 0 {
		w = max(w, min(2/lags, 3/l.delay))
	}
	return runPlan{
		step:    fine / w,
		quiet:   l.delay + min(spread, 20/w),
		horizon: 400 * max(spread, 1/w),
		rest:    2e-5,

		deadline: math.Inf(1),
	}
}

// fastest returns the higher of the highest gain crossover and w0, rad/s.
func (l *openLoop) fastest(w0 float64) float64 {
	w := w0
	if l.magnitude(w) <= 1 {
		return w // |L| of these loops falls, so a crossover lies below w0
	}
	hi := w
	for range 200 {
		hi *= 1.5
		if l.magnitude(hi) < 1 {
			return bisectCoarse(func(w float64) float64 { return l.magnitude(w) - 1 }, hi/1.5, hi)
		}
	}
	return hi
}

// bisectCoarse is bisect to about a percent.
func bisectCoarse(f func(float64) float64, lo, hi float64) float64 {
	for range 6 {
		mid := (lo + hi) / 2
		if f(mid) > 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}

// setpointStep runs a step of the setpoint by r (a change, not 0) and judges
// settling into band (fraction of the step). A step that the limits of the
// input keep out of reach does not settle.
func setpointStep(s *loopSim, p ident.Plant, c law, r, band float64, plan runPlan) stepFigures {
	target, uEnd := steadyState(p, c, r, 0)
	if k := s.curve; !k.straight() {
		target, uEnd = k.steadyState(p, c, r)
	}
	// where the limits do not let the temperature come to its target, it ends
	// where they hold it
	needed := uEnd
	uEnd = max(s.control.low, min(s.control.high, needed))
	end := target
	if uEnd != needed && !p.Structure.Integrating() {
		end = p.Gain * s.curve.heat(uEnd)
		plan.deadline = math.Inf(1) // it comes to rest outside the band
	}
	w := newWatch(p, r, end, uEnd, plan)
	w.band = band * math.Abs(target)
	w.direction = math.Copysign(1, target)
	s.run(r, 0, w.see)
	f := w.stepFigures
	f.touched = s.control.touched
	f.settling = math.NaN()
	if d := math.Abs(w.last.y - target); end == target && d <= w.band && w.last.t-w.outside > plan.quiet/2 {
		f.settling = w.outside
	}
	f.overshoot = max(0, f.peak/math.Abs(target)-1)
	f.final, f.offset = end, r-end
	if uEnd != needed {
		f.short = math.Abs(needed-uEnd) / max(math.Abs(uEnd), 1e-3*math.Abs(needed))
	}
	return f
}

// loadStep runs a load step of d at the plant's input.
func loadStep(s *loopSim, p ident.Plant, c law, d float64, plan runPlan) stepFigures {
	target, uEnd := steadyState(p, c, 0, d)
	w := newWatch(p, 0, target, uEnd, plan)
	w.direction = math.Copysign(1, p.Gain*d)
	w.band = math.Inf(1)
	s.run(0, d, w.see)
	f := w.stepFigures
	f.final, f.offset = target, -target
	f.settling = math.NaN()
	return f
}

func newWatch(p ident.Plant, r, target, uEnd float64, plan runPlan) *watch {
	w := &watch{r: r, target: target, uEnd: uEnd, quiet: plan.quiet, horizon: plan.horizon, rest: plan.rest, deadline: plan.deadline}
	w.scale = math.Abs(p.Gain)
	if p.Structure.Integrating() {
		w.scale *= plan.quiet
	}
	return w
}

// steadyState is that of a setpoint step through a curve.
func (k curve) steadyState(p ident.Plant, c law, r float64) (y, u float64) {
	switch {
	case p.Structure.Integrating():
		return steadyState(p, c, r, 0)
	case c.integral():
		return r, k.input(r / p.Gain)
	}
	u = k.balance(c.kc*c.b*r, p.Gain*c.kc)
	return p.Gain * k.heat(max(u, k.least())), u
}

// steadyState returns where temperature and output come to rest under
// setpoint r and load d, limits aside.
func steadyState(p ident.Plant, c law, r, d float64) (y, u float64) {
	switch {
	case p.Structure.Integrating() && c.integral():
		return r, -d
	case p.Structure.Integrating():
		return c.b*r + d/c.kc, -d
	case c.integral():
		return r, r/p.Gain - d
	}
	loop := p.Gain * c.kc
	y = (loop*c.b*r + p.Gain*d) / (1 + loop)
	return y, c.kc * (c.b*r - y)
}
