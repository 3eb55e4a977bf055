package tune

import (
	"math"
	"math/cmplx"

	"lagwright/ident"
)

// openLoop is the loop cut open, plant times controller, with its dead time
// exact:
//
//	L(s) = k · Π(z·s+1) · (q2·s² + q1·s + 1) · e^(−delay·s) / (s^integrators · Π(lag·s+1))
type openLoop struct {
	k           float64
	integrators int
	zeros, lags []float64 // s; a negative zero lies in the right half plane
	q1, q2      float64   // numerator of the controller
	delay       float64   // s
}

// newOpenLoop joins a plant and a control law. A controller that scans every
// scan seconds holds its output for scan/2 on average, which adds to the dead
// time (common practice, no source): near enough for times and poles, not for
// margins, see sampledLoop.
func newOpenLoop(p ident.Plant, c law, scan float64) openLoop {
	l := openLoop{k: p.Gain * c.kc, q1: c.td, lags: p.Elements(), delay: p.DeadTime + scan/2}
	if p.Structure.Integrating() {
		l.integrators++
	}
	if c.integral() {
		l.integrators++
		l.k /= c.ti
		l.q1, l.q2 = c.ti, c.ti*c.td
	}
	if c.tf > 0 {
		l.lags = append(l.lags, c.tf)
	}
	return l
}

// response returns L(jw).
func (l *openLoop) response(w float64) complex128 { return l.at(complex(0, w)) }

// at returns L(s).
func (l *openLoop) at(s complex128) complex128 {
	num := complex(l.k, 0) * (s*s*complex(l.q2, 0) + s*complex(l.q1, 0) + 1)
	for _, z := range l.zeros {
		num *= s*complex(z, 0) + 1
	}
	den := complex(1, 0)
	for range l.integrators {
		den *= s
	}
	for _, t := range l.lags {
		den *= s*complex(t, 0) + 1
	}
	if l.delay > 0 {
		num *= cmplx.Exp(-s * complex(l.delay, 0))
	}
	return num / den
}

// magnitude returns |L(jw)|.
func (l *openLoop) magnitude(w float64) float64 {
	w2 := w * w
	re := 1 - l.q2*w2
	num := l.k * l.k * (re*re + l.q1*l.q1*w2)
	for _, z := range l.zeros {
		num *= 1 + z*z*w2
	}
	den := 1.0
	for range l.integrators {
		den *= w2
	}
	for _, t := range l.lags {
		den *= 1 + t*t*w2
	}
	return math.Sqrt(num / den)
}

// phase returns the angle of L(jw), in rad, followed continuously from w = 0,
// where it is −90° for every integrator (and 180° less for a negative k).
func (l *openLoop) phase(w float64) float64 {
	a := math.Atan2(l.q1*w, 1-l.q2*w*w) - float64(l.integrators)*math.Pi/2 - l.delay*w
	for _, z := range l.zeros {
		a += math.Atan(z * w)
	}
	for _, t := range l.lags {
		a -= math.Atan(t * w)
	}
	if l.k < 0 {
		a -= math.Pi
	}
	return a
}

// excess is the degree of the denominator less that of the numerator.
func (l *openLoop) excess() int {
	n := l.integrators - len(l.zeros)
	for _, t := range l.lags {
		if t != 0 {
			n++
		}
	}
	switch {
	case l.q2 != 0:
		n -= 2
	case l.q1 != 0:
		n--
	}
	return n
}

// atInfinity is the limit of |L(jw)|·sign as w grows, for excess 0: without
// dead time L tends to it, with dead time it circles at that radius.
func (l *openLoop) atInfinity() float64 {
	v := l.k
	for _, z := range l.zeros {
		v *= z
	}
	for _, t := range l.lags {
		if t != 0 {
			v /= t
		}
	}
	switch {
	case l.q2 != 0:
		v *= l.q2
	case l.q1 != 0:
		v *= l.q1
	}
	return v
}

// corners returns the lowest and the highest angular frequency, rad/s, at
// which the loop changes its character.
func (l *openLoop) corners() (low, high float64) {
	low, high = math.Inf(1), 0
	note := func(t float64) {
		if t = math.Abs(t); t > 0 {
			low, high = min(low, 1/t), max(high, 1/t)
		}
	}
	for _, z := range l.zeros {
		note(z)
	}
	for _, t := range l.lags {
		note(t)
	}
	note(l.q1)
	if l.q1 > 0 {
		note(l.q2 / l.q1)
	}
	note(l.delay)
	if l.integrators > 0 { // |k|/w^n = 1
		note(math.Pow(math.Abs(l.k), -1/float64(l.integrators)))
	}
	if high == 0 {
		return 1, 1
	}
	return low, high
}
