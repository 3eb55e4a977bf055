package tune

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"

	"lagwright/ident"
)

// firstOrder is what the published rules start from: gain, lag and dead time
// K·e^(−theta·s)/(tau·s+1), or K·e^(−theta·s)/s for an integrating plant.
type firstOrder struct {
	k, tau, theta float64
	integrating   bool
}

// ratio is theta/tau.
func (f firstOrder) ratio() float64 { return f.theta / f.tau }

// halfRule reduces a chain of lags (s), right half plane zeros given by their
// positive times (−T·s+1), and a dead time to order lags (1 or 2) and a dead
// time: the first lag left out goes half to the last lag kept and half to the
// dead time, the others and the zeros wholly to the dead time; the lags come
// back sorted, longest first.
// S. Skogestad, J. Process Control 13 (2003) 291–309.
func halfRule(lags, inverse []float64, deadTime float64, order int) (kept []float64, theta float64) {
	sorted := slices.Clone(lags)
	slices.SortFunc(sorted, func(a, b float64) int { return cmp.Compare(b, a) })
	kept, theta = make([]float64, order), deadTime
	for i, tau := range sorted {
		switch {
		case i < order:
			kept[i] = tau
		case i == order:
			kept[order-1] += tau / 2
			theta += tau / 2
		default:
			theta += tau
		}
	}
	for _, t := range inverse {
		theta += t
	}
	slices.SortFunc(kept, func(a, b float64) int { return cmp.Compare(b, a) })
	return kept, theta
}

// byHalfRule reduces a plant by the half rule.
func byHalfRule(p ident.Plant) firstOrder {
	if p.Structure.Integrating() {
		return firstOrder{k: p.Gain, theta: p.DeadTime, tau: math.Inf(1), integrating: true}
	}
	kept, theta := halfRule(p.Elements(), nil, p.DeadTime, 1)
	return firstOrder{k: p.Gain, tau: kept[0], theta: theta}
}

// byTwoPoints reads lag and dead time off the times at which the step
// response reaches two levels p1 < p2 of its end value, exact for a first-order
// plant: with q = −ln(1−p), tau = (t2−t1)/(q2−q1), theta = t1 − q1·tau. The
// levels 1−e^(−1/3) and 1−e^(−1) give tau = 1.5·(t63 − t28) (C. L. Smith,
// Digital Computer Process Control, 1972, citation from memory).
func byTwoPoints(p ident.Plant) firstOrder {
	if p.Structure.Integrating() {
		return byHalfRule(p)
	}
	r := newReading(p)
	t28, t63 := r.reaches(-math.Expm1(-1.0/3)), r.reaches(-math.Expm1(-1))
	tau := 1.5 * (t63 - t28)
	return firstOrder{k: p.Gain, tau: tau, theta: max(0, t63-tau)}
}

// byTangent reads lag and dead time off the steepest tangent of the step
// response: it leaves the start at theta and crosses the end value a time tau
// later (Ziegler and Nichols 1942).
func byTangent(p ident.Plant) firstOrder {
	if p.Structure.Integrating() {
		return byHalfRule(p)
	}
	r := newReading(p)
	t, slope := r.steepest()
	return firstOrder{k: p.Gain, tau: 1 / slope, theta: p.DeadTime + t - r.level(t)/slope}
}

// byTangentAnd63 takes theta from the steepest tangent and theta + tau as the
// time at which the response reaches 63.2 % (Åström and Hägglund 2004).
func byTangentAnd63(p ident.Plant) firstOrder {
	f := byTangent(p)
	if !f.integrating {
		f.tau = newReading(p).reaches(-math.Expm1(-1)) - f.theta
	}
	return f
}

// reading is a unit step response to be read; its times start after the dead
// time.
type reading struct {
	lags     []float64
	deadTime float64
	sum      float64
}

func newReading(p ident.Plant) reading {
	r := reading{deadTime: p.DeadTime}
	for _, tau := range p.Elements() {
		r.sum += tau
	}
	r.lags = felt(p.Elements(), r.sum)
	return r
}

// level is the rise at t s after the dead time, a fraction of the end value.
func (r reading) level(t float64) float64 {
	tr := newTransition(r.lags, false, t)
	return tr.gamma[tr.n-1]
}

// slope is the rate of rise, per s.
func (r reading) slope(t float64) float64 {
	tr := newTransition(r.lags, false, t)
	before := 1.0
	if tr.n > 1 {
		before = tr.gamma[tr.n-2]
	}
	return (before - tr.gamma[tr.n-1]) / r.lags[tr.n-1]
}

// reaches returns the time from the step at which the rise is p of its end
// value.
func (r reading) reaches(p float64) float64 {
	if r.sum == 0 {
		return r.deadTime
	}
	hi := r.sum
	for r.level(hi) < p {
		hi *= 2
	}
	return r.deadTime + bisect(func(t float64) float64 { return r.level(t) - p }, 0, hi)
}

func (r reading) steepest() (t, slope float64) {
	if len(r.lags) == 1 {
		return 0, 1 / r.lags[0]
	}
	return goldenMax(r.slope, 0, 2*r.sum)
}

// ultimate returns the gain (input per temperature) and the period (s) at
// which the loop with P control alone swings steadily.
func ultimate(p ident.Plant) (ku, pu float64, err error) {
	l := newOpenLoop(p, law{kc: 1 / math.Abs(p.Gain), ti: math.Inf(1), b: 1}, 0)
	l.k = math.Abs(l.k)
	w := l.phaseCross()
	if math.IsInf(w, 1) {
		return 0, 0, errors.New("no ultimate gain: this plant does not become unstable under P control")
	}
	return 1 / (l.magnitude(w) * p.Gain), 2 * math.Pi / w, nil
}

// phaseCross returns the lowest frequency, rad/s, at which the phase passes
// −180°, +Inf when it never does.
func (l *openLoop) phaseCross() float64 {
	for _, w := range crossings(l.grid(), func(w float64) float64 { return l.phase(w) + math.Pi }) {
		return w
	}
	return math.Inf(1)
}

func (f firstOrder) check() error {
	if !(f.theta > 0) {
		return fmt.Errorf("the plant has no dead time (%.3g s), on which this rule rests", f.theta)
	}
	return nil
}
